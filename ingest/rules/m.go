package rules

import (
	"fmt"
	"math"
	"strings"

	"steelyard/meta/effect"
	"steelyard/meta/numeric"
	"steelyard/meta/review"
)

// means looks at means and standard deviations: rules M1 to M16. Some of M11 and
// M15 is found when effects are worked out.
func (c *checker) means() {
	for _, rows := range c.outcomes {
		for _, r := range rows {
			c.errorForDeviation(r)
			c.largeDifference(r)
			c.bounds(r)
			c.wholeItems(r)
			c.skew(r)
			c.halfWidths(r)
			c.impossibleCorrelation(r)
			c.imbalance(r)
			c.medianAsMean(r)
			c.imputed(r)
		}
		c.copiedDeviations(rows)
		c.directions(rows)
		c.acrossScale(rows)
	}
}

// impliedSD returns the standard deviation of people that the row's interval, test or
// p-value of the difference in means implies, and what implied it. Those of a
// standardised difference say nothing of it.
func (r *row) impliedSD() (sd float64, by string, ok bool) {
	treated, control, ok := r.groups()
	if !ok || (r.measure != effect.MeanDifference && r.measure != effect.Unspecified) || r.crossover() {
		return 0, "", false
	}
	df := treated.N + control.N - 2
	perSE := math.Sqrt(1/treated.N + 1/control.N)
	for _, a := range r.results() {
		if half, ok := a.width(); ok && 0 < a.level && a.level < 1 {
			return half / numeric.StudentCritical(1-a.level, df) / perSE, "the interval", true
		}
		if a.se != nil && a.se.Value > 0 {
			return a.se.Value / perSE, "the standard error of the difference", true
		}
	}
	difference := math.Abs(treated.Mean - control.Mean)
	if t := math.Abs(r.value(review.TestStatistic)); t > 0.5 && difference > 0 {
		return difference / t / perSE, "the test", true
	}
	const largest = 0.3 // beyond, a rounded p says too little of the test behind it
	for _, f := range []review.Field{review.PValue, review.ReportedP} {
		p, ok := r.number(f)
		if ok && decimals(p) >= 2 && halfUnit(p) <= p.Value/4 && p.Value <= largest && difference > 0 {
			return difference / numeric.StudentCritical(p.Value, df) / perSE, "the p-value", true
		}
	}
	return 0, "", false
}

// errorForDeviation reports a standard error in the column of a standard deviation
// where the result shows which it is (M1).
func (c *checker) errorForDeviation(r *row) {
	const low, high, least = 0.8, 1.25, 5
	sd, by, ok := r.impliedSD()
	if !ok {
		return
	}
	treated, control, _ := r.groups()
	n := 2 / (1/treated.N + 1/control.N)
	entered := pooledSD(treated, control)
	if ratio := entered * math.Sqrt(n) / sd; n < least || ratio < low || ratio > high {
		return
	}
	c.add(r, review.Error, "M1", review.SDTreated, fmt.Sprintf("SDs of %s and %s with %s and %s people would be %s and %s if they are standard errors, and %s implies %s; look whether the report says SD or SE",
		shown(treated.SD), shown(control.SD), shown(treated.N), shown(control.N), shown(treated.SD*math.Sqrt(treated.N)), shown(control.SD*math.Sqrt(control.N)), by, shown(sd)), r.asErrors()...)
}

// asErrors returns the readings of the row's SDs as entered and as standard errors.
func (r *row) asErrors() []review.Reading {
	treated, control, ok := r.groups()
	if !ok {
		return nil
	}
	return []review.Reading{
		r.asEntered(review.SDTreated, review.SDControl),
		r.with("SDs read as standard errors", fieldValue{review.SDTreated, treated.SD * math.Sqrt(treated.N)}, fieldValue{review.SDControl, control.SD * math.Sqrt(control.N)}),
	}
}

// largeDifference reports standardised differences that are rarely true (M4).
func (c *checker) largeDifference(r *row) {
	const rare, absurd, large, many = 3, 5, 1.5, 100
	treated, control, ok := r.groups()
	if !ok || r.crossover() {
		return
	}
	e, _, err := effect.FromArms(effect.StandardisedMeanDifference, treated, control)
	if err != nil {
		return
	}
	message := fmt.Sprintf("the means differ by %s standard deviations; of such differences above 3 in one survey, 60%% came from a standard error taken for an SD (Kadlec 2023): check SDs, means and units", shown(math.Abs(e.Y)))
	switch g := math.Abs(e.Y); {
	case g > absurd:
		c.add(r, review.Error, "M4", review.SDTreated, message, r.asErrors()...)
	case g > rare:
		c.add(r, review.Warning, "M4", review.SDTreated, message, r.asErrors()...)
	case g > large && treated.N+control.N > many:
		c.add(r, review.Note, "M4", review.SDTreated, fmt.Sprintf("the means differ by %s standard deviations in a trial of %s people, which is much; check SDs, means and units", shown(g), shown(treated.N+control.N)))
	}
}

