package grid

import (
	"encoding/xml"
	"fmt"
	"slices"
	"strconv"
)

// sheetReader reads one worksheet part.
type sheetReader struct {
	*xmlPart
	book     *workbook
	sheet    *Sheet
	begun    bool                   // the rows were met
	seen     [MaxRows/64 + 1]uint64 // rows met
	last     int                    // number of the row before
	order    bool                   // rows or cells stand out of order
	current  Row
	record   []Cell
	filled   [formatColumns/64 + 1]uint64 // columns of the row met
	formulas bool
}

// readSheet reads a worksheet with its comments.
func (w *workbook) readSheet(part string, entry sheetEntry) (*Sheet, error) {
	sheet := &Sheet{Name: entry.name, Hidden: entry.hidden}
	s := &sheetReader{book: w, sheet: sheet}
	err := w.archive.read(part, entry.name, mainNamespaces, "worksheet", func(x *xmlPart) error {
		s.xmlPart = x
		return s.children(s.element)
	})
	if err != nil {
		return nil, err
	}
	if !s.begun {
		e := w.archive.refuse(part, "has no table of rows")
		e.Sheet = entry.name
		return nil, e
	}
	if s.order {
		slices.SortFunc(sheet.Rows, func(a, b Row) int { return a.Number - b.Number })
		w.remarks.add(sheet.Name, 0, 0, "rows or cells do not stand in order in the file; each was put where its reference says", "")
	}
	if s.formulas && w.restless {
		w.remarks.add(sheet.Name, 0, 0, "the file asks to be recalculated, so that results of formulas may be out of date; open and save it in a spreadsheet program", "")
	}
	if err := w.clearCovered(part, sheet); err != nil {
		return nil, err
	}
	return sheet, w.readNotes(part, sheet)
}

// element reads a child of the worksheet.
func (s *sheetReader) element(e xml.StartElement) error {
	switch e.Name.Local {
	case "cols":
		return s.children(s.columns)
	case "sheetData":
		if s.begun {
			return s.refuse("has two tables of rows")
		}
		s.begun = true
		return s.children(s.readRow)
	case "mergeCells":
		return s.children(s.merge)
	}
	return s.skip()
}

// columns reads which columns are hidden.
func (s *sheetReader) columns(e xml.StartElement) error {
	if e.Name.Local == "col" && truth(attribute(e, "hidden")) {
		first, err1 := strconv.Atoi(attribute(e, "min"))
		last, err2 := strconv.Atoi(attribute(e, "max"))
		if err1 != nil || err2 != nil || first < 1 || last < first || last > formatColumns {
			return s.refuse("describes columns that do not exist")
		}
		for col := first; col <= min(last, MaxColumns); col++ {
			if i, ok := slices.BinarySearch(s.sheet.HiddenColumns, col); !ok {
				s.sheet.HiddenColumns = slices.Insert(s.sheet.HiddenColumns, i, col)
			}
		}
	}
	return s.skip()
}

// merge reads one merged range.
func (s *sheetReader) merge(e xml.StartElement) error {
	if e.Name.Local == "mergeCell" {
		ref := attribute(e, "ref")
		m, ok := parseRange(ref)
		switch {
		case !ok:
			return s.refuse(fmt.Sprintf("merges cells %q, which is no range", ref))
		case len(s.sheet.Merges) >= MaxMerges:
			return s.refuse(fmt.Sprintf("merges more than %d ranges, the limit", MaxMerges))
		}
		s.sheet.Merges = append(s.sheet.Merges, m)
	}
	return s.skip()
}

// readRow reads a row and its cells.
func (s *sheetReader) readRow(e xml.StartElement) error {
	if e.Name.Local != "row" {
		return s.skip()
	}
	number := s.last + 1
	if text := attribute(e, "r"); text != "" {
		var err error
		if number, err = strconv.Atoi(text); err != nil {
			return s.refuse(fmt.Sprintf("has a row of the number %q after row %d", text, s.last))
		}
	}
	s.place, s.row, s.col = "", number, 0
	if number < 1 || number > MaxRows {
		return s.refuse(fmt.Sprintf("has a row number beyond the %d rows of a sheet", MaxRows))
	}
	if mark(s.seen[:], number) {
		return s.refuse("has this row twice, so that it is not clear which counts")
	}
	s.order = s.order || number < s.last
	s.last = number
	s.current = Row{Number: number, Hidden: truth(attribute(e, "hidden"))}
	s.record = s.record[:0]
	clear(s.filled[:])
	col := 0
	err := s.children(func(e xml.StartElement) error {
		if e.Name.Local != "c" {
			return s.skip()
		}
		var err error
		col, err = s.readCell(e, col)
		return err
	})
	if err != nil {
		return err
	}
	if len(s.record) == 0 {
		return nil
	}
	var ok bool
	if s.current.Cells, ok = s.book.cells.keep(s.record); !ok {
		return s.tooMany(fmt.Sprintf("the workbook has more than %d cells, the limit", MaxWorkbookCells), "save the sheet of studies alone, as .csv")
	}
	s.sheet.Rows = append(s.sheet.Rows, s.current)
	return nil
}

// mark sets a bit and reports whether it was set before.
func mark(bits []uint64, i int) (before bool) {
	before = bits[i/64]&(1<<(i%64)) != 0
	bits[i/64] |= 1 << (i % 64)
	return before
}

func (s *sheetReader) tooMany(problem, remedy string) error {
	e := s.refuse(problem)
	e.Remedy = remedy
	return e
}

// put puts a cell that is not blank into the row.
func (s *sheetReader) put(col int, cell Cell) error {
	if col > MaxColumns {
		return s.tooMany(fmt.Sprintf("a value stands in column %d; at most %d columns are read", col, MaxColumns),
			"keep only the columns of the studies on the sheet")
	}
	for len(s.record) < col {
		s.record = append(s.record, Cell{})
	}
	s.record[col-1] = cell
	return nil
}

// clearCovered blanks the cells that lie under a merged cell, which a spreadsheet
// does not show, and tells of those that held a value.
func (w *workbook) clearCovered(part string, sheet *Sheet) error {
	const message = "a value lies hidden under merged cells and was not read"
	visits := 0
	for _, m := range sheet.Merges {
		i, _ := slices.BinarySearchFunc(sheet.Rows, m.FirstRow, func(r Row, number int) int { return r.Number - number })
		for ; i < len(sheet.Rows) && sheet.Rows[i].Number <= m.LastRow; i++ {
			row := &sheet.Rows[i]
			for col := m.FirstCol; col <= min(m.LastCol, len(row.Cells)); col++ {
				cell := &row.Cells[col-1]
				if cell.Kind != Blank && (row.Number != m.FirstRow || col != m.FirstCol) {
					w.remarks.add(sheet.Name, row.Number, col, message, strconv.Quote(cell.Text))
					*cell = Cell{}
				}
				visits++
			}
			visits++
		}
		// Ranges that do not overlap visit each cell once at most.
		if visits > 2*MaxWorkbookCells {
			e := w.archive.refuse(part, "merges cells in ranges that overlap")
			e.Sheet = sheet.Name
			return e
		}
	}
	if visits > 0 {
		sheet.Rows = slices.DeleteFunc(sheet.Rows, func(r Row) bool { return !slices.ContainsFunc(r.Cells, isFilled) })
	}
	return nil
}

func isFilled(c Cell) bool { return c.Kind != Blank }
