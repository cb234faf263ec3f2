package meta

import (
	"fmt"
	"math"

	"steelyard/meta/numeric"
)

// rootTolerance is the relative accuracy asked of iterative roots.
const rootTolerance = 1e-12

// rootSteps caps Newton's steps towards a root; a handful is usual, and every step
// but the last few doubles τ² at least where the studies differ very much.
const rootSteps = 2000

// estimateTau2 returns the estimate of τ² by a method, in squared working units;
// 0 for a single study. p.zero must have been worked out last.
//
// Sources, gathered by Veroniki et al. (2016), Research Synthesis Methods
// 7:55-79: DerSimonian & Laird (1986); DerSimonian & Kacker (2007); Hedges &
// Olkin (1985); Hunter & Schmidt; Sidik & Jonkman (2005); Paule & Mandel (1982).
func (p *Pooler) estimateTau2(method TauMethod) (float64, error) {
	d := &p.data
	if d.k() < 2 {
		return 0, nil
	}
	switch method {
	case DerSimonianLaird:
		return dersimonianLaird(p.zero, d.df()), nil
	case TwoStepDerSimonianLaird:
		return twoStep(d, p.zero), nil
	case HedgesOlkin:
		return max(0, d.scatter()/d.df()-d.meanVariance()), nil
	case HunterSchmidt:
		return max(0, (p.zero.q-float64(d.k()))/p.zero.w), nil
	case SidikJonkman:
		return sidikJonkman(d), nil
	case PauleMandel:
		return tau2WhereQ(d, p.zero, d.df())
	case MaximumLikelihood:
		l := likelihood{data: d, kind: fullLikelihood}
		return p.highestMode(l, l.pointOf(p.zero))
	case RestrictedML:
		l := likelihood{data: d, kind: restrictedLikelihood}
		return p.highestMode(l, l.pointOf(p.zero))
	}
	return 0, &ModelError{Problem: fmt.Sprintf("%v cannot estimate τ²: choose one of its estimators", method)}
}

// dersimonianLaird returns max(0, (Q − (k−1))/(Σw − Σw²/Σw)) with w = 1/v, of
// the moments at τ² = 0.
func dersimonianLaird(zero moments, df float64) float64 { return max(0, (zero.q-df)/zero.c) }

// twoStep returns DerSimonian and Kacker's two-step estimate: with weights
// a = 1/(v + first step) and A = Σa,
//
//	max(0, (Σa(y − mean)² − Σav + Σa²v/A) / (A − Σa²/A)).
func twoStep(d *sample, zero moments) float64 {
	m := d.at(dersimonianLaird(zero, d.df()))
	var expected, rest numeric.Sum // Σav(1 − a/A): its mean if τ² were 0
	for i, a := range d.w {
		if i != d.best {
			expected.Add(a * d.v[i] * (1 - a/m.w))
			rest.Add(a)
		}
	}
	expected.Add(d.w[d.best] * d.v[d.best] * (rest.Value() / m.w))
	return max(0, (m.q-expected.Value())/m.c)
}

// sidikJonkman returns τ₀²·Q(τ₀²)/(k−1) with τ₀² = Σ(y − ȳ)²/k, which is
// Σ(y − μ)²/r/(k−1), r = v/τ₀² + 1; 0 only if all estimates are equal.
func sidikJonkman(d *sample) float64 {
	start := d.scatter() / float64(d.k())
	return start * d.at(start).q / d.df()
}

// tau2WhereQ returns the τ² at which the generalised Q(τ²) = Σw(y − mean)²
// equals target, or 0 where Q(0) is at or below it; zero are the moments at 0.
//
// 1/Q rises with τ² and is concave, by the inequality of Cauchy and Schwarz, so
// that Newton's steps from 0 close in on the root from below. dQ/dτ² is
// −Σw²(y − mean)².
func tau2WhereQ(d *sample, zero moments, target float64) (float64, error) {
	m := zero
	if m.q <= target {
		return 0, nil
	}
	for range rootSteps {
		step := (m.q/target - 1) * (m.q / m.s)
		next := m.tau2 + step
		if math.Abs(step) <= newtonStep*next {
			return next, nil
		}
		m = d.at(next)
	}
	return 0, fmt.Errorf("τ² where Q is %.6g: %w", target, numeric.ErrNotConverged)
}
