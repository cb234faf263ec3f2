package review

import (
	"fmt"
	"strconv"

	"steelyard/meta/choice"
	"steelyard/meta/effect"
)

// Date is a calendar date of which the day, or day and month, may be unknown
// (zero). The zero Date is no date.
type Date struct{ Year, Month, Day int }

// String returns the date in the form of ISO 8601, as far as it is known.
func (d Date) String() string {
	switch {
	case d.Year == 0:
		return ""
	case d.Month == 0:
		return fmt.Sprintf("%04d", d.Year)
	case d.Day == 0:
		return fmt.Sprintf("%04d-%02d", d.Year, d.Month)
	}
	return fmt.Sprintf("%04d-%02d-%02d", d.Year, d.Month, d.Day)
}

// Compare orders dates; an unknown part sorts before a known one.
func (d Date) Compare(e Date) int {
	for _, diff := range []int{d.Year - e.Year, d.Month - e.Month, d.Day - e.Day} {
		if diff != 0 {
			return diff
		}
	}
	return 0
}

// Number is one extracted number with its place in the sheet.
type Number struct {
	Field Field
	Value float64
	Place Spot
}

// Study is one row of the sheet: one study's result for one outcome.
type Study struct {
	Name    string
	ID      string
	Date    Date
	Outcome string // as typed; blank when the sheet has no such column
	Measure effect.Measure
	Better  Better
	Row     Place // of the whole row
	Numbers []Number
	Remarks []Remark // every other filled cell: context fields and covariates
}

// Remark is the text of a context or covariate cell.
type Remark struct {
	Header string // as the sheet's header says; for a recognised column its field's name
	Text   string // in one line, without surrounding blanks
	Col    int    // 1-based; the row is the study's
}

// Number returns the study's number of a field, if it has one.
func (s *Study) Number(f Field) (Number, bool) {
	for _, n := range s.Numbers {
		if n.Field == f {
			return n, true
		}
	}
	return Number{}, false
}

// Remark returns the text of a context or covariate column by its folded header.
func (s *Study) Remark(header string) (Remark, bool) {
	for _, n := range s.Remarks {
		if n.Header == header {
			return n, true
		}
	}
	return Remark{}, false
}

// Source identifies the input.
type Source struct {
	File   string // base name
	Sheet  string // blank for text
	SHA256 string // of the file's bytes, lower-case hex
}

// Column is a column of the sheet as it was understood.
type Column struct {
	Header string // as typed; two header rows joined by a blank
	Field  Field  // NoField for a covariate
	Place  Place
}

// Names returns the names by which filters call the column: its field's, and
// "year" beside "date"; a covariate's is its header.
func (c Column) Names() []string {
	switch c.Field {
	case NoField:
		return []string{c.Header}
	case DateField:
		return []string{"date", "year"}
	}
	return []string{c.Field.String()}
}

// Extraction is a whole sheet as read: the studies in the order of the file,
// rows with findings included.
type Extraction struct {
	Source   Source
	Columns  []Column
	Studies  []Study
	Findings []Finding
	// Judgements are the panel's own, those that could be read.
	Judgements []Judgement
}

// Outcomes returns the names of the outcomes in the order of their first row.
func (x *Extraction) Outcomes() []string {
	var names []string
	seen := map[string]bool{}
	for i := range x.Studies {
		if name := x.Studies[i].Outcome; !seen[name] {
			seen[name] = true
			names = append(names, name)
		}
	}
	return names
}

// RowColumn is the name by which filters call the number of a row in the sheet, as in
// "sheet row is not 7", unless the sheet has a column of that name.
const RowColumn = "sheet row"

// Cell returns the text of a column by its folded name, for filters: identity
// first, then numbers, then context and covariates. It is blank where the row has
// nothing. The year is that of a column of its own beside the date where the row
// fills it, else the date's.
func (s *Study) Cell(column string) string {
	switch column {
	case "study":
		return s.Name
	case "id":
		return s.ID
	case "date", "year":
		if own := s.remarkText(column); own != "" {
			return own
		}
		if column == "year" && s.Date.Year != 0 {
			return strconv.Itoa(s.Date.Year)
		}
		return s.Date.String()
	case "outcome":
		return s.Outcome
	case "sheet-row": // RowColumn, folded
		if own := s.remarkText(column); own != "" {
			return own
		}
		return strconv.Itoa(s.Row.Row)
	}
	for _, n := range s.Numbers {
		if choice.Fold(n.Field.String()) == column {
			return n.Place.Text
		}
	}
	return s.remarkText(column)
}

// remarkText returns the text of a context or covariate column by its folded name.
func (s *Study) remarkText(column string) string {
	for _, r := range s.Remarks {
		if choice.Fold(r.Header) == column {
			return r.Text
		}
	}
	return ""
}
