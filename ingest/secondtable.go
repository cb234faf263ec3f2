package ingest

import (
	"fmt"

	"steelyard/ingest/grid"
	"steelyard/meta/review"
)

// looksLikeHeader reports whether a row below the header is a header itself: at
// least two of its number cells are words of a header and none is a number; one is
// enough where its name is that of a column of studies.
func (t *tableReader) looksLikeHeader(row *grid.Row) bool {
	words, enough := 0, 2
	if m, ok := recognise(headerText(row, t.role.name)); ok && m.field == review.StudyName {
		enough = 1
	}
	for i := range t.numeric {
		col := t.numeric[i].col
		if col > len(row.Cells) || row.Cells[col-1].Kind == grid.Blank {
			continue
		}
		cell := &row.Cells[col-1]
		if cell.Kind != grid.Text || ('0' <= cell.Text[0] && cell.Text[0] <= '9') {
			return false
		}
		if headerWord(cell.Text) {
			words++
		}
	}
	return words >= enough
}

// reportRepeat reports a row that repeats the header. Behind a gap or a title it may
// head a table of another outcome, which nothing else would tell from the one above.
func (t *tableReader) reportRepeat(row *grid.Row, parted bool) {
	severity, message := review.Note, "the header is repeated here; the row is skipped"
	if parted {
		severity, message = review.Warning, "the header is repeated here below a gap, and the rows below it are read with those above as one table; if they are of another outcome, say so in a column outcome, or move them to another sheet"
	}
	t.find(severity, "F9", t.place(row.Number, 0, ""), "", message)
}

// headerWord reports whether a text is a word of a header: a field, a quantity or
// an arm.
func headerWord(text string) bool {
	if len(text) > maxHeaderBytes {
		return false
	}
	phrase, _ := fold(text)
	d := vocabulary()
	_, known := recognise(text)
	_, bare := d.bare[phrase]
	return known || bare || d.treated[phrase] || d.control[phrase]
}

// repeatsHeader reports whether a row says the same as a row of the header.
func (t *tableReader) repeatsHeader(row *grid.Row) bool {
	for i := t.header.top; i <= t.header.bottom; i++ {
		same := true
		head := &t.sheet.Rows[i]
		for col := 1; col <= max(len(row.Cells), len(head.Cells)) && same; col++ {
			same = headerText(row, col) == headerText(head, col)
		}
		if same {
			return true
		}
	}
	return false
}

// refuseSecondTable reports the rows from the i-th on as a table of their own.
func (t *tableReader) refuseSecondTable(i int) {
	row := &t.rows[i]
	last := t.rows[len(t.rows)-1].Number
	width := 1
	for j := i; j < len(t.rows); j++ {
		width = max(width, len(t.rows[j].Cells))
	}
	t.find(review.Error, "F9", t.place(row.Number, 0, ""), "",
		fmt.Sprintf("a second table with a header of its own begins here and was not read (A%d:%s%d); move it to another sheet, or put its rows under the first header",
			row.Number, review.ColumnLetters(width), last))
}
