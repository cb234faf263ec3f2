package ingest

import (
	"fmt"
	"sort"

	"steelyard/ingest/grid"
	"steelyard/meta/review"
)

// cellKey is a cell's row and column, 1-based.
type cellKey struct{ row, col int }

// mergedCells are the effects of merged cells below the header.
type mergedCells struct {
	above   map[cellKey]grid.Cell // the value that a cell below it takes over
	refused map[cellKey]bool      // number cells that are merged with others
}

// maxMergedText bounds the bytes of the texts that are read anew for merged cells.
const maxMergedText = 128 << 20

// maxMergedCells bounds the cells that merged ranges may cover in all; ranges of
// an honest file do not overlap and stay far below it.
const maxMergedCells = 1 << 20

// readMerges fills merged cells of names and context downwards, saying so, and
// refuses merged cells of numbers.
func (t *tableReader) readMerges() error {
	t.merged = mergedCells{above: map[cellKey]grid.Cell{}, refused: map[cellKey]bool{}}
	covered, text := 0, 0
	for _, m := range t.sheet.Merges {
		first := sort.Search(len(t.rows), func(i int) bool { return t.rows[i].Number >= m.FirstRow })
		end := sort.Search(len(t.rows), func(i int) bool { return t.rows[i].Number > m.LastRow })
		covered += max(0, end-first) * (min(m.LastCol, len(t.header.columns)) - m.FirstCol + 1)
		if covered > maxMergedCells {
			return &grid.FileError{File: t.book.File, Sheet: t.sheet.Name, Problem: fmt.Sprintf("merged cells cover more than %d cells of the table", maxMergedCells),
				Remedy: "unmerge them"}
		}
		if first < end && t.rows[first].Number == m.FirstRow {
			text += (end - first) * len(t.rows[first].Cell(m.FirstCol).Text)
		}
		if text > maxMergedText {
			return &grid.FileError{File: t.book.File, Sheet: t.sheet.Name, Problem: fmt.Sprintf("merged cells repeat texts of more than %d MB", maxMergedText>>20),
				Remedy: "unmerge them"}
		}
		if first < end {
			t.applyMerge(m, t.rows[first:end])
		}
	}
	return nil
}

// applyMerge applies one merged range to the rows it covers.
func (t *tableReader) applyMerge(m grid.Merge, rows []grid.Row) {
	filled := 0
	var top grid.Cell
	if rows[0].Number == m.FirstRow {
		top = rows[0].Cell(m.FirstCol)
	}
	for col := m.FirstCol; col <= min(m.LastCol, len(t.header.columns)); col++ {
		numeric := t.header.columns[col-1].field.Numeric()
		for i := range rows {
			key := cellKey{rows[i].Number, col}
			switch {
			case numeric:
				t.merged.refused[key] = true
			case col == m.FirstCol && key.row > m.FirstRow && top.Kind != grid.Blank:
				t.merged.above[key] = top
				filled++
			}
		}
	}
	if filled > 0 {
		place := t.place(m.FirstRow, m.FirstCol, top.Text)
		t.find(review.Note, "F9", place, "", fmt.Sprintf("%s stands in merged cells and is read for every row down to row %d", quote(tidy(top.Text)), m.LastRow))
	}
}
