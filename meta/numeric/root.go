package numeric

import (
	"errors"
	"fmt"
	"math"
)

var (
	// ErrNoBracket reports that a function has the same sign at both ends of the
	// interval in which a root was looked for.
	ErrNoBracket = errors.New("no sign change between the ends of the interval; widen it")
	// ErrNotFinite reports that a function gave NaN, or an infinite value where a
	// finite one is needed.
	ErrNotFinite = errors.New("the function is not a finite number there")
	// ErrNotConverged reports that an iteration or a subdivision reached its cap
	// before its tolerance.
	ErrNotConverged = errors.New("tolerance not reached; loosen it or narrow the interval")
)

// solveSteps caps the iterations of Root and Minimum. Bisection alone needs
// about 1,100 to cross the range of a float64 down to its smallest value.
const solveSteps = 1200

// Root returns an x in [lo, hi] with f(x) = 0, to within relTol·|x| or the
// resolution of a float64, whichever is wider. f must differ in sign at the two
// ends, or be 0 at one of them; infinite values are taken by their sign.
//
// It returns ErrNoBracket when the signs agree, ErrNotFinite when f gives NaN or
// an end is not finite, and ErrNotConverged at the iteration cap.
//
// Source: Brent (1973), Algorithms for Minimization without Derivatives, ch. 4.
func Root(f func(float64) float64, lo, hi, relTol float64) (float64, error) {
	if math.IsNaN(lo-hi) || math.IsInf(lo-hi, 0) {
		return 0, fmt.Errorf("root between %g and %g: %w", lo, hi, ErrNotFinite)
	}
	a, b := lo, hi
	fa, fb := f(a), f(b)
	switch {
	case math.IsNaN(fa):
		return 0, notFinite("root", a)
	case math.IsNaN(fb):
		return 0, notFinite("root", b)
	case fa == 0:
		return a, nil
	case fb == 0:
		return b, nil
	case (fa > 0) == (fb > 0):
		return 0, fmt.Errorf("root between %g and %g: %w", lo, hi, ErrNoBracket)
	}
	c, fc := a, fa // the end opposite to b
	step, before := b-a, b-a
	for range solveSteps {
		if math.Abs(fc) < math.Abs(fb) {
			a, b, c = b, c, b
			fa, fb, fc = fb, fc, fb
		}
		tol := tolerance(b, relTol)
		half := 0.5 * (c - b)
		if math.Abs(half) <= tol || fb == 0 {
			return b, nil
		}
		step, before = rootStep(rootPoints{a, b, c, fa, fb, fc}, step, before, half, tol)
		a, fa = b, fb
		if math.Abs(step) > tol {
			b += step
		} else {
			b += math.Copysign(tol, half)
		}
		if fb = f(b); math.IsNaN(fb) {
			return 0, notFinite("root", b)
		}
		if (fb > 0) == (fc > 0) {
			c, fc = a, fa
			step, before = b-a, b-a
		}
	}
	return 0, fmt.Errorf("root between %g and %g: %w", lo, hi, ErrNotConverged)
}

// tolerance is half the width at which x counts as found.
func tolerance(x, relTol float64) float64 {
	return 2e-16*math.Abs(x) + 0.5*max(relTol, 0)*math.Abs(x) + 5e-324
}

func notFinite(what string, x float64) error {
	return fmt.Errorf("%s at %g: %w", what, x, ErrNotFinite)
}

// rootPoints are the last, the best and the opposite point with their values.
type rootPoints struct{ a, b, c, fa, fb, fc float64 }

// rootStep returns the next step from b and the one before it: interpolation
// where that is safe, else half the interval.
func rootStep(p rootPoints, step, before, half, tol float64) (next, last float64) {
	if math.Abs(before) < tol || !(math.Abs(p.fa) > math.Abs(p.fb)) || math.IsInf(p.fa, 0) {
		return half, half
	}
	s := p.fb / p.fa
	var num, den float64
	if p.a == p.c {
		num, den = 2*half*s, 1-s // secant
	} else { // inverse quadratic
		q, r := p.fa/p.fc, p.fb/p.fc
		num = s * (2*half*q*(q-r) - (p.b-p.a)*(r-1))
		den = (q - 1) * (r - 1) * (s - 1)
	}
	if num > 0 {
		den = -den
	}
	num = math.Abs(num)
	if 2*num < min(3*half*den-math.Abs(tol*den), math.Abs(before*den)) {
		return num / den, step
	}
	return half, half
}
