// Package review holds a review as data: the studies with every number's place
// in the sheet, the findings about them, and the plan of the analysis.
package review

import (
	"fmt"
	"strconv"
	"strings"
)

// Place says where in the reviewer's files something stands.
type Place struct {
	File  string // base name, never a path
	Sheet string // blank for a text file
	Row   int    // 1-based, as a spreadsheet program numbers it; 0 for a whole column
	Col   int    // 1-based; 0 for a whole row
	Text  string // the cell's text exactly as stored
}

// Cell returns the place in the style of spreadsheets: "C7", "C:C" for a column,
// "7:7" for a row, blank when neither is known.
func (p Place) Cell() string {
	col, row := ColumnLetters(p.Col), strconv.Itoa(p.Row)
	switch {
	case p.Col > 0 && p.Row > 0:
		return col + row
	case p.Col > 0:
		return col + ":" + col
	case p.Row > 0:
		return row + ":" + row
	}
	return ""
}

// String returns the full place, such as "Sheet1!C7", "Sheet1 row 7", "Sheet1
// column C", with the file's name in place of a sheet's for a text file.
func (p Place) String() string {
	where := p.Sheet
	if where == "" {
		where = p.File
	}
	switch {
	case p.Row > 0 && p.Col > 0:
		return strings.TrimPrefix(where+"!"+p.Cell(), "!")
	case p.Row > 0:
		return strings.TrimSpace(fmt.Sprintf("%s row %d", where, p.Row))
	case p.Col > 0:
		return strings.TrimSpace(where + " column " + ColumnLetters(p.Col))
	}
	return where
}

// Spot is a cell of the sheet that a study stands in; the file and the sheet are
// those of the study's row, so that millions of numbers need not repeat them.
type Spot struct {
	Row  int    // 1-based; of the header for what the header says
	Col  int    // 1-based
	Text string // the cell's text exactly as stored
}

// In returns the full place of the cell, beside a place of the same sheet.
func (s Spot) In(beside Place) Place {
	return Place{File: beside.File, Sheet: beside.Sheet, Row: s.Row, Col: s.Col, Text: s.Text}
}

// Cell returns the cell in the style of spreadsheets, such as "C7".
func (s Spot) Cell() string { return Place{Row: s.Row, Col: s.Col}.Cell() }

// String returns the same as Cell.
func (s Spot) String() string { return s.Cell() }

// ColumnLetters returns a spreadsheet's letters of a 1-based column: 1 is A, 27
// is AA; blank for 0.
func ColumnLetters(col int) string {
	var letters []byte
	for ; col > 0; col = (col - 1) / 26 {
		letters = append([]byte{byte('A' + (col-1)%26)}, letters...)
	}
	return string(letters)
}
