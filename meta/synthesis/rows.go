package synthesis

import (
	"fmt"
	"slices"
	"strings"

	"steelyard/meta/choice"
	"steelyard/meta/review"
)

type rowKey struct {
	file  string
	sheet string
	row   int
}

// blockedRows returns the first blocking finding of each row.
func blockedRows(findings []review.Finding) map[rowKey]review.Finding {
	blocked := map[rowKey]review.Finding{}
	for _, f := range findings {
		key := rowKey{f.Place.File, f.Place.Sheet, f.Place.Row}
		if _, have := blocked[key]; !have && f.Blocks() && f.Place.Row > 0 {
			blocked[key] = f
		}
	}
	return blocked
}

// knownColumns refuses a filter on a column that the sheet does not have: it
// would keep or drop every row.
func knownColumns(where *review.Filter, columns []review.Column) error {
	if where == nil {
		return nil
	}
	names := []string{convertedColumn, review.RowColumn}
	for _, c := range columns {
		names = append(names, c.Names()...)
	}
	for _, name := range where.Columns() {
		if !slices.ContainsFunc(names, func(have string) bool { return choice.Fold(have) == name }) {
			return fmt.Errorf("the filter %q looks at a column %q that the sheet does not have; its columns are: %s", where, name, strings.Join(names, ", "))
		}
	}
	return nil
}

// rows returns the rows of the outcome that may be pooled, and lists the others.
func (o *Outcome) rows(x *review.Extraction, where rowFilter, blocked map[rowKey]review.Finding) []*review.Study {
	var rows []*review.Study
	for i := range x.Studies {
		row := &x.Studies[i]
		if row.Outcome != o.Name {
			continue
		}
		if !where.mayKeep(row) {
			o.exclude(row, where.reason())
			continue
		}
		o.Counts.Rows++
		if f, bad := blocked[rowKey{row.Row.File, row.Row.Sheet, row.Row.Row}]; bad {
			o.excludeFor(row, f)
			continue
		}
		rows = append(rows, row)
	}
	return rows
}

// exclude lists a row that the plan or the measure leaves out.
func (o *Outcome) exclude(row *review.Study, reason string) {
	o.excludeFor(row, review.Finding{Severity: review.Note, Place: row.Row, Message: reason})
}

// excludeFor lists a row that is not pooled because of a finding, by its place; the
// sheet is wrong if the finding is an error.
func (o *Outcome) excludeFor(row *review.Study, f review.Finding) {
	wrong := f.Severity == review.Error
	o.Excluded = append(o.Excluded, Excluded{Study: row.Name, Place: f.Place, Rule: f.Rule, Reason: f.Message, Wrong: wrong})
	if wrong {
		o.Counts.Wrong++
	}
}

// refusal returns the finding that keeps a whole outcome from being pooled: an
// error of the plan, of a column, or of the outcome itself.
func refusal(findings []review.Finding, outcome string) (review.Finding, bool) {
	for _, f := range findings {
		concerns := f.Outcome == "" || choice.Fold(f.Outcome) == choice.Fold(outcome)
		if f.Blocks() && concerns && (f.Rule == review.RulePlan || f.Place.Row == 0) {
			return f, true
		}
	}
	return review.Finding{}, false
}

func (o *Outcome) nothingLeft() string {
	if len(o.Excluded) == 0 {
		return "there is no row to pool"
	}
	first := o.Excluded[0]
	if i := slices.IndexFunc(o.Excluded, func(e Excluded) bool { return e.Wrong }); i >= 0 {
		first = o.Excluded[i]
	}
	if len(o.Excluded) == 1 {
		return "its one row cannot be pooled: " + first.Reason
	}
	return fmt.Sprintf("none of its %d rows can be pooled; %s (%s): %s", len(o.Excluded), first.Study, first.Where(), first.Reason)
}
