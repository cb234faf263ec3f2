package rules

import (
	"fmt"
	"math"
	"strings"

	"steelyard/meta/effect"
	"steelyard/meta/numeric"
	"steelyard/meta/review"
)

// intervals looks at estimates, standard errors, limits and p-values: rules I2, I3,
// I5 to I13 and I17 to I19. The reader itself reports limits out of order (I1) and
// ratios that cannot be (I4); I14 to I16 need a fit; I20 stands beside C10.
func (c *checker) intervals() {
	for _, rows := range c.outcomes {
		c.unlogged(rows)
		for _, r := range rows {
			for _, a := range r.results() {
				c.symmetry(r, &a)
				c.scaleOfError(r, &a)
				c.level(r, &a)
				c.pValue(r, &a)
				c.smallest(r, &a)
				c.rounding(r, &a)
			}
			c.bareP(r)
			c.hazard(r)
			c.fromCurve(r)
		}
		c.sizes(rows)
		c.mixedAdjustment(rows)
	}
}

// symmetry reports limits that do not lie evenly around their estimate on the
// analysis scale, however all three were rounded (I2).
func (c *checker) symmetry(r *row, a *result) {
	const doubtful, wrong = 0.1, 0.5
	if a.estimate == nil || !a.hasLimits() || a.curved() {
		return
	}
	low, high := boxOf(*a.low).mapped(a.onScale), boxOf(*a.high).mapped(a.onScale)
	middle := box{(low.low + high.low) / 2, (low.high + high.high) / 2}
	at := boxOf(*a.estimate).mapped(a.onScale)
	s, ok := a.seOfLimits()
	if !ok || !middle.finite() || !at.finite() {
		return
	}
	gap := math.Abs(middle.gap(at)) / s
	implied := (middle.low + middle.high) / 2
	if a.scale.Log() {
		implied = math.Exp(implied)
	} else if a.scale == effect.Correlation {
		implied = math.Tanh(implied)
	}
	message := fmt.Sprintf("the limits %s and %s imply an estimate of %s, but %s is entered; check the three numbers for a slip of a digit", typed(*a.low), typed(*a.high), shown(implied), typed(*a.estimate))
	switch {
	case gap > wrong && a.own:
		c.add(r, review.Error, "I2", a.estimate.Field, message, r.asEntered(a.estimate.Field, a.low.Field, a.high.Field),
			r.with("the estimate in the middle of its limits", fieldValue{a.estimate.Field, implied}))
	case gap > doubtful:
		c.add(r, review.Warning, "I2", a.estimate.Field, message)
	}
}

// unevenness returns by how much of half their width the limits' middle lies beside
// the estimate: as the numbers stand, and as logarithms beyond what rounding
// explains; ok is false unless all three are above 0 and in order.
func (a *result) unevenness() (raw, logged float64, ok bool) {
	if a.estimate == nil || !a.hasLimits() {
		return 0, 0, false
	}
	e, l, u := a.estimate.Value, a.low.Value, a.high.Value
	at, low, high := boxOf(*a.estimate), boxOf(*a.low), boxOf(*a.high)
	if !(0 < low.low && l < e && e < u) {
		return 0, 0, false
	}
	raw = math.Abs((l+u)/2-e) / ((u - l) / 2)
	low, high = low.mapped(math.Log), high.mapped(math.Log)
	middle := box{(low.low + high.low) / 2, (low.high + high.high) / 2}
	logged = math.Abs(middle.gap(at.mapped(math.Log))) / ((math.Log(u) - math.Log(l)) / 2)
	return raw, logged, true
}

