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
	// Up to z/2 the variable is θ, beyond it θ − z, so that neither peak is lost
	// in rounding.
	lnPrior := func(theta float64) float64 { return -2 * math.Log(math.Hypot(1, theta/r)) }
	near := func(theta float64) float64 { return theta*(z-0.5*theta) + lnPrior(theta) }
	far := func(u float64) float64 { return 0.5*z*z - 0.5*u*u + lnPrior(z+u) }
	half := max(0, 0.5*z)
	end := normalReach + 0.0
	if z < 0 {
		end = min(normalReach, normalReach*normalReach/-z)
	}
	total := math.Inf(-1)
	add := func(f func(float64) float64, cuts []float64) error {
		ln, err := lnOver(f, cuts)
		total = lnSumAny(total, ln)
		return err
	}
	if half == 0 {
		end = min(end, normalReach)
		if err := add(near, growing(0, end, min(r, 1, end))); err != nil {
			return 0, err
		}
		return total + math.Log(2/math.Pi) - math.Log(r), nil
	}
	if err := add(near, growing(0, half, min(r, 1))); err != nil {
		return 0, err
	}
	left := growing(0, min(half, normalReach), 1)
	for i := range left {
		left[i] = -left[i]
	}
	slices.Reverse(left)
	if err := add(far, append(left, growing(0, normalReach, 1)[1:]...)); err != nil {
		return 0, err
	}
	return total + math.Log(2/math.Pi) - math.Log(r), nil
}

// growing returns cuts from a to b, the first step being first and each panel
// ending panelRatio times as far.
func growing(a, b, first float64) []float64 {
	cuts := []float64{a}
	for step := first; a+step < b; step *= panelRatio {
		cuts = append(cuts, a+step)
	}
	return append(cuts, b)
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
	total := 0.0
	for i := 1; i < len(cuts); i++ {
		if cuts[i-1] == cuts[i] {
			continue
		}
		area, absErr, err := numeric.Integrate(func(x float64) float64 { return math.Exp(f(x) - height) }, cuts[i-1], cuts[i], 1e-11)
		if err != nil && !(absErr <= 1e-11*total) {
			return 0, ErrOutOfRange
		}
		total += area
	}
	return height + math.Log(total), nil
}

// lnSumAny is lnSum that takes −Inf too.
func lnSumAny(a, b float64) float64 {
	if math.IsInf(a, -1) {
		return b
	}
	if math.IsInf(b, -1) {
		return a
	}
	return lnSum(a, b)
}
