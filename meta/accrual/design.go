package accrual

import (
	"fmt"
	"math"

	"steelyard/meta/effect"
)

// Design turns the size of a next study into the standard error it would have, on
// the analysis scale. For an odds ratio, a risk ratio or a risk difference it
// needs the risk in the control arm, for a mean difference the standard deviation.
// The standard error is the one expected if Effect, the pooled effect on the
// analysis scale, is the truth.
type Design struct {
	Measure     effect.Measure
	Effect      float64
	ControlRisk float64
	SD          float64
	// Ratio is the number of people treated per person in the control arm; 0 means 1.
	Ratio float64
}

// Arms divides a number of people between the treated and the control arm.
func (d Design) Arms(total float64) (treated, control float64) {
	ratio := d.Ratio
	if ratio == 0 {
		ratio = 1
	}
	control = total / (1 + ratio)
	return total - control, control
}

// SE returns the standard error of a study with the given numbers of people:
//
//	odds ratio       √(1/(n₁p₁) + 1/(n₁(1−p₁)) + 1/(n₂p₂) + 1/(n₂(1−p₂)))
//	risk ratio       √((1−p₁)/(n₁p₁) + (1−p₂)/(n₂p₂))
//	risk difference  √(p₁(1−p₁)/n₁ + p₂(1−p₂)/n₂)
//	mean difference  sd·√(1/n₁ + 1/n₂)
//	standardised     √(N/(n₁n₂) + g²/(2(N−3.94)))
//
// p₂ is the control risk and p₁ what the effect makes of it. It returns an
// *InputError for a size, risk or standard deviation out of range, and an
// *effect.MeasureError for another measure.
//
// Source: Cochrane Handbook 6.4.1, 6.5.1, 10.5.
func (d Design) SE(treated, control float64) (float64, error) {
	if !(treated > 0 && control > 0) || math.IsInf(treated+control, 1) {
		return 0, &InputError{fmt.Sprintf("arms of %v and %v people: both must be finite and above 0", treated, control)}
	}
	if math.IsNaN(d.Effect) || math.IsInf(d.Effect, 0) {
		return 0, &InputError{fmt.Sprintf("an effect of %v gives no standard error: give a finite one on the analysis scale", d.Effect)}
	}
	switch d.Measure {
	case effect.OddsRatio, effect.RiskRatio, effect.RiskDifference:
		return d.binary(treated, control)
	case effect.MeanDifference:
		if !(d.SD > 0) || math.IsInf(d.SD, 1) {
			return 0, &InputError{fmt.Sprintf("a standard deviation of %v: give one above 0 in the unit of the outcome", d.SD)}
		}
		return d.SD * math.Sqrt(1/treated+1/control), nil
	case effect.StandardisedMeanDifference:
		if !(treated+control > 4) {
			return 0, &InputError{"a standardised difference needs more than 4 people: enlarge the study"}
		}
		n := treated + control
		return math.Hypot(math.Sqrt(1/treated+1/control), d.Effect/math.Sqrt(2*(n-3.94))), nil
	}
	return 0, &effect.MeasureError{Measure: d.Measure, From: "arm sizes", Valid: []effect.Measure{
		effect.OddsRatio, effect.RiskRatio, effect.RiskDifference, effect.MeanDifference, effect.StandardisedMeanDifference}}
}

// binary returns the standard error of a comparison of two risks.
func (d Design) binary(n1, n2 float64) (float64, error) {
	p2 := d.ControlRisk
	if !(p2 > 0 && p2 < 1) {
		return 0, &InputError{fmt.Sprintf("a control risk of %v: give one between 0 and 1", p2)}
	}
	var p1 float64
	switch d.Measure {
	case effect.OddsRatio:
		p1 = 1 / (1 + (1-p2)/p2*math.Exp(-d.Effect))
	case effect.RiskRatio:
		p1 = p2 * math.Exp(d.Effect)
	default:
		p1 = p2 + d.Effect
	}
	if !(p1 > 0 && p1 < 1) {
		return 0, &InputError{fmt.Sprintf("the effect %v makes of the control risk %v a risk of %v: give a control risk for which it stays between 0 and 1", d.Effect, p2, p1)}
	}
	q1, q2 := 1-p1, 1-p2
	var v float64
	switch d.Measure {
	case effect.OddsRatio:
		v = 1/(n1*p1*q1) + 1/(n2*p2*q2)
	case effect.RiskRatio:
		v = q1/(n1*p1) + q2/(n2*p2)
	default:
		v = p1*q1/n1 + p2*q2/n2
	}
	return math.Sqrt(v), nil
}

// SizeToSE returns the standard error of a study of a total size, for a curve.
func (d Design) SizeToSE(total float64) (float64, error) { return d.SE(d.Arms(total)) }