// unlogged reports ratios where logarithms are expected (I3): in a column of
// logarithms an error; where no measure is stated a warning, unless it is but one row.
func (c *checker) unlogged(rows []*row) {
	const uneven, even, least = 0.1, 0.02, 3
	var asRatios []*row
	positive, known := 0, 0
	var estimates []float64
	for _, r := range rows {
		if len(r.results()) == 0 {
			continue
		}
		a := r.results()[0]
		if !a.own || a.scale != effect.Unspecified || a.estimate == nil || !a.hasLimits() {
			continue
		}
		known++
		raw, logged, ok := a.unevenness()
		if ok {
			positive++
			estimates = append(estimates, a.estimate.Value)
		}
		if ok && raw > uneven && logged < even {
			asRatios = append(asRatios, r)
		}
	}
	center := median(estimates)
	if known >= least && positive == known && 0.3 <= center && center <= 3 && 2*len(asRatios) >= known {
		asRatios = nil
		for _, r := range rows {
			if a := r.results(); len(a) > 0 && a[0].own && a[0].estimate != nil && a[0].hasLimits() && a[0].scale == effect.Unspecified {
				asRatios = append(asRatios, r)
			}
		}
	}
	for _, r := range asRatios {
		a := r.results()[0]
		message := fmt.Sprintf("%s with limits %s and %s lies evenly between them only as a logarithm, so these look like ratios", typed(*a.estimate), typed(*a.low), typed(*a.high))
		switch {
		case a.estimate.Field == review.AnalysisEstimate:
			c.add(r, review.Error, "I3", a.estimate.Field, message+" in a column of logarithms; enter their logarithms, or head the columns as ratios",
				r.asEntered(a.estimate.Field, a.low.Field, a.high.Field),
				r.with("as ratios", fieldValue{a.estimate.Field, math.Log(a.estimate.Value)}, fieldValue{a.low.Field, math.Log(a.low.Value)}, fieldValue{a.high.Field, math.Log(a.high.Value)}))
		case len(asRatios) >= least:
			c.add(r, review.Warning, "I3", a.estimate.Field, message+", but no measure is stated and they are pooled as they stand; state the measure, such as --measure \"odds ratio\"")
		}
	}
}

// scaleOfError reports the standard error of a ratio where that of its logarithm is
// needed (I5).
func (c *checker) scaleOfError(r *row, a *result) {
	const differs, fits = 0.1, 0.05
	if a.se == nil || a.estimate == nil || !a.scale.Log() || !(a.estimate.Value > 0) {
		return
	}
	s, ok := a.seOfLimits()
	by := "the limits give"
	if !ok {
		s, ok = r.expectedSE()
		by = "the counts give"
	}
	if !ok || near(a.se.Value, s, differs) || !near(a.se.Value, a.estimate.Value*s, fits) {
		return
	}
	c.add(r, review.Error, "I5", review.StandardError, fmt.Sprintf("%s is the standard error of the ratio %s, but that of its logarithm is needed, for which %s %s; enter that", typed(*a.se), typed(*a.estimate), by, shown(s)),
		r.asEntered(review.StandardError), r.with("that of the logarithm", fieldValue{review.StandardError, s}))
}

// level reports limits of another level than stated (I6). It has no readings: the
// other numbers that show the level are those that the row is pooled by.
func (c *checker) level(r *row, a *result) {
	const within = 0.03
	half, ok := a.width()
	if !ok {
		return
	}
	s, by, pooledBy := 0.0, "the standard error", "its standard error"
	if a.se != nil {
		s = a.se.Value
	} else if s, ok = r.expectedSE(); ok {
		by, pooledBy = "the standard error that the row's numbers give", "those numbers"
	}
	if !(s > 0) || !(0 < a.level && a.level < 1) {
		return
	}
	times := half / s
	if near(times, numeric.NormalCritical(1-a.level), within) {
		return
	}
	if df := r.people() - 2; df > 0 && near(times, numeric.StudentCritical(1-a.level, df), within) {
		return
	}
	for _, other := range []struct{ times, level float64 }{{1.645, 0.9}, {2.576, 0.99}, {1.282, 0.8}, {1.95996, 0.95}} {
		if near(times, other.times, within) && other.level != a.level {
			c.add(r, review.Warning, "I6", a.low.Field, fmt.Sprintf("the limits lie %s times %s from the middle, as those of a %.0f%% interval do, not of a %s%% one; check the level and write it under ci level (the row is pooled by %s, whatever the level)", shown(times), by, 100*other.level, shown(100*a.level), pooledBy))
			return
		}
	}
}

