package synthesis

import (
	"fmt"
	"slices"

	"steelyard/meta"
	"steelyard/meta/choice"
	"steelyard/meta/review"
)

// convertedColumn is the name by which filters ask whether a row's number rests
// on an assumption, unless the sheet has a column of that name.
const convertedColumn = "converted"

// The commonest things that a number rests on besides its report.
const (
	AssumedCorrection = "zero-cell correction"
	AssumedReport     = "taken as reported while others are counted or measured"
)

// Converted reports whether the study's number rests on an assumption: a
// correction, a conversion that needs one, or a report where other studies of the
// outcome are counted.
func (s *Study) Converted() bool { return len(s.Assumptions) > 0 }

// markReported marks effects taken as reported while others of the outcome come
// from counts or measurements.
func (o *Outcome) markReported() {
	if !slices.ContainsFunc(o.Studies, func(s Study) bool { return s.Basis.Counted() }) {
		return
	}
	for i := range o.Studies {
		if s := &o.Studies[i]; !s.Basis.Counted() && !s.Converted() {
			s.Assumptions = append(s.Assumptions, AssumedReport)
		}
	}
}

// rowFilter is the plan's filter of rows. What it asks about conversions is
// known only once the rows are effects.
type rowFilter struct {
	filter  *review.Filter // nil keeps every row
	derived bool           // it asks whether rows are converted
}

func newRowFilter(filter *review.Filter, columns []review.Column) rowFilter {
	f := rowFilter{filter: filter}
	if filter == nil || !slices.Contains(filter.Columns(), convertedColumn) {
		return f
	}
	f.derived = !slices.ContainsFunc(columns, func(c review.Column) bool { return choice.Fold(c.Header) == convertedColumn })
	return f
}

func (f rowFilter) reason() string { return fmt.Sprintf("left out by the filter %q", f.filter) }

// match applies the filter to a row that is converted or not.
func (f rowFilter) match(row *review.Study, converted bool) bool {
	return f.filter.Match(func(column string) string {
		switch {
		case !f.derived || column != convertedColumn:
			return row.Cell(column)
		case converted:
			return "yes"
		}
		return "no"
	})
}

// mayKeep reports whether the filter keeps the row, or may keep it.
func (f rowFilter) mayKeep(row *review.Study) bool {
	return f.filter == nil || f.match(row, false) || (f.derived && f.match(row, true))
}

// filterConverted leaves out the studies that the filter does not keep now that
// it is known which of them are converted.
func (o *Outcome) filterConverted(where rowFilter) {
	if !where.derived {
		return
	}
	o.Studies = slices.DeleteFunc(o.Studies, func(s Study) bool {
		if where.match(s.Source, s.Converted()) {
			return false
		}
		o.exclude(s.Source, where.reason())
		o.Counts.Rows--
		return true
	})
}

// withoutConverted pools the studies that rest on no assumption by the same model;
// nil if that is all of them, or none.
func (o *Outcome) withoutConverted() *meta.Fit {
	rest := slices.DeleteFunc(slices.Clone(o.Studies), func(s Study) bool { return s.Converted() })
	if len(rest) == 0 || len(rest) == len(o.Studies) {
		return nil
	}
	fit, err := o.fit(o.Analysis.Model, rest)
	if err != nil {
		return nil
	}
	return fit
}

// CountConverted returns how many pooled studies are converted.
func (o *Outcome) CountConverted() int {
	n := 0
	for i := range o.Studies {
		if o.Studies[i].Converted() {
			n++
		}
	}
	return n
}
