package ingest

import (
	"context"
	"fmt"
	"slices"

	"steelyard/ingest/grid"
	"steelyard/meta/review"
)

// tableReader reads the rows below a header.
type tableReader struct {
	book    *grid.Book
	sheet   *grid.Sheet
	header  *header
	rows    []grid.Row // from the first below the header to the last of the table
	numeric []numberColumn
	context []int // indices of the columns kept as text
	role    roles
	merged  mergedCells
	x       *review.Extraction
	numbers []review.Number // a block of those read last, see room
	remarks []review.Remark
	armRows bool         // each row is of one arm
	final   map[int]bool // findings, by index, whose numbers no acceptance makes usable
}

// roles are the 1-based columns of the fields that make up a study's identity; 0
// where the sheet has no such column.
type roles struct{ name, id, date, outcome, measure, better, accept int }

// readTable reads all rows of a table into an extraction.
func readTable(ctx context.Context, book *grid.Book, sheet *grid.Sheet, h *header) (*review.Extraction, error) {
	ctx, cancel := grid.Limited(ctx)
	defer cancel()
	h.noteLevels()
	t := &tableReader{book: book, sheet: sheet, header: h, final: map[int]bool{}, x: &review.Extraction{
		Source:   review.Source{File: book.File, Sheet: sheet.Name, SHA256: book.SHA256},
		Findings: h.findings,
	}}
	for _, c := range h.columns {
		if c.Header != "" {
			t.x.Columns = append(t.x.Columns, c.Column)
		}
	}
	t.rows = sheet.Rows[h.bottom+1:]
	t.noteSheet()
	t.sortColumns()
	t.dropFootnotes()
	t.dropUnitRow()
	t.warnOfArmRows()
	if err := t.readMerges(); err != nil {
		return nil, err
	}
	if err := t.chooseDecimals(); err != nil {
		return nil, err
	}
	t.x.Studies = make([]review.Study, 0, len(t.rows))
	if err := t.readRows(ctx); err != nil {
		return nil, err
	}
	if len(t.x.Studies) == 0 {
		where := book.File
		if sheet.Name != "" {
			where += ", " + sheet.Name
		}
		return nil, fmt.Errorf("%s: the header stands in row %d: %w", where, sheet.Rows[h.bottom].Number, ErrNoStudies)
	}
	t.checkSums()
	t.checkNames()
	t.remarkAcceptances()
	if len(t.x.Findings) > maxFindings {
		return nil, t.tooManyFindings()
	}
	return t.x, nil
}

// noteSheet hands on what the cell reader remarked, except about formulas without
// a value, which are findings of their own, and warns of hidden columns and sheets.
func (t *tableReader) noteSheet() {
	for _, r := range t.book.Remarks {
		if (r.Sheet == t.sheet.Name || r.Sheet == "") && t.kindAt(r.Row, r.Col) != grid.Uncalculated {
			t.find(review.Note, "F5", t.place(r.Row, r.Col, ""), "", r.Message)
		}
	}
	for _, col := range t.sheet.HiddenColumns {
		if col <= len(t.header.columns) && t.header.columns[col-1].Header != "" {
			t.find(review.Warning, "F9", t.place(0, col, t.header.columns[col-1].Header), "",
				"the column "+quote(t.header.columns[col-1].Header)+" is hidden and was read; show it, or delete it if it is not meant to count")
		}
	}
	scanned := 0
	for i := range t.book.Sheets {
		s := &t.book.Sheets[i]
		if !s.Hidden || s == t.sheet || len(s.Rows) == 0 {
			continue
		}
		if scanned += headerCells(s); scanned > maxHeaderCells {
			break // enough to warn of
		}
		r := &headerReader{file: t.book.File, sheet: s}
		if _, ok := r.find(); ok {
			t.find(review.Warning, "F9", review.Place{File: t.book.File, Sheet: s.Name}, "",
				"the hidden sheet "+quote(s.Name)+" also holds a table of studies, which was not read; delete it, or choose it with --sheet")
		}
	}
}

// kindAt returns the kind of a cell of the sheet.
func (t *tableReader) kindAt(row, col int) grid.Kind {
	i, found := slices.BinarySearchFunc(t.sheet.Rows, row, func(r grid.Row, want int) int { return r.Number - want })
	if !found {
		return grid.Blank
	}
	return t.sheet.Rows[i].Cell(col).Kind
}

// sortColumns parts the columns by what is done with them.
func (t *tableReader) sortColumns() {
	for i, c := range t.header.columns {
		col := i + 1
		switch c.field {
		case review.StudyName:
			t.role.name = col
		case review.StudyID:
			t.role.id = col
		case review.DateField:
			t.role.date = col
		case review.OutcomeField:
			t.role.outcome = col
		case review.MeasureField:
			t.role.measure = col
		case review.BetterField:
			t.role.better = col
		case review.Accept:
			t.role.accept = col
			t.context = append(t.context, i)
		default:
			switch {
			case c.field.Numeric():
				t.numeric = append(t.numeric, numberColumn{col: col, field: c.field, decimal: '.'})
			case c.Header != "":
				t.context = append(t.context, i)
			}
		}
	}
	t.noteHeadless()
}

// noteHeadless tells of columns with values but without a header.
func (t *tableReader) noteHeadless() {
	for i, c := range t.header.columns {
		if c.Header != "" {
			continue
		}
		for j := range t.rows {
			if cell := t.rows[j].Cell(i + 1); cell.Kind != grid.Blank {
				t.find(review.Warning, "F9", t.place(0, i+1, ""), "",
					"the column has values, the first in row "+fmt.Sprint(t.rows[j].Number)+", but no header, and was not read; give it one or clear it")
				break
			}
		}
	}
}

// blockSize is the number of numbers or remarks that are given room at a time.
const blockSize = 16 << 10

// room returns the block if it has room for n more, else a new one.
func room[T any](block []T, n int) []T {
	if cap(block)-len(block) >= n {
		return block
	}
	return make([]T, 0, max(n, min(blockSize, 2*cap(block)+64)))
}

func (t *tableReader) place(row, col int, text string) review.Place {
	return review.Place{File: t.book.File, Sheet: t.sheet.Name, Row: row, Col: col, Text: text}
}

func (t *tableReader) find(severity review.Severity, rule string, place review.Place, study, message string) {
	t.x.Findings = append(t.x.Findings, review.Finding{Severity: severity, Rule: rule, Place: place, Study: study, Message: message})
}

// filled counts the cells of a row that hold something.
func filled(row *grid.Row) int {
	n := 0
	for i := range row.Cells {
		if row.Cells[i].Kind != grid.Blank {
			n++
		}
	}
	return n
}

// dropUnitRow leaves out a row right below the header that names no study and
// holds no number, only units such as "n" or "mmHg".
func (t *tableReader) dropUnitRow() {
	if len(t.rows) < 2 || t.rows[0].Cell(t.role.name).Kind != grid.Blank {
		return
	}
	for i := range t.rows[0].Cells {
		cell := &t.rows[0].Cells[i]
		if _, _, err := grid.ParseNumber(cell.Text, '.'); cell.Kind != grid.Blank && (cell.Kind != grid.Text || err == nil) {
			return
		}
	}
	t.find(review.Note, "F9", t.place(t.rows[0].Number, 0, ""), "", "the row below the header names no study and holds no number; it is read as a row of units")
	t.rows = t.rows[1:]
}
