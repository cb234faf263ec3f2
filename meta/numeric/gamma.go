package numeric

import "math"

const (
	lnSqrt2Pi = 0.91893853320467274178 // ln √(2π)
	lnSqrtPi  = 0.57236494292470008707 // ln √π
	ln2       = math.Ln2
)

// stirlingFrom is where the asymptotic series of lnΓ and ψ are used directly;
// smaller arguments are shifted up to it. At 12 the first term left out is below
// 1e-18.
const stirlingFrom = 12

// LogGamma returns lnΓ(x) for x > 0; +Inf at 0 and at +Inf, NaN below 0.
func LogGamma(x float64) float64 {
	if !(x >= 0) {
		return math.NaN()
	}
	v, _ := math.Lgamma(x)
	return v
}

// stirlingRest returns lnΓ(x) - [(x-½) ln x - x + ½ ln 2π] for x ≥ stirlingFrom.
//
// Source: Abramowitz & Stegun (1964), 6.1.41.
func stirlingRest(x float64) float64 {
	if math.IsInf(x, 1) {
		return 0
	}
	r := 1 / x
	q := r * r
	return r * (1./12 - q*(1./360-q*(1./1260-q*(1./1680-q*(1./1188-q*(691./360360-q*(1./156-q*3617./122400)))))))
}

// LogGammaRatio returns lnΓ(a) - lnΓ(b) for a, b > 0, keeping its digits where
// both are large. See LogGammaRise for a difference a - b that is known better
// than a is.
func LogGammaRatio(a, b float64) float64 {
	if !(a > 0) || !(b > 0) {
		return math.NaN()
	}
	switch {
	case a == b:
		return 0
	case a < b:
		return -LogGammaRise(a, b-a)
	}
	return LogGammaRise(b, a-b)
}

// LogGammaRise returns lnΓ(b+d) - lnΓ(b) for b > 0 and b + d > 0, keeping its
// digits for any size of b: it tends to d·ln b.
func LogGammaRise(b, d float64) float64 {
	if !(b > 0) || !(b+d > 0) {
		return math.NaN()
	}
	if d == 0 {
		return 0
	}
	if math.IsInf(b, 1) {
		return math.Inf(1) * d
	}
	if math.IsInf(d, 1) {
		return math.Inf(1)
	}
	shifted := 0.0
	if low := min(b, b+d); low < stirlingFrom {
		for n := math.Ceil(stirlingFrom - low); n > 0; n-- {
			shifted += logRatio(b, d)
			b++
		}
	}
	a := b + d
	// (a-½) ln a - a - (b-½) ln b + b with the large parts taken together.
	return (b-0.5)*logRatio(b, d) - d + d*math.Log(a) + stirlingRise(b, d) - shifted
}

// stirlingRise returns stirlingRest(b+d) - stirlingRest(b), by the derivative
// where the difference would lose it.
func stirlingRise(b, d float64) float64 {
	if math.Abs(d) < 1e-4 {
		mid := b + 0.5*d
		return d * (digammaRest(mid) + 0.5/mid)
	}
	return stirlingRest(b+d) - stirlingRest(b)
}

// logRatio returns ln((b+d)/b).
func logRatio(b, d float64) float64 {
	if r := d / b; math.Abs(r) < 0.5 {
		return math.Log1p(r)
	}
	return math.Log(b+d) - math.Log(b)
}

// Digamma returns ψ(x), the derivative of lnΓ, for x > 0; NaN elsewhere.
func Digamma(x float64) float64 {
	if !(x > 0) {
		return math.NaN()
	}
	if math.IsInf(x, 1) {
		return x
	}
	shifted := 0.0
	for ; x < stirlingFrom; x++ {
		shifted += 1 / x
	}
	return math.Log(x) + digammaRest(x) - shifted
}

// DigammaLessLog returns ψ(x) - ln x for x > 0, which tends to -1/(2x), to full
// relative precision for large x; 0 at +Inf, NaN for x ≤ 0.
func DigammaLessLog(x float64) float64 {
	if x >= stirlingFrom {
		return digammaRest(x)
	}
	return Digamma(x) - math.Log(x)
}

// digammaRest returns ψ(x) - ln x for x ≥ stirlingFrom.
//
// Source: Abramowitz & Stegun (1964), 6.3.18.
func digammaRest(x float64) float64 {
	r := 1 / x
	q := r * r
	return -0.5*r - q*(1./12-q*(1./120-q*(1./252-q*(1./240-q*(1./132-q*(691./32760-q*(1./12-q*3617./8160)))))))
}

// lessLog1p returns u - ln(1+u) for u > -1 without cancellation near 0.
func lessLog1p(u float64) float64 {
	if math.Abs(u) > 0.4 {
		return u - math.Log1p(u)
	}
	// ln(1+u) = 2 artanh(r), r = u/(2+u), and u - 2r = u·r.
	r := u / (2 + u)
	q := r * r
	sum, power := 0.0, 1.0
	for k := 3.0; k < 60; k += 2 {
		term := power / k
		sum += term
		if term < 1e-17*sum {
			break
		}
		power *= q
	}
	return u*r - 2*r*q*sum
}
