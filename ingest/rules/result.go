package rules

import (
	"math"
	"strings"

	"steelyard/meta/effect"
	"steelyard/meta/numeric"
	"steelyard/meta/review"
)

// result is a result as a report gives it: the row's own, or one that only stands
// beside counts or means.
type result struct {
	scale    effect.Measure // Unspecified where its numbers are on the analysis scale
	estimate *review.Number // nil where there is none, as with those below
	low      *review.Number
	high     *review.Number
	se       *review.Number // on the analysis scale
	p        *review.Number
	level    float64 // of the limits
	own      bool    // of the row's own columns
}

// results returns the row's results, its own first.
func (r *row) results() []result {
	var all []result
	own := result{scale: r.measure, level: 0.95, own: true}
	own.estimate, own.low, own.high = r.at(review.Estimate), r.at(review.LimitLow), r.at(review.LimitHigh)
	if own.estimate == nil && r.has(review.AnalysisEstimate) {
		own.scale = effect.Unspecified
		own.estimate, own.low, own.high = r.at(review.AnalysisEstimate), r.at(review.AnalysisLow), r.at(review.AnalysisHigh)
	}
	own.se, own.p = r.at(review.StandardError), r.at(review.PValue)
	if r.has(review.LimitLevel) {
		own.level = r.value(review.LimitLevel)
	}
	if own.estimate != nil || own.low != nil {
		all = append(all, own)
	}
	reported := result{scale: r.measure, level: 0.95, estimate: r.at(review.ReportedEstimate),
		low: r.at(review.ReportedLow), high: r.at(review.ReportedHigh), p: r.at(review.ReportedP)}
	if reported.estimate != nil || reported.low != nil {
		all = append(all, reported)
	}
	return all
}

// at returns the row's number of a field, nil if it has none.
func (r *row) at(f review.Field) *review.Number {
	if n, ok := r.number(f); ok {
		return &n
	}
	return nil
}

// onScale puts a value in the reader's unit on the analysis scale; NaN where it
// cannot stand there.
func (a *result) onScale(x float64) float64 {
	switch {
	case a.scale.Log():
		if !(x > 0) {
			return math.NaN()
		}
		return math.Log(x)
	case a.scale == effect.Correlation:
		return math.Atanh(x)
	}
	return x
}

// curved reports whether limits of the measure are not expected to lie evenly
// around the estimate on any scale that the rules know.
func (a *result) curved() bool {
	switch a.scale {
	case effect.Proportion, effect.ArcsineProportion, effect.DoubleArcsineProportion, effect.ArcsineDifference, effect.RiskDifference:
		return true
	}
	return false
}

func (a *result) hasLimits() bool { return a.low != nil && a.high != nil }

// y returns the estimate on the analysis scale; ok is false where there is none.
func (a *result) y() (y float64, ok bool) {
	if a.estimate == nil {
		return 0, false
	}
	y = a.onScale(a.estimate.Value)
	return y, finite(y)
}

// width returns half the width of the limits on the analysis scale.
func (a *result) width() (half float64, ok bool) {
	if !a.hasLimits() {
		return 0, false
	}
	half = (a.onScale(a.high.Value) - a.onScale(a.low.Value)) / 2
	return half, finite(half) && half > 0
}

// seOfLimits returns the standard error that the limits imply by the normal law.
func (a *result) seOfLimits() (s float64, ok bool) {
	half, ok := a.width()
	if !ok || !(0 < a.level && a.level < 1) {
		return 0, false
	}
	return half / numeric.NormalCritical(1-a.level), true
}

// s returns the standard error: as reported, else of the limits.
func (a *result) s() (s float64, ok bool) {
	if a.se != nil {
		return a.se.Value, a.se.Value > 0
	}
	return a.seOfLimits()
}

