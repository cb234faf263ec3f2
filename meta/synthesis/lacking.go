package synthesis

import (
	"errors"
	"fmt"
	"strings"

	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// commonSets are the numbers of the commonest kinds, to tell which of them a row
// comes nearest to.
var commonSets = []struct {
	what   string
	fields []review.Field
}{
	{"counts", []review.Field{review.EventsTreated, review.TotalTreated, review.EventsControl, review.TotalControl}},
	{"means", []review.Field{review.MeanTreated, review.SDTreated, review.TotalTreated, review.MeanControl, review.SDControl, review.TotalControl}},
	{"means", []review.Field{review.MeanTreated, review.SETreated, review.TotalTreated, review.MeanControl, review.SEControl, review.TotalControl}},
	{"medians", []review.Field{review.MedianTreated, review.Q1Treated, review.Q3Treated, review.TotalTreated, review.MedianControl, review.Q1Control, review.Q3Control, review.TotalControl}},
	{"an estimate with its limits", []review.Field{review.Estimate, review.LimitLow, review.LimitHigh}},
	{"an estimate with its limits", []review.Field{review.AnalysisEstimate, review.AnalysisLow, review.AnalysisHigh}},
	{"an estimate with its se", []review.Field{review.Estimate, review.StandardError}},
	{"an estimate with its se", []review.Field{review.AnalysisEstimate, review.StandardError}},
	{"events with person time", []review.Field{review.EventsTreated, review.PersonTimeTreated, review.EventsControl, review.PersonTimeControl}},
	{"events of one arm", []review.Field{review.Events, review.Total}},
	{"a correlation", []review.Field{review.Coefficient, review.Total}},
	{"observed minus expected events", []review.Field{review.ObservedMinusExpected, review.Variance}},
}

// lacking says which numbers the row lacks of the kind that it comes nearest to.
func (d *derivation) lacking() error {
	var nearest []string
	what, most := "", 0
	for _, set := range commonSets {
		var missing []string
		for _, f := range set.fields {
			if !d.has(f) {
				missing = append(missing, f.String())
			}
		}
		have := len(set.fields) - len(missing)
		if score := 2*have - len(missing); have > 0 && (nearest == nil || score > most) {
			nearest, what, most = missing, set.what, score
		}
	}
	if nearest == nil {
		return errors.New("the row has no complete set of numbers: give an estimate with se or both limits, events and totals of both arms, or means, SDs and totals of both arms")
	}
	return fmt.Errorf("the row has no complete set of numbers: for %s it lacks %s", what, listed(nearest))
}

// listed joins names: "events control and total control".
func listed(names []string) string {
	if len(names) == 1 {
		return names[0]
	}
	return strings.Join(names[:len(names)-1], ", ") + " and " + names[len(names)-1]
}

// blame returns the place of the number that an error names, else the row.
func (d *derivation) blame(err error) review.Place {
	var input *effect.InputError
	if !errors.As(err, &input) {
		return d.row.Row
	}
	field, unknown := review.ParseField(input.What)
	if unknown != nil {
		return d.row.Row
	}
	n, ok := d.row.Number(field)
	if !ok || n.Place.Row != d.row.Row.Row || n.Place.Col == 0 {
		return d.row.Row
	}
	return n.Place.In(d.row.Row)
}

// noteUnmatched tells of conditions of the filter whose value no row has, which a
// slip of spelling would make.
func (o *Outcome) noteUnmatched(x *review.Extraction, where rowFilter) {
	if where.filter == nil {
		return
	}
	var rows []*review.Study
	for i := range x.Studies {
		if x.Studies[i].Outcome == o.Name {
			rows = append(rows, &x.Studies[i])
		}
	}
	unmatched := where.filter.Unmatched(len(rows), func(row int, column string) string { return rows[row].Cell(column) })
	for _, condition := range unmatched {
		if where.derived && strings.HasPrefix(condition, convertedColumn) {
			continue
		}
		o.note(fmt.Sprintf("No row has the value of the filter's condition %q; check its spelling.", condition))
	}
}
