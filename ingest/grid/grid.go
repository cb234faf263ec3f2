// Package grid reads a workbook or a text file whole and strictly into plain
// cells with their places. It knows nothing of studies. A file is either read
// completely or refused with a *FileError that names the place and the remedy;
// there is never a value together with an error.
package grid

import (
	"context"
	"fmt"
)

// Kind says what a cell holds.
type Kind uint8

// The kinds. A text file has only Blank and Text cells: what its digits mean is
// decided by whoever knows the column, see ParseNumber and Decimal.
const (
	Blank        Kind = iota // nothing, or white space alone
	Text                     // text as typed
	Number                   // a workbook's number; Text has every stored digit
	Bool                     // Text is "TRUE" or "FALSE"
	Date                     // a number shown as date or time; Text is ISO 8601
	ErrorValue               // Text is the error as shown, such as "#N/A"
	Uncalculated             // a formula whose value was never stored; Text is "=" and the formula
)

var kindNames = [...]string{"blank", "text", "number", "boolean", "date", "error value", "formula without a value"}

// String names the kind in a word or two.
func (k Kind) String() string {
	if int(k) >= len(kindNames) {
		return fmt.Sprintf("kind %d", int(k))
	}
	return kindNames[k]
}

// Cell is one cell. The zero Cell is blank.
type Cell struct {
	// Text is the value exactly as stored: numbers with all digits of the file,
	// text as typed (line ends as "\n"; control, invisible and direction-override
	// characters removed, which is remarked), dates as "2016-12-03",
	// "2016-12-03T10:30:00", "10:30:00" (a time of day) or "PT36H0M0S" (a length
	// of time, from formats such as [h]:mm).
	Text string
	Kind Kind
	// Formula says that the value is a formula's stored result.
	Formula bool
}

// Row is a row that holds at least one cell that is not blank.
type Row struct {
	Number int    // 1-based, as a spreadsheet program numbers it; in a text file blank lines count, a line "sep=;" does not
	Line   int    // text files: the line of the file, 1-based, where the row starts; 0 for workbooks
	Hidden bool   // hidden by hand or by a filter
	Cells  []Cell // index = column-1; blanks after the last value are left off
}

// Cell returns the cell of a 1-based column, blank where the row has none.
func (r *Row) Cell(col int) Cell {
	if col < 1 || col > len(r.Cells) {
		return Cell{}
	}
	return r.Cells[col-1]
}

// Merge is a range of merged cells, 1-based, ends included. Its value is in the
// top left cell; the others are blank.
type Merge struct{ FirstRow, FirstCol, LastRow, LastCol int }

// CellNote is the comment attached to a cell.
type CellNote struct {
	Row, Col int // 1-based
	Text     string
}

// Sheet is a worksheet, or the whole of a text file.
type Sheet struct {
	Name          string // blank for a text file
	Hidden        bool
	Rows          []Row      // only rows with a value, ascending by Number
	Merges        []Merge    // in the order of the file
	Notes         []CellNote // by row, then column
	HiddenColumns []int      // 1-based, ascending, at most MaxColumns
}

// Remark tells of something that was normalised or noticed while reading.
type Remark struct {
	Sheet    string
	Row, Col int // 1-based; 0 where it concerns the whole row, column or file
	Message  string
}

// Book is a file as read.
type Book struct {
	File    string // base name, never a path
	SHA256  string // of the file's bytes, lower-case hex
	Text    bool   // a text file; it has exactly one sheet
	Sheets  []Sheet
	Remarks []Remark
}

// Read reads a file's bytes. What kind of file it is is told by its content;
// name serves for messages, and its ending .tsv as a hint at the delimiter. The
// error is a *FileError.
func Read(ctx context.Context, data []byte, name string) (*Book, error) {
	return readContent(ctx, data, name)
}
