package evidence

import "math"

const (
	// correctionReach is how far the sum in correction goes: beyond, the normal
	// density times G is below 1e-14.
	correctionReach = 8.5
	// correctionStep is the widest step of the sum.
	correctionStep = 0.35
)

// correction returns β of a region in standard errors from the estimate; see
// Location.Correction.
//
// Both expectations are sums over the same equally spaced points. For a function
// that is analytic within a distance d of the real line such a sum errs by about
// exp(-2πd/step). G of one interval has d near 2. Between two intervals a gap g
// apart it bends where one takes over from the other, with d = π/(2g), so the
// step follows the widest gap. A 40-point Gauss-Hermite rule misses those bends
// by up to 5e-4.
//
// Source of the rule: Trefethen & Weideman (2014), SIAM Review 56:385-458.
func (s strips) correction() float64 {
	step := correctionStep
	if gap := s.widestGap(); gap > 0 {
		step = max(0.05, min(step, 0.43/gap))
	}
	centre := s.nearest()
	half := int(correctionReach / step)
	sum := 0.0
	for k := -half; k <= half; k++ {
		v := float64(k) * step
		// The density of U less that of U/√2, times √(2π).
		weight := math.Exp(-0.5*v*v) - math.Sqrt2*math.Exp(-v*v)
		sum += weight * s.lnNormal(math.Sqrt2, centre+v)
	}
	return 0.5 + step*sum/math.Sqrt(2*math.Pi)
}

// widestGap returns the widest gap between neighbouring intervals.
func (s strips) widestGap() float64 {
	widest := 0.0
	for i := 1; i < len(s); i++ {
		widest = max(widest, s[i].low-s[i-1].high)
	}
	return widest
}
