package synthesis

import (
	"slices"
	"strings"

	"steelyard/meta/choice"
	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// RowChanges is what differs between the rows of an outcome.
type RowChanges struct {
	New           []*review.Study // in the current sheet only
	Removed       []*review.Study // in the previous sheet only
	Changed       []ChangedRow
	Renamed       []RenamedRow
	SecondReports []review.Finding // of the current sheet, that a row may be a study known before

	pairs map[*review.Study]*review.Study // current row to the previous one
}

// ChangedRow is a row with the cells that differ.
type ChangedRow struct {
	Study *review.Study // as it is now
	Cells []ChangedCell
}

// ChangedCell is a cell that differs, as typed; blank where there was or is nothing.
type ChangedCell struct {
	Header        string
	Before, After string
	Number        bool // an extracted number, the measure or the direction: it may move the result
	Place         review.Place
}

// RenamedRow is a row of another name than before.
type RenamedRow struct {
	Study  *review.Study // as it is now
	Before string
	ByID   bool // known by its id, else by the same numbers
}

// Any reports whether any row differs.
func (r *RowChanges) Any() bool {
	return len(r.New)+len(r.Removed)+len(r.Changed)+len(r.Renamed) > 0
}

// rowChanges pairs the rows of two states of an outcome: by id, else by name and
// year, else by name, else by the same numbers, each within the same comparison,
// time point and subgroup.
func rowChanges(before, now []*review.Study) RowChanges {
	r := RowChanges{pairs: map[*review.Study]*review.Study{}}
	r.pair(before, now, func(s *review.Study) string {
		if s.ID == "" {
			return ""
		}
		return choice.Fold(s.ID) + rowContext(s)
	})
	r.pair(before, now, func(s *review.Study) string {
		return review.FoldName(s.Name) + "\x00" + s.Date.String() + rowContext(s)
	})
	r.pair(before, now, func(s *review.Study) string { return review.FoldName(s.Name) + rowContext(s) })
	r.pair(before, now, numbersKey)
	r.pair(before, now, func(s *review.Study) string { return review.FoldName(s.Name) })
	paired := map[*review.Study]bool{}
	for _, s := range now {
		old := r.pairs[s]
		if old == nil {
			r.New = append(r.New, s)
			continue
		}
		paired[old] = true
		if review.FoldName(old.Name) != review.FoldName(s.Name) {
			r.Renamed = append(r.Renamed, RenamedRow{Study: s, Before: old.Name, ByID: s.ID != "" && choice.Fold(s.ID) == choice.Fold(old.ID)})
		}
		if cells := changedCells(old, s); len(cells) > 0 {
			r.Changed = append(r.Changed, ChangedRow{Study: s, Cells: cells})
		}
	}
	for _, s := range before {
		if !paired[s] {
			r.Removed = append(r.Removed, s)
		}
	}
	return r
}

// pair joins rows that are not paired yet and have the same key, in the order of the
// sheets; a blank key pairs nothing.
func (r *RowChanges) pair(before, now []*review.Study, key func(*review.Study) string) {
	taken := map[*review.Study]bool{}
	for _, old := range r.pairs {
		taken[old] = true
	}
	waiting := map[string][]*review.Study{}
	for _, old := range before {
		if k := key(old); k != "" && !taken[old] {
			waiting[k] = append(waiting[k], old)
		}
	}
	for _, s := range now {
		if r.pairs[s] != nil {
			continue
		}
		k := key(s)
		if partners := waiting[k]; len(partners) > 0 && idsAgree(partners[0], s) {
			r.pairs[s], waiting[k] = partners[0], partners[1:]
		}
	}
}

// idsAgree is false for rows that have two different ids.
func idsAgree(a, b *review.Study) bool {
	return a.ID == "" || b.ID == "" || choice.Fold(a.ID) == choice.Fold(b.ID)
}

// rowContext tells the rows of one study apart.
func rowContext(s *review.Study) string {
	var parts strings.Builder
	for _, f := range []review.Field{review.Comparison, review.TimePoint, review.Subgroup} {
		r, _ := s.Remark(f.String())
		parts.WriteString("\x00" + choice.Fold(r.Text))
	}
	return parts.String()
}

// numbersKey is the same for rows with the same numbers; blank where they are too few
// to know a study by.
func numbersKey(s *review.Study) string {
	const least = 2
	var parts []string
	for f := review.Estimate; int(f) < review.FieldCount; f++ {
		if n, ok := s.Number(f); ok {
			parts = append(parts, f.String()+" "+n.Typed())
		}
	}
	if len(parts) < least {
		return ""
	}
	return strings.Join(parts, "\x00") + rowContext(s)
}

// changedCells compares two rows cell by cell: numbers by value, all others by text.
func changedCells(a, b *review.Study) []ChangedCell {
	var all []ChangedCell
	add := func(header, before, after string, number bool, place review.Place) {
		if before != after {
			all = append(all, ChangedCell{Header: header, Before: before, After: after, Number: number, Place: place})
		}
	}
	add(review.StudyName.String(), a.Name, b.Name, false, b.Row)
	add(review.StudyID.String(), a.ID, b.ID, false, b.Row)
	add(review.DateField.String(), a.Date.String(), b.Date.String(), false, b.Row)
	add(review.MeasureField.String(), measureText(a), measureText(b), true, b.Row)
	add(review.BetterField.String(), a.Better.String(), b.Better.String(), true, b.Row)
	for f := review.Estimate; int(f) < review.FieldCount; f++ {
		x, had := a.Number(f)
		y, has := b.Number(f)
		switch {
		case had && has && x.Value != y.Value:
			add(f.String(), typed(x, y), typed(y, x), true, y.Place.In(b.Row))
		case had && !has:
			add(f.String(), x.Typed(), "", true, b.Row)
		case has && !had:
			add(f.String(), "", y.Typed(), true, y.Place.In(b.Row))
		}
	}
	for _, header := range remarkHeaders(a, b) {
		x, _ := a.Remark(header)
		y, _ := b.Remark(header)
		place := b.Row
		place.Col = y.Col
		add(header, x.Text, y.Text, false, place)
	}
	return all
}

// typed returns a number as typed, or with all its digits where both would read alike.
func typed(n, other review.Number) string {
	if n.Typed() != other.Typed() {
		return n.Typed()
	}
	return review.Exact(n.Value)
}

func measureText(s *review.Study) string {
	if s.Measure == effect.Unspecified {
		return ""
	}
	return s.Measure.String()
}

// remarkHeaders returns the headers of the context of two rows, those of the first
// before; what is compared as a field of its own is left out.
func remarkHeaders(a, b *review.Study) []string {
	own := []string{"date", "year", "measure", "better", "outcome"}
	var all []string
	for _, r := range slices.Concat(a.Remarks, b.Remarks) {
		if !slices.Contains(all, r.Header) && !slices.Contains(own, choice.Fold(r.Header)) {
			all = append(all, r.Header)
		}
	}
	return all
}

// reportRules are the rules of the catalogue on reports of one study.
var reportRules = []string{"D1", "D2", "D3"}

// secondReports returns what the current sheet's findings say of new rows that may be
// reports of a study known before, those accepted left out.
func secondReports(previous, current *Synthesis, o *OutcomeChange) []review.Finding {
	known := map[string]bool{}
	for _, f := range previous.Findings {
		known[f.Rule+"\x00"+f.Study+"\x00"+choice.Fold(f.Outcome)] = true
	}
	var all []review.Finding
	for _, f := range current.Findings {
		if slices.Contains(reportRules, f.Rule) && f.Accepted == "" && choice.Fold(f.Outcome) == choice.Fold(o.Name) && o.concernsNew(f) &&
			!known[f.Rule+"\x00"+f.Study+"\x00"+choice.Fold(f.Outcome)] {
			all = append(all, f)
		}
	}
	return all
}

// concernsNew reports whether a finding stands at a new row or names one.
func (o *OutcomeChange) concernsNew(f review.Finding) bool {
	return slices.ContainsFunc(o.Rows.New, func(s *review.Study) bool {
		return s.Row.Row == f.Place.Row || strings.Contains(f.Message, s.Name)
	})
}
