package bayes

import (
	"errors"
	"math"
	"slices"

	"steelyard/meta/numeric"
)

const (
	// normalReach is the distance in standard errors beyond which a normal
	// likelihood is left out.
	normalReach = 40
	// panelRatio is how much further each panel ends than the one before: the
	// Cauchy density changes with the logarithm of the distance.
	panelRatio = 8
)

// lnCauchyFactor returns the Bayes factor under a Cauchy prior of scale r, in
// standard errors: the mean of the two halves.
func lnCauchyFactor(z, r float64) (float64, error) {
	above, err1 := lnHalfCauchyFactor(z, r)
	below, err2 := lnHalfCauchyFactor(-z, r)
	return lnSum(above, below) - math.Ln2, errors.Join(err1, err2)
}

// lnHalfCauchyFactor returns the Bayes factor under a Cauchy prior cut off below
// 0, ln of
//
//	(2/πr) ∫ exp(zθ − θ²/2)/(1 + θ²/r²) dθ,  θ > 0,
//
// in panels that follow both peaks: the prior's at 0 and the likelihood's at z.
func lnHalfCauchyFactor(z, r float64) (float64, error) {
	lnPrior := func(theta float64) float64 { return -2 * math.Log(math.Hypot(1, theta/r)) }
	near := func(theta float64) float64 { return theta*(z-0.5*theta) + lnPrior(theta) }
	scale := math.Log(2/math.Pi) - math.Log(r)
	if z <= 0 {
		end := min(normalReach, normalReach*normalReach/math.Abs(z)) // z may be 0
		ln, err := lnOver(near, growing(end, min(r, 1, end)))
		return ln + scale, err
	}
	// Up to z/2 the variable is θ, beyond it u = θ − z, so that neither peak is
	// lost in rounding.
	below, err1 := lnOver(near, growing(0.5*z, min(r, 1)))
	far := func(u float64) float64 { return -0.5*u*u + lnPrior(z+u) }
	left := growing(min(0.5*z, normalReach), 1)
	for i := range left {
		left[i] = -left[i]
	}
	slices.Reverse(left)
	around, err2 := lnOver(far, append(left, growing(normalReach, 1)[1:]...))
	return lnSum(below, 0.5*z*z+around) + scale, errors.Join(err1, err2)
}

// growing returns cuts from 0 to end, the first panel ending at first and each
// other panelRatio times as far as the one before.
func growing(end, first float64) []float64 {
	cuts := []float64{0}
	for step := first; step < end; step *= panelRatio {
		cuts = append(cuts, step)
	}
	return append(cuts, end)
}

// lnOver returns ln ∫exp(f) over panels.
func lnOver(f func(float64) float64, cuts []float64) (float64, error) {
	height := math.Inf(-1)
	for i, x := range cuts {
		height = max(height, f(x))
		if i > 0 {
			height = max(height, f(0.5*(cuts[i-1]+x)))
		}
	}
	// exp(f) is no surer than the rounding of f.
	tolerance := max(1e-11, 1e-14*math.Abs(height))
	total, doubt := 0.0, 0.0
	for i := 1; i < len(cuts); i++ {
		area, absErr, err := numeric.Integrate(func(x float64) float64 { return math.Exp(f(x) - height) }, cuts[i-1], cuts[i], tolerance)
		if err != nil && !errors.Is(err, numeric.ErrNotConverged) {
			return 0, ErrOutOfRange
		}
		total += area
		doubt += absErr
	}
	if !(doubt <= 100*tolerance*total) && total > 0 {
		return 0, ErrOutOfRange
	}
	return height + math.Log(max(total, math.SmallestNonzeroFloat64)), nil
}
