package rules

import (
	"fmt"
	"math"
	"strings"

	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// identity looks for people who count twice: rules D1 to D6, D8 and D9. The reader
// itself reports rows of one name (D1, D5), the analysis clusters (D7).
func (c *checker) identity() {
	for _, rows := range c.outcomes {
		c.sameNumbers(rows)
		c.overlaps(rows)
		byStudy := map[string][]*row{}
		var order []string
		for _, r := range rows {
			key := r.identity()
			if byStudy[key] == nil {
				order = append(order, key)
			}
			byStudy[key] = append(byStudy[key], r)
		}
		for _, key := range order {
			if group := byStudy[key]; len(group) > 1 && len(group) <= mostCompanions {
				c.oneStudy(group)
			}
		}
		for _, r := range rows {
			c.pairedPeople(r)
			c.unitOfAnalysis(r)
		}
	}
}

// fewPeople is the size of a study below which equal counts are taken for chance.
const fewPeople = 20

var (
	countFields = []review.Field{review.EventsTreated, review.TotalTreated, review.EventsControl, review.TotalControl}
	meanFields  = []review.Field{review.MeanTreated, review.SDTreated, review.TotalTreated, review.MeanControl, review.SDControl, review.TotalControl}
	limitFields = []review.Field{review.Estimate, review.LimitLow, review.LimitHigh}
)

// sameNumbers reports rows of different names with the same numbers: an error where
// the names are similar (D1), else a warning (D2).
func (c *checker) sameNumbers(rows []*row) {
	all, counts, means, limits := index{}, index{}, index{}, index{}
	var near [4]index
	for i := range near {
		near[i] = index{}
	}
	for _, r := range rows {
		if p, ok := r.printOf(r.fields()...); ok && len(r.Numbers) > 0 {
			if twin := find(all.before(p, r), func(b *row) bool { return c.others(r, b) && equal(r, b, r.fields()...) && similar(r, b) }); twin != nil {
				c.add(r, review.Error, "D1", review.StudyName, fmt.Sprintf("all numbers are those of row %d (%s), and the name or registration is nearly the same, so its people would count twice; take one of the two rows out", twin.Row.Row, twin.Name))
				continue
			}
		}
		if b, what := c.sameResult(r, counts, means, limits); b != nil {
			c.add(r, review.Warning, "D2", review.StudyName, fmt.Sprintf("the %s are those of row %d (%s) under another name; is it one trial in two reports? Compare sites, dates and authors, and keep the fuller report", what, b.Row.Row, b.Name))
		} else if b := c.nearlySame(r, near); b != nil {
			c.add(r, review.Warning, "D2", review.StudyName, fmt.Sprintf("three of the four counts are those of row %d (%s), a few years apart; is it one trial in two reports, or one row typed into another? Check both against their source", b.Row.Row, b.Name))
		}
	}
}

// others reports whether two rows have different names, so that the reader has not
// compared them.
func (c *checker) others(a, b *row) bool {
	return strings.Join(foldedWords(a.Name), " ") != strings.Join(foldedWords(b.Name), " ")
}

func find(rows []*row, match func(*row) bool) *row {
	for _, r := range rows {
		if match(r) {
			return r
		}
	}
	return nil
}

// sameResult returns an earlier row of another name with the same counts, means or
// limits.
func (c *checker) sameResult(r *row, counts, means, limits index) (*row, string) {
	for _, kind := range []struct {
		index  index
		fields []review.Field
		what   string
	}{{counts, countFields, "events and totals"}, {means, meanFields, "means, SDs and totals"}, {limits, limitFields, "estimate and limits"}} {
		p, ok := r.printOf(kind.fields...)
		if !ok {
			continue
		}
		earlier := kind.index.before(p, r)
		if kind.what == "estimate and limits" {
			if !telling(r) {
				continue
			}
		} else if r.people() < fewPeople {
			continue
		}
		if b := find(earlier, func(b *row) bool { return c.others(r, b) && equal(r, b, kind.fields...) }); b != nil {
			return b, kind.what
		}
	}
	return nil, ""
}

// telling reports whether the row's estimate and limits have three significant
// digits each.
func telling(r *row) bool {
	for _, f := range limitFields {
		n, _ := r.number(f)
		digits := strings.TrimLeft(strings.Map(func(x rune) rune {
			if '0' <= x && x <= '9' {
				return x
			}
			return -1
		}, typed(n)), "0")
		if len(digits) < 3 {
			return false
		}
	}
	return true
}

// nearlySame returns an earlier row with three of the row's four counts, within
// three years: both totals and one number of events, unless the totals are equal,
// or one total and both numbers of events. Few events are taken for chance.
func (c *checker) nearlySame(r *row, near [4]index) *row {
	const years, events = 3, 5
	t, ok := r.table()
	if !ok || t.Total1+t.Total2 < fewPeople {
		return nil
	}
	var match *row
	for i := range countFields {
		three := make([]review.Field, 0, 3)
		for j, f := range countFields {
			if j != i {
				three = append(three, f)
			}
		}
		kept := map[int]float64{0: t.Events2, 2: t.Events1, 1: math.Min(t.Events1, t.Events2), 3: math.Min(t.Events1, t.Events2)}[i]
		if kept < events || (i%2 == 0 && t.Total1 == t.Total2) {
			continue
		}
		p, _ := r.printOf(three...)
		b := find(near[i].before(p, r), func(b *row) bool {
			known := r.year() != 0 && b.year() != 0
			return c.others(r, b) && known && abs(r.year()-b.year()) <= years && equal(r, b, three...)
		})
		if match == nil {
			match = b
		}
	}
	return match
}

func abs(x int) int { return max(x, -x) }

// overlaps reports rows that may be later reports of a study (D3): the same first
// author or registration, the same comparison, sizes within a fifth and dates within
// five years.
func (c *checker) overlaps(rows []*row) {
	const years, size, shared = 5, 0.2, 0.2
	authors := map[string]int{}
	for _, r := range rows {
		authors[r.firstAuthor()]++
	}
	seen := index{}
	for _, r := range rows {
		comparison, author := r.remark(review.Comparison), r.firstAuthor()
		var keys []print
		if reg := r.registration(); reg != "" {
			keys = append(keys, textPrint("registration", reg, comparison))
		}
		if n := authors[author]; author != "" && (n < 4 || float64(n) <= shared*float64(len(rows))) {
			keys = append(keys, textPrint("author", author, comparison))
		}
		for _, key := range keys {
			b := find(seen.before(key, r), func(b *row) bool {
				return r.identity() != b.identity() && r.year() != 0 && b.year() != 0 && abs(r.year()-b.year()) <= years &&
					r.people() > 0 && b.people() > 0 && math.Abs(r.people()-b.people()) <= size*math.Max(r.people(), b.people())
			})
			if b != nil {
				c.add(r, review.Warning, "D3", review.StudyName, fmt.Sprintf("the same first author or registration as row %d (%s), within five years, and %s people against %s; if both report one trial, keep the fuller report", b.Row.Row, b.Name, shown(r.people()), shown(b.people())))
				break
			}
		}
	}
}

// oneStudy looks through the rows of one study in one outcome: a total among its
// parts (D6), a control arm used twice (D4), several times or scales (D5).
func (c *checker) oneStudy(group []*row) {
	total := c.totalOfParts(group)
	var rest []*row
	for _, r := range group {
		if r != total {
			rest = append(rest, r)
		}
	}
	for i, r := range rest {
		if i == 0 {
			continue
		}
		if first := find(rest[:i], func(b *row) bool { return sharedControl(r, b) }); first != nil {
			c.reportShared(r, first, rest)
			continue
		}
		if b := find(rest[:i], func(b *row) bool {
			return differ(r, b, review.TimePoint) || differ(r, b, review.Unit) || otherScale(r, b)
		}); b != nil {
			what := "another scale"
			if differ(r, b, review.TimePoint) {
				what = "another time point"
			}
			if c.repeats[r.Outcome] {
				c.add(r, review.Note, "D5", review.StudyName, fmt.Sprintf("the study stands in row %d too, at %s; both are pooled, as the plan allows for several estimates from one study", b.Row.Row, what))
				continue
			}
			c.add(r, review.Error, "D5", review.StudyName, fmt.Sprintf("the study stands in row %d too, at %s, so its people would count twice; choose one of them by a rule stated beforehand, give the other an outcome of its own, or pool both by --dependence three-level or robust", b.Row.Row, what))
		}
	}
}

// totalOfParts reports a row of a study whose people are those of its other rows
// together, give or take one, and returns it; nil if there is none.
func (c *checker) totalOfParts(group []*row) *row {
	if len(group) < 3 {
		return nil
	}
	all := 0.0
	for _, r := range group {
		all += r.people()
	}
	for _, r := range group {
		if n := r.people(); n >= fewPeople && math.Abs(all-2*n) <= 1 {
			c.add(r, review.Error, "D6", review.StudyName, fmt.Sprintf("its %s people are those of the study's other %d rows together, such as men, women and all; pool either the parts or the whole, and take the other out", shown(n), len(group)-1))
			return r
		}
	}
	return nil
}

// sharedControl reports whether two rows of one study have the same control arm and
// different treated arms.
func sharedControl(a, b *row) bool {
	counts := equal(a, b, review.EventsControl, review.TotalControl) && !equal(a, b, review.EventsTreated, review.TotalTreated)
	means := equal(a, b, review.MeanControl, review.SDControl, review.TotalControl) && !equal(a, b, review.MeanTreated, review.SDTreated, review.TotalTreated)
	return counts || means
}

// reportShared reports a control arm that stands in two rows of a study, with the
// answer if its treated arms are combined.
func (c *checker) reportShared(r, first *row, group []*row) {
	at := review.TotalControl
	parts := []*row{first}
	for _, b := range group {
		if b != first && sharedControl(first, b) {
			parts = append(parts, b)
		}
	}
	entered := review.Reading{Label: "as entered"}
	for _, b := range parts[1:] {
		n, _ := b.Number(at)
		entered.Numbers = append(entered.Numbers, n)
	}
	readings := []review.Reading{entered}
	if combined, ok := combine(first, parts); ok {
		readings = append(readings, combined)
	}
	if r != parts[1] {
		readings = nil // the first of the study's findings has them
	}
	c.add(r, review.Error, "D4", at, fmt.Sprintf("the control arm of %s people is that of row %d of the same study, so they would count twice; combine the treated arms in one row, or split the control arm into %d parts of equal size (both by Cochrane Handbook 23.3.4)", shown(r.value(at)), first.Row.Row, len(parts)), readings...)
}

// combine returns the reading of a row that takes the treated arms of several as
// one; the other rows stay left out.
func combine(first *row, parts []*row) (review.Reading, bool) {
	if _, ok := first.table(); ok {
		var arms []effect.Counts
		for _, r := range parts {
			arms = append(arms, effect.Counts{Events: r.value(review.EventsTreated), Total: r.value(review.TotalTreated)})
		}
		sum, _, err := effect.MergeCounts(arms...)
		return first.with("treated arms combined", fieldValue{review.EventsTreated, sum.Events}, fieldValue{review.TotalTreated, sum.Total}), err == nil
	}
	var arms []effect.Arm
	for _, r := range parts {
		treated, _, ok := r.groups()
		if !ok {
			return review.Reading{}, false
		}
		arms = append(arms, treated)
	}
	sum, _, err := effect.MergeArms(arms...)
	return first.with("treated arms combined", fieldValue{review.MeanTreated, sum.Mean}, fieldValue{review.SDTreated, sum.SD}, fieldValue{review.TotalTreated, sum.N}), err == nil
}

// differ reports whether two rows both fill a context column, differently.
func differ(a, b *row, f review.Field) bool {
	x, y := a.remark(f), b.remark(f)
	return x != "" && y != "" && x != y
}

// otherScale reports whether two rows have scales with different ends.
func otherScale(a, b *row) bool {
	return a.has(review.ScaleLow, review.ScaleHigh) && b.has(review.ScaleLow, review.ScaleHigh) && !equal(a, b, review.ScaleLow, review.ScaleHigh)
}

// pairedPeople reports a cross-over trial whose standard error is that of two
// groups of people (D8).
func (c *checker) pairedPeople(r *row) {
	if !r.crossover() || !r.has(review.SDTreated, review.SDControl) {
		return
	}
	n1, n2 := r.value(review.TotalTreated), r.value(review.TotalControl)
	if n := r.value(review.Total); n > 0 && n1 == 0 {
		n1, n2 = n, n
	}
	if !(n1 > 0 && n2 > 0) {
		return
	}
	sd1, sd2 := r.value(review.SDTreated), r.value(review.SDControl)
	apart := math.Sqrt(sd1*sd1/n1 + sd2*sd2/n2)
	for _, a := range r.results() {
		if s, ok := a.s(); ok && near(s, apart, 0.05) {
			c.add(r, review.Warning, "D8", review.Design, fmt.Sprintf("the trial is a cross-over, but its standard error of %s is that of two separate groups (%s); it should come from the differences within people: give their SD, or a correlation, and try 0.3, 0.5 and 0.7", shown(s), shown(apart)))
			return
		}
	}
}

// parts of people that are sometimes counted in place of people.
var bodyParts = []string{"eye", "limb", "teeth", "tooth", "lesion", "knee", "hip", "ear", "breast", "implant", "graft", "wound", "arter", "vessel"}

// unitOfAnalysis reports rows that count parts of people (D9).
func (c *checker) unitOfAnalysis(r *row) {
	unit := r.remark(review.Unit)
	for _, word := range bodyParts {
		if strings.HasPrefix(unit, word) && len(unit) <= len(word)+2 && !r.cluster() {
			c.add(r, review.Warning, "D9", review.Unit, "the unit is "+unit+", of which one person may have several; they are alike, so treat each person as a cluster: give cluster size and icc, or take numbers of people")
			return
		}
	}
}
