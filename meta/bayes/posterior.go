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
// prior for the mean and the given one for τ, each estimate being normal with its
// standard error known.
type Posterior struct {
	Level       float64
	Prior       TauPrior
	Effect, Tau Quantiles
	New         Quantiles // the true effect in a new setting: the predictive distribution
	Studies     []Shrunk  // the true effect of each study, in their order

	place     func(x float64) float64 // into working units
	mean, new mixture
}

// Shrunk is the posterior of one study's true effect, which the others draw towards
// the mean effect.
type Shrunk struct {
	Quantiles
	Toward float64 // mean share of the way from the study's own estimate to the mean effect
}

// Chance is the probability of an effect below or above a threshold.
type Chance struct{ Below, Above float64 }

// Mean returns the probability that the mean effect lies below and above a threshold.
func (p *Posterior) Mean(threshold float64) Chance { return p.mean.chance(p.place(threshold)) }

// Setting returns the probability that the true effect in a new setting lies below
// and above a threshold.
func (p *Posterior) Setting(threshold float64) Chance { return p.new.chance(p.place(threshold)) }

func (m mixture) chance(x float64) Chance { return Chance{Below: m.below(x), Above: m.above(x)} }

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
	post := &Posterior{Level: level, Prior: prior}
	var tau, effect [3]float64
	for i, tail := range tails(level) {
		if tau[i], err = p.tauQuantile(tail); err != nil {
			return nil, err
		}
		if effect[i], err = p.effectQuantile(tail); err != nil {
			return nil, err
		}
	}
	post.Tau = Quantiles{Low: tau[0] * d.unit, Median: tau[1] * d.unit, High: tau[2] * d.unit}
	post.Effect = Quantiles{Low: d.place(effect[0]), Median: d.place(effect[1]), High: d.place(effect[2])}
	if err := p.means(post); err != nil {
		return nil, err
	}
	if err := p.mix(post); err != nil {
		return nil, err
	}
	return post, nil
}

// mix fills in what is normal given τ: the effect in a new setting, and each study's
// own.
func (p *marginal) mix(post *Posterior) error {
	nodes, err := p.nodes()
	if err != nil {
		return err
	}
	d := p.d
	post.place = func(x float64) float64 { return (x - d.centre) / d.unit }
	post.mean = mixed(nodes, func(n node) (mean, variance float64) { return n.mean, n.variance })
	post.new = mixed(nodes, func(n node) (mean, variance float64) { return n.mean, n.variance + n.tau*n.tau })
	if post.New, err = post.new.quantiles(post.Level); err != nil {
		return err
	}
	post.New = d.placed(post.New)
	post.New.Mean = post.Effect.Mean
	for i, v := range d.v {
		own := mixed(nodes, func(n node) (mean, variance float64) {
			toward := v / (v + n.tau*n.tau)
			return d.y[i] + toward*(n.mean-d.y[i]), (1-toward)*v + toward*toward*n.variance
		})
		quantiles, err := own.quantiles(post.Level)
		if err != nil {
			return err
		}
		shrunk := Shrunk{Quantiles: d.placed(quantiles)}
		average := d.place(own.average())
		shrunk.Mean = &average
		for _, n := range nodes {
			shrunk.Toward += n.weight * v / (v + n.tau*n.tau)
		}
		post.Studies = append(post.Studies, shrunk)
	}
	return nil
}

// placed turns limits and median in working units into the unit of the estimates.
func (d *studies) placed(q Quantiles) Quantiles {
	return Quantiles{Low: d.place(q.Low), Median: d.place(q.Median), High: d.place(q.High)}
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
