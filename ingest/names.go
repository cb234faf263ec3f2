package ingest

import (
	"fmt"
	"slices"

	"steelyard/meta/review"
)

// mostTwins bounds how many earlier rows of the same name a row is compared with.
const mostTwins = 30

// checkNames reports studies that stand twice in one outcome, however their names
// are spelled.
func (t *tableReader) checkNames() {
	type key struct{ outcome, name string }
	first := make(map[key]int, len(t.x.Studies))
	more := map[key][]int{}
	for i := range t.x.Studies {
		if len(t.x.Findings) > maxFindings {
			return
		}
		s := &t.x.Studies[i]
		k := key{s.Outcome, review.FoldName(s.Name)}
		j, twice := first[k]
		if !twice {
			first[k] = i
			continue
		}
		if f, found := t.twin(s, j, more[k]); found {
			f.Accepted = s.AcceptedReason(f.Rule)
			t.x.Findings = append(t.x.Findings, f)
		}
		if len(more[k]) < mostTwins {
			more[k] = append(more[k], i)
		}
	}
}

// twin reports a study that repeats one of the earlier rows with its name, the
// first or one of more: the same numbers are an error; others are a warning, unless
// the dates tell the two apart or each row is of one arm.
func (t *tableReader) twin(s *review.Study, first int, more []int) (f review.Finding, found bool) {
	f = review.Finding{Severity: review.Warning, Rule: "D5", Study: s.Name, Place: t.place(s.Row.Row, t.role.name, s.Name)}
	for _, i := range slices.Concat([]int{first}, more) {
		before := &t.x.Studies[i]
		spelled, sameSpelling := "", ""
		if before.Name != s.Name {
			spelled, sameSpelling = " as "+quote(before.Name), ", spelled "+quote(before.Name)+","
		}
		if len(s.Numbers) > 0 && sameNumbers(s, before) {
			f.Severity, f.Rule = review.Error, "D1"
			f.Message = fmt.Sprintf("the row repeats row %d with the same name%s and numbers, so its people would count twice; take one of them out"+howToAccept("D1"), before.Row.Row, sameSpelling)
			return f, true
		}
		if !found && !t.armRows && !datesDiffer(s.Date, before.Date) {
			found = true
			f.Message = fmt.Sprintf("the study stands in row %d too%s, with other numbers; if both rows are of the same people, they count twice: keep one, or give them names of their own", before.Row.Row, spelled)
		}
	}
	return f, found
}

// datesDiffer reports whether two dates cannot be the same, as far as both are
// known.
func datesDiffer(a, b review.Date) bool {
	for _, part := range [3][2]int{{a.Year, b.Year}, {a.Month, b.Month}, {a.Day, b.Day}} {
		if part[0] == 0 || part[1] == 0 {
			return false
		}
		if part[0] != part[1] {
			return true
		}
	}
	return false
}

func sameNumbers(a, b *review.Study) bool {
	return slices.EqualFunc(a.Numbers, b.Numbers, func(x, y review.Number) bool { return x.Field == y.Field && x.Value == y.Value })
}
