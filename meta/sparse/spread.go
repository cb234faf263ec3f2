package sparse

import (
	"fmt"
	"math"

	"steelyard/meta"
	"steelyard/meta/numeric"
)

// The search for maxima in τ takes steps of a factor e^(1/scanSteps), from
// scanFrom standard errors of the most informative study on, up to widestSpread:
// with a spread of 50 in log odds no two studies would have anything in common.
const (
	scanSteps    = 4
	scanFrom     = 0.1
	widestSpread = 50
)

// spreadTolerance is that of roots in τ. At a maximum it counts with its square.
const spreadTolerance = 1e-8

// randomResult is the result with τ at its maximum; common is the place at τ = 0.
func (l *logistic) randomResult(m Model, common place, d detail) (*Result, error) {
	if err := l.search(common); err != nil {
		return nil, err
	}
	top, err := l.highest()
	if err != nil {
		return nil, err
	}
	se, err := l.standardError(top)
	if err != nil {
		return nil, err
	}
	if top, err = l.at(top.mu, top.tau); err != nil {
		return nil, err
	}
	weights := l.weights()
	atNull, err := l.bestSpreadAnywhere(m.Null)
	if err != nil {
		return nil, err
	}
	low, high := top.mu-l.critical*se, top.mu+l.critical*se
	if d > pointOnly {
		if low, err = l.limit(top, -se, l.bestSpreadAnywhere); err != nil {
			return nil, err
		}
		if high, err = l.limit(top, se, l.bestSpreadAnywhere); err != nil {
			return nil, err
		}
	}
	r := m.rooted(top.mu, se, signedRoot(top.lnL-atNull.lnL, top.mu, m.Null), low, high)
	r.Weights, r.Mean.Tau2 = weights, top.tau*top.tau
	if d == everything {
		r.Tau2, err = l.spreadLimits(top)
	}
	return r, err
}

// search fills scan.
func (l *logistic) search(common place) error {
	best := 0.0
	for _, w := range l.weights() {
		best = max(best, w)
	}
	l.scan = append(l.scan[:0], common)
	mu, from := common.mu, scanFrom/math.Sqrt(best)
	steps := math.Ceil(scanSteps * max(1, math.Log(widestSpread/from)))
	for i := 0.0; i <= steps; i++ {
		p, err := l.bestMean(from*math.Exp(i/scanSteps), mu)
		if err != nil {
			return err
		}
		l.scan = append(l.scan, p)
		mu = p.mu
	}
	return nil
}

// highest returns the highest of all maxima between the places of the scan.
func (l *logistic) highest() (place, error) {
	last := len(l.scan) - 1
	if l.scan[last].slopeTau2 > 0 {
		return place{}, &UnboundedError{What: "the spread between studies"}
	}
	var top place
	found := false
	take := func(p place) {
		if !found || p.lnL > top.lnL {
			top, found = p, true
		}
	}
	if l.scan[0].slopeTau2 <= 0 {
		take(l.scan[0])
	}
	for i := range last {
		a, b := l.scan[i], l.scan[i+1]
		if !(a.slopeTau2 > 0 && b.slopeTau2 <= 0) {
			continue
		}
		p, err := l.between(a, b, func(p place) float64 { return p.slopeTau2 })
		if err != nil {
			return place{}, err
		}
		take(p)
	}
	return top, nil
}

// between returns the place between a and b, the mean at its maximum, where f
// is 0.
func (l *logistic) between(a, b place, f func(place) float64) (place, error) {
	var failed error
	mu := a.mu
	tau, err := numeric.Root(func(tau float64) float64 {
		switch tau {
		case a.tau:
			return f(a)
		case b.tau:
			return f(b)
		}
		p, err := l.bestMean(tau, mu)
		if err != nil {
			failed = err
			return math.NaN()
		}
		mu = p.mu
		return f(p)
	}, a.tau, b.tau, spreadTolerance)
	if failed != nil {
		return place{}, failed
	}
	if err != nil {
		return place{}, fmt.Errorf("spread between studies: %w", err)
	}
	return l.bestMean(tau, mu)
}

