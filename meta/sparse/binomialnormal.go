package sparse

import (
	"fmt"
	"math"

	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
)

// binomialNormal fits the logistic model with an intercept for every study and
// log odds ratios θ ~ N(μ, τ²), treatment coded ±½, by maximum likelihood; with
// a common effect, or a single table, τ² = 0. The intercepts are found study by
// study, so that two parameters are left. The limits of μ and τ² are those of
// their profile likelihoods, the statistic is the signed root of the likelihood
// ratio, at which the evidence is taken in the normal form. The standard error
// comes from the observed information about μ and τ² (about μ alone at τ² = 0);
// weights are the studies' shares of the information about μ.
//
// Heterogeneity is LikelihoodRatio against the common effect. Where the odds
// ratio is estimated as 0 or infinite, the tables say nothing about τ², and the
// one-sided answer is that of the common effect.
//
// Sources: Turner, Omar, Yang, Goldstein & Thompson (2000), Statistics in
// Medicine 19:3417-3432; Jackson, Law, Stijnen, Viechtbauer & White (2018),
// Statistics in Medicine 37:1059-1085 (both from memory).
func (m Model) binomialNormal(tables []effect.Table, d detail) (*Result, error) {
	if len(tables) < 2 {
		m.Effects = meta.CommonEffect
	}
	l := newLogistic(tables, numeric.NormalCritical(1-m.Level))
	if side := toward(tables); side != 0 {
		return nil, l.oneSided(m, side)
	}
	common, err := l.bestMean(0, 0)
	if err != nil {
		return nil, err
	}
	var r *Result
	if m.Effects == meta.CommonEffect {
		r, err = l.commonResult(m, common)
	} else {
		r, err = l.randomResult(m, common, d)
	}
	if err != nil {
		return nil, err
	}
	r.Mean.Q = 2 * max(0, -common.lnL)
	r.Heterogeneity = scattered(LikelihoodRatio, r.Mean.Q, len(tables))
	return r, nil
}

// logistic is the likelihood of all studies, relative to that of the observed
// shares.
type logistic struct {
	studies  []study
	critical float64 // of the standard normal law, for the level of the limits
	scan     []place // by ascending τ, the mean at its maximum
}

// place is a pair of μ and τ with the log-likelihood there, the intercepts at
// their maxima, and its derivatives.
type place struct {
	mu, tau          float64
	lnL              float64
	slope, curvature float64 // in μ
	slopeTau2        float64
}

func newLogistic(tables []effect.Table, critical float64) *logistic {
	l := &logistic{studies: make([]study, len(tables)), critical: critical}
	for i, t := range tables {
		l.studies[i] = studyOf(t)
	}
	return l
}

// at evaluates the likelihood at μ and τ.
func (l *logistic) at(mu, tau float64) (place, error) {
	var lnL, slope, curvature, slopeTau2 numeric.Sum
	for i := range l.studies {
		m, err := l.studies[i].profile(mu, tau)
		if err != nil {
			return place{}, fmt.Errorf("likelihood at a mean of %g and a spread of %g: %w", mu, tau, err)
		}
		lnL.Add(m.lnL)
		slope.Add(m.m)
		curvature.Add(m.mm)
		slopeTau2.Add(m.tau2)
	}
	return place{mu: mu, tau: tau, lnL: lnL.Value(), slope: slope.Value(), curvature: curvature.Value(), slopeTau2: slopeTau2.Value()}, nil
}

// meanTolerance is the last step towards the best mean, in standard errors;
// another evaluation follows it.
const meanTolerance = 1e-5

// bestMean returns the place of the best mean for a given τ, looked for from
// start on. The likelihood is log-concave in μ.
func (l *logistic) bestMean(tau, start float64) (place, error) {
	var failed error
	mu, err := ascend(func(mu float64) (float64, float64) {
		p, err := l.at(mu, tau)
		if err != nil {
			failed = err
		}
		return p.slope, p.curvature
	}, start, widestStep, meanTolerance)
	if failed != nil {
		return place{}, failed
	}
	if err != nil {
		return place{}, fmt.Errorf("mean log odds ratio: %w", err)
	}
	return l.at(mu, tau)
}

