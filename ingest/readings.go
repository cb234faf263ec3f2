package ingest

import (
	"strings"

	"steelyard/ingest/grid"
	"steelyard/meta/review"
)

// offerReadings adds a finding with both readings of the columns whose commas may
// be decimal marks or part thousands. The cells are errors of their own; this one
// lets the analysis work out what either reading would do to the answer.
func (t *tableReader) offerReadings() {
	decimals := review.Reading{Label: "commas as decimal marks"}
	thousands := review.Reading{Label: "commas between thousands"}
	var headers []string
	var place review.Place
	for i := range t.numeric {
		c := &t.numeric[i]
		found := false
		for j := range t.rows {
			row := t.rows[j].Number
			text := t.rows[j].Cell(c.col).Text
			if c.unclear[row].rule != "F3" {
				continue
			}
			asDecimal, _, errDecimal := grid.ParseNumber(text, ',')
			asThousands, _, errThousands := grid.ParseNumber(text, '.')
			if errDecimal != nil || errThousands != nil {
				continue
			}
			found = true
			at := review.Spot{Row: row, Col: c.col, Text: text}
			decimals.Numbers = append(decimals.Numbers, review.Number{Field: c.field, Value: asDecimal, Place: at})
			thousands.Numbers = append(thousands.Numbers, review.Number{Field: c.field, Value: asThousands, Place: at})
		}
		if !found {
			continue
		}
		if len(headers) == 0 {
			place = t.place(0, c.col, t.header.columns[c.col-1].Header)
		}
		headers = append(headers, t.header.columns[c.col-1].Header)
	}
	if len(headers) == 0 {
		return
	}
	what := "the column " + quote(headers[0]) + " has"
	if len(headers) > 1 {
		what = "the columns " + quoteList(headers) + " have"
	}
	t.x.Findings = append(t.x.Findings, review.Finding{Severity: review.Warning, Rule: "F3", Place: place,
		Message:  what + " commas before three digits, such as " + quote(strings.TrimSpace(decimals.Numbers[0].Place.Text)) + ", which may mark decimals or part thousands; write decimals with a point, or leave thousands commas out",
		Readings: []review.Reading{decimals, thousands}})
}