// standardError returns that of μ from the observed information about μ and τ².
// The curvature in μ is exact; those with τ² are differences of exact slopes.
func (l *logistic) standardError(top place) (float64, error) {
	information := -top.curvature
	if v := top.tau * top.tau; v > 0 {
		h := 1e-4 * v
		below, err := l.at(top.mu, math.Sqrt(v-h))
		if err != nil {
			return 0, err
		}
		above, err := l.at(top.mu, math.Sqrt(v+h))
		if err != nil {
			return 0, err
		}
		cross := (above.slope - below.slope) / (2 * h)
		own := (above.slopeTau2 - below.slopeTau2) / (2 * h)
		if own < 0 {
			information += cross * cross / own
		}
	}
	if !(information > 0) {
		return 0, &UnboundedError{What: "the standard error of the mean log odds ratio"}
	}
	return 1 / math.Sqrt(information), nil
}

// bestSpread returns the place of the best τ for the mean of p, uphill from p.
func (l *logistic) bestSpread(p place) (place, error) {
	lowest := l.scan[1].tau
	rising := p.slopeTau2 > 0
	for {
		next := max(lowest, 1.5*p.tau)
		switch {
		case rising && next > 4*widestSpread:
			return p, &UnboundedError{What: "the spread between studies"}
		case !rising && p.tau == 0:
			return p, nil
		case !rising:
			next = p.tau / 1.5
			if next < lowest {
				next = 0
			}
		}
		q, err := l.at(p.mu, next)
		if err != nil {
			return q, err
		}
		if (q.slopeTau2 > 0) != rising {
			return l.spreadBetween(p.mu, p, q)
		}
		p = q
	}
}

// spreadBetween returns the place of a given mean between a and b where the
// slope in τ² is 0.
func (l *logistic) spreadBetween(mu float64, a, b place) (place, error) {
	var failed error
	tau, err := numeric.Root(func(tau float64) float64 {
		switch tau {
		case a.tau:
			return a.slopeTau2
		case b.tau:
			return b.slopeTau2
		}
		p, err := l.at(mu, tau)
		if err != nil {
			failed = err
			return math.NaN()
		}
		return p.slopeTau2
	}, a.tau, b.tau, 1e-6)
	if failed != nil {
		return place{}, failed
	}
	if err != nil {
		return place{}, fmt.Errorf("spread between studies: %w", err)
	}
	return l.at(mu, tau)
}

// fixedMeanStride says which of the scan's spreads are tried for a fixed mean:
// every second one, half an e-fold apart. hopeless is how far below the best the
// likelihood must have fallen for the larger ones to be left out.
const (
	fixedMeanStride = 2
	hopeless        = 30
)

// bestSpreadAnywhere returns the place of the best τ for a given mean: uphill
// from the best of the scan's spreads, since there can be a maximum at τ = 0
// beside another, between which the best changes with the mean.
func (l *logistic) bestSpreadAnywhere(mu float64) (place, error) {
	var best place
	for i := 0; i < len(l.scan); i += fixedMeanStride {
		p, err := l.at(mu, l.scan[i].tau)
		if err != nil {
			return p, err
		}
		if i == 0 || p.lnL > best.lnL {
			best = p
		}
		if p.slopeTau2 < 0 && p.lnL < best.lnL-hopeless {
			break
		}
	}
	return l.bestSpread(best)
}

// spreadLimits returns the profile-likelihood limits of τ², the furthest ones
// should there be several; nil if the likelihood stays above the cut however
// large τ² is.
func (l *logistic) spreadLimits(top place) (*meta.Limits, error) {
	cut := top.lnL - 0.5*l.critical*l.critical
	over := func(p place) float64 { return p.lnL - cut }
	first, last := top, top
	var before, after *place
	for i := range l.scan {
		switch p := l.scan[i]; {
		case over(p) >= 0 && p.tau < first.tau:
			first = p
		case over(p) >= 0 && p.tau > last.tau:
			last = p
		}
	}
	for i := range l.scan {
		p := &l.scan[i]
		if p.tau < first.tau {
			before = p
		}
		if p.tau > last.tau && after == nil {
			after = p
		}
	}
	if after == nil {
		return nil, nil
	}
	high, err := l.between(last, *after, over)
	if err != nil {
		return nil, err
	}
	limits := meta.Limits{High: high.tau * high.tau}
	if before != nil {
		low, err := l.between(*before, first, over)
		if err != nil {
			return nil, err
		}
		limits.Low = low.tau * low.tau
	}
	return &limits, nil
}
