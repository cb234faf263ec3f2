package numeric

import (
	"math"

	"gonum.org/v1/gonum/mathext"
)

// millsFrom is where Mills' continued fraction takes over from erfc.
const millsFrom = 6

// NormalTail returns P(Z > z) for a standard normal Z. It underflows to 0 past
// z = 38.5; LogNormalTail does not.
func NormalTail(z float64) float64 { return 0.5 * math.Erfc(z/math.Sqrt2) }

// LogNormalTail returns ln P(Z > z) for a standard normal Z, for any z.
func LogNormalTail(z float64) float64 {
	switch {
	case z > millsFrom:
		return -0.5*z*z - lnSqrt2Pi + math.Log(mills(z))
	case z > 0:
		return math.Log(NormalTail(z))
	}
	return math.Log1p(-NormalTail(-z)) // NaN stays NaN
}

// LogMills returns ln(P(Z > z)/φ(z)), φ the standard normal density: the part
// of LogNormalTail that is left when the common factor exp(-z²/2) is known to
// cancel.
func LogMills(z float64) float64 {
	if z > millsFrom {
		return math.Log(mills(z))
	}
	return LogNormalTail(z) + 0.5*z*z + lnSqrt2Pi
}

// mills returns P(Z > z)/φ(z) for z ≥ millsFrom by the continued fraction
// 1/(z + 1/(z + 2/(z + 3/(z + …)))), from the far end.
//
// Source: Abramowitz & Stegun (1964), 26.2.14.
func mills(z float64) float64 {
	f := z
	for n := float64(int(20 + 1600/(z*z))); n >= 1; n-- {
		f = z + n/f
	}
	return 1 / f
}

// LogNormalBetween returns ln(Φ(b) - Φ(a)) for a ≤ b, right in both far tails
// and for narrow intervals; -Inf when a = b, NaN when a > b.
func LogNormalBetween(a, b float64) float64 {
	switch {
	case !(a <= b):
		return math.NaN()
	case a == b:
		return math.Inf(-1)
	case a >= 0:
		return logNormalAbove(a, b)
	case b <= 0:
		return logNormalAbove(-b, -a)
	case -a < 1 && b < 1:
		return math.Log(0.5 * (math.Erf(b/math.Sqrt2) + math.Erf(-a/math.Sqrt2)))
	}
	return math.Log1p(-NormalTail(-a) - NormalTail(b))
}

// logNormalAbove is LogNormalBetween for 0 ≤ a < b.
func logNormalAbove(a, b float64) float64 {
	if w := b - a; w*max(a, 1) < 1 {
		sum := 0.0
		for i, u := range legendreNodes {
			v := w * u
			sum += legendreWeights[i] * math.Exp(-v*(a+0.5*v))
		}
		return -0.5*a*a - lnSqrt2Pi + math.Log(w*sum)
	}
	top := LogNormalTail(a)
	if math.IsInf(b, 1) || math.IsInf(top, -1) {
		return top
	}
	return top + math.Log(-math.Expm1(LogNormalTail(b)-top))
}

// LogNormalStrip returns ln of the probability of a narrow strip of the given
// width round mid, for a width so small that the two ends as floating-point
// numbers would lose it: width·max(1, |mid|) ≤ 1e-4.
func LogNormalStrip(mid, width float64) float64 {
	if !(width > 0) {
		return math.NaN()
	}
	return math.Log(width) - 0.5*mid*mid - lnSqrt2Pi + math.Log1p(width*width*(mid*mid-1)/24)
}

// NormalCritical returns the z whose two-sided tail is alpha: P(|Z| > z) =
// alpha; NaN unless 0 ≤ alpha ≤ 1.
func NormalCritical(alpha float64) float64 {
	if !(alpha >= 0 && alpha <= 1) {
		return math.NaN()
	}
	return NormalFromLogTail(math.Log(alpha) - ln2)
}

// NormalFromLogTail returns the z with ln P(Z > z) = lnTail, for any lnTail ≤ 0;
// NaN above 0.
func NormalFromLogTail(lnTail float64) float64 {
	switch {
	case !(lnTail <= 0):
		return math.NaN()
	case lnTail > -ln2:
		return -NormalFromLogTail(otherTail(lnTail))
	case lnTail > -600:
		return -mathext.NormalQuantile(math.Exp(lnTail))
	case math.IsInf(lnTail, -1):
		return math.Inf(1)
	}
	// Newton's steps on the log of the tail, whose slope is -1/mills: the log is
	// concave, so after the first step they come from one side.
	z := math.Sqrt2 * math.Sqrt(-lnTail)
	z = math.Sqrt2 * math.Sqrt(-lnTail-lnSqrt2Pi-math.Log(z))
	for range 6 {
		step := (LogNormalTail(z) - lnTail) * mills(z)
		z += step
		if math.Abs(step) < 1e-16*z {
			break
		}
	}
	return z
}

// otherTail returns ln(1 - tail) for lnTail = ln tail > -ln 2, never above
// -ln 2: the two halves of a symmetric law meet there.
func otherTail(lnTail float64) float64 {
	return min(math.Log(-math.Expm1(lnTail)), -ln2)
}
