package numeric

import (
	"fmt"
	"math"
)

// golden is the share of the larger part that a golden-section step takes.
const golden = 0.38196601125010515

// minimumTol is the smallest relative tolerance that means anything: near a
// minimum a function changes with the square of the distance.
const minimumTol = 1e-8

// Minimum returns a local minimum of f in [lo, hi] and the value there. x is
// found to within relTol·|x| plus relTol·1e-3·(hi - lo), relTol being raised to
// 1e-8, below which the values of f no longer differ. With one local minimum in
// the interval that is the smallest value; an end of the interval is found to
// that tolerance too.
//
// It returns ErrNotFinite when f gives NaN or an end is not finite, and
// ErrNotConverged at the iteration cap.
//
// Source: Brent (1973), Algorithms for Minimization without Derivatives, ch. 5.
func Minimum(f func(float64) float64, lo, hi, relTol float64) (x, fx float64, err error) {
	if math.IsNaN(lo-hi) || math.IsInf(lo-hi, 0) {
		return 0, 0, fmt.Errorf("minimum between %g and %g: %w", lo, hi, ErrNotFinite)
	}
	a, b := min(lo, hi), max(lo, hi)
	relTol = max(relTol, minimumTol)
	floor := relTol*1e-3*(b-a) + 5e-324
	x = a + golden*(b-a)
	w, v := x, x
	if fx = f(x); math.IsNaN(fx) {
		return 0, 0, notFinite("minimum", x)
	}
	fw, fv := fx, fx
	var step, before float64
	for range solveSteps {
		mid := 0.5 * (a + b)
		tol := relTol*math.Abs(x) + floor
		if math.Abs(x-mid) <= 2*tol-0.5*(b-a) {
			return x, fx, nil
		}
		last := before
		before = step
		var ok bool
		if math.Abs(last) > tol {
			step, ok = parabola(x, w, v, fx, fw, fv, last, a, b)
		}
		switch {
		case !ok && x < mid:
			before = b - x
			step = golden * before
		case !ok:
			before = a - x
			step = golden * before
		case x+step-a < 2*tol || b-x-step < 2*tol:
			step = math.Copysign(tol, mid-x)
		}
		u := x + step
		if math.Abs(step) < tol {
			u = x + math.Copysign(tol, step)
		}
		fu := f(u)
		if math.IsNaN(fu) {
			return 0, 0, notFinite("minimum", u)
		}
		if fu <= fx {
			if u < x {
				b = x
			} else {
				a = x
			}
			v, fv, w, fw, x, fx = w, fw, x, fx, u, fu
			continue
		}
		if u < x {
			a = u
		} else {
			b = u
		}
		switch {
		case fu <= fw || w == x:
			v, fv, w, fw = w, fw, u, fu
		case fu <= fv || v == x || v == w:
			v, fv = u, fu
		}
	}
	return 0, 0, fmt.Errorf("minimum between %g and %g: %w", lo, hi, ErrNotConverged)
}

// parabola returns the step from x to the lowest point of the parabola through
// the three best points, and whether it falls inside (a, b) and is less than
// half the step before last.
func parabola(x, w, v, fx, fw, fv, last, a, b float64) (float64, bool) {
	r := (x - w) * (fx - fv)
	q := (x - v) * (fx - fw)
	num := (x-v)*q - (x-w)*r
	den := 2 * (q - r)
	if den > 0 {
		num = -num
	}
	den = math.Abs(den)
	if !(math.Abs(num) < math.Abs(0.5*den*last)) || num <= den*(a-x) || num >= den*(b-x) {
		return 0, false
	}
	return num / den, true
}
