package synthesis

import (
	"fmt"
	"math"

	"steelyard/meta/panel"
	"steelyard/meta/review"
)

// AbsoluteChange is what the pooled effect means at a baseline risk, before and now;
// nil where there is no result, or none that is a number.
type AbsoluteChange struct {
	Baseline      review.Baseline
	Before, After *panel.Absolute
}

// absolute works out the absolute effects at the baselines of the plan, else at the
// median risk of the control arms of today.
func (o *OutcomeChange) absolute(plan *review.Plan) []AbsoluteChange {
	asked, err := plan.Analysis(o.Name)
	if err != nil { // the results say so
		return nil
	}
	baselines := asked.Panel.Baselines
	if len(baselines) == 0 {
		latest := o.Current
		if !o.hasResult() {
			latest = o.Previous
		}
		if latest == nil || latest.Result == nil {
			return nil
		}
		if m := latest.medianRisk(); m != nil {
			baselines = []review.Baseline{{Name: MedianBaseline, Risk: m.Risk}}
		}
	}
	var all []AbsoluteChange
	for _, b := range baselines {
		change := AbsoluteChange{Baseline: b}
		if o.hadResult() {
			change.Before = o.Previous.absoluteAt(b.Risk)
		}
		if o.hasResult() {
			change.After = o.Current.absoluteAt(b.Risk)
		}
		if change.Before != nil || change.After != nil {
			all = append(all, change)
		}
	}
	return all
}

// absoluteAt returns the pooled effect at a baseline risk, nil for a measure without
// an absolute form, and for limits that leave the range of numbers.
func (o *Outcome) absoluteAt(risk float64) *panel.Absolute {
	m := o.Result.Fit.Mean
	a, err := panel.At(o.Analysis.Measure, risk, panel.Range{Value: m.Estimate, Low: m.Low, High: m.High})
	if err != nil || math.IsInf(a.Treated.High, 1) {
		return nil
	}
	return &a
}

func (a *AbsoluteChange) comparable() bool { return a.Before != nil && a.After != nil }

// per is the number of people in which differences are counted.
const per = 1000

// per1000Limits returns the important difference per 1000 of the plan on both sides of
// none.
func per1000Limits(plan *review.Plan, outcome string) []float64 {
	asked, err := plan.Analysis(outcome)
	switch limits := asked.Panel.Per1000; {
	case err != nil || len(limits) == 0:
		return nil
	case len(limits) == 1:
		return []float64{-math.Abs(limits[0]), math.Abs(limits[0])}
	default:
		return limits
	}
}

// crossed names the limits per 1000 people that the absolute difference crossed.
func (a *AbsoluteChange) crossed(limits []float64) []string {
	var named []string
	before, now := per*a.Before.Difference.Value, per*a.After.Difference.Value
	for _, limit := range limits {
		word := "more"
		if limit < 0 {
			word = "fewer"
		}
		if (before < limit) != (now < limit) {
			named = append(named, fmt.Sprintf("%g %s per 1000 at %s", math.Abs(limit), word, a.Name()))
		}
	}
	return named
}

// Name calls the baseline by its name and its risk per 1000.
func (a *AbsoluteChange) Name() string {
	risk := fmt.Sprintf("%.3g per 1000", per*a.Baseline.Risk)
	if a.Baseline.Name == MedianBaseline {
		return "the " + MedianBaseline + ", " + risk
	}
	if a.Baseline.Name == "" {
		return "a baseline risk of " + risk
	}
	return fmt.Sprintf("the baseline %q (%s)", a.Baseline.Name, risk)
}
