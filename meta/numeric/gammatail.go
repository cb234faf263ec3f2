package numeric

import (
	"math"

	"gonum.org/v1/gonum/mathext"
)

// GammaTail returns the upper regularised incomplete gamma function, the chance
// that a gamma variable of the given shape and rate 1 exceeds x; NaN unless
// x ≥ 0 and shape > 0 is finite.
func GammaTail(x, shape float64) float64 {
	if gammaValid(x, shape) && gammaPlain(x, shape) {
		return mathext.GammaIncRegComp(shape, x)
	}
	return math.Exp(logGammaUpper(x, shape))
}

func gammaValid(x, shape float64) bool { return x >= 0 && shape > 0 && !math.IsInf(shape, 1) }

// gammaPlain says where the library's incomplete gamma functions hold: for
// shapes up to 200, and within four standard deviations of the mean for larger
// ones. Farther out they stop after 2,000 terms (a tail of 3.3e-6 at shape 1.6e7
// is then 6 % off).
func gammaPlain(x, shape float64) bool {
	return !math.IsInf(x, 1) && (shape <= 200 || shape <= gammaLargeFrom && math.Abs(x-shape) <= 4*math.Sqrt(shape))
}

// LogChiSquareTail returns ln P(X > x) for a chi-square variable with df degrees
// of freedom; NaN unless x ≥ 0 and df > 0.
func LogChiSquareTail(x, df float64) float64 { return logGammaUpper(x/2, df/2) }

// ChiSquareTail returns P(X > x) for a chi-square variable with df degrees of
// freedom; NaN unless x ≥ 0 and df > 0.
func ChiSquareTail(x, df float64) float64 { return GammaTail(x/2, df/2) }

// gammaSteps caps the continued fraction of the incomplete gamma function, which
// needs fewer than 1,000 steps where it is used.
const gammaSteps = 100_000

// plainTail is the smallest tail that is taken from the plain function before
// its log; smaller ones come from the continued fraction.
const plainTail = 1e-200

// logGammaUpper returns the log of GammaTail.
func logGammaUpper(x, shape float64) float64 {
	switch {
	case !gammaValid(x, shape):
		return math.NaN()
	case math.IsInf(x, 1):
		return math.Inf(-1)
	case shape > gammaLargeFrom:
		upper, _ := logGammaLarge(x, shape)
		return upper
	}
	if gammaPlain(x, shape) {
		plain := mathext.GammaIncRegComp(shape, x)
		switch {
		case plain > 0.5:
			return math.Log1p(-mathext.GammaIncReg(shape, x))
		case plain > plainTail:
			return math.Log(plain)
		}
	}
	if x < shape {
		return math.Log1p(-math.Exp(gammaLowerSeries(x, shape)))
	}
	return gammaLogFront(x, shape) + math.Log(gammaFraction(x, shape))
}

// logGammaLower returns the log of the chance that a gamma variable of the
// given shape is below x.
func logGammaLower(x, shape float64) float64 {
	switch {
	case !gammaValid(x, shape):
		return math.NaN()
	case x == 0:
		return math.Inf(-1)
	case math.IsInf(x, 1):
		return 0
	case shape > gammaLargeFrom:
		_, lower := logGammaLarge(x, shape)
		return lower
	}
	if gammaPlain(x, shape) {
		upper, plain := mathext.GammaIncRegComp(shape, x), 0.0
		if upper < 0.5 {
			return math.Log1p(-upper)
		}
		if plain = mathext.GammaIncReg(shape, x); plain > plainTail {
			return math.Log(plain)
		}
	}
	if x < shape {
		return gammaLowerSeries(x, shape)
	}
	return math.Log1p(-math.Exp(gammaLogFront(x, shape)) * gammaFraction(x, shape))
}

// gammaLowerSeries returns the log of the lower tail for x < shape by its power
// series, of positive terms.
//
// Source: Abramowitz & Stegun (1964), 6.5.29.
func gammaLowerSeries(x, shape float64) float64 {
	sum, term := 1.0, 1.0
	for n := shape + 1; term > 1e-17*sum; n++ {
		term *= x / n
		sum += term
	}
	return gammaLogFront(x, shape) - math.Log(shape) + math.Log(sum)
}

// gammaLogFront returns ln(x^shape·exp(-x)/Γ(shape)), keeping its digits where
// shape is large.
func gammaLogFront(x, shape float64) float64 {
	if shape < stirlingFrom {
		return shape*math.Log(x) - x - LogGamma(shape)
	}
	return -shape*lessLog1p((x-shape)/shape) + 0.5*math.Log(shape) - lnSqrt2Pi - stirlingRest(shape)
}

