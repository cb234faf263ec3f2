package ingest

import (
	"slices"

	"steelyard/ingest/grid"
	"steelyard/meta/review"
)

// readCellNotes takes the comments attached to the cells of the row into its note, so
// that rules and readers see what the extractor remarked there, and names each.
func (r *rowReader) readCellNotes() {
	notes := r.t.sheet.Notes
	first, _ := slices.BinarySearchFunc(notes, r.row.Number, func(n grid.CellNote, row int) int { return n.Row - row })
	for _, n := range notes[first:] {
		if n.Row != r.row.Number {
			return
		}
		text := tidy(n.Text)
		if text == "" {
			continue
		}
		r.find(review.Note, "F9", n.Col, "the cell has a comment, which is read as a note of the row: "+quote(text))
		r.addNote(text, n.Col)
	}
}

// addNote adds a text to the row's note.
func (r *rowReader) addNote(text string, col int) {
	name := review.NoteField.String()
	for i := range r.study.Remarks {
		if own := &r.study.Remarks[i]; own.Header == name {
			own.Text += "; " + text
			return
		}
	}
	r.study.Remarks = append(r.study.Remarks, review.Remark{Header: name, Text: text, Col: col})
}
