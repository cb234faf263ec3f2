package evidence

import "math"

// lnPValueCap is ln(e²/2), the most that a p-value can say for no effect: the
// largest value of the exact form, reached at p = 1 - 1/e.
const lnPValueCap = 2 - math.Ln2

// PValue returns the evidence of a study of which only the two-sided p-value is
// known: ER = 1/(10p), and at most e²/2 = 3.69 for no effect. Above p = 0.1 it
// is no evidence for an effect, never evidence of none. p = 0 gives +Inf, a p
// outside 0 to 1 a ratio that holds NaN.
//
// Source: Dudbridge (2024), PLoS ONE 19(2):e0297874.
func PValue(p float64) Ratio { return PValueFromLn(math.Log(p)) }

// PValueFromLn is PValue for a p-value given by its natural logarithm, which may
// lie below the range of a float64.
func PValueFromLn(lnP float64) Ratio {
	if !(lnP <= 0) {
		return invalid()
	}
	return Ratio{ln: max(-math.Ln10-lnP, -lnPValueCap)}
}

// PValueExact returns the evidence that PValue approximates:
//
//	BF₀₁ = (e³/2)·(-(1-p) ln(1-p))
//
// p being Beta(1, κ) with a flat prior on κ. Past p = 1 - 1/e, where that form
// turns back towards an effect, it is held at its largest value e²/2.
//
// Source: Dudbridge (2024), PLoS ONE 19(2):e0297874.
func PValueExact(p float64) Ratio {
	switch {
	case !(p >= 0 && p <= 1):
		return invalid()
	case p >= 1-1/math.E:
		return Ratio{ln: -lnPValueCap}
	}
	q := math.Log1p(-p)
	return Ratio{ln: math.Ln2 - 3 - q - math.Log(-q)}
}

// PValueBound returns the largest evidence for an effect that a p-value allows
// under any prior that makes small p-values likelier: ER = 1/(-e p ln p) for
// p < 1/e, and 1 above.
//
// Source: Sellke, Bayarri & Berger (2001), The American Statistician 55:62-71.
func PValueBound(p float64) Ratio {
	switch {
	case !(p >= 0 && p <= 1):
		return invalid()
	case p >= 1/math.E:
		return Ratio{}
	case p == 0:
		return Ratio{ln: math.Inf(1)}
	}
	lnP := math.Log(p)
	return Ratio{ln: -1 - lnP - math.Log(-lnP)}
}
