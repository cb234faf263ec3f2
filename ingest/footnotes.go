package ingest

import (
	"fmt"
	"regexp"
	"slices"
	"unicode/utf8"

	"steelyard/ingest/grid"
	"steelyard/meta/review"
)

// dropFootnotes leaves out the rows at the end of the table that hold a single
// text and are parted from it by a blank row, or read like a footnote.
func (t *tableReader) dropFootnotes() {
	first := len(t.rows)
	for first > 1 && t.loneText(&t.rows[first-1]) != "" {
		first--
	}
	for first < len(t.rows) && t.rows[first].Number == t.rows[max(first-1, 0)].Number+1 && !readsAsFootnote(t.loneText(&t.rows[first])) {
		first++
	}
	if first == len(t.rows) || first == 0 {
		return
	}
	message := "the row below the table that holds a text alone is read as a footnote"
	if n := len(t.rows) - first; n > 1 {
		message = fmt.Sprintf("the %d rows below the table that hold a text alone are read as footnotes", n)
	}
	text := t.loneText(&t.rows[first])
	col := 1 + slices.IndexFunc(t.rows[first].Cells, func(c grid.Cell) bool { return c.Kind != grid.Blank })
	t.find(review.Note, "F9", t.place(t.rows[first].Number, col, text), "", message)
	t.rows = t.rows[:first]
}

// loneText returns the text of a row that holds nothing else, in its first column
// or that of the studies' names; blank otherwise.
func (t *tableReader) loneText(row *grid.Row) string {
	if filled(row) != 1 {
		return ""
	}
	for _, col := range []int{1, t.role.name} {
		if cell := row.Cell(col); cell.Kind == grid.Text {
			return cell.Text
		}
	}
	return ""
}

// footnoteStart is how a footnote begins: a mark, a letter before a bracket or a
// word that announces one.
var footnoteStart = regexp.MustCompile(`(?i)^\s*([*†‡§¶#^]|\(?[a-z]\)|\[[a-z0-9]\]|(?-i:[a-h] [A-Z])|(notes?|sources?|abbreviations?|legend|footnotes?|data from|anmerkung(en)?|quellen?|abkürzungen|remarques?|notas?|fuentes?)\b)`)

// readsAsFootnote reports whether a text that stands alone in its row is rather a
// footnote than the name of a study without numbers.
func readsAsFootnote(text string) bool {
	const longName = 80
	return footnoteStart.MatchString(text) || utf8.RuneCountInString(text) > longName
}
