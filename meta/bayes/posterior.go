package bayes

import (
	"math"

	"steelyard/meta/numeric"
)

// Quantiles are the median and the limits that hold the posterior's level, equal
// tails outside, in the unit of the estimates. Mean is nil where the integral for
// it does not exist.
type Quantiles struct {
	Low, Median, High float64
	Mean              *float64
}

// Posterior is the posterior distribution of the mean effect and of τ, with a flat
// prior for the mean and the given one for τ.
type Posterior struct {
	Level       float64
	Effect, Tau Quantiles
}

// posteriorTolerance is the relative accuracy of a quantile, against the unit of
// the smallest standard error where it is near 0.
const posteriorTolerance = 1e-9

// PosteriorOf returns the posterior of mean and spread for the estimates y with
// standard errors s. level, such as 0.95, lies strictly between 0 and 1. Errors
// are those of Integrate, and a *PriorError for the level.
func PosteriorOf(y, s []float64, prior TauPrior, level float64) (*Posterior, error) {
	if !(level > 0 && level < 1) {
		return nil, &PriorError{"the level must lie strictly between 0 and 1: give a fraction such as 0.95"}
	}
	d, err := newStudies(y, s, firstOf(y), prior)
	if err != nil {
		return nil, err
	}
	f := d.integrand(1, true)
	m, err := survey(f, d.lo, d.hi)
	if err != nil {
		return nil, err
	}
	p := &marginal{d: d, f: f, mass: m}
	ln, err := m.lnIntegral(f, nil)
	if err != nil {
		return nil, err
	}
	p.total = math.Exp(ln - m.height)
	post := &Posterior{Level: level}
	tails := [3]float64{0.5 * (1 - level), 0.5, 0.5 * (1 + level)}
	var tau, effect [3]float64
	for i, tail := range tails {
		if tau[i], err = p.tauQuantile(tail); err != nil {
			return nil, err
		}
		if effect[i], err = p.effectQuantile(tail); err != nil {
			return nil, err
		}
	}
	post.Tau = Quantiles{Low: tau[0] * d.unit, Median: tau[1] * d.unit, High: tau[2] * d.unit}
	post.Effect = Quantiles{Low: d.place(effect[0]), Median: d.place(effect[1]), High: d.place(effect[2])}
	return post, p.means(post)
}

// firstOf returns a null that lies among the estimates; none enters a posterior.
func firstOf(y []float64) float64 {
	if len(y) == 0 {
		return 0
	}
	return y[0]
}

// place turns a position in working units into the unit of the estimates.
func (d *studies) place(x float64) float64 { return d.centre + x*d.unit }

// marginal is the posterior of ln τ.
type marginal struct {
	d     *studies
	f     func(float64) float64
	mass  mass
	total float64
	fault error // the first of a quadrature within a root search
}

// expect returns the posterior mean of g(ln τ) over ln τ ≤ end.
func (p *marginal) expect(g func(float64) float64, end float64) float64 {
	value, _, err := p.mass.upTo(p.f, g, end)
	if err != nil && p.fault == nil {
		p.fault = err
	}
	return value / p.total
}

// tauQuantile returns the τ below which the posterior has a chance.
func (p *marginal) tauQuantile(chance float64) (float64, error) {
	panels := p.mass.panels
	from, to := panels[0][0], panels[len(panels)-1][1]
	x, err := numeric.Root(func(x float64) float64 { return p.expect(nil, x) - chance }, from, to, posteriorTolerance)
	if err == nil {
		err = p.fault
	}
	if err != nil {
		return 0, ErrOutOfRange
	}
	return math.Exp(x), nil
}

// effectQuantile returns the mean effect below which the posterior has a chance:
// given τ the mean is normal round the weighted mean with variance 1/Σw.
func (p *marginal) effectQuantile(chance float64) (float64, error) {
	below := func(mu float64) float64 {
		return p.expect(func(x float64) float64 {
			m := p.d.at(math.Exp(x))
			return numeric.NormalTail((m.mean - mu) * math.Sqrt(m.w))
		}, math.Inf(1)) - chance
	}
	span := 1.0
	for _, y := range p.d.y {
		span = max(span, math.Abs(y))
	}
	low, high := -span, span
	for below(low) > 0 && span < reach*reach {
		span *= 4
		low = -span
	}
	for below(high) < 0 && span < reach*reach {
		span *= 4
		high = span
	}
	mu, err := numeric.Root(below, low, high, posteriorTolerance)
	if err == nil {
		err = p.fault
	}
	if err != nil {
		return 0, ErrOutOfRange
	}
	return mu, nil
}

// means fills in the posterior means that exist. For large τ the marginal
// likelihood falls as τ^(1−k); the mean of τ, and that of |μ|, needs one power
// more.
func (p *marginal) means(post *Posterior) error {
	power := p.d.k() - 1
	switch p.d.prior.Kind {
	case HalfCauchy:
		power += 2
	case HalfNormal, LogNormal:
		power = math.MaxInt
	}
	if power <= 2 {
		return nil
	}
	// τ shifts the peak: the mean of τ is integrated as an integrand of its own.
	f := func(x float64) float64 { return p.f(x) + x }
	m, err := survey(f, p.d.lo, p.d.hi)
	if err != nil {
		return err
	}
	ln, err := m.lnIntegral(f, nil)
	if err != nil {
		return err
	}
	tau := math.Exp(ln-p.mass.height) / p.total * p.d.unit
	post.Tau.Mean = &tau
	shift := p.expect(func(x float64) float64 { return p.d.at(math.Exp(x)).mean }, math.Inf(1))
	effect := p.d.place(shift)
	post.Effect.Mean = &effect
	return p.fault
}
