package ingest

import (
	"fmt"

	"steelyard/ingest/grid"
	"steelyard/meta/choice"
)

// Names of the sheets that hold no studies.
var reserved = map[string]bool{"plan": true, "guide": true, "judgement": true, "lists": true}

// chooseSheet returns the sheet with the studies and its header: the sheet that
// was asked for, else the only visible one whose header is understood.
func chooseSheet(book *grid.Book, asked string, columns []request) (*grid.Sheet, *header, error) {
	if asked != "" {
		return askedSheet(book, asked, columns)
	}
	var sheets []*grid.Sheet
	var headers []*header
	var nearest *HeaderError
	scanned := 0
	for i := range book.Sheets {
		s := &book.Sheets[i]
		if s.Hidden || reserved[choice.Fold(s.Name)] || len(s.Rows) == 0 {
			continue
		}
		if scanned += headerCells(s); scanned > maxHeaderCells {
			return nil, nil, &grid.FileError{File: book.File, Problem: fmt.Sprintf("has sheets with more than %d cells in which the header may stand", maxHeaderCells),
				Remedy: "name the sheet of the studies with --sheet"}
		}
		r := &headerReader{file: book.File, sheet: s, asked: columns}
		h, ok := r.find()
		if ok {
			sheets, headers = append(sheets, s), append(headers, h)
			continue
		}
		if e := newHeaderError(book, s, h); nearest == nil || e.score > nearest.score {
			nearest = e
		}
	}
	switch {
	case len(sheets) == 1:
		return sheets[0], headers[0], nil
	case len(sheets) > 1:
		return nil, nil, &SheetError{File: book.File, Names: sheetNames(sheets)}
	case nearest != nil:
		return nil, nil, nearest
	}
	return nil, nil, &grid.FileError{File: book.File, Problem: "no visible sheet holds a table of studies",
		Remedy: "write one with a header and one row for each study, or name a hidden one with --sheet"}
}

// maxHeaderCells bounds the cells of all sheets that are looked at for a header; a
// hundred sheets of fifty columns stay below it.
const maxHeaderCells = 200_000

// headerCells counts the cells of a sheet that may be part of its header.
func headerCells(s *grid.Sheet) int {
	n := 0
	for i := range s.Rows[:min(scanRows, len(s.Rows))] {
		n += len(s.Rows[i].Cells)
	}
	return n
}

func askedSheet(book *grid.Book, asked string, columns []request) (*grid.Sheet, *header, error) {
	var all []*grid.Sheet
	for i := range book.Sheets {
		s := &book.Sheets[i]
		if book.Text || choice.Fold(s.Name) != choice.Fold(asked) {
			all = append(all, s)
			continue
		}
		if len(s.Rows) == 0 {
			return nil, nil, &grid.FileError{File: book.File, Sheet: s.Name, Problem: "the sheet is empty", Remedy: "choose another with --sheet"}
		}
		r := &headerReader{file: book.File, sheet: s, asked: columns}
		h, ok := r.find()
		if !ok {
			return nil, nil, newHeaderError(book, s, h)
		}
		return s, h, nil
	}
	return nil, nil, &SheetError{File: book.File, Asked: asked, Text: book.Text, Names: sheetNames(all)}
}

func sheetNames(sheets []*grid.Sheet) []string {
	names := make([]string, len(sheets))
	for i, s := range sheets {
		names[i] = s.Name
	}
	return names
}