// weights returns the information of each study about μ at the latest place.
func (l *logistic) weights() []float64 {
	w := make([]float64, len(l.studies))
	for i, s := range l.studies {
		w[i] = s.information
	}
	return w
}

// commonResult is the result with τ = 0.
func (l *logistic) commonResult(m Model, top place) (*Result, error) {
	weights := l.weights()
	profile := func(mu float64) (place, error) { return l.at(mu, 0) }
	atNull, err := profile(m.Null)
	if err != nil {
		return nil, err
	}
	se := 1 / math.Sqrt(-top.curvature)
	low, err := l.limit(top, -se, profile)
	if err != nil {
		return nil, err
	}
	high, err := l.limit(top, se, profile)
	if err != nil {
		return nil, err
	}
	r := m.rooted(top.mu, se, signedRoot(top.lnL-atNull.lnL, top.mu, m.Null), low, high)
	r.Weights = weights
	return r, nil
}

// farthestLimit is how far from the estimate a limit of the log odds ratio is
// looked for.
const farthestLimit = 100

// limitSteps caps the search for a limit, and limitClose is the last step in it,
// in standard errors.
const (
	limitSteps = 100
	limitClose = 1e-9
)

// limit returns the μ beside top, towards the sign of se, where the profile
// likelihood of μ is as low as the level allows. The signed root of the
// likelihood ratio is nearly straight in μ: Newton's steps, halved towards the
// known ends of an interval round the limit where they leave it. profile gives
// the highest place for a μ, whose slope is that of the profile likelihood.
func (l *logistic) limit(top place, se float64, profile func(mu float64) (place, error)) (float64, error) {
	near, far := 0.0, math.Inf(1)
	steps := l.critical
	for range limitSteps {
		if steps*math.Abs(se) > farthestLimit {
			return 0, &UnboundedError{What: "the interval for the mean log odds ratio"}
		}
		p, err := profile(top.mu + steps*se)
		if err != nil {
			return 0, err
		}
		root := math.Sqrt(2 * max(0, top.lnL-p.lnL))
		if root < l.critical {
			near = steps
		} else {
			far = steps
		}
		next := steps + (l.critical-root)*root/(-p.slope*se)
		switch {
		case math.Abs(next-steps) < limitClose:
			return top.mu + next*se, nil
		case far-near < limitClose:
			return top.mu + steps*se, nil
		}
		if !(next > near && next < far) || next > 2*steps {
			next = min(2*steps, 0.5*(near+far))
		}
		steps = next
	}
	return 0, fmt.Errorf("profile-likelihood limit of the mean: %w", numeric.ErrNotConverged)
}

// oneSided returns the error of an estimate at 0 (side −1) or infinity (side 1),
// where the likelihood with τ = 0 rises towards that of the observed shares.
func (l *logistic) oneSided(m Model, side int) error {
	var failed error
	lnL := func(mu float64) float64 {
		p, err := l.at(mu, 0)
		if err != nil {
			failed = err
			return math.NaN()
		}
		return p.lnL
	}
	cut := -0.5 * l.critical * l.critical
	limit, err := crossing(func(mu float64) float64 { return lnL(mu) - cut }, float64(-side))
	z := signedRoot(-lnL(m.Null), float64(side), 0)
	if failed != nil {
		return failed
	}
	if err != nil {
		return fmt.Errorf("profile-likelihood limit of the odds ratio: %w", err)
	}
	return &BoundaryError{Toward: side, OneSided: &OneSided{
		Limit: limit, Statistic: z, LnP: lnTwoSided(z), Evidence: evidence.Normal(z),
	}}
}