// bounds reports means outside their scale, and SDs that no values on it can have
// (M5): at most √((mean − low)(high − mean)·n/(n − 1)), by Bhatia and Davis.
func (c *checker) bounds(r *row) {
	low, okLow := r.number(review.ScaleLow)
	high, okHigh := r.number(review.ScaleHigh)
	if !okLow || !okHigh || r.changes() || !(low.Value < high.Value) {
		return
	}
	for _, a := range arms {
		mean, ok := r.number(a.mean)
		if !ok {
			continue
		}
		b := boxOf(mean)
		if b.high < low.Value || b.low > high.Value {
			c.add(r, review.Error, "M5", a.mean, fmt.Sprintf("the mean of the %s arm, %s, lies outside its scale from %s to %s; check the mean, the scale, and whether it is a change", a.name, typed(mean), typed(low), typed(high)))
			return
		}
		sd, okSD := r.number(a.sd)
		n := r.value(a.total)
		if !okSD || n < 2 {
			continue
		}
		middle := math.Min(math.Max((low.Value+high.Value)/2, b.low), b.high) // where the bound is largest
		largest := math.Sqrt(math.Max(0, (middle-low.Value)*(high.Value-middle)) * n / (n - 1))
		if boxOf(sd).low > largest {
			c.add(r, review.Error, "M5", a.sd, fmt.Sprintf("an SD of %s cannot be: values from %s to %s with a mean of %s have one of %s at most; check the SD and the ends of the scale", typed(sd), typed(low), typed(high), typed(mean), shown(largest)))
			return
		}
	}
}

// wholeItems reports means that no whole numbers give (M7), after the test of Brown
// and Heathers (2017): with n people and a scale of so many items, the sum of all
// answers is whole.
func (c *checker) wholeItems(r *row) {
	items := r.value(review.Items)
	if !(items >= 1) || items != math.Trunc(items) {
		return
	}
	for _, a := range arms {
		mean, ok := r.number(a.mean)
		n := r.value(a.total)
		if !ok || n < 1 || n*items >= math.Pow10(decimals(mean)) {
			continue
		}
		h := halfUnit(mean) * (1 + 1e-9)
		nearest := math.Round(mean.Value*n*items) / (n * items)
		if math.Abs(nearest-mean.Value) <= h+1e-12 {
			continue
		}
		asked := shown(items) + " items"
		if items == 1 {
			asked = "1 item"
		}
		below, above := math.Floor(mean.Value*n*items)/(n*items), math.Ceil(mean.Value*n*items)/(n*items)
		c.add(r, review.Warning, "M7", a.mean, fmt.Sprintf("no whole answers of %s people to %s have a mean of %s; the nearest means are %.*f and %.*f: check the mean, the number of people and of items",
			shown(n), asked, typed(mean), decimals(mean)+1, below, decimals(mean)+1, above))
		return
	}
}

// skew reports means near the lower end of their scale (M8), after Altman and Bland
// (1996): less than two standard deviations above it.
func (c *checker) skew(r *row) {
	const skewed, strongly = 2, 1
	low, ok := r.number(review.ScaleLow)
	if !ok || r.changes() {
		return
	}
	for _, a := range arms {
		if !r.has(a.mean, a.sd) || !(r.value(a.sd) > 0) {
			continue
		}
		ratio := (r.value(a.mean) - low.Value) / r.value(a.sd)
		message := fmt.Sprintf("the mean of the %s arm lies %s standard deviations above the lowest value, so the values are skewed; consider logarithms or medians", a.name, shown(ratio))
		switch {
		case ratio < 0 || ratio >= skewed:
			continue
		case ratio < strongly:
			c.add(r, review.Warning, "M8", a.mean, message)
		default:
			c.add(r, review.Note, "M8", a.mean, message)
		}
		return
	}
}

// halfWidths reports half the width of an interval in the column of an SE or SD
// (M10).
func (c *checker) halfWidths(r *row) {
	const within = 0.05
	for _, a := range r.results() {
		if a.se == nil {
			continue
		}
		expected, ok := a.seOfLimits()
		if !ok {
			expected, ok = r.expectedSE()
		}
		if z := a.se.Value / expected; ok && near(z, 1.96, within) {
			c.add(r, review.Warning, "M10", review.StandardError, fmt.Sprintf("%s is 1.96 times the standard error of %s that the row's other numbers imply, so it looks like half the width of the interval", typed(*a.se), shown(expected)),
				r.asEntered(review.StandardError), r.with("as half the width of the interval", fieldValue{review.StandardError, expected}))
			return
		}
	}
	sd, _, ok := r.impliedSD()
	if !ok {
		return
	}
	treated, control, _ := r.groups()
	n := 2 / (1/treated.N + 1/control.N)
	if entered := pooledSD(treated, control); n >= 8 && near(entered*math.Sqrt(n)/sd, 1.96, within) {
		c.add(r, review.Warning, "M10", review.SDTreated, fmt.Sprintf("SDs of %s and %s are 1.96 times the standard errors that the result implies (its SD is %s), so they look like half the widths of intervals", shown(treated.SD), shown(control.SD), shown(sd)),
			r.asEntered(review.SDTreated, review.SDControl),
			r.with("as half the widths of intervals", fieldValue{review.SDTreated, treated.SD * math.Sqrt(treated.N) / 1.96}, fieldValue{review.SDControl, control.SD * math.Sqrt(control.N) / 1.96}))
	}
}

