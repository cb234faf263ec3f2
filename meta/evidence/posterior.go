package evidence

import "math"

// Posterior returns the probability of H1 after the evidence, given its
// probability before: odds after = ratio × odds before. NaN unless
// 0 ≤ prior ≤ 1.
func Posterior(prior float64, r Ratio) float64 {
	switch {
	case !(prior >= 0 && prior <= 1) || math.IsNaN(r.ln):
		return math.NaN()
	case prior == 0 || prior == 1:
		return prior
	}
	return logistic(logit(prior) + r.ln)
}

// DoubtersPrior returns the prior probability of H1 at which the posterior is
// exactly level: whoever starts below it is not convinced to that level.
//
//	1/(1 + ER·(1-level)/level)
//
// NaN unless 0 ≤ level ≤ 1.
func DoubtersPrior(r Ratio, level float64) float64 { return Posterior(level, r.Inverse()) }

// logit returns the log odds of a probability strictly between 0 and 1.
func logit(p float64) float64 { return math.Log(p) - math.Log1p(-p) }

// logistic returns the probability with the given log odds.
func logistic(x float64) float64 { return 1 / (1 + math.Exp(-x)) }
