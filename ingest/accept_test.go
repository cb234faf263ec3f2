package ingest

import (
	"strings"
	"testing"
)

// TestAcceptanceOffered wants an acceptance to be offered where the number can be
// used, and not where nothing can be made of it; words without a rule are answered
// by the rules of the row.
func TestAcceptanceOffered(t *testing.T) {
	for _, tt := range []struct {
		rows    table
		offered string
	}{
		{counts([]any{"A", 2002, 3.5, 40, 5, 41}), "C2"},
		{counts([]any{"A", 2002, 3, 40.5, 5, 41}), "C2"},
		{means([]any{"A", 1, 2, 30.5, 3, 4, 31}), "C2"},
		{counts([]any{"Total", 2002, 3, 40, 5, 41}), "F10"},
		{counts([]any{"Good", 2001, 3, 40, 5, 41}), "D1"},
		{table{{"study", "events", "total"}, {"A", 3.5, 40}}, ""},
		{table{{"study", "events treated", "person time treated", "events control", "person time control", "total treated"}, {"A", 50, 90, 5, 80, 40}}, "C1"},
		{counts([]any{"A", 2002, 42, 40, 5, 41}), ""},
		{counts([]any{"A", 2002, -1, 40, 5, 41}), ""},
		{results([]any{"A", 0.5, "", "", "", 0}), ""},
		{results([]any{"A", 0.5, 1, 0.25}), ""},
		{means([]any{"A", 1, 0, 30, 3, 4, 31}), ""},
	} {
		x := mustRead(t, tt.rows.csv(t), "a.csv", Options{})
		if len(x.Findings) != 1 {
			t.Fatalf("findings %q", said(x))
		}
		m := x.Findings[0].Message
		if offers := strings.Contains(m, "accept"); offers != (tt.offered != "") || (offers && !strings.HasSuffix(m, `or accept it by writing "`+tt.offered+` reason" in the accept column`)) {
			t.Errorf("%q, want an offer of %q", m, tt.offered)
		}
	}
	x := mustRead(t, counts([]any{"Good", 2001, 3, 40, 5, 41, "author confirmed"}, []any{"A", 2002, 3.5, 40, 42, 41, "yes"}, []any{"B", 2002, 3, 40, 5, 41, "yes"}).csv(t), "a.csv", Options{})
	var notes []string
	for _, f := range x.Findings {
		if f.Rule == "F9" {
			notes = append(notes, f.Message)
		}
	}
	if len(notes) != 3 || !strings.Contains(notes[0], `findings of D1: write such as "D1 author confirmed"`) || !strings.Contains(notes[1], `findings of C2: write such as "C2 yes"`) || !strings.Contains(notes[2], "nothing in the row") {
		t.Errorf("notes %q", notes)
	}
}
