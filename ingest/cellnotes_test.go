package ingest

import (
	"bytes"
	"slices"
	"testing"

	"github.com/xuri/excelize/v2"

	"steelyard/meta/review"
)

// TestCellNotes: comments on cells of a row, written by another program's library, are
// named and join the row's note; those above the table are not of any row.
func TestCellNotes(t *testing.T) {
	f := excelize.NewFile()
	for i, row := range [][]any{{"study", "y", "se", "note"}, {"A", 0.5, 0.25, "by hand"}, {"B", 0.5, 0.25}} {
		cell, _ := excelize.CoordinatesToCellName(1, i+1)
		if err := f.SetSheetRow("Sheet1", cell, &row); err != nil {
			t.Fatal(err)
		}
	}
	for cell, text := range map[string]string{"B1": "what was measured", "B2": "a median, p. 4", "C3": "<b>read off the figure</b>"} {
		if err := f.AddComment("Sheet1", excelize.Comment{Cell: cell, Author: "", Text: text}); err != nil {
			t.Fatal(err)
		}
	}
	var out bytes.Buffer
	if err := f.Write(&out); err != nil {
		t.Fatal(err)
	}
	x := mustRead(t, out.Bytes(), "a.xlsx", Options{})
	if got := said(x); !slices.Equal(got, []string{"note F9 B2", "note F9 C3"}) {
		t.Errorf("findings %q", got)
	}
	for i, want := range []string{"by hand; a median, p. 4", "<b>read off the figure</b>"} {
		if got, _ := x.Studies[i].Remark(review.NoteField.String()); got.Text != want {
			t.Errorf("note %q, want %q", got.Text, want)
		}
	}
}