// seBox returns the standard errors that rounding leaves open.
func (a *result) seBox() (box, bool) {
	if a.se != nil {
		b := boxOf(*a.se)
		return b, b.low > 0
	}
	if !a.hasLimits() || !(0 < a.level && a.level < 1) {
		return box{}, false
	}
	low, high := boxOf(*a.low).mapped(a.onScale), boxOf(*a.high).mapped(a.onScale)
	z := 2 * numeric.NormalCritical(1-a.level)
	b := box{(high.low - low.high) / z, (high.high - low.low) / z}
	return b, b.finite() && b.low > 0
}

// crossover reports whether the row's arms are the same people.
func (r *row) crossover() bool {
	design := strings.ReplaceAll(r.remark(review.Design), "-", "")
	for _, word := range []string{"crossover", "paired", "withinperson", "withinpatient"} {
		if strings.Contains(design, word) {
			return !strings.Contains(design, "unpaired")
		}
	}
	return false
}

// cluster reports whether the row is of a trial that randomised clusters.
func (r *row) cluster() bool {
	return strings.Contains(r.remark(review.Design), "cluster") || (!r.named && said(r.remark(review.Cluster))) || r.has(review.DesignEffect) || r.has(review.ClusterSize)
}

// adjusted reports whether the row's result is said to be adjusted.
func (r *row) adjusted() bool { return said(r.remark(review.Adjusted)) }

// said reports whether a folded text says yes.
func said(text string) bool {
	return strings.HasPrefix(text, "yes") || text == "y" || text == "true" || text == "adjusted" || text == "1"
}

// changes reports whether the row's numbers are of changes from baseline.
func (r *row) changes() bool { return strings.Contains(r.remark(review.ResultType), "change") }

// table returns the row's 2×2 table; ok is false unless it is one of people.
func (r *row) table() (t effect.Table, ok bool) {
	if !r.has(review.EventsTreated, review.TotalTreated, review.EventsControl, review.TotalControl) || r.has(review.PersonTimeTreated) {
		return t, false
	}
	t = effect.Table{Events1: r.value(review.EventsTreated), Total1: r.value(review.TotalTreated), Events2: r.value(review.EventsControl), Total2: r.value(review.TotalControl)}
	return t, t.Total1 > 0 && t.Total2 > 0 && 0 <= t.Events1 && t.Events1 <= t.Total1 && 0 <= t.Events2 && t.Events2 <= t.Total2
}

// groups returns the row's two arms of means; ok is false where a number of them is
// missing.
func (r *row) groups() (treated, control effect.Arm, ok bool) {
	if !r.has(review.MeanTreated, review.SDTreated, review.TotalTreated, review.MeanControl, review.SDControl, review.TotalControl) {
		return treated, control, false
	}
	treated = effect.Arm{Mean: r.value(review.MeanTreated), SD: r.value(review.SDTreated), N: r.value(review.TotalTreated)}
	control = effect.Arm{Mean: r.value(review.MeanControl), SD: r.value(review.SDControl), N: r.value(review.TotalControl)}
	return treated, control, treated.SD > 0 && control.SD > 0 && treated.N > 1 && control.N > 1
}

// spread returns the standard deviation of both arms together, from their SDs or from
// their standard errors.
func (r *row) spread() (sd float64, ok bool) {
	if treated, control, ok := r.groups(); ok {
		return pooledSD(treated, control), true
	}
	if !r.has(review.SETreated, review.TotalTreated, review.SEControl, review.TotalControl) {
		return 0, false
	}
	treated, control := r.errorArm(review.SETreated, review.TotalTreated), r.errorArm(review.SEControl, review.TotalControl)
	return pooledSD(treated, control), treated.SD > 0 && control.SD > 0 && treated.N > 1 && control.N > 1
}

// errorArm is an arm known by the standard error of its mean.
func (r *row) errorArm(se, total review.Field) effect.Arm {
	n := r.value(total)
	return effect.Arm{SD: r.value(se) * math.Sqrt(n), N: n}
}

// pooledSD returns the standard deviation of both arms together.
func pooledSD(a, b effect.Arm) float64 {
	return math.Sqrt(((a.N-1)*a.SD*a.SD + (b.N-1)*b.SD*b.SD) / (a.N + b.N - 2))
}
