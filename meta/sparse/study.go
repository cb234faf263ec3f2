package sparse

import (
	"math"

	"steelyard/meta/effect"
)

// study is one table in the binomial–normal model: logits α + θ/2 in the treated
// and α − θ/2 in the control arm, θ = μ + τu the study's own log odds ratio.
// α and the mode of u are kept from one evaluation to the next as starts.
type study struct {
	events1, total1, events2, total2 float64
	saturated                        float64 // log-likelihood at the observed shares
	alpha, mode                      float64
	information                      float64 // about μ, at the latest evaluation
}

func studyOf(t effect.Table) study {
	return study{
		events1: t.Events1, total1: t.Total1, events2: t.Events2, total2: t.Total2,
		saturated: saturated(t.Events1, t.Total1) + saturated(t.Events2, t.Total2),
		alpha:     math.Log((t.Events1 + t.Events2) / (t.Total1 + t.Total2 - t.Events1 - t.Events2)),
	}
}

// saturated is the binomial log-likelihood, without its coefficient, at the
// observed share.
func saturated(y, n float64) float64 {
	if y == 0 || y == n {
		return 0
	}
	return y*math.Log(y/n) + (n-y)*math.Log1p(-y/n)
}

// arm returns the binomial log-likelihood of y events among n without its
// coefficient, its slope and minus its curvature in the logit.
func arm(y, n, logit float64) (lnL, slope, information float64) {
	e := math.Exp(-math.Abs(logit))
	small := e / (1 + e) // the smaller of both probabilities
	information = n * small / (1 + e)
	if logit > 0 {
		return -(n-y)*logit - n*math.Log1p(e), n*small - (n - y), information
	}
	return y*logit - n*math.Log1p(e), y - n*small, information
}

// point is the log-likelihood of a study, less the saturated one, at α and θ
// with its derivatives in both: slopes and second derivatives.
type point struct{ lnL, a, t, aa, at, tt float64 }

func (s *study) point(alpha, theta float64) point {
	l1, r1, i1 := arm(s.events1, s.total1, alpha+0.5*theta)
	l2, r2, i2 := arm(s.events2, s.total2, alpha-0.5*theta)
	return point{
		lnL: l1 + l2 - s.saturated,
		a:   r1 + r2, t: 0.5 * (r1 - r2),
		aa: -(i1 + i2), at: 0.5 * (i2 - i1), tt: -0.25 * (i1 + i2),
	}
}

// marginal is the log-likelihood of a study with θ integrated over its normal
// law, and derivatives of it in α (a), in μ (m) and in τ².
type marginal struct{ lnL, a, m, aa, am, mm, tau2 float64 }

// The nodes of the integral over u stand at most a share nodeWidth of the
// integrand's standard deviation apart, and at most nodeReach in θ, and go out
// to where it has fallen to e^−nodeDepth of its top. The sum is then right to
// about 1e-12: for nodes h apart its error is e^(−2πy/h) times the growth of the
// integrand at a distance y from the real axis, up to y = π in θ. A standard
// deviation of s lets it grow as e^(y²/2s²), which leaves e^(−2π²(s/h)²) for small
// s and e^(−2π²/h + π²/2s²) for large.
const (
	nodeWidth = 0.7
	nodeReach = 0.5
	nodeDepth = 36
)

// widestMode, a step in u or in θ, and modeTolerance are for the search of the
// integrand's top, which need not be exact.
const (
	widestMode    = 4
	modeTolerance = 1e-3
)

// integrate returns the marginal log-likelihood at α, μ and τ. With E the mean
// over the law of u given the data and l the log-likelihood,
//
//	slopes E lα and E lθ, second derivatives E(lαα + lα²) − (E lα)² and so on,
//	slope in τ²  ½ E(lθθ + lθ²)
//
// which is the limit at τ = 0 too.
func (s *study) integrate(alpha, mu, tau float64) (marginal, error) {
	var sum momentSum
	if tau == 0 {
		p := s.point(alpha, mu)
		sum.add(p, 1)
		return sum.marginal(p.lnL), nil
	}
	mode, err := ascend(func(u float64) (float64, float64) {
		p := s.point(alpha, mu+tau*u)
		return tau*p.t - u, tau*tau*p.tt - 1
	}, s.mode, widestMode*max(1, 1/tau), modeTolerance)
	if err != nil {
		return marginal{}, err
	}
	s.mode = mode
	p := s.point(alpha, mu+tau*mode)
	top := p.lnL - 0.5*mode*mode
	step := min(nodeWidth/math.Sqrt(1-tau*tau*p.tt), nodeReach/tau)
	sum.add(p, 1)
	for _, side := range [2]float64{-step, step} {
		for i := 1.0; ; i++ {
			u := mode + i*side
			p := s.point(alpha, mu+tau*u)
			depth := p.lnL - 0.5*u*u - top
			if !(depth > -nodeDepth) {
				break
			}
			sum.add(p, math.Exp(depth))
		}
	}
	return sum.marginal(top + math.Log(step*sum.total/math.Sqrt(2*math.Pi))), nil
}

// momentSum gathers weighted derivatives.
type momentSum struct{ total, a, t, aa, at, tt float64 }

func (m *momentSum) add(p point, weight float64) {
	m.total += weight
	m.a += weight * p.a
	m.t += weight * p.t
	m.aa += weight * (p.aa + p.a*p.a)
	m.at += weight * (p.at + p.a*p.t)
	m.tt += weight * (p.tt + p.t*p.t)
}

func (m *momentSum) marginal(lnL float64) marginal {
	a, t := m.a/m.total, m.t/m.total
	return marginal{
		lnL: lnL, a: a, m: t,
		aa: m.aa/m.total - a*a, am: m.at/m.total - a*t, mm: m.tt/m.total - t*t,
		tau2: 0.5 * m.tt / m.total,
	}
}

// widestStart and interceptTolerance are for the search of the intercept. Its
// last step is followed by one more evaluation, so that its square counts.
const (
	widestStart        = 3
	interceptTolerance = 1e-5
)

// profile returns the marginal log-likelihood at μ and τ with the intercept at
// its maximum; mm is then the curvature along the profile. The integrand is
// log-concave in α, μ and u, and with it the marginal likelihood in α and μ.
func (s *study) profile(mu, tau float64) (marginal, error) {
	var failed error
	alpha, err := ascend(func(alpha float64) (float64, float64) {
		m, err := s.integrate(alpha, mu, tau)
		if err != nil {
			failed = err
		}
		return m.a, m.aa
	}, s.alpha, widestStart, interceptTolerance)
	if failed != nil {
		return marginal{}, failed
	}
	if err != nil {
		return marginal{}, err
	}
	s.alpha = alpha
	m, err := s.integrate(alpha, mu, tau)
	if err != nil {
		return marginal{}, err
	}
	m.mm -= m.am * m.am / m.aa
	s.information = max(0, -m.mm)
	return m, nil
}
