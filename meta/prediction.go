package meta

import (
	"math"

	"steelyard/meta/numeric"
)

// roundingShare is how far, as a share of the interval for the mean, a
// prediction limit may fall inside it by rounding alone.
const roundingShare = 1e-9

// prediction returns the interval for the true effect in a new setting, or nil
// for a common effect or fewer than three studies. The Student-t forms are
//
//	mean ± t·√(τ² + se²)
//
// on k − 2 or k − 1 degrees of freedom, se being the model's 1/√Σw (Henmi–Copas:
// that of its own mean). The true effect in a new setting is no better known than
// the mean: where a limit would lie inside the interval for the mean, the
// interval's own standard error is used, and its own limit where that reaches
// further still; Widened says so.
//
// Source: Higgins, Thompson & Spiegelhalter (2009), Journal of the Royal
// Statistical Society A 172:137-159.
func (p *Pooler) prediction() *Prediction {
	k := p.data.k()
	if p.model.Effects == CommonEffect || k < 3 {
		return nil
	}
	method := p.model.Prediction
	result := &Prediction{Method: method, DF: infinite}
	var limits Limits
	if method == PredictionBootstrap {
		limits = p.bootstrap()
	} else {
		result.DF = float64(k - 2)
		if method == PredictionOneLess {
			result.DF = float64(k - 1)
		}
		se := p.final.se()
		if p.model.Interval == HenmiCopas {
			se = p.answer.se
		}
		limits = p.studentPrediction(se, result.DF)
	}
	if slack := roundingShare * (p.answer.high - p.answer.low); limits.Low > p.answer.low+slack || limits.High < p.answer.high-slack {
		result.Widened = true
		if method != PredictionBootstrap {
			limits = p.studentPrediction(p.answer.se, result.DF)
		}
		limits.Low, limits.High = min(limits.Low, p.answer.low), max(limits.High, p.answer.high)
	}
	result.Low, result.High = p.data.place(limits.Low), p.data.place(limits.High)
	return result
}

// studentPrediction returns estimate ± t·√(τ² + se²).
func (p *Pooler) studentPrediction(se, df float64) Limits {
	half := numeric.StudentCritical(1-p.model.Level, df) * math.Hypot(math.Sqrt(p.tau2()), se)
	return Limits{Low: p.answer.estimate - half, High: p.answer.estimate + half}
}