// gammaFraction returns Γ(a, x)·exp(x)·x^(-a) for x > a + 1 by Lentz's method.
//
// Source: Abramowitz & Stegun (1964), 6.5.31.
func gammaFraction(x, a float64) float64 {
	if x > 1e290 {
		return 1 / x
	}
	b := x + 1 - a
	c, d := math.Inf(1), 1/b
	f := d
	for n := 1.0; n < gammaSteps; n++ {
		an := -n * (n - a)
		b += 2
		d = 1 / (an*d + b)
		c = b + an/c
		step := c * d
		f *= step
		if !(math.Abs(step-1) > fractionEnough) { // NaN ends too
			return f
		}
	}
	return math.NaN()
}

// ChiSquareQuantile returns the x with P(X ≤ x) = lowerP for a chi-square
// variable with df degrees of freedom; NaN unless 0 ≤ lowerP ≤ 1.
func ChiSquareQuantile(lowerP, df float64) float64 {
	switch {
	case !(lowerP >= 0 && lowerP <= 1) || !(df > 0):
		return math.NaN()
	case lowerP > 0.5:
		return ChiSquareFromLogTail(math.Log1p(-lowerP), df)
	}
	return 2 * gammaFromLogLower(math.Log(lowerP), df/2)
}

// ChiSquareUpperQuantile returns the x with P(X > x) = upperP; NaN unless
// 0 ≤ upperP ≤ 1.
func ChiSquareUpperQuantile(upperP, df float64) float64 {
	if !(upperP >= 0 && upperP <= 1) {
		return math.NaN()
	}
	return ChiSquareFromLogTail(math.Log(upperP), df)
}

// ChiSquareFromLogTail returns the x with ln P(X > x) = lnTail, for any
// lnTail ≤ 0; NaN above 0.
func ChiSquareFromLogTail(lnTail, df float64) float64 {
	switch {
	case !(lnTail <= 0) || !(df > 0) || math.IsInf(df, 1):
		return math.NaN()
	case math.IsInf(lnTail, -1):
		return math.Inf(1)
	case lnTail > -ln2:
		return 2 * gammaFromLogLower(math.Log(-math.Expm1(lnTail)), df/2)
	}
	return 2 * gammaInverse(lnTail, df/2, logGammaUpper, -1)
}

// gammaFromLogLower returns the x below which a gamma variable lies with log
// probability lnP.
func gammaFromLogLower(lnP, shape float64) float64 {
	if math.IsInf(lnP, -1) {
		return 0
	}
	return gammaInverse(lnP, shape, logGammaLower, 1)
}

// gammaInverse solves lnF(x, shape) = want by Newton's steps in ln x, on which
// both log tails are concave; sign is that of the slope. x itself is carried, as
// its logarithm would round it. A bracket guards the first steps.
func gammaInverse(want, shape float64, lnF func(x, shape float64) float64, sign float64) float64 {
	x := math.Exp(gammaStart(want, shape, sign))
	low, high := 0.0, math.Inf(1)
	for range 400 {
		if x == 0 || math.IsInf(x, 1) {
			break // beyond the range of a float64
		}
		now := lnF(x, shape)
		if (now < want) == (sign > 0) {
			low = x
		} else {
			high = x
		}
		next := x + x*math.Expm1(sign*(want-now)*math.Exp(now-gammaLogFront(x, shape)))
		if math.Abs(next-x) <= newtonEnough*x {
			return next
		}
		if !(next > low && next < high) {
			switch {
			case low == 0:
				next = high / 8
			case math.IsInf(high, 1):
				next = 8 * low
			default:
				next = math.Sqrt(low) * math.Sqrt(high)
			}
		}
		x = next
	}
	return x
}

// gammaStart returns a first guess at ln x: Wilson and Hilferty's cube, or the
// leading term of the lower tail where that is not positive.
func gammaStart(want, shape, sign float64) float64 {
	z := -sign * NormalFromLogTail(want)
	c := 1 / (9 * shape)
	if cube := 1 - c + z*math.Sqrt(c); cube > 0.1 {
		if sign > 0 || shape > 0.5 {
			return math.Log(shape) + 3*math.Log(cube)
		}
	}
	if sign > 0 {
		return (want + LogGamma(shape+1)) / shape
	}
	return math.Log(max(-want, 1e-3))
}
