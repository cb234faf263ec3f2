package bayes

import (
	"math"

	"steelyard/meta/numeric"
)

// node is a value of τ with its share of the posterior, and what the posterior of
// the mean effect is given it: normal, with mean and variance.
type node struct{ tau, weight, mean, variance float64 }

const (
	// nodeStep is the distance of nodes in ln τ that is tried first.
	nodeStep = 0.1
	// mostNodes caps their number.
	mostNodes = 1 << 17
	// nodeTolerance is how well their sum must agree with the adaptive quadrature.
	nodeTolerance = 1e-9
	// roundedTolerance is how well where rounding allows no better.
	roundedTolerance = 1e-5
	// lightest is the share below which a node is left out.
	lightest = 1e-18
)

// nodes returns the posterior of τ as a rule equally spaced in ln τ, halved until its
// sum agrees with that of the adaptive quadrature: for an analytic integrand that
// vanishes at both ends the error falls faster than any power of the step. Where
// rounding of the integrand keeps them apart, agreement that no longer improves is
// enough if it is within roundedTolerance.
func (p *marginal) nodes() ([]node, error) {
	from, to := p.mass.panels[0][0], p.mass.panels[len(p.mass.panels)-1][1]
	step := min(nodeStep, (to-from)/16)
	for before := math.Inf(1); (to-from)/step < mostNodes; step /= 2 {
		density, total := p.equallySpaced(from, to, step)
		off := math.Abs(total-p.total) / p.total
		if off <= nodeTolerance || (off <= roundedTolerance && off > before/2) {
			return p.nodesAt(from, step, density, total), nil
		}
		before = off
	}
	return nil, ErrOutOfRange
}

// equallySpaced returns the density of ln τ times step at equal steps, and its sum.
func (p *marginal) equallySpaced(from, to, step float64) (density []float64, total float64) {
	density = make([]float64, int((to-from)/step)+1)
	for i := range density {
		density[i] = step * math.Exp(min(separate, p.f(from+step*float64(i))-p.mass.height))
		total += density[i]
	}
	return density, total
}

// nodesAt returns the nodes that weigh anything.
func (p *marginal) nodesAt(from, step float64, density []float64, total float64) []node {
	var list []node
	for i, weight := range density {
		if share := weight / total; share > lightest {
			tau := math.Exp(from + step*float64(i))
			m := p.d.at(tau)
			list = append(list, node{tau: tau, weight: share, mean: m.mean, variance: 1 / m.w})
		}
	}
	return list
}

// mixture is a distribution that is normal given τ.
type mixture struct{ weight, mean, sd []float64 }

// mixed returns the mixture over nodes of the normal laws that part gives.
func mixed(nodes []node, part func(n node) (mean, variance float64)) mixture {
	m := mixture{weight: make([]float64, len(nodes)), mean: make([]float64, len(nodes)), sd: make([]float64, len(nodes))}
	for i, n := range nodes {
		mean, variance := part(n)
		m.weight[i], m.mean[i], m.sd[i] = n.weight, mean, math.Sqrt(variance)
	}
	return m
}

// below returns the probability of a value under x.
func (m mixture) below(x float64) float64 {
	var total numeric.Sum
	for i, w := range m.weight {
		total.Add(w * numeric.NormalTail((m.mean[i]-x)/m.sd[i]))
	}
	return min(1, total.Value())
}

// above returns the probability of a value over x, to its own relative accuracy.
func (m mixture) above(x float64) float64 {
	var total numeric.Sum
	for i, w := range m.weight {
		total.Add(w * numeric.NormalTail((x-m.mean[i])/m.sd[i]))
	}
	return min(1, total.Value())
}

// average returns the mean of the mixture.
func (m mixture) average() float64 {
	var total numeric.Sum
	for i, w := range m.weight {
		total.Add(w * m.mean[i])
	}
	return total.Value()
}

// quantile returns the value under which the mixture has a chance.
func (m mixture) quantile(chance float64) (float64, error) {
	centre, spread := m.average(), 0.0
	for i, w := range m.weight {
		spread += w * m.sd[i]
	}
	short := func(u float64) float64 { return m.below(centre+u) - chance }
	low, high := -spread, spread
	for short(low) > 0 && low > -reach*reach {
		low *= 4
	}
	for short(high) < 0 && high < reach*reach {
		high *= 4
	}
	u, err := numeric.Root(short, low, high, posteriorTolerance)
	if err != nil {
		return 0, ErrOutOfRange
	}
	return centre + u, nil
}

// quantiles returns median and limits, in working units.
func (m mixture) quantiles(level float64) (Quantiles, error) {
	var q [3]float64
	for i, chance := range tails(level) {
		var err error
		if q[i], err = m.quantile(chance); err != nil {
			return Quantiles{}, err
		}
	}
	return Quantiles{Low: q[0], Median: q[1], High: q[2]}, nil
}

// tails are the chances of the lower limit, the median and the upper limit.
func tails(level float64) [3]float64 {
	return [3]float64{0.5 * (1 - level), 0.5, 0.5 * (1 + level)}
}
