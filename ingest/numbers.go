package ingest

import (
	"errors"
	"fmt"
	"math"
	"strconv"
	"strings"

	"steelyard/ingest/grid"
	"steelyard/meta/review"
)

// numberColumn is a column of numbers.
type numberColumn struct {
	col     int // 1-based
	field   review.Field
	decimal rune
	unclear map[int]doubt // by row number, of cells whose decimal mark cannot be told
}

// doubt says why a cell's decimal mark cannot be told.
type doubt struct {
	rule, message string
	mark          rune // ',' or '.' that may mark decimals or part thousands; 0 for other doubts
}

// rowValues finds a row's numbers by their field.
type rowValues struct {
	at [review.FieldCount]*review.Number
}

// has returns the value of a field and whether the row has it.
func (v *rowValues) has(f review.Field) (float64, bool) {
	if n := v.at[f]; n != nil {
		return n.Value, true
	}
	return 0, false
}

// largest is the size beyond which a number is no result of a study.
const largest = 1e150

// chooseDecimals decides for each column which mark separates decimals. A column
// without any comma, and without two points in a cell, needs no deciding; one of
// counts does if it has any point. The error
// says that more cells are in doubt than anybody could go through.
func (t *tableReader) chooseDecimals() error {
	doubts := 0
	for i := range t.numeric {
		c := &t.numeric[i]
		if !t.doubtful(c) {
			continue
		}
		var texts []string
		var numbers []int
		for j := range t.rows {
			if cell := t.rows[j].Cell(c.col); cell.Kind == grid.Text {
				texts, numbers = append(texts, cell.Text), append(numbers, t.rows[j].Number)
			}
		}
		t.decide(c, texts, numbers)
		doubtPoints(c, texts, numbers)
		if doubts += len(c.unclear); doubts > maxFindings {
			return t.tooManyFindings()
		}
	}
	t.offerReadings()
	return nil
}

// doubtful reports whether a column has a text whose decimal mark is not plain.
func (t *tableReader) doubtful(c *numberColumn) bool {
	counted := counted(c.field)
	for j := range t.rows {
		if cell := t.rows[j].Cell(c.col); cell.Kind == grid.Text && (hasComma(cell.Text) || counted && strings.IndexByte(cell.Text, '.') >= 0) {
			return true
		}
	}
	return false
}

// hasComma reports whether a text may use a comma, or groups parted by points.
func hasComma(text string) bool {
	points := 0
	for i := 0; i < len(text); i++ {
		switch c := text[i]; {
		case c == ',' || c == 0xef: // the first byte of a full-width mark
			return true
		case c == '.':
			points++
		}
	}
	return points > 1
}

// decide settles the decimal mark of a column, or marks the cells in doubt, one more
// than maxFindings at most.
func (t *tableReader) decide(c *numberColumn, texts []string, rows []int) {
	mark, err := grid.Decimal(texts)
	var mixed *grid.MixedDecimalError
	var ambiguous *grid.AmbiguousDecimalError
	switch {
	case errors.As(err, &mixed):
		c.unclear = map[int]doubt{}
		message := fmt.Sprintf("the column marks decimals by points in some cells (%d, such as %s) and by commas in others (%d, such as %s), so none of them can be read safely; use one mark throughout",
			len(mixed.Points), quote(mixed.PointExample), len(mixed.Commas), quote(mixed.CommaExample))
		for _, list := range [][]int{mixed.Points, mixed.Commas} {
			for _, i := range list {
				if len(c.unclear) <= maxFindings {
					c.unclear[rows[i]] = doubt{rule: "F4", message: message}
				}
			}
		}
	case errors.As(err, &ambiguous):
		c.unclear = map[int]doubt{}
		for i, text := range texts {
			if len(c.unclear) <= maxFindings && strings.ContainsAny(text, ",\uff0c") {
				c.unclear[rows[i]] = doubt{"F3", bothReadings(text, ','), ','}
			}
		}
	case mark == ',':
		c.decimal = ','
		place := t.place(0, c.col, t.header.columns[c.col-1].Header)
		t.find(review.Note, "F3", place, "", "the column is read with the comma as its decimal mark")
	}
}

func shortest(x float64) string { return strconv.FormatFloat(x, 'g', -1, 64) }

