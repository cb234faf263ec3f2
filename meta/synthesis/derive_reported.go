package synthesis

import (
	"errors"
	"fmt"
	"math"

	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// own returns the measure in which the row's reported numbers stand.
func (d *derivation) own() effect.Measure {
	if d.row.Measure == effect.Unspecified || d.measure == effect.Unspecified {
		return d.measure
	}
	return d.row.Measure
}

// reportable reports whether what the row reports can become the outcome's
// measure.
func (d *derivation) reportable() bool {
	own := d.own()
	switch {
	case own == d.measure, own == effect.OddsRatio && d.measure == effect.StandardisedMeanDifference:
		return true
	case own == effect.StandardisedMeanDifference && d.measure == effect.OddsRatio:
		return true
	}
	return own == effect.MeanDifference && d.measure == effect.StandardisedMeanDifference && d.has(review.TotalTreated, review.TotalControl)
}

func (d *derivation) hasEstimate() bool {
	return d.has(review.Estimate) || d.has(review.AnalysisEstimate)
}

func (d *derivation) hasEstimateSE() bool { return d.hasEstimate() && d.has(review.StandardError) }

func (d *derivation) hasEstimateLimits() bool {
	return d.hasEstimate() && (d.has(review.LimitLow, review.LimitHigh) || d.has(review.AnalysisLow, review.AnalysisHigh))
}

func (d *derivation) hasEstimateStatistic() bool {
	return d.hasEstimate() && d.has(review.TestStatistic)
}

func (d *derivation) hasEstimateP() bool { return d.hasEstimate() && d.has(review.PValue) }

// estimate returns the row's estimate with the measure whose scale it stands on:
// its own for one in the reader's unit, none for one on the analysis scale, which
// is not converted and not logged again.
func (d *derivation) estimate() (y float64, scale effect.Measure) {
	if d.has(review.Estimate) {
		return d.value(review.Estimate), d.own()
	}
	return d.value(review.AnalysisEstimate), effect.Unspecified
}

// level returns the level of the row's limits.
func (d *derivation) level() float64 {
	if d.has(review.LimitLevel) {
		return d.value(review.LimitLevel)
	}
	return 0.95
}

// freedom returns the degrees of freedom of a test or an interval: those of means
// where the row says how many people there were, else infinite (the normal law).
func (d *derivation) freedom(m effect.Measure) float64 {
	if m != effect.MeanDifference && m != effect.StandardisedMeanDifference {
		return math.Inf(1)
	}
	df := math.Inf(1)
	switch {
	case d.crossover():
		df = d.people() - 1
	case d.has(review.TotalTreated, review.TotalControl):
		df = d.value(review.TotalTreated) + d.value(review.TotalControl) - 2
	case d.has(review.Total):
		df = d.value(review.Total) - 2
	}
	if !(df > 0) {
		return math.Inf(1)
	}
	return df
}

func (d *derivation) fromSE() (effect.Estimate, error) {
	y, scale := d.estimate()
	e, err := d.made(effect.FromSE(scale, y, d.value(review.StandardError)))
	if err != nil {
		return e, err
	}
	return d.toMeasure(e, d.own())
}

// fromLimits takes limits on the scale of the estimate. Those of a mean
// difference are ones of Student's t where the number of people is known.
func (d *derivation) fromLimits() (effect.Estimate, error) {
	y, scale := d.estimate()
	lowField, highField := review.LimitLow, review.LimitHigh
	if d.has(review.AnalysisLow, review.AnalysisHigh) {
		lowField, highField = review.AnalysisLow, review.AnalysisHigh
	}
	switch logged := lowField == review.AnalysisLow; {
	case scale.Log() && logged:
		return effect.Estimate{}, errors.New("the estimate is a ratio but its limits are logarithms; give both in the same form")
	case scale == effect.Unspecified && !logged && d.own().Log():
		return effect.Estimate{}, errors.New("the estimate is a logarithm but its limits are ratios; give both in the same form")
	}
	df := math.Inf(1)
	if d.own() == effect.MeanDifference {
		df = d.freedom(effect.MeanDifference)
	}
	e, err := d.made(effect.FromStudentLimits(scale, y, d.value(lowField), d.value(highField), d.level(), df))
	if err != nil {
		return e, err
	}
	return d.toMeasure(e, d.own())
}

// statistic returns the row's t or z; one above 0 may have been printed without
// the sign of its estimate y.
func (d *derivation) statistic(y float64) float64 {
	if t := d.value(review.TestStatistic); t < 0 {
		return t
	}
	return math.Copysign(d.value(review.TestStatistic), y)
}

func (d *derivation) fromStatistic() (effect.Estimate, error) {
	if err := d.tested(); err != nil {
		return effect.Estimate{}, err
	}
	value, scale := d.estimate()
	y, err := effect.FromReader(scale, value)
	if err != nil {
		return effect.Estimate{}, err
	}
	e, err := d.made(effect.FromT(scale, value, d.statistic(y)))
	if err != nil {
		return e, err
	}
	return d.toMeasure(e, d.own())
}

// tested refuses a test of a measure that has no value of no effect.
func (d *derivation) tested() error {
	if d.own().HasNull() {
		return nil
	}
	return fmt.Errorf("a test says nothing of the standard error where no effect has no value, as with %s; give se, limits, or the counts", d.own())
}

func (d *derivation) fromP() (effect.Estimate, error) {
	if err := d.tested(); err != nil {
		return effect.Estimate{}, err
	}
	y, scale := d.estimate()
	d.assume("standard error worked out from a p-value")
	e, err := d.byP(scale, y)
	if err != nil {
		return e, err
	}
	return d.toMeasure(e, d.own())
}

// byP returns an estimate with the standard error that its p-value implies. A
// one-sided p-value is taken as one of a test in the direction stated, else in
// that of the estimate.
func (d *derivation) byP(scale effect.Measure, y float64) (effect.Estimate, error) {
	df := d.freedom(d.own())
	if d.value(review.PSides) != 1 {
		return d.made(effect.FromP(scale, y, d.value(review.PValue), df))
	}
	direction, err := d.direction()
	if err != nil {
		return effect.Estimate{}, err
	}
	if direction == effect.DirectionUnknown {
		scaled, err := effect.FromReader(scale, y)
		if err != nil {
			return effect.Estimate{}, err
		}
		if direction = effect.Higher; scaled < 0 {
			direction = effect.Lower
		}
	}
	return d.made(effect.FromOneSidedP(scale, y, d.value(review.PValue), df, direction))
}

// direction returns the stated direction of the effect.
func (d *derivation) direction() (effect.Direction, error) {
	r, ok := d.row.Remark(review.Direction.String())
	if !ok {
		return effect.DirectionUnknown, nil
	}
	return effect.ParseDirection(r.Text)
}

// toMeasure turns an effect of the row's measure into one of the outcome's.
func (d *derivation) toMeasure(e effect.Estimate, own effect.Measure) (effect.Estimate, error) {
	switch {
	case own == d.measure:
		return e, nil
	case own == effect.OddsRatio && d.measure == effect.StandardisedMeanDifference:
		d.assume("odds ratio taken as a standardised difference")
		return d.made(effect.StandardisedFromOdds(e))
	case own == effect.StandardisedMeanDifference && d.measure == effect.OddsRatio:
		d.assume("standardised difference taken as an odds ratio")
		return d.made(effect.OddsFromStandardised(e))
	case own == effect.MeanDifference && d.measure == effect.StandardisedMeanDifference:
		return d.standardise(e)
	}
	return e, &missingError{rule: "I20", message: fmt.Sprintf("the row gives its effect as %s, which cannot be pooled as %s", own, d.measure)}
}

// standardise divides a difference in means by the standard deviation that its
// standard error implies if both arms have the same.
func (d *derivation) standardise(e effect.Estimate) (effect.Estimate, error) {
	if !d.has(review.TotalTreated, review.TotalControl) || d.crossover() {
		return e, errors.New("a mean difference can be standardised only with the totals of both arms of separate people; give them, or the means and SDs")
	}
	n1, n2 := d.value(review.TotalTreated), d.value(review.TotalControl)
	sd, step, err := effect.SDFromDifferenceSE(e.SE, n1, n2)
	if err != nil {
		return e, err
	}
	d.log(step)
	d.assume("the same standard deviation in both arms")
	out, steps, err := effect.FromArms(effect.StandardisedMeanDifference, effect.Arm{Mean: e.Y, SD: sd, N: n1}, effect.Arm{SD: sd, N: n2})
	for i := range steps { // there are no two means and SDs, only their difference and one SD
		steps[i].From = []effect.Value{{Name: "estimate", Value: e.Y}, {Name: "sd", Value: sd}, {Name: "total treated", Value: n1}, {Name: "total control", Value: n2}}
	}
	return d.made(out, steps, err)
}

// hasEvents reports whether the events behind a hazard ratio are known with what
// gives the variance of observed minus expected ones.
func (d *derivation) hasEvents() bool {
	return d.has(review.EventsTreated, review.EventsControl) ||
		(d.has(review.Events) && (d.has(review.TotalTreated, review.TotalControl) || d.has(review.ShareTreated, review.ShareControl)))
}

func (d *derivation) hasEstimateEvents() bool { return d.hasEstimate() && d.hasEvents() }

// hazardVariance returns the variance of observed minus expected events that the
// events and the people, or their shares, imply.
func (d *derivation) hazardVariance() (float64, error) {
	d.assume("log-rank variance worked out from numbers of events")
	events := d.value(review.Events)
	if !d.has(review.Events) {
		events = d.value(review.EventsTreated) + d.value(review.EventsControl)
	}
	var v float64
	var step effect.Conversion
	var err error
	switch {
	case d.has(review.TotalTreated, review.TotalControl):
		v, step, err = effect.VarianceFromTotals(events, d.value(review.TotalTreated), d.value(review.TotalControl))
	case d.has(review.ShareTreated, review.ShareControl):
		v, step, err = effect.VarianceFromShares(events, d.value(review.ShareTreated), d.value(review.ShareControl))
	default:
		v, step, err = effect.VarianceFromEvents(d.value(review.EventsTreated), d.value(review.EventsControl))
	}
	if err == nil {
		d.log(step)
	}
	return v, err
}

func (d *derivation) fromHazardEvents() (effect.Estimate, error) {
	if d.own() != effect.HazardRatio {
		return effect.Estimate{}, fmt.Errorf("the row gives its effect as %s without a standard error or limits; give one of them", d.own())
	}
	v, err := d.hazardVariance()
	if err != nil {
		return effect.Estimate{}, err
	}
	if !d.has(review.Estimate) {
		return d.made(effect.FromHazardZ(d.value(review.AnalysisEstimate)*math.Sqrt(v), v))
	}
	return d.made(effect.FromHazardVariance(d.value(review.Estimate), v))
}

// hasHazardTest reports whether a log-rank test comes with its events.
func (d *derivation) hasHazardTest() bool {
	return d.measure == effect.HazardRatio && !d.hasEstimate() && d.hasEvents() &&
		(d.has(review.TestStatistic) || (d.has(review.PValue) && d.remark(review.Direction) != ""))
}

// fromHazardTest returns the hazard ratio of a log-rank z, or of its p-value and
// direction, with the variance that the events imply.
func (d *derivation) fromHazardTest() (effect.Estimate, error) {
	v, err := d.hazardVariance()
	if err != nil {
		return effect.Estimate{}, err
	}
	if d.has(review.TestStatistic) {
		return d.made(effect.FromHazardZ(d.value(review.TestStatistic), v))
	}
	z, err := d.signedZ()
	if err != nil {
		return effect.Estimate{}, err
	}
	return d.made(effect.FromHazardZ(z, v))
}
