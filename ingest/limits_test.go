package ingest

import (
	"context"
	"strings"
	"testing"

	"steelyard/ingest/grid"
)

// TestTooManyFindings: a sheet of nothing but mistakes is refused as that.
func TestTooManyFindings(t *testing.T) {
	for name, row := range map[string]string{"words": "S,bad,worse\n", "comma or thousands": "S,\"1,234\",\"5,678\"\n", "twice": "S,1,1\n"} {
		_, _, err := Read(context.Background(), []byte("study,y,se\n"+strings.Repeat(row, maxFindings+10)), "a.csv", Options{})
		if err == nil || !strings.Contains(err.Error(), "has more than 100000 cells or rows that need looking at") {
			t.Errorf("%s: error %v, want the limit of findings", name, err)
		}
	}
}

// TestLongPlansAreNotRead beyond the limit.
func TestLongPlansAreNotRead(t *testing.T) {
	plan := &grid.Sheet{Name: "plan", Rows: []grid.Row{{Number: 1, Cells: []grid.Cell{{Kind: grid.Text, Text: "setting"}, {Kind: grid.Text, Text: "value"}}}}}
	for i := range maxPlanRows + 1 {
		plan.Rows = append(plan.Rows, grid.Row{Number: i + 2, Cells: []grid.Cell{{Kind: grid.Text, Text: "tua"}, {Kind: grid.Text, Text: "x"}}})
	}
	d := &planDraft{}
	d.read("a.xlsx", plan)
	if len(d.findings) != 1 || !strings.Contains(d.findings[0].Message, "10001 rows, more than the limit of 10000") {
		t.Errorf("%d findings, want one about the length", len(d.findings))
	}
}

// TestWideSheetsAreNotAllSearched: with many wide sheets the reader asks for one.
func TestWideSheetsAreNotAllSearched(t *testing.T) {
	row := grid.Row{Number: 1, Cells: make([]grid.Cell, 1000)}
	for i := range row.Cells {
		row.Cells[i] = grid.Cell{Kind: grid.Text, Text: "a b c d e f g h i j k l m n o p"}
	}
	book := &grid.Book{File: "a.xlsx"}
	for range 40 {
		sheet := grid.Sheet{Name: "x"}
		for i := range scanRows {
			sheet.Rows = append(sheet.Rows, grid.Row{Number: i + 1, Cells: row.Cells})
		}
		book.Sheets = append(book.Sheets, sheet)
	}
	if _, _, err := chooseSheet(book, "", nil); err == nil || !strings.Contains(err.Error(), "more than 200000 cells in which the header may stand; name the sheet of the studies with --sheet") {
		t.Errorf("error %v, want to be asked for the sheet", err)
	}
}

// TestRepeatedTextsOfMergedCellsAreLimited: one text over many rows is not read anew
// for each without end.
func TestRepeatedTextsOfMergedCellsAreLimited(t *testing.T) {
	long := grid.Cell{Kind: grid.Text, Text: strings.Repeat("w  ", 40_000)}
	cells := func(name grid.Cell) []grid.Cell {
		return []grid.Cell{name, {Kind: grid.Number, Text: "1"}, {Kind: grid.Number, Text: "1"}}
	}
	head := []grid.Cell{{Kind: grid.Text, Text: "study"}, {Kind: grid.Text, Text: "y"}, {Kind: grid.Text, Text: "se"}}
	sheet := grid.Sheet{Name: "x", Rows: []grid.Row{{Number: 1, Cells: head}, {Number: 2, Cells: cells(long)}}, Merges: []grid.Merge{{FirstRow: 2, FirstCol: 1, LastRow: 3000, LastCol: 1}}}
	for i := 3; i <= 3000; i++ {
		sheet.Rows = append(sheet.Rows, grid.Row{Number: i, Cells: cells(grid.Cell{})})
	}
	_, _, err := read(context.Background(), &grid.Book{File: "a.xlsx", Sheets: []grid.Sheet{sheet}}, beside{}, Options{})
	if err == nil || !strings.Contains(err.Error(), "merged cells repeat texts of more than 128 MB") {
		t.Errorf("error %v, want the limit of repeated texts", err)
	}
}

// TestTidyKeepsTidyTexts as they are, without a copy of them.
func TestTidyKeepsTidyTexts(t *testing.T) {
	for text, want := range map[string]string{"": "", "a b": "a b", " é\u00a0 ü ": "é ü", "é ü": "é ü", "a\tb": "a b", "a ": "a", "  ": "", "a  b": "a b", "a\n": "a"} {
		if got := tidy(text); got != want {
			t.Errorf("tidy(%q) = %q, want %q", text, got, want)
		}
	}
	text := strings.Repeat("é ü ", 100) + "x"
	if n := testing.AllocsPerRun(10, func() { tidy(text) }); n != 0 {
		t.Errorf("a tidy text is copied in %v pieces", n)
	}
}
