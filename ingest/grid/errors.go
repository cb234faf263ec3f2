package grid

import (
	"fmt"
	"strconv"
	"strings"
)

// FileError says why a file was refused: where, what is wrong, and what to do.
type FileError struct {
	File    string // base name
	Sheet   string // the sheet's name, if the fault is in one
	Part    string // the part of the workbook's package, such as "xl/styles.xml"
	Place   string // a cell, row or line, such as "C7" or "line 12"
	Problem string // what is wrong and why it matters
	Remedy  string // what to do
	Err     error  // the cause, if another package reported it
}

// Error joins the parts to one line.
func (e *FileError) Error() string {
	where := e.File
	for _, s := range []string{e.Sheet, e.Part, e.Place} {
		if s != "" {
			where += ", " + s
		}
	}
	return strings.TrimPrefix(where+": ", ": ") + e.Problem + "; " + e.Remedy
}

// Unwrap returns the cause, such as a cancelled context or a missing file.
func (e *FileError) Unwrap() error { return e.Err }

// NumberError says why a text is not a number.
type NumberError struct {
	Text    string // as typed
	Problem string // what is wrong, such as "is not a number"
}

// Error quotes the text.
func (e *NumberError) Error() string { return "\"" + e.Text + "\" " + e.Problem }

// AmbiguousDecimalError reports a column in which every comma is followed by
// exactly three digits, so that it may separate decimals or thousands.
type AmbiguousDecimalError struct {
	Index       int     // of the first such cell in the column given
	Text        string  // its text
	AsDecimal   float64 // read with a decimal comma
	AsThousands float64 // read with a thousands comma
}

// MixedDecimalError reports a column in which both "." and "," mark decimals.
type MixedDecimalError struct {
	Points, Commas             []int // indices of the cells of each kind in the column given
	PointExample, CommaExample string
}

// Error shows both readings.
func (e *AmbiguousDecimalError) Error() string {
	return fmt.Sprintf("%q may be %s (decimal comma) or %s (thousands comma); write decimals with a point, or leave thousands commas out",
		e.Text, shortest(e.AsDecimal), shortest(e.AsThousands))
}

// Error shows one cell of each kind.
func (e *MixedDecimalError) Error() string {
	return fmt.Sprintf("decimals are marked by points in %d cells (%q) and by commas in %d cells (%q); use one mark throughout the column",
		len(e.Points), e.PointExample, len(e.Commas), e.CommaExample)
}

func shortest(x float64) string { return strconv.FormatFloat(x, 'g', -1, 64) }
