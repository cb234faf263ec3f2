package rules

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"time"

	"steelyard/meta/review"
)

// cells looks for what spreadsheets and habits do to single cells: rules F2, F7
// and F8. The reader itself has the other rules of the file.
func (c *checker) cells() {
	for _, rows := range c.outcomes {
		for _, f := range plainFields {
			if !c.hasColumn(f) {
				continue
			}
			c.serials(rows, f)
			c.codes(rows, f)
		}
		c.silentZeros(rows)
	}
}

// plainFields are the columns whose values are of one kind from row to row.
var plainFields = []review.Field{
	review.EventsTreated, review.TotalTreated, review.EventsControl, review.TotalControl, review.Events, review.Total,
	review.MeanTreated, review.SDTreated, review.SETreated, review.MeanControl, review.SDControl, review.SEControl,
	review.Estimate, review.AnalysisEstimate, review.StandardError, review.LimitLow, review.LimitHigh, review.ReportedEstimate,
	review.BaselineMeanTreated, review.BaselineMeanControl, review.RandomisedTreated, review.RandomisedControl,
}

// serials reports numbers that look like the date numbers of spreadsheets (F2):
// whole, from 20000 to 60000, in a column whose other values are far smaller.
func (c *checker) serials(rows []*row, f review.Field) {
	const first, last, usual, largest = 20000, 60000, 2000, 10000
	var suspects []*row
	var others []float64
	for _, r := range rows {
		n, ok := r.Number(f)
		switch {
		case !ok:
		case first <= n.Value && n.Value <= last && n.Value == math.Trunc(n.Value):
			suspects = append(suspects, r)
		default:
			others = append(others, math.Abs(n.Value))
		}
	}
	if len(suspects) == 0 || len(others) == 0 || median(others) >= usual || slices.Max(others) >= largest {
		return
	}
	for _, r := range suspects {
		n, _ := r.Number(f)
		day := time.Date(1899, 12, 30, 0, 0, 0, 0, time.UTC).AddDate(0, 0, int(n.Value))
		c.add(r, review.Error, "F2", f, fmt.Sprintf("%.0f is the number by which spreadsheet programs store the date %s, and the other values of the column have a median of %s; an entry such as %d/%d may have been turned into a date: type the number again",
			n.Value, day.Format("2006-01-02"), shown(median(others)), day.Day(), day.Month()))
	}
}

// missingCodes are numbers by which people write that a number is missing.
var missingCodes = []float64{-1, -9, -99, -999, -9999, 9, 99, 999, 9999}

// codes reports values that look like codes for missing (F7): one of the usual
// codes, twice or more, beyond 5 median absolute deviations of the others.
func (c *checker) codes(rows []*row, f review.Field) {
	const least, far = 4, 5
	times := map[float64]int{}
	for _, r := range rows {
		if n, ok := r.Number(f); ok && slices.Contains(missingCodes, n.Value) {
			times[n.Value]++
		}
	}
	for _, code := range missingCodes {
		if times[code] < 2 {
			continue
		}
		var others []float64
		for _, r := range rows {
			if n, ok := r.Number(f); ok && n.Value != code {
				others = append(others, n.Value)
			}
		}
		center, away := median(others), spread(others)
		if len(others) < least || !(away > 0) || math.Abs(code-center) <= far*away {
			continue
		}
		for _, r := range rows {
			if n, ok := r.Number(f); ok && n.Value == code {
				c.add(r, review.Warning, "F7", f, fmt.Sprintf("%s stands %d times in the column and lies far from its other values (median %s), so it looks like a code for a missing number; if it is one, leave the cell blank", shown(code), times[code], shown(center)))
			}
		}
	}
}

// sourced reports whether the sheet has a column that says where numbers come
// from.
func (c *checker) sourced() bool {
	return c.hasColumn(review.SourceField) || c.hasColumn(review.HowObtained)
}

// unsourced reports whether nothing says where the row's numbers come from, or that
// they were not reported.
func (r *row) unsourced() bool {
	filled := false
	for _, f := range []review.Field{review.SourceField, review.HowObtained, review.NoteField} {
		text := r.remark(f)
		if strings.Contains(text, "not-reported") || text == "nr" {
			return true
		}
		filled = filled || text != ""
	}
	return !filled
}

// silentZeros reports counts of 0 without a source (F8), and outcomes in which
// several trials have no event in both arms without one (C11).
func (c *checker) silentZeros(rows []*row) {
	if !c.sourced() {
		return
	}
	var empty []*row
	for _, r := range rows {
		if !r.unsourced() {
			continue
		}
		t, ok := r.table()
		if ok && t.Events1 == 0 && t.Events2 == 0 {
			empty = append(empty, r)
		}
		for _, f := range []review.Field{review.EventsTreated, review.EventsControl, review.Events} {
			if n, ok := r.number(f); ok && n.Value == 0 {
				c.add(r, review.Warning, "F8", f, "0 events, and no source is given: does the report state that nobody had the event, or does it say nothing? If it says nothing, leave the cell blank; else name the page")
				break
			}
		}
	}
	if len(empty) < 2 {
		return
	}
	for _, r := range empty {
		c.add(r, review.Warning, "C11", review.EventsTreated, fmt.Sprintf("0 events in both arms without a source, as in %d trials of this outcome: harms that a report does not mention are often entered as 0; check that the report states it, and leave the cells blank if not", len(empty)))
	}
}
