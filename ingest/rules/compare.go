package rules

import (
	"fmt"
	"math"
	"strings"

	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// fit is a way in which a reported number may have come from a row's counts or
// means.
type fit struct {
	name    string
	measure effect.Measure // Unspecified for what is no effect measure
	value   float64        // as it would be reported
	log     bool           // values are compared as logarithms
	open    float64        // what rounding of the row's own numbers leaves open
}

// compared is a row whose reported result is compared with its counts or means.
type compared struct {
	r       *row
	a       result
	fits    []fit // those that agree with the report
	nearest fit   // of the row's measure, if it can be worked out
	s       float64
}

// compare sets reported results beside counts and means: rules C4, C10 and I20.
func (c *checker) compare(rows []*row) {
	var all []compared
	for _, r := range rows {
		for _, a := range r.results() {
			if v, ok := r.compared(a); ok {
				all = append(all, v)
				break
			}
		}
	}
	mixed := mixture(all)
	for i := range all {
		c.disagreement(&all[i], mixed)
	}
}

// compared works out what the row's counts or means say; ok is false where there is
// nothing to compare.
func (r *row) compared(a result) (v compared, ok bool) {
	if a.estimate == nil || r.measure == effect.HazardRatio || r.measure == effect.RateRatio || r.crossover() {
		return v, false
	}
	v = compared{r: r, a: a}
	var all []fit
	if t, ok := r.table(); ok {
		all, v.s = r.countFits(a, t)
	} else if treated, control, ok := r.groups(); ok && !r.adjusted() {
		all, v.s = meanFits(treated, control)
		open := halfUnit(*r.at(review.MeanTreated)) + halfUnit(*r.at(review.MeanControl))
		for i := range all {
			all[i].open = open
			if all[i].measure != effect.MeanDifference && !strings.HasPrefix(all[i].name, "mean difference") {
				all[i].open = 2 * open / math.Min(treated.SD, control.SD) // the SDs are rounded as well
			}
		}
	}
	if len(all) == 0 {
		return v, false
	}
	for _, f := range all {
		if f.measure == r.measure && f.measure != effect.Unspecified && v.nearest.name == "" {
			v.nearest = f
		}
		if v.agrees(f) {
			v.fits = append(v.fits, f)
		}
	}
	return v, true
}

// countFits returns what a 2×2 table may be reported as, and the standard error of
// the measure claimed.
func (r *row) countFits(a result, t effect.Table) (all []fit, s float64) {
	logged := a.estimate.Field == review.AnalysisEstimate
	for _, m := range []effect.Measure{effect.OddsRatio, effect.RiskRatio} {
		e, _, err := effect.FromTable(m, t, effect.Half)
		if err != nil {
			continue
		}
		if m == r.measure || s == 0 {
			s = e.SE
		}
		if logged || r.measure == effect.Unspecified {
			all = append(all, fit{"log " + m.String(), m, e.Y, false, 0}, fit{"log " + m.String() + " to base 10", effect.Unspecified, e.Y / math.Ln10, false, 0})
		}
		if logged {
			continue
		}
		all = append(all, fit{m.String(), m, math.Exp(e.Y), true, 0}, fit{m.String() + " the other way round", effect.Unspecified, math.Exp(-e.Y), true, 0})
		if m == effect.RiskRatio {
			all = append(all, fit{"relative risk reduction, 1 less the risk ratio", effect.Unspecified, 1 - math.Exp(e.Y), false, 0})
		}
	}
	if logged {
		return all, s
	}
	difference := t.Events1/t.Total1 - t.Events2/t.Total2
	return append(all, fit{"risk difference", effect.RiskDifference, difference, false, 0}, fit{"risk difference in per cent", effect.Unspecified, 100 * difference, false, 0}), s
}

// meanFits returns what two arms of means may be reported as, and the standard error
// of their difference.
func meanFits(treated, control effect.Arm) (all []fit, s float64) {
	difference := treated.Mean - control.Mean
	all = []fit{{"mean difference", effect.MeanDifference, difference, false, 0}, {"mean difference with the other sign", effect.Unspecified, -difference, false, 0}}
	if e, _, err := effect.FromArms(effect.StandardisedMeanDifference, treated, control); err == nil {
		all = append(all, fit{"standardised mean difference", effect.StandardisedMeanDifference, e.Y, false, 0},
			fit{"standardised mean difference with the other sign", effect.Unspecified, -e.Y, false, 0})
	}
	if treated.Mean > 0 && control.Mean > 0 {
		all = append(all, fit{"ratio of means", effect.RatioOfMeans, treated.Mean / control.Mean, true, 0})
	}
	return all, math.Sqrt(treated.SD*treated.SD/treated.N + control.SD*control.SD/control.N)
}

// agrees reports whether a fit lies within rounding of what is reported, and 0.02
// of its logarithm; within half a standard error where the report is adjusted.
func (v *compared) agrees(f fit) bool {
	const slack = 0.02
	b := boxOf(*v.a.estimate)
	at := f.value
	if f.log {
		if !(at > 0) || !(b.low > 0) {
			return false
		}
		b, at = b.mapped(math.Log), math.Log(at)
	}
	allowed := slack
	switch {
	case v.r.adjusted():
		allowed = 0.5 * v.s
	case !f.log:
		allowed = slack * math.Max(math.Abs(f.value), v.s)
	}
	return math.Abs(b.gap(box{at, at})) <= allowed+f.open
}

// matching returns the fit of a measure among those that agree.
func (v *compared) matching(m effect.Measure) bool {
	for _, f := range v.fits {
		if f.measure == m {
			return true
		}
	}
	return false
}

// mixture returns the measure that other rows report where each of two ratios fits
// some rows alone: then one column holds two measures.
func mixture(all []compared) map[*row]bool {
	var odds, risks []*row
	for i := range all {
		v := &all[i]
		switch o, k := v.matching(effect.OddsRatio), v.matching(effect.RiskRatio); {
		case o && !k:
			odds = append(odds, v.r)
		case k && !o:
			risks = append(risks, v.r)
		}
	}
	if len(odds) == 0 || len(risks) == 0 {
		return nil
	}
	fewer := odds
	if len(risks) < len(odds) || (len(risks) == len(odds) && risks[0].measure == effect.OddsRatio) {
		fewer = risks
	}
	mixed := map[*row]bool{}
	for _, r := range fewer {
		mixed[r] = true
	}
	return mixed
}

// disagreement reports a result that is not what its counts or means give.
func (c *checker) disagreement(v *compared, mixed map[*row]bool) {
	r, claimed := v.r, v.r.measure
	ok := v.matching(claimed)
	if claimed == effect.Unspecified {
		ok = len(v.fits) > 0 && v.fits[0].measure != effect.Unspecified
		for _, f := range v.fits {
			ok = ok || f.measure != effect.Unspecified
		}
	} else if v.nearest.name == "" {
		return
	}
	at := v.a.estimate.Field
	if mixed[r] && len(v.fits) > 0 {
		c.add(r, review.Error, "I20", at, fmt.Sprintf("%s is the %s of the row's own counts, while other rows of the column report another ratio; one column must hold one measure: enter this row's as the other, or leave only the counts", typed(*v.a.estimate), v.fits[0].name))
		return
	}
	if ok {
		return
	}
	says := "the row's counts give"
	if _, isTable := r.table(); !isTable {
		says = "the row's means give"
	}
	nearest := v.nearest
	if nearest.name == "" {
		nearest = fit{name: "no measure near it"}
	}
	computed := fmt.Sprintf("%s %s (%s)", says, shown(nearest.value), nearest.name)
	if claimed == effect.Unspecified {
		computed = says + " no effect like it"
	}
	switch {
	case len(v.fits) > 0 && strings.Contains(v.fits[0].name, "the other way round"):
		c.add(r, review.Warning, "C4", at, fmt.Sprintf("%s is reported and %s: one is the other turned round, so the arms or the outcome may be reversed; check which arm is which, and what counts as the event", typed(*v.a.estimate), computed), r.swapped()...)
	case len(v.fits) > 0:
		c.add(r, review.Warning, "C10", at, fmt.Sprintf("%s is reported and %s; it is the %s: check what the report gives", typed(*v.a.estimate), computed, v.fits[0].name))
	default:
		c.add(r, review.Warning, "C10", at, fmt.Sprintf("%s is reported and %s; check the numbers of both arms, and whether the report is adjusted", typed(*v.a.estimate), computed))
	}
}

// swapped returns the readings of a row's counts as entered and with its arms
// swapped.
func (r *row) swapped() []review.Reading {
	t, ok := r.table()
	if !ok {
		return nil
	}
	return []review.Reading{
		r.asEntered(countFields...),
		r.with("arms swapped", fieldValue{review.EventsTreated, t.Events2}, fieldValue{review.TotalTreated, t.Total2},
			fieldValue{review.EventsControl, t.Events1}, fieldValue{review.TotalControl, t.Total1}),
	}
}