// expectedSE returns the standard error that the row's counts or means give for its
// own measure.
func (r *row) expectedSE() (float64, bool) {
	if r.crossover() || r.adjusted() || r.cluster() {
		return 0, false
	}
	if t, ok := r.table(); ok && (r.measure == effect.OddsRatio || r.measure == effect.RiskRatio) {
		e, _, err := effect.FromTable(r.measure, t, effect.Half)
		return e.SE, err == nil
	}
	if treated, control, ok := r.groups(); ok && (r.measure == effect.MeanDifference || r.measure == effect.StandardisedMeanDifference) {
		e, _, err := effect.FromArms(r.measure, treated, control)
		return e.SE, err == nil
	}
	return 0, false
}

// impossibleCorrelation reports an SD of differences within people that the SDs of
// both measurements do not allow (M11): the correlation would lie outside −1 to 1.
func (c *checker) impossibleCorrelation(r *row) {
	if !r.has(review.SDDifference, review.SDTreated, review.SDControl) {
		return
	}
	a, b, d := boxOf(*r.at(review.SDTreated)), boxOf(*r.at(review.SDControl)), boxOf(*r.at(review.SDDifference))
	if d.low <= a.high+b.high && d.high >= math.Max(a.low-b.high, b.low-a.high) {
		return
	}
	x, y, z := r.value(review.SDTreated), r.value(review.SDControl), r.value(review.SDDifference)
	c.add(r, review.Error, "M11", review.SDDifference, fmt.Sprintf("an SD of the difference of %s beside SDs of %s and %s would need a correlation of %s, beyond −1 to 1; check the three numbers", shown(z), shown(x), shown(y), shown((x*x+y*y-z*z)/(2*x*y))))
}

// imbalance reports arms that differed before treatment by more than chance explains
// (M14).
func (c *checker) imbalance(r *row) {
	const times = 2 * 1.3
	if !r.has(review.BaselineMeanTreated, review.BaselineSDTreated, review.BaselineMeanControl, review.BaselineSDControl, review.TotalTreated, review.TotalControl) {
		return
	}
	a := effect.Arm{Mean: r.value(review.BaselineMeanTreated), SD: r.value(review.BaselineSDTreated), N: r.value(review.TotalTreated)}
	b := effect.Arm{Mean: r.value(review.BaselineMeanControl), SD: r.value(review.BaselineSDControl), N: r.value(review.TotalControl)}
	if !(a.SD > 0 && b.SD > 0 && a.N > 1 && b.N > 1) {
		return
	}
	if g := math.Abs(a.Mean-b.Mean) / pooledSD(a, b); g > times*math.Sqrt(1/a.N+1/b.N) {
		c.add(r, review.Note, "M14", review.BaselineMeanTreated, fmt.Sprintf("the arms differed by %s standard deviations before treatment, more than chance explains; prefer an estimate adjusted for the baseline", shown(g)))
	}
}

// medianAsMean reports means that may be medians (M15): a note says so, or the mean
// is just the middle of the quartiles.
func (c *checker) medianAsMean(r *row) {
	note := r.remark(review.NoteField) + "-" + r.remark(review.HowObtained)
	for i, a := range arms {
		mean, ok := r.number(a.mean)
		if !ok || r.has(a.median) {
			continue
		}
		q1, q3 := []review.Field{review.Q1Treated, review.Q1Control}[i], []review.Field{review.Q3Treated, review.Q3Control}[i]
		switch {
		case strings.Contains(note, "median") && !strings.Contains(note, "from-median"):
			c.add(r, review.Warning, "M15", a.mean, "the row has a mean and its note speaks of a median; if the number is a median, enter it with its quartiles as median, q1 and q3, which are converted (Wan 2014, Luo 2018) and marked")
		case r.has(q1, q3) && mean.Value == (r.value(q1)+r.value(q3))/2:
			c.add(r, review.Warning, "M15", a.mean, fmt.Sprintf("the mean %s is just the middle of the quartiles %s and %s; was it worked out from them, or is it a median?", typed(mean), shown(r.value(q1)), shown(r.value(q3))))
		default:
			continue
		}
		return
	}
}

// imputed notes numbers that were filled in (M16).
func (c *checker) imputed(r *row) {
	for _, f := range []review.Field{review.HowObtained, review.SourceField} {
		if strings.Contains(r.remark(f), "imput") {
			c.add(r, review.Note, "M16", f, "the row has an imputed number; show the answer without it too, and with other values for it")
			return
		}
	}
}
