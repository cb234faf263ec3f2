package ingest

import (
	"fmt"
	"regexp"
	"strings"

	"steelyard/ingest/grid"
	"steelyard/meta/review"
)

// markNames are what the marks are called in messages.
var markNames = map[rune]string{',': "comma", '.': "point"}

// otherMark returns the point for the comma and the comma for the point.
func otherMark(mark rune) rune {
	if mark == ',' {
		return '.'
	}
	return ','
}

// bothReadings says what a text with a mark before three digits may mean.
func bothReadings(text string, mark rune) string {
	decimal, _, errDecimal := grid.ParseNumber(text, mark)
	thousands, _, errThousands := grid.ParseNumber(text, otherMark(mark))
	if errDecimal != nil || errThousands != nil {
		return notANumber(text)
	}
	remedy := "write decimals with a point, or leave thousands commas out"
	if mark == '.' {
		remedy = "write a count in digits alone"
	}
	return fmt.Sprintf("%s may be %s (decimal %s) or %s (thousands %s), and nothing in the column tells which; %s",
		quote(tidy(text)), shortest(decimal), markNames[mark], shortest(thousands), markNames[mark], remedy)
}

// counted reports whether a field holds whole numbers of people or events.
func counted(f review.Field) bool {
	switch f {
	case review.EventsTreated, review.TotalTreated, review.EventsControl, review.TotalControl, review.Events, review.Total, review.RandomisedTreated, review.RandomisedControl:
		return true
	}
	return false
}

// pointBeforeThree is a number in which a point may part thousands.
var pointBeforeThree = regexp.MustCompile(`^\s*[-+−]?[1-9]\d{0,2}\.\d{3}\s*$`)

// doubtPoints marks the cells of a column of counts in which a point may be a
// decimal mark or part thousands, such as "2.000", unless the column has another
// point that can only be a decimal mark, or is read with decimal commas.
func doubtPoints(c *numberColumn, texts []string, rows []int) {
	if !counted(c.field) || c.decimal != '.' {
		return
	}
	var unclear []int
	for i, text := range texts {
		switch _, number := plainNumber(tidy(text), '.'); {
		case pointBeforeThree.MatchString(text):
			unclear = append(unclear, i)
		case number && strings.Contains(text, "."):
			return
		}
	}
	if len(unclear) > 0 && c.unclear == nil {
		c.unclear = map[int]doubt{}
	}
	for _, i := range unclear {
		if len(c.unclear) <= maxFindings {
			c.unclear[rows[i]] = doubt{"F3", bothReadings(texts[i], '.'), '.'}
		}
	}
}

// offerReadings adds for each mark a finding with both readings of the columns in
// which it may mark decimals or part thousands. The cells are errors of their own;
// this one lets the analysis work out what either reading would do to the answer.
func (t *tableReader) offerReadings() {
	for _, mark := range []rune{',', '.'} {
		var both bothOf
		for i := range t.numeric {
			t.collect(&t.numeric[i], mark, &both)
		}
		if len(both.headers) > 0 {
			t.x.Findings = append(t.x.Findings, both.finding(mark))
		}
	}
}

// bothOf are the numbers of all columns under both readings of a mark.
type bothOf struct {
	decimals, thousands []review.Number
	headers             []string
	place               review.Place // of the first column
}

// collect adds the doubtful cells of a column.
func (t *tableReader) collect(c *numberColumn, mark rune, both *bothOf) {
	if len(c.unclear) == 0 {
		return
	}
	before := len(both.decimals)
	for j := range t.rows {
		row := t.rows[j].Number
		if c.unclear[row].mark != mark {
			continue
		}
		text := t.rows[j].Cell(c.col).Text
		asDecimal, _, errDecimal := grid.ParseNumber(text, mark)
		asThousands, _, errThousands := grid.ParseNumber(text, otherMark(mark))
		if errDecimal != nil || errThousands != nil {
			continue
		}
		at := review.Spot{Row: row, Col: c.col, Text: text}
		both.decimals = append(both.decimals, review.Number{Field: c.field, Value: asDecimal, Place: at})
		both.thousands = append(both.thousands, review.Number{Field: c.field, Value: asThousands, Place: at})
	}
	if len(both.decimals) == before {
		return
	}
	header := t.header.columns[c.col-1].Header
	if len(both.headers) == 0 {
		both.place = t.place(0, c.col, header)
	}
	both.headers = append(both.headers, header)
}

// finding says which columns are in doubt.
func (b *bothOf) finding(mark rune) review.Finding {
	name := markNames[mark]
	what := "the column " + quote(b.headers[0]) + " has"
	if len(b.headers) > 1 {
		what = "the columns " + quoteList(b.headers) + " have"
	}
	remedy := "write decimals with a point, or leave thousands commas out"
	if mark == '.' {
		remedy = "write counts in digits alone"
	}
	return review.Finding{Severity: review.Warning, Rule: "F3", Place: b.place,
		Message: what + " " + name + "s before three digits, such as " + quote(strings.TrimSpace(b.decimals[0].Place.Text)) + ", which may mark decimals or part thousands; " + remedy,
		Readings: []review.Reading{
			{Label: name + "s as decimal marks", Numbers: b.decimals},
			{Label: name + "s between thousands", Numbers: b.thousands},
		}}
}
