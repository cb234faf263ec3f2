package rules

import (
	"fmt"
	"math"

	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// smallest reports standard errors smaller than the numbers of people or events
// allow (I10).
func (c *checker) smallest(r *row, a *result) {
	const slack, fisher = 0.97, 0.03
	s, ok := a.seBox()
	if !ok || r.crossover() {
		return
	}
	n, events := r.people(), r.value(review.Events)
	if r.has(review.EventsTreated, review.EventsControl) {
		events = r.value(review.EventsTreated) + r.value(review.EventsControl)
	}
	var least float64
	var of string
	switch {
	case r.measure == effect.OddsRatio && n > 0:
		least, of = 4/math.Sqrt(n), shown(n)+" people"
	case r.measure == effect.HazardRatio && events > 0:
		least, of = 2/math.Sqrt(events), shown(events)+" events"
	case r.measure == effect.StandardisedMeanDifference && n > 0:
		least, of = 2/math.Sqrt(n), shown(n)+" people"
	case r.measure == effect.Correlation && n > 3:
		least, of = 1/math.Sqrt(n-3), shown(n)+" people"
	default:
		return
	}
	severity := review.Error
	if r.adjusted() || r.changes() {
		severity = review.Warning
	}
	middle := (s.low + s.high) / 2
	switch {
	case s.high < least*slack:
		c.add(r, severity, "I10", a.widthField(), fmt.Sprintf("%s cannot give a standard error of %s: the smallest possible is %s; check the standard error or limits, and the totals", of, shown(middle), shown(least)))
	case r.measure == effect.Correlation && s.low > least*(1+fisher):
		c.add(r, review.Warning, "I10", a.widthField(), fmt.Sprintf("%s give Fisher's z a standard error of %s, not of %s; check the limits and the total", of, shown(least), shown(middle)))
	}
}

// widthField returns the field that says how sure the result is.
func (a *result) widthField() review.Field {
	if a.se != nil {
		return a.se.Field
	}
	return a.low.Field
}

// sized is a row's standard error in relation to its size.
type sized struct {
	r   *row
	at  review.Field
	log float64 // ln(s√N)
	s   float64
}

// sizes reports standard errors out of line with the size of the study (I11), and
// those that a decimal place would put right (I19). Counts are left out: what they
// say follows from them, and rare events scatter.
func (c *checker) sizes(rows []*row) {
	const least, odd, slip, fine = 6, 3.5, 4, 1
	var all []sized
	var logs []float64
	for _, r := range rows {
		v, ok := r.sized()
		if ok {
			all = append(all, v)
			logs = append(logs, v.log)
		}
	}
	if len(all) < least {
		return
	}
	usual := scaleOf(logs)
	for _, v := range all {
		z := usual.z(v.log)
		if math.Abs(z) <= odd {
			continue
		}
		factor := 10.0
		if z > 0 {
			factor = 0.1
		}
		n := v.r.people()
		if math.Abs(z) > slip && math.Abs(usual.z(v.log+math.Log(factor))) < fine {
			var readings []review.Reading
			if v.at == review.StandardError {
				readings = []review.Reading{v.r.asEntered(v.at), v.r.with("the decimal place moved", fieldValue{v.at, v.s * factor})}
			}
			c.add(v.r, review.Warning, "I19", v.at, fmt.Sprintf("a standard error of %s with %s people is far from what the other studies have for their size, and %s would not be; has a decimal place slipped?", shown(v.s), shown(n), shown(v.s*factor)), readings...)
			continue
		}
		word := "large"
		if z < 0 {
			word = "small"
		}
		expected := math.Exp(usual.center) / math.Sqrt(n)
		c.add(v.r, review.Warning, "I11", v.at, fmt.Sprintf("a standard error of %s is %s for %s people, where the other studies would have about %s; check the total, whether an SD or SE was meant, and whether clusters or rare events explain it", shown(v.s), word, shown(n), shown(expected)))
	}
}

// sized returns the standard error of a row's reported result or means with its
// size; ok is false where one of them is missing.
func (r *row) sized() (v sized, ok bool) {
	n := r.people()
	if !(n > 0) {
		return v, false
	}
	if treated, control, ok := r.groups(); ok && r.measure != effect.StandardisedMeanDifference {
		s := math.Sqrt(treated.SD*treated.SD/treated.N + control.SD*control.SD/control.N)
		return sized{r, review.SDTreated, math.Log(s * math.Sqrt(n)), s}, true
	}
	for _, a := range r.results() {
		if s, ok := a.s(); ok && a.own {
			return sized{r, a.widthField(), math.Log(s * math.Sqrt(n)), s}, true
		}
	}
	return v, false
}

// hazard compares the ways to a hazard ratio (I12): observed minus expected events
// with their variance, and the ratio itself.
func (c *checker) hazard(r *row) {
	const slack = 1.03
	oe, okOE := r.number(review.ObservedMinusExpected)
	v, okV := r.number(review.Variance)
	if !okV || !(v.Value > 0) {
		return
	}
	events := r.value(review.Events)
	if r.has(review.EventsTreated, review.EventsControl) {
		events = r.value(review.EventsTreated) + r.value(review.EventsControl)
	}
	if events > 0 && boxOf(v).low > events/4*slack {
		c.add(r, review.Warning, "I12", review.Variance, fmt.Sprintf("a variance of %s is more than a quarter of %s events, which is the most it can be; check both", typed(v), shown(events)))
		return
	}
	if !okOE || r.measure != effect.HazardRatio {
		return
	}
	for _, a := range r.results() {
		y, ok := a.y()
		if !ok || a.estimate == nil {
			continue
		}
		byCounts := box{math.Min(boxOf(oe).low/boxOf(v).low, boxOf(oe).low/boxOf(v).high), math.Max(boxOf(oe).high/boxOf(v).low, boxOf(oe).high/boxOf(v).high)}
		at := boxOf(*a.estimate).mapped(a.onScale)
		if !at.finite() || !byCounts.finite() || math.Abs(byCounts.gap(at)) <= 0.02 {
			return
		}
		ln := oe.Value / v.Value
		text := fmt.Sprintf("observed minus expected of %s with a variance of %s gives a hazard ratio of %s, but %s is reported", typed(oe), typed(v), shown(math.Exp(ln)), typed(*a.estimate))
		if ln*y < 0 && at.low*at.high > 0 {
			c.add(r, review.Error, "I12", review.ObservedMinusExpected, text+", on the other side of 1; check which arm the events are of")
			return
		}
		c.add(r, review.Warning, "I12", review.ObservedMinusExpected, text+"; check the numbers, and whether the ratio is adjusted")
		return
	}
}