// pValue compares p with the estimate and its standard error (I7, I9).
func (c *checker) pValue(r *row, a *result) {
	const conventional, oneSided = 0.05, 0.05
	s, okS := a.seBox()
	if a.p == nil || a.estimate == nil || !okS || !a.hasNull() {
		return
	}
	at := boxOf(*a.estimate).mapped(a.onScale)
	if !at.finite() {
		return
	}
	near0, far := math.Min(math.Abs(at.low), math.Abs(at.high)), math.Max(math.Abs(at.low), math.Abs(at.high))
	if at.low <= 0 && at.high >= 0 {
		near0 = 0
	}
	reported := boxOf(*a.p)
	fitsBy := func(df, factor float64) (box, bool) {
		p := box{factor * 2 * numeric.StudentTail(far/s.low, df), factor * 2 * numeric.StudentTail(near0/s.high, df)}
		return p, p.low <= reported.high && p.high >= reported.low
	}
	byZ, fits := fitsBy(math.Inf(1), 1)
	df := r.people() - 2
	if !fits && df > 0 {
		_, fits = fitsBy(df, 1)
	}
	if fits || r.value(review.PSides) == 1 {
		return
	}
	y, _ := a.y()
	middle := 2 * numeric.StudentTail(math.Abs(y)/((s.low+s.high)/2), math.Inf(1))
	if _, half := fitsBy(math.Inf(1), 0.5); half || near(2*a.p.Value, middle, oneSided) {
		c.add(r, review.Warning, "I9", a.p.Field, fmt.Sprintf("p = %s is half of the %s that the estimate and its standard error give; is it one-sided? If so, write 1 under p sides", typed(*a.p), shown(middle)))
		return
	}
	severity, why := review.Warning, ""
	if (reported.high < conventional && byZ.low >= conventional) || (reported.low >= conventional && byZ.high < conventional) {
		severity, why = review.Error, ", on the other side of 0.05"
	}
	c.add(r, severity, "I7", a.p.Field, fmt.Sprintf("p = %s is reported, but the estimate and its standard error give z = %s and p = %s%s; check all of them", typed(*a.p), shown(y/((s.low+s.high)/2)), shown(middle), why))
}

// hasNull reports whether a test against no effect can be made of the measure.
func (a *result) hasNull() bool { return a.scale.HasNull() && !a.curved() }

// bareP reports p-values that look like bounds where nothing but them says how sure
// the estimate is (I8).
func (c *checker) bareP(r *row) {
	p, ok := r.number(review.PValue)
	_, _, means := r.groups()
	_, table := r.table()
	if !ok || means || table || r.has(review.StandardError) || r.has(review.LimitLow, review.LimitHigh) || r.has(review.AnalysisLow, review.AnalysisHigh) || r.has(review.TestStatistic) {
		return
	}
	if p.Value == 0 || p.Value == 1 || (p.Value == 0.05 && decimals(p) == 2) {
		c.add(r, review.Warning, "I8", review.PValue, fmt.Sprintf("p = %s may stand for a bound, such as p < %s or not significant, and the standard error rests on it alone; give limits or a standard error, or take p as a bound and leave the row out", typed(p), typed(p)))
	}
}

// rounding notes limits too coarse to tell the standard error (I17).
func (c *checker) rounding(r *row, a *result) {
	const coarse = 0.1
	if !a.own || a.se != nil || !a.hasLimits() {
		return
	}
	s, ok := a.seBox()
	if middle := (s.low + s.high) / 2; ok && (s.high-s.low)/2 > coarse*middle {
		c.add(r, review.Note, "I17", a.low.Field, fmt.Sprintf("the limits %s and %s are rounded so far that the standard error may be anything from %s to %s; ask for more digits", typed(*a.low), typed(*a.high), shown(s.low), shown(s.high)))
	}
}

// fromCurve notes hazard ratios read from a curve (I13).
func (c *checker) fromCurve(r *row) {
	for _, f := range []review.Field{review.HowObtained, review.SourceField} {
		if r.measure == effect.HazardRatio && (strings.Contains(r.remark(f), "curve") || strings.Contains(r.remark(f), "kaplan")) {
			c.add(r, review.Note, "I13", f, "the hazard ratio was read from a curve; name the method, and show the answer without it too")
			return
		}
	}
}

// mixedAdjustment notes outcomes in which some results are adjusted and some not
// (I18).
func (c *checker) mixedAdjustment(rows []*row) {
	yes, no := 0, 0
	for _, r := range rows {
		switch text := r.remark(review.Adjusted); {
		case text == "":
		case said(text):
			yes++
		default:
			no++
		}
	}
	if yes > 0 && no > 0 {
		c.addOutcome(rows, review.Note, "I18", review.Adjusted, fmt.Sprintf("%d results are adjusted and %d are not; look at them apart, by a subgroup or a planned run", yes, no))
	}
}
