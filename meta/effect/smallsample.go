package effect

import (
	"math"

	"steelyard/meta/numeric"
)

// SmallSampleFactor returns Hedges' exact factor that takes the bias from a
// standardised difference whose standard deviation rests on m degrees of
// freedom:
//
//	J = Γ(m/2) / (√(m/2) Γ((m−1)/2))
//
// It rises from 0 at m = 1 to 1 as m grows; outside m ≥ 1 it is 0.
//
// Source: Hedges (1981), Journal of Educational Statistics 6:107-128.
func SmallSampleFactor(m float64) float64 {
	switch {
	case !(m > 1):
		return 0
	case math.IsInf(m, 1):
		return 1
	}
	return math.Exp(numeric.LogGammaRatio(m/2, (m-1)/2)) / math.Sqrt(m/2)
}