// readNumbers reads the row's numbers.
func (r *rowReader) readNumbers() {
	t := r.t
	t.numbers = room(t.numbers, len(t.numeric)+1) // with that of a header's level
	start := len(t.numbers)
	for i := range t.numeric {
		c := &t.numeric[i]
		if len(t.merged.refused) > 0 && t.merged.refused[cellKey{r.row.Number, c.col}] {
			r.unreadable = true
			r.find(review.Error, "F9", c.col, "the number stands in merged cells, so it is unclear which row or column it belongs to; unmerge them and write it where it belongs")
			continue
		}
		if c.col > len(r.row.Cells) {
			continue
		}
		cell := &r.row.Cells[c.col-1]
		if cell.Kind == grid.Blank {
			continue
		}
		value, ok := r.number(c, cell)
		if !ok {
			continue
		}
		t.numbers = append(t.numbers, review.Number{Field: c.field, Value: value, Place: review.Spot{Row: r.row.Number, Col: c.col, Text: cell.Text}})
		r.values.at[c.field] = &t.numbers[len(t.numbers)-1]
	}
	r.addHeaderLevel()
	if end := len(t.numbers); end > start {
		r.study.Numbers = t.numbers[start:end:end]
	}
}

// addHeaderLevel gives a row with limits the level that their header states.
func (r *rowReader) addHeaderLevel() {
	if r.values.at[review.LimitLevel] != nil {
		return
	}
	for _, field := range []review.Field{review.LimitLow, review.AnalysisLow, review.LimitHigh, review.AnalysisHigh} {
		n := r.values.at[field]
		if n == nil {
			continue
		}
		if c := &r.t.header.columns[n.Place.Col-1]; c.level != 0 {
			r.t.numbers = append(r.t.numbers, review.Number{Field: review.LimitLevel, Value: c.level, Place: review.Spot{Row: c.Place.Row, Col: c.Place.Col, Text: c.Place.Text}})
			r.values.at[review.LimitLevel] = &r.t.numbers[len(r.t.numbers)-1]
			return
		}
	}
}

// number reads a cell as a number; what cannot be read is reported.
func (r *rowReader) number(c *numberColumn, cell *grid.Cell) (float64, bool) {
	switch cell.Kind {
	case grid.Number:
		if value, err := strconv.ParseFloat(cell.Text, 64); err == nil {
			return r.sized(c, value)
		}
	case grid.Date:
		return r.refuse(c, "F1", "a date ("+cell.Text+") stands where a number belongs; spreadsheet programs turn entries such as 3-12 or 3/12 into dates: type the number again, in a cell formatted as text or number")
	case grid.Bool:
		return r.refuse(c, "F6", cell.Text+" stands where a number belongs; write the number")
	case grid.ErrorValue:
		return r.refuse(c, "F9", "the cell holds the error value "+cell.Text+", not a number; mend the formula or type the number")
	case grid.Uncalculated:
		return r.refuse(c, "F9", uncalculated)
	}
	if d, doubtful := c.unclear[r.row.Number]; doubtful {
		return r.refuse(c, d.rule, d.message)
	}
	if value, ok := plainNumber(cell.Text, c.decimal); ok {
		return r.sized(c, value)
	}
	value, normalised, err := grid.ParseNumber(cell.Text, c.decimal)
	if err != nil {
		return r.unreadableText(c, cell.Text)
	}
	if oddMarks(cell.Text) {
		r.find(review.Note, "F5", c.col, "read as "+normalised)
	}
	return r.sized(c, value)
}

// plainNumber reads the commonest form, ASCII digits with a point, without asking
// the reader of everything that people type.
func plainNumber(text string, decimal rune) (float64, bool) {
	if decimal != '.' || text == "" || len(text) > 20 {
		return 0, false
	}
	digits := 0
	for i := 0; i < len(text); i++ {
		switch c := text[i]; {
		case '0' <= c && c <= '9':
			digits++
		case c == '.' || (c == '-' && i == 0):
		default:
			return 0, false
		}
	}
	if digits == 0 || text[len(text)-1] == '.' {
		return 0, false
	}
	value, err := strconv.ParseFloat(text, 64)
	return value, err == nil
}

// oddMarks reports whether a number is typed with other characters than those of
// plain numbers and separators.
func oddMarks(text string) bool {
	for _, c := range []byte(strings.TrimSpace(text)) {
		if c >= 0x80 || c == ' ' || c == '\'' {
			return true
		}
	}
	return false
}

// sized refuses a number that is too large to be a result, or not finite.
func (r *rowReader) sized(c *numberColumn, value float64) (float64, bool) {
	if !(math.Abs(value) <= largest) {
		return r.refuse(c, "F11", "the number is too large to be a result of a study; check for a slip of the exponent or of the formula")
	}
	return value, true
}

// refuse reports a cell whose number cannot be read. One that serves only where
// nothing better is given, or for comparison, does not keep its row from being
// pooled.
func (r *rowReader) refuse(c *numberColumn, rule, message string) (float64, bool) {
	severity := review.Error
	if c.field.Aside() {
		severity = review.Warning
		message += "; the " + asideName(c.field) + " is left aside"
	} else {
		r.unreadable = true
	}
	r.find(severity, rule, c.col, message)
	return 0, false
}

func asideName(f review.Field) string {
	if f == review.PValue {
		return "p-value"
	}
	return f.String()
}
