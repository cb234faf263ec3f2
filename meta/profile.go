package meta

import (
	"fmt"
	"math"

	"steelyard/meta/numeric"
)

// profileSteps is how many points the search for the ends of a profile interval
// looks at before it refines the best of them.
const profileSteps = 48

// profile returns the profile-likelihood interval for the mean, all μ whose
// profile log-likelihood lies within z²/2 of the maximum, with evidence in the
// normal form at the signed root of the likelihood ratio against the null.
//
// Source: Hardy & Thompson (1996), Statistics in Medicine 15:619-629.
func (p *Pooler) profile() (answer, error) {
	full := likelihood{data: &p.data, kind: fullLikelihood}
	p.compareModes(full)
	a := answer{estimate: p.final.mean, se: p.final.se(), df: infinite}
	critical := numeric.NormalCritical(1 - p.model.Level)
	cut := p.height - 0.5*critical*critical
	limits, err := p.tau2Above(full, cut)
	if err != nil {
		return a, err
	}
	if a.high, err = p.profileEnd(full, cut, limits, 1); err != nil {
		return a, err
	}
	if a.low, err = p.profileEnd(full, cut, limits, -1); err != nil {
		return a, err
	}
	top := p.height
	held := likelihood{data: &p.data, kind: fixedMeanLikelihood, mean: p.null}
	if _, err = p.highestMode(held, held.point(0)); err != nil {
		return a, err
	}
	p.compareModes(held)
	z := math.Copysign(math.Sqrt(2*max(0, top-p.height)), a.estimate-p.null)
	a.statistic = z
	a.lnP = math.Ln2 + numeric.LogNormalTail(math.Abs(z))
	return a.located(z, p.null, p.model.Level), nil
}

// profileEnd returns the upper (side 1) or lower (side −1) end of all μ with
// log-likelihood ≥ cut for some τ². At a given τ² they are
//
//	mean(τ²) ± √(2(l(τ²) − cut)/Σw),
//
// so that the end is the furthest of these over the τ² whose own profile
// likelihood l is above the cut, which lie within limits.
func (p *Pooler) profileEnd(l likelihood, cut float64, limits Limits, side float64) (float64, error) {
	inward := func(tau2 float64) float64 {
		m := p.data.at(tau2)
		return -(side*m.mean + math.Sqrt(2*max(0, l.value(tau2)-cut)/m.w))
	}
	if !(limits.High > limits.Low) {
		return -side * inward(limits.Low), nil
	}
	// Equal steps in ln(τ² + offset) place points evenly for small and large τ².
	offset := 0.1 * p.data.v[p.data.best]
	low, high := math.Log(limits.Low+offset), math.Log(limits.High+offset)
	node := func(i int) float64 {
		switch i {
		case 0:
			return limits.Low
		case profileSteps:
			return limits.High
		}
		return math.Exp(low+(high-low)*float64(i)/profileSteps) - offset
	}
	best := math.Inf(1)
	before, here := math.Inf(1), inward(node(0))
	for i := range profileSteps + 1 {
		after := math.Inf(1)
		if i < profileSteps {
			after = inward(node(i + 1))
		}
		if here <= before && here <= after {
			_, furthest, err := numeric.Minimum(inward, node(max(0, i-1)), node(min(profileSteps, i+1)), 1e-9)
			if err != nil {
				return 0, fmt.Errorf("profile-likelihood limit of the mean: %w", err)
			}
			best = min(best, here, furthest)
		}
		before, here = here, after
	}
	return -side * best, nil
}

// tau2Above returns the smallest and the largest τ² whose likelihood is at least
// cut. p.modes must hold all maxima of l with their heights, and cut lie at or
// below the highest: before the first maximum above the cut, and past the last,
// the likelihood crosses the cut once.
func (p *Pooler) tau2Above(l likelihood, cut float64) (Limits, error) {
	first, last := -1, -1
	for i, m := range p.modes {
		if m.logL >= cut {
			last = i
			if first < 0 {
				first = i
			}
		}
	}
	var limits Limits
	if first < 0 {
		return limits, &ModelError{Problem: "the likelihood of τ² has no maximum for these data: use the Q-profile interval"}
	}
	over := func(tau2 float64) float64 { return l.value(tau2) - cut }
	var err error
	if over(0) < 0 {
		if limits.Low, err = numeric.Root(over, 0, p.modes[first].tau2, rootTolerance); err != nil {
			return limits, fmt.Errorf("profile-likelihood limit of τ²: %w", err)
		}
	}
	beyond := 2*p.modes[last].tau2 + p.data.v[p.data.best]
	for over(beyond) > 0 {
		beyond *= 4
	}
	if limits.High, err = numeric.Root(over, p.modes[last].tau2, beyond, rootTolerance); err != nil {
		return limits, fmt.Errorf("profile-likelihood limit of τ²: %w", err)
	}
	return limits, nil
}
