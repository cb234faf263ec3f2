package ingest

import (
	"slices"
	"strings"
	"testing"

	"steelyard/meta/review"
)

// TestFootnotes tells texts below a table from studies without numbers.
func TestFootnotes(t *testing.T) {
	head := "study,estimate,se\nA,1,2\nB,1,2\n"
	for _, note := range []string{"* data from the author", "† adjusted", "a) adjusted", "a Adjusted for age", "Note: adjusted", "Source: own extraction", "SOURCES", "Anmerkung: vorläufig",
		"Numbers of the second trial were read off a figure by two people who agreed on every one of them"} {
		for _, rows := range []string{head + note + "\n", head + note + "\nmore of it\n"} {
			x := mustRead(t, []byte(rows), "a.csv", Options{})
			if got := said(x); len(x.Studies) != 2 || !slices.Equal(got, []string{"note F9 A4"}) {
				t.Errorf("%q: %d studies, findings %q", note, len(x.Studies), got)
			}
		}
	}
	for _, name := range []string{"Adams 2001", "Notebaert 2003", "A Smith 2004", "Sourced Trial", "Chen"} {
		x := mustRead(t, []byte(head+name+"\n"), "a.csv", Options{})
		if got := said(x); len(x.Studies) != 3 || !slices.Equal(got, []string{"error F9 4:4"}) {
			t.Errorf("%q: %d studies, findings %q", name, len(x.Studies), got)
		}
	}
	x := mustRead(t, []byte("study,estimate,se\n* Adams,1,2\nSource,1,2\n"), "a.csv", Options{})
	if len(x.Studies) != 2 || len(x.Findings) != 0 {
		t.Errorf("a row with numbers is no footnote: %+v", x.Findings)
	}
}

// TestThousandsPoints wants a count such as "2.000", typed as a text, to be offered
// as 2 and as 2000, and the numbers of other columns to be read as they stand.
func TestThousandsPoints(t *testing.T) {
	x := mustRead(t, []byte("study,events treated,total treated,events control,total control,se\nA,1,2.000,2,3.400,1.234\nB,12,900,1,800,2.000\n"), "a.csv", Options{})
	if got := said(x); !slices.Equal(got, []string{"warning F3 C:C", "error F3 C2", "error F3 E2"}) {
		t.Fatalf("findings %q", got)
	}
	f := x.Findings[0]
	if !strings.Contains(f.Message, "part thousands") || !strings.Contains(x.Findings[1].Message, `"2.000" may be 2 (decimal point) or 2000 (thousands point)`) {
		t.Errorf("messages %q, %q", f.Message, x.Findings[1].Message)
	}
	for i, want := range [][]float64{{2, 3.4}, {2000, 3400}} {
		got := f.Readings[i].Numbers
		if len(got) != 2 || got[0].Value != want[0] || got[1].Value != want[1] || got[0].Field != review.TotalTreated {
			t.Errorf("%s: %+v, want %v", f.Readings[i].Label, got, want)
		}
	}
	if se, _ := x.Studies[0].Number(review.StandardError); se.Value != 1.234 {
		t.Errorf("se %v", se)
	}
}
