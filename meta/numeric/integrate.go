package numeric

import (
	"fmt"
	"math"
)

// integratePanels caps the subdivision of Integrate.
const integratePanels = 500

// panel is one part of an integration range with its value, the estimate of
// its error, and the integral of |f|.
type panel struct{ a, b, value, err, size float64 }

// Integrate returns ∫f from lo to hi and an estimate of its absolute error, by
// subdividing the part with the largest error. lo and hi may be infinite; the
// order of the limits sets the sign. The target is relTol·|∫f|, or the rounding
// of ∫|f| where that is larger.
//
// A peak that is narrow against the range can be missed, as by every rule that
// samples: centre and scale the variable first, or integrate piecewise round
// the peak. An infinite range is mapped with its origin at the finite limit, or
// at 0, and with unit scale.
//
// It returns ErrNotFinite when f gives NaN or an infinite value inside the
// range, and ErrNotConverged, beside the best value found, when the target is
// not met.
//
// Source of the rule: Kronrod (1965); Piessens et al. (1983), QUADPACK, for the
// error estimate.
func Integrate(f func(float64) float64, lo, hi, relTol float64) (value, absErr float64, err error) {
	switch {
	case math.IsNaN(lo) || math.IsNaN(hi):
		return 0, 0, fmt.Errorf("integral from %g to %g: %w", lo, hi, ErrNotFinite)
	case lo == hi:
		return 0, 0, nil
	case lo > hi:
		value, absErr, err = Integrate(f, hi, lo, relTol)
		return -value, absErr, err
	}
	switch loInf, hiInf := math.IsInf(lo, -1), math.IsInf(hi, 1); {
	case math.IsInf(lo, 1) || math.IsInf(hi, -1):
		return 0, 0, fmt.Errorf("integral from %g to %g: %w", lo, hi, ErrNotFinite)
	case loInf && hiInf:
		return integrate(func(u float64) float64 {
			x := (1 - u) / u
			return mapped(f(x), u) + mapped(f(-x), u)
		}, 0, 1, relTol)
	case hiInf:
		return integrate(func(u float64) float64 { return mapped(f(lo+(1-u)/u), u) }, 0, 1, relTol)
	case loInf:
		return integrate(func(u float64) float64 { return mapped(f(hi-(1-u)/u), u) }, 0, 1, relTol)
	}
	return integrate(f, lo, hi, relTol)
}

// mapped returns the integrand y·|dx/du| of a half line under x = (1-u)/u, which
// puts infinity at u = 0, where floating-point numbers are finest.
func mapped(y, u float64) float64 {
	if y == 0 {
		return 0
	}
	return y / u / u
}

// integrate is Integrate for finite lo < hi.
func integrate(f func(float64) float64, lo, hi, relTol float64) (value, absErr float64, err error) {
	const start = 8 // first panels, so that fewer peaks are missed
	panels := make([]panel, 0, 64)
	for i := range start {
		a := lo + (hi-lo)*float64(i)/start
		b := lo + (hi-lo)*float64(i+1)/start
		panels = append(panels, kronrod(f, a, b))
	}
	for {
		var total, errs, size Sum
		worst := 0
		for i, p := range panels {
			total.Add(p.value)
			errs.Add(p.err)
			size.Add(p.size)
			if p.err > panels[worst].err {
				worst = i
			}
		}
		value, absErr = total.Value(), errs.Value()
		if math.IsNaN(value) || math.IsInf(value, 0) {
			return 0, 0, fmt.Errorf("integral from %g to %g: %w", lo, hi, ErrNotFinite)
		}
		if absErr <= max(relTol*math.Abs(value), 1e-14*size.Value()) {
			return value, absErr, nil
		}
		p := panels[worst]
		mid := 0.5 * (p.a + p.b)
		if len(panels) == integratePanels || !(p.a < mid && mid < p.b) {
			return value, absErr, fmt.Errorf("integral from %g to %g: %w", lo, hi, ErrNotConverged)
		}
		panels[worst] = kronrod(f, p.a, mid)
		panels = append(panels, kronrod(f, mid, p.b))
	}
}

// kronrod applies the 15-point rule to one panel.
func kronrod(f func(float64) float64, a, b float64) panel {
	mid, half := 0.5*(a+b), 0.5*(b-a)
	var left, right [len(kronrodNodes)]float64
	centre := f(mid)
	fine, coarse, size := kronrodWeights[0]*centre, gaussWeights[0]*centre, kronrodWeights[0]*math.Abs(centre)
	for i := 1; i < len(kronrodNodes); i++ {
		left[i], right[i] = f(mid-half*kronrodNodes[i]), f(mid+half*kronrodNodes[i])
		sum := left[i] + right[i]
		fine += kronrodWeights[i] * sum
		size += kronrodWeights[i] * (math.Abs(left[i]) + math.Abs(right[i]))
		if i%2 == 0 {
			coarse += gaussWeights[i/2] * sum
		}
	}
	mean := 0.5 * fine
	spread := kronrodWeights[0] * math.Abs(centre-mean)
	for i := 1; i < len(kronrodNodes); i++ {
		spread += kronrodWeights[i] * (math.Abs(left[i]-mean) + math.Abs(right[i]-mean))
	}
	p := panel{a: a, b: b, value: fine * half, size: size * half}
	p.err = math.Abs(fine-coarse) * half
	if spread *= half; spread > 0 && p.err > 0 {
		p.err = spread * min(1, math.Pow(200*p.err/spread, 1.5))
	}
	// No rule is better than the rounding of what it adds.
	p.err = max(p.err, 2e-16*p.size)
	return p
}
