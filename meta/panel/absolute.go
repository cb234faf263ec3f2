package panel

import (
	"fmt"
	"math"

	"steelyard/meta/effect"
)

// Range is a value with its limits, Low at most High.
type Range struct{ Value, Low, High float64 }

// Absolute is an effect at a baseline, as fractions of the people (or, for a rate
// ratio, events per unit of person time).
type Absolute struct {
	Baseline   float64
	Treated    Range // the risk with treatment
	Difference Range // Treated − Baseline; below 0: fewer events
	// Capped: the effect would make a risk below 0 or above 1 of the baseline, which
	// the risk stops at.
	Capped bool
}

// HasAbsolute reports whether the measure has an absolute form at a baseline.
func HasAbsolute(m effect.Measure) bool {
	switch m {
	case effect.OddsRatio, effect.RiskRatio, effect.RiskDifference, effect.HazardRatio, effect.RateRatio, effect.ArcsineDifference:
		return true
	}
	return false
}

// CheckBaseline returns an *InputError unless 0 < p < 1.
func CheckBaseline(p float64) error {
	if p > 0 && p < 1 {
		return nil
	}
	return &InputError{fmt.Sprintf("a baseline risk of %v: it lies between 0 and 1, such as 0.05 for 50 per 1000", p)}
}

// Risk returns what an effect y on the analysis scale makes of a baseline p:
//
//	odds ratio           o·p/(1−p+o·p), o = exp(y)
//	risk ratio           p·exp(y)
//	risk difference      p + y
//	hazard ratio         1−(1−p)^exp(y)    (event by some time)
//	rate ratio           p·exp(y)          (events per unit of person time)
//	arcsine difference   sin²(arcsin√p + y)
//
// A risk leaves 0 to 1 for no measure: it stops there, and capped says so. A rate
// has no upper end. y may be infinite. The errors are a *MeasureError, and an
// *InputError for a baseline outside 0 to 1 or an effect that is no number.
//
// Source: Cochrane Handbook 5.1, 11.5.5 and 12.5.4; GRADE guidelines 12 (2013); the
// arcsine by its definition (Rücker et al. 2009).
func Risk(m effect.Measure, p, y float64) (risk float64, capped bool, err error) {
	if !HasAbsolute(m) {
		return 0, false, refuse(m)
	}
	if err := CheckBaseline(p); err != nil {
		return 0, false, err
	}
	if math.IsNaN(y) {
		return 0, false, &InputError{"the effect is no number"}
	}
	switch m {
	case effect.OddsRatio:
		return 1 / (1 + (1-p)/p*math.Exp(-y)), false, nil
	case effect.HazardRatio:
		return -math.Expm1(math.Log1p(-p) * math.Exp(y)), false, nil
	case effect.RateRatio:
		return p * math.Exp(y), false, nil
	case effect.RiskRatio:
		risk = p * math.Exp(y)
	case effect.RiskDifference:
		risk = p + y
	case effect.ArcsineDifference:
		angle := math.Asin(math.Sqrt(p)) + y
		risk = math.Pow(math.Sin(max(0, min(angle, math.Pi/2))), 2)
		return risk, angle < 0 || angle > math.Pi/2, nil
	}
	return max(0, min(risk, 1)), risk < 0 || risk > 1, nil
}

// Effect is the inverse of Risk: the effect on the analysis scale that makes a risk of
// a baseline p. A risk of 0 or 1, or outside, that no effect reaches gives −Inf or
// +Inf. The errors are those of Risk.
func Effect(m effect.Measure, p, risk float64) (float64, error) {
	if !HasAbsolute(m) {
		return 0, refuse(m)
	}
	if err := CheckBaseline(p); err != nil {
		return 0, err
	}
	if math.IsNaN(risk) {
		return 0, &InputError{"the risk is no number"}
	}
	switch {
	case risk <= 0 && (risk < 0 || m != effect.RiskDifference && m != effect.ArcsineDifference):
		return math.Inf(-1), nil
	case m != effect.RateRatio && risk > 1,
		risk == 1 && (m == effect.OddsRatio || m == effect.HazardRatio):
		return math.Inf(1), nil
	}
	switch m {
	case effect.OddsRatio:
		return math.Log(risk) - math.Log1p(-risk) - math.Log(p) + math.Log1p(-p), nil
	case effect.HazardRatio:
		return math.Log(math.Log1p(-risk) / math.Log1p(-p)), nil
	case effect.RiskDifference:
		return risk - p, nil
	case effect.ArcsineDifference:
		return math.Asin(math.Sqrt(risk)) - math.Asin(math.Sqrt(p)), nil
	}
	return math.Log(risk / p), nil
}

// At returns the absolute effect at a baseline of an effect with its limits on the
// analysis scale; all measures ascend, so that each limit becomes its own. The errors
// are those of Risk.
//
// Check: risk ratio 0.75 makes 60% of 80% and 15% of 20% (Cochrane Handbook 5.1,
// 11.5.5).
func At(m effect.Measure, baseline float64, y Range) (Absolute, error) {
	a := Absolute{Baseline: baseline}
	for _, part := range []struct {
		from float64
		to   *float64
	}{{y.Value, &a.Treated.Value}, {y.Low, &a.Treated.Low}, {y.High, &a.Treated.High}} {
		risk, capped, err := Risk(m, baseline, part.from)
		if err != nil {
			return Absolute{}, err
		}
		*part.to = risk
		a.Capped = a.Capped || capped
	}
	a.Difference = Range{Value: a.Treated.Value - baseline, Low: a.Treated.Low - baseline, High: a.Treated.High - baseline}
	return a, nil
}
