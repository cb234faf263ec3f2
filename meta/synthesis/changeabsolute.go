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

// absolute works out the absolute effects at the baselines of the plan.
func (o *OutcomeChange) absolute(plan *review.Plan) []AbsoluteChange {
	asked, err := plan.Analysis(o.Name)
	if err != nil { // the results say so
		return nil
	}
	var all []AbsoluteChange
	for _, b := range asked.Baselines {
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

// crossed names the side on which the absolute difference crossed a threshold per
// 1000 people.
func (a *AbsoluteChange) crossed(threshold float64) []string {
	var named []string
	before, now := per*a.Before.Difference.Value, per*a.After.Difference.Value
	for _, side := range []struct {
		bound float64
		word  string
	}{{-threshold, "fewer"}, {threshold, "more"}} {
		if (before < side.bound) != (now < side.bound) {
			named = append(named, fmt.Sprintf("%g %s per 1000 at %s", threshold, side.word, a.Name()))
		}
	}
	return named
}

// Name calls the baseline by its name and its risk per 1000.
func (a *AbsoluteChange) Name() string {
	risk := fmt.Sprintf("%.3g per 1000", per*a.Baseline.Risk)
	if a.Baseline.Name == "" {
		return "a baseline risk of " + risk
	}
	return fmt.Sprintf("the baseline %q (%s)", a.Baseline.Name, risk)
}
