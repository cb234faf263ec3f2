package grid

import (
	"encoding/xml"
	"fmt"
	"strconv"
	"strings"
)

const neverCalculated = "a formula without a stored value; open and save the file in a spreadsheet program"

// stored is a cell as it lies in the file.
type stored struct {
	kind       string // attribute t
	style      string // attribute s
	value      string // element v
	hasValue   bool
	inline     string // element is
	formula    string
	hasFormula bool
}

// readCell reads a cell; before is the column of the cell before it. It returns
// the cell's column.
func (s *sheetReader) readCell(e xml.StartElement, before int) (col int, err error) {
	var c stored
	col = before + 1
	for i := range e.Attr {
		if e.Attr[i].Name.Space != "" {
			continue
		}
		switch value := e.Attr[i].Value; e.Attr[i].Name.Local {
		case "r":
			row, refCol, ok := parseReference(value)
			if !ok {
				return 0, s.refuse(fmt.Sprintf("has a cell of the reference %q, which is none", value))
			}
			if row != s.row {
				return 0, s.refuse(fmt.Sprintf("has the cell %s, which belongs to another row", value))
			}
			col = refCol
		case "t":
			c.kind = value
		case "s":
			c.style = value
		}
	}
	s.col = col
	if col > formatColumns {
		return 0, s.refuse(fmt.Sprintf("has more than the %d columns of a sheet", formatColumns))
	}
	if mark(s.filled[:], col) {
		return 0, s.refuse("has this cell twice, so that it is not clear which counts")
	}
	s.order = s.order || col <= before
	if err := s.readStored(&c); err != nil {
		return 0, err
	}
	cell, err := s.interpret(&c, col)
	if err != nil || cell.Kind == Blank {
		return col, err
	}
	cell.Formula = c.hasFormula
	s.formulas = s.formulas || c.hasFormula
	return col, s.put(col, cell)
}

// readStored reads the cell's elements.
func (s *sheetReader) readStored(c *stored) error {
	return s.children(func(e xml.StartElement) error {
		switch e.Name.Local {
		case "v":
			text, err := s.content()
			c.value, c.hasValue = string(text), true
			return err
		case "f":
			text, err := s.content()
			c.formula, c.hasFormula = string(text), true
			return err
		case "is":
			text, err := s.richText()
			c.inline = text
			return err
		}
		return s.skip()
	})
}

// interpret says what a stored cell holds.
func (s *sheetReader) interpret(c *stored, col int) (Cell, error) {
	format, err := s.format(c.style)
	if err != nil {
		return Cell{}, err
	}
	value := strings.TrimSpace(c.value)
	if c.hasFormula && (!c.hasValue || value == "" && c.kind != "str") {
		s.book.remarks.add(s.sheet.Name, s.row, col, neverCalculated, "")
		formula, _ := cleanText(c.formula)
		return Cell{Kind: Uncalculated, Text: "=" + formula}, nil
	}
	if c.kind == "inlineStr" {
		text, removed := cleanText(c.inline)
		return s.textCell(sharedString{text, removed}, col)
	}
	if value == "" && c.kind != "str" {
		return Cell{}, nil
	}
	switch c.kind {
	case "", "n":
		return s.number(value, format, col)
	case "s":
		i, err := strconv.Atoi(value)
		if err != nil || i < 0 || i >= len(s.book.strings) {
			return Cell{}, s.refuse(fmt.Sprintf("refers to text %q of a table of %d texts", value, len(s.book.strings)))
		}
		return s.textCell(s.book.strings[i], col)
	case "str":
		text, removed := cleanText(unescape(c.value))
		return s.textCell(sharedString{text, removed}, col)
	case "b":
		switch value {
		case "1", "true":
			return Cell{Kind: Bool, Text: "TRUE"}, nil
		case "0", "false":
			return Cell{Kind: Bool, Text: "FALSE"}, nil
		}
		return Cell{}, s.refuse(fmt.Sprintf("holds the boolean %q, which is none", value))
	case "e":
		text, _ := cleanText(value)
		return Cell{Kind: ErrorValue, Text: text}, nil
	case "d":
		iso, ok := plainISO(value)
		if !ok {
			return Cell{}, s.refuse(fmt.Sprintf("holds the date %q, which is none", value))
		}
		return Cell{Kind: Date, Text: iso}, nil
	}
	return Cell{}, s.refuse(fmt.Sprintf("has a cell of the unknown type %q", c.kind))
}

// format returns how the style of a cell shows numbers.
func (s *sheetReader) format(style string) (dateFormat, error) {
	if style == "" || style == "0" && len(s.book.styles) == 0 {
		return noDate, nil
	}
	i, err := strconv.Atoi(style)
	if err != nil || i < 0 || i >= len(s.book.styles) {
		return noDate, s.refuse(fmt.Sprintf("refers to style %q of %d styles", style, len(s.book.styles)))
	}
	return s.book.styles[i], nil
}

// textCell makes a cell of a cleaned text.
func (s *sheetReader) textCell(text sharedString, col int) (Cell, error) {
	if len(text.text) > MaxFieldBytes {
		return Cell{}, s.refuse(fmt.Sprintf("holds a text longer than the %d bytes a cell can have", MaxFieldBytes))
	}
	if text.removed {
		s.book.remarks.add(s.sheet.Name, s.row, col, removedCharacters, "")
	}
	if isBlank(text.text) {
		return Cell{}, nil
	}
	if s.book.text += len(text.text); s.book.text > MaxWorkbookText {
		return Cell{}, s.tooMany(fmt.Sprintf("the texts of all cells up to here are longer than %d MB together, the limit", MaxWorkbookText>>20), "save the sheet of studies alone, without long texts")
	}
	return Cell{Kind: Text, Text: text.text}, nil
}

// number makes a cell of a stored number, a date if it is shown as one.
func (s *sheetReader) number(value string, format dateFormat, col int) (Cell, error) {
	if !validDouble(value) {
		return Cell{}, s.refuse(fmt.Sprintf("holds the number %q, which is none", shortened(value)))
	}
	if format != noDate {
		serial, err := strconv.ParseFloat(value, 64)
		if iso, ok := isoDate(serial, format, s.book.from1904); ok && err == nil {
			return Cell{Kind: Date, Text: iso}, nil
		}
		s.book.remarks.add(s.sheet.Name, s.row, col, "a number shown as date is no date and was read as a number", value)
	}
	return Cell{Kind: Number, Text: value}, nil
}

func shortened(text string) string {
	if len(text) > 40 {
		return strings.ToValidUTF8(text[:40], "") + "…"
	}
	return text
}

// validDouble checks the grammar of a stored number (xsd:double without its
// words for infinity and not-a-number).
func validDouble(text string) bool {
	if len(text) > maxNumberBytes {
		return false
	}
	if c := firstByte(text); c == '-' || c == '+' {
		text = text[1:]
	}
	if i := strings.IndexAny(text, "eE"); i >= 0 {
		if _, ok := plainExponent(text[i+1:]); !ok {
			return false
		}
		text = text[:i]
	}
	whole, fraction, _ := strings.Cut(text, ".")
	return (whole == "" || allDigits(whole)) && (fraction == "" || allDigits(fraction)) && whole+fraction != ""
}
