package numeric

import (
	"math"
	"sync"
)

// betaSteps caps the continued fraction of the incomplete beta function, which
// needs about √max(a, b) steps near the mean and few in the tails.
const betaSteps = 2_000_000

// fractionEnough is how near to 1 the last factor of a continued fraction must
// be: above the spacing of float64 there, so that rounding cannot keep it away.
const fractionEnough = 4e-16

// betaFraction returns the continued fraction K of the incomplete beta function,
//
//	I_x(a, b) = x^a·y^b/(a·B(a, b))·K,  y = 1 - x,
//
// which converges fast where x < (a+1)/(a+b+2); NaN if it does not converge.
// Lentz's method.
//
// Source: Abramowitz & Stegun (1964), 26.5.8.
func betaFraction(a, b, x float64) float64 {
	const tiny = 1e-300
	c, d := 1.0, 1-(a+b)*x/(a+1)
	if math.Abs(d) < tiny {
		d = tiny
	}
	d = 1 / d
	f := d
	for m := 1.0; m < betaSteps; m++ {
		even := m / (a + 2*m - 1) * ((b - m) / (a + 2*m)) * x
		d = 1 + even*d
		c = 1 + even/c
		d = 1 / d
		f *= d * c
		odd := -(a + m) / (a + 2*m) * ((a + b + m) / (a + 2*m + 1)) * x
		d = 1 + odd*d
		c = 1 + odd/c
		d = 1 / d
		step := d * c
		f *= step
		if !(math.Abs(step-1) > fractionEnough) { // NaN ends too
			return f
		}
	}
	return math.NaN()
}

// betaFractionRatio is betaFraction by the fraction of Gauss in the ratio r = x/y
// after the transformation of Pfaff, which keeps the digits of a small y that x
// near 1 has lost.
//
// Source: Abramowitz & Stegun (1964), 15.3.4; Gauss (1813) for the fraction.
func betaFractionRatio(a, b, r float64) float64 {
	c, d, f := 1.0, 0.0, 1.0
	for n := 0.0; n < betaSteps; n++ {
		odd := (n + 1 - b) / (a + 2*n + 1) * ((a + n) / (a + 2*n)) * r
		c, d = 1+odd/c, 1/(1+odd*d)
		f *= c * d
		even := (n + 1) / (a + 2*n + 1) * ((a + b + n) / (a + 2*n + 2)) * r
		c, d = 1+even/c, 1/(1+even*d)
		step := c * d
		f *= step
		if !(math.Abs(step-1) > fractionEnough) { // NaN ends too
			return (1 + r) / f
		}
	}
	return math.NaN()
}

// lnBeta returns ln B(a, b).
func lnBeta(a, b float64) float64 {
	if a < b {
		a, b = b, a
	}
	return LogGamma(b) - LogGammaRise(a, b)
}

// halfBetas holds ln B(df/2, ½) by df: the constant of Student's t, which fits of few
// studies need again and again.
var halfBetas = sync.OnceValue(func() *[512]float64 {
	var table [512]float64
	for df := 1; df < len(table); df++ {
		table[df] = lnBeta(float64(df)/2, 0.5)
	}
	return &table
})

// lnHalfBeta returns ln B(a, ½).
func lnHalfBeta(a float64) float64 {
	if df := int(2 * a); float64(df) == 2*a && 0 < df && df < len(halfBetas()) {
		return halfBetas()[df]
	}
	return lnBeta(a, 0.5)
}

// LogFTail returns ln P(F > f) for Fisher's F with d1 and d2 degrees of freedom,
// either of which may be infinite; NaN unless d1, d2 > 0 and f ≥ 0, and where
// both are finite and beyond about 1e10.
func LogFTail(f, d1, d2 float64) float64 {
	switch {
	case !(f >= 0) || !(d1 > 0) || !(d2 > 0):
		return math.NaN()
	case f == 0:
		return 0
	case math.IsInf(f, 1):
		return math.Inf(-1)
	case d1 == 1:
		return ln2 + LogStudentTail(math.Sqrt(f), d2)
	case math.IsInf(d1, 1) && math.IsInf(d2, 1):
		if f < 1 {
			return 0
		}
		return math.Inf(-1)
	case math.IsInf(d2, 1):
		return LogChiSquareTail(d1*f, d1)
	case math.IsInf(d1, 1):
		return logGammaLower(d2/f/2, d2/2)
	}
	q := math.Log1p(d1 / d2 * f)
	if r := math.Log1p(d2 / d1 / f); d1 > 1e8 && d1 > d2 && r < 1e-5 {
		return logGammaLower((d1+d2/2-1)*r/2, d2/2) // the same for the inverse of F
	}
	if d2 > 1e8 && q < 1e-5 {
		// Twice the rate times ln(1 + d1·f/d2) is chi-square up to a relative
		// q²·d1/48: the first term of the expansion of the tail in 1/d2.
		return LogChiSquareTail((d2+d1/2-1)*q, d1)
	}
	return logBetaTails(d2/2, d1/2, q)
}

// logBetaTails returns ln I_x(a, b) for x = exp(-q), by whichever tail converges.
func logBetaTails(a, b, q float64) float64 {
	x, y := math.Exp(-q), -math.Expm1(-q)
	lnY := math.Log(y)
	front := logBetaFront(a, b, x, y, -q, lnY)
	if x < (a+1)/(a+b+2) {
		if x > 0.5 {
			return front - math.Log(a) + math.Log(betaFractionRatio(a, b, x/y))
		}
		return front - math.Log(a) + math.Log(betaFraction(a, b, x))
	}
	return math.Log1p(-math.Exp(front-math.Log(b)) * betaFraction(b, a, y))
}

// logBetaFront returns ln(x^a·y^b/B(a, b)), y = 1 - x. Where both a and b are
// large it is written with the deviations of x and y from their means, which
// keeps the digits that the difference of large terms would lose.
//
// Source of that form: Loader (2000), Fast and accurate computation of binomial
// probabilities.
func logBetaFront(a, b, x, y, lnX, lnY float64) float64 {
	if min(a, b) < stirlingFrom {
		if b == 0.5 {
			return a*lnX + b*lnY - lnHalfBeta(a)
		}
		return a*lnX + b*lnY - lnBeta(a, b)
	}
	n := a + b
	// x = (a/n)(1+u), y = (b/n)(1-u·a/b); both deviances are sums of positive parts.
	u := (b*x - a*y) / a
	deviance := a*lessLog1p(u) + b*lessLog1p(-u*a/b)
	rest := stirlingRest(n) - stirlingRest(a) - stirlingRest(b)
	return 0.5*(math.Log(a)+math.Log(b/n)) - lnSqrt2Pi + rest - deviance
}
