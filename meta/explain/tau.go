package explain

import (
	"fmt"
	"math"

	"steelyard/meta"
	"steelyard/meta/numeric"
)

// rootTolerance is the relative accuracy asked of iterative roots.
const rootTolerance = 1e-12

// estimate returns τ² left by the regression, in squared working units, by a
// method's form for regressions: each sets a quadratic form of the residuals equal
// to its expectation E yᵀP_a y = tr P_a V + τ² tr P_a, or maximises a likelihood.
// With the intercept alone they are the estimators of the package meta.
//
// Sources: Thompson & Sharp (1999), Statistics in Medicine 18:2693-2708; DerSimonian
// & Kacker (2007), Contemporary Clinical Trials 28:105-114; Sidik & Jonkman (2005),
// Journal of the Royal Statistical Society C 54:367-384; Raudenbush (2009) in The
// Handbook of Research Synthesis and Meta-Analysis.
func (m *system) estimate(method meta.TauMethod) (float64, error) {
	switch method {
	case meta.DefaultTau: // a common effect
		return 0, nil
	case meta.DerSimonianLaird:
		return m.byMoments(0), nil
	case meta.TwoStepDerSimonianLaird:
		return m.byMoments(m.byMoments(0)), nil
	case meta.HedgesOlkin:
		squares, variance := m.unweighted()
		return max(0, squares/m.df()-variance), nil
	case meta.HunterSchmidt:
		zero := m.fit(0)
		return max(0, (zero.q-float64(m.k))/zero.weight), nil
	case meta.SidikJonkman:
		start := m.variance()
		if start == 0 {
			return 0, nil
		}
		return start * m.fit(start).q / m.df(), nil
	case meta.PauleMandel:
		return m.whereQ(m.df())
	case meta.MaximumLikelihood:
		return m.highest(false)
	case meta.RestrictedML:
		return m.highest(true)
	}
	return 0, &meta.ModelError{Problem: fmt.Sprintf("%v cannot estimate τ² of a regression", method)}
}

// byMoments returns max(0, (Q − tr PV)/tr P) with the weights of a first τ².
func (m *system) byMoments(first float64) float64 {
	f := m.fit(first)
	return max(0, (f.q-f.spread)/f.trace)
}

// variance returns Σ(y − ȳ)²/k.
func (m *system) variance() float64 {
	var sum numeric.Sum
	for _, y := range m.y {
		sum.Add(y)
	}
	mean := sum.Value() / float64(m.k)
	var squares numeric.Sum
	for _, y := range m.y {
		squares.Add((y - mean) * (y - mean))
	}
	return squares.Value() / float64(m.k)
}

// whereQ returns the τ² at which the residual Q is target, 0 where Q(0) is at or
// below it. Q falls as τ² grows and is at most the plain residual sum over τ².
func (m *system) whereQ(target float64) (float64, error) {
	if m.fit(0).q <= target {
		return 0, nil
	}
	squares, _ := m.unweighted()
	excess := func(tau2 float64) float64 { return target/m.fit(tau2).q - 1 }
	root, err := numeric.Root(excess, 0, squares/target*(1+1e-6), rootTolerance)
	if err != nil {
		return 0, fmt.Errorf("τ² where the residual Q is %.6g: %w", target, err)
	}
	return root, nil
}

// likelihood is the log-likelihood of τ², restricted or full, of a system.
type likelihood struct {
	of         *system
	restricted bool
}

// slopeAt is the sign-giving part of the slope at one τ²: scatter/weight − 1. Both
// fall as τ² grows, as dP/dτ² = −P².
type slopeAt struct{ tau2, scatter, weight float64 }

func (s slopeAt) rises() bool { return s.scatter > s.weight }

func (l likelihood) slope(tau2 float64) slopeAt {
	f := l.of.fit(tau2)
	if l.restricted {
		return slopeAt{tau2, f.scatter, f.trace}
	}
	return slopeAt{tau2, f.scatter, f.weight}
}

func (l likelihood) value(tau2 float64) float64 {
	f := l.of.fit(tau2)
	var logs numeric.Sum
	for _, v := range l.of.v {
		logs.Add(math.Log(v + tau2))
	}
	logs.Add(f.q)
	if l.restricted {
		logs.Add(f.logDet)
	}
	return -0.5 * logs.Value()
}

// top returns a τ² from which on the likelihood falls: there the scatter, at most
// S/τ⁴ for the plain residual sum S, is below (k − p)/(τ² + largest v), which both
// weights exceed.
func (l likelihood) top() float64 {
	squares, _ := l.of.unweighted()
	largest := 0.0
	for _, v := range l.of.v {
		largest = max(largest, v)
	}
	half := squares / (2 * l.of.df())
	return 1.001 * (half + math.Sqrt(half*half+2*half*largest))
}

// closest is the ratio of two τ² from which on a stretch of one sign is not divided
// further.
var closest = math.Exp(1. / 32)

// peaks appends the maxima between two points. Where scatter stays on one side of
// weight whatever both do in between, there is none.
func (l likelihood) peaks(into []float64, left, right slopeAt) ([]float64, error) {
	const margin = 1 + 1e-9
	if margin*left.scatter < right.weight || right.scatter > margin*left.weight {
		return into, nil
	}
	near := right.tau2 <= closest*left.tau2
	if left.rises() && !right.rises() && near {
		tau2, err := numeric.Root(func(t float64) float64 {
			s := l.slope(t)
			return 1 - s.weight/s.scatter
		}, left.tau2, right.tau2, rootTolerance)
		if err != nil {
			return into, fmt.Errorf("maximum of the likelihood of τ²: %w", err)
		}
		return append(into, tau2), nil
	}
	if near {
		return into, nil
	}
	middle := l.slope(math.Sqrt(left.tau2) * math.Sqrt(right.tau2))
	into, err := l.peaks(into, left, middle)
	if err != nil {
		return into, err
	}
	return l.peaks(into, middle, right)
}

// highest returns the τ² of the highest of all maxima, 0 included.
func (m *system) highest(restricted bool) (float64, error) {
	l := likelihood{m, restricted}
	best, height := 0.0, l.value(0)
	top := l.top()
	low := 0.01 * m.v[0] // below it the slope is straight to 1 %
	if top <= low {
		return best, nil
	}
	zero, first := l.slope(0), l.slope(low)
	var found []float64
	var err error
	if zero.rises() && !first.rises() {
		var tau2 float64
		tau2, err = numeric.Root(func(t float64) float64 {
			s := l.slope(t)
			return s.scatter/s.weight - 1
		}, 0, low, rootTolerance)
		if err != nil {
			return 0, fmt.Errorf("maximum of the likelihood of τ²: %w", err)
		}
		found = append(found, tau2)
	}
	if found, err = l.peaks(found, first, l.slope(top)); err != nil {
		return 0, err
	}
	for _, tau2 := range found {
		if h := l.value(tau2); h > height {
			best, height = tau2, h
		}
	}
	return best, nil
}
