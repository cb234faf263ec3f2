package meta

import "math"

// What follows is about f = ln(scatter/weight) of a likelihood, whose sign is that
// of the slope. It rests on
//
//	f' = weightRate − 2·scatterRate,
//	1/weightRate and 1/scatterRate grow by at least the step that τ² makes,
//	1/scatterRate is at most the largest v + τ²,
//
// the second by the inequality of Cauchy and Schwarz, as scatter and weight are
// Σz²λ² and Σλ over numbers λ that fall by dλ/dτ² = −λ²: the eigenvalues of P
// (restricted), or the weights; the third because no λ is below the least weight.

// newtonSteps is how often Newton's method is tried before all maxima are looked
// for; two to five steps are usual.
const newtonSteps = 12

// newtonStep is the relative step after which the point reached by Newton's method
// is exact to 1e-12.
const newtonStep = 1e-7

// onlyMaximum returns the τ² at which the likelihood is highest if a few points
// prove that it has no other maximum; false where they do not.
func (l likelihood) onlyMaximum(zero slopePoint) (float64, bool) {
	if !(zero.slope > 0) {
		return 0, l.fallsFrom(zero)
	}
	p, ok := l.climb(zero)
	if !ok || !l.risesBetween(zero, p, 2) || !l.fallsFrom(p) {
		return 0, false
	}
	return p.tau2 + p.newton(), true
}

// newton returns Newton's step for 1 − weight/scatter, which is straight in τ² for
// studies of equal precision.
func (p slopePoint) newton() float64 { return p.slope / -p.change() }

// change returns f'.
func (p slopePoint) change() float64 { return p.weightRate - 2*p.scatterRate }

// climb follows Newton's method from a point where the likelihood rises to within
// a last step of a maximum, inside a bracket; false where it does not get there.
func (l likelihood) climb(p slopePoint) (slopePoint, bool) {
	low, high := p.tau2, l.top()
	for range newtonSteps {
		next := p.tau2 + p.newton()
		if !(next > low && next < high) {
			next = 0.5 * (low + high)
		}
		p = l.point(next)
		if p.slope > 0 {
			low = p.tau2
		} else {
			high = p.tau2
		}
		if math.Abs(p.newton()) <= newtonStep*p.tau2 {
			return p, true
		}
	}
	return p, false
}

// The proof that the likelihood falls to the end goes in proofSteps strides at most,
// the first of firstStride·(typical v + τ²); a stride that proves something is
// followed by one longer by proofLonger, one that does not is cut to proofShorter.
const (
	proofSteps   = 14
	firstStride  = 2
	proofLonger  = 6
	proofShorter = 0.25
)

// fallsFrom reports whether the likelihood surely falls from a to infinity, a being
// a point where it falls or, to rounding, a maximum.
func (l likelihood) fallsFrom(a slopePoint) bool {
	stride := firstStride / a.weightRate
	for range proofSteps {
		if a.staysBelow(l.data.largest + a.tau2) {
			return true
		}
		b := l.point(a.tau2 + stride)
		if a.staysBelow(b.reachBack(a)) {
			a, stride = b, proofLonger*stride
		} else {
			stride *= proofShorter
		}
	}
	return false
}

// proofMargin is what rounding is allowed in a proof.
const proofMargin = 1e-6

// staysBelow reports whether f stays below 0 from a on as long as scatterRate is at
// least 1/(reach + h), h = τ² − a: then
//
//	scatter ≤ scatter(a)·(1 + h/reach)⁻²,  weight ≥ weight(a)·(1 + h·weightRate(a))⁻¹,
//
// and the ratio of the two is below 1 for every h > 0 unless a quadratic has roots.
// At a maximum that condition reads reach·weightRate ≤ 2: f falls throughout.
func (a slopePoint) staysBelow(reach float64) bool {
	ratio := min(1, a.slope+1)
	return a.weightRate > 0 && ratio*reach*a.weightRate < (2-proofMargin)*(1+math.Sqrt(1-ratio))
}

// reachBack returns the reach for staysBelow from a on, as far as to b.
func (b slopePoint) reachBack(a slopePoint) float64 { return 1/b.scatterRate - (b.tau2 - a.tau2) }

// fallsTo reports whether f surely falls from a to b.
func (a slopePoint) fallsTo(b slopePoint) bool {
	return a.weightRate > 0 && b.reachBack(a)*a.weightRate < 2-proofMargin
}

// risesBetween reports whether f is surely above 0 from a on until b, a maximum to
// rounding, dividing the way at most depth times. With H = b − a and h = b − τ²,
//
//	scatter ≥ scatter(b)/(1 − h·scatterRate(b))²,
//	weight ≤ weight(b)·(1/weightRate(a) + H)/(1/weightRate(a) + H − h),
//
// and f is above 0 where a convex function of h, 0 at b, is below 0: it is so
// throughout if it is so at a.
func (l likelihood) risesBetween(a, b slopePoint, depth int) bool {
	width := b.tau2 - a.tau2
	left := 1 - width*b.scatterRate
	if left*left*(1+width*a.weightRate)+proofMargin*width*b.scatterRate < b.slope+1 || a.fallsTo(b) {
		return true
	}
	if depth == 0 {
		return false
	}
	// Halfway in the logarithm of typical v + τ².
	middle := l.point(a.tau2 + (math.Sqrt(1+width*a.weightRate)-1)/a.weightRate)
	return middle.slope > 0 && l.risesBetween(a, middle, depth-1) && l.risesBetween(middle, b, depth-1)
}
