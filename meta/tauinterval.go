package meta

import (
	"steelyard/meta/numeric"
)

// tau2Limits returns the limits of τ² by the model's method, in squared working
// units; 0 and 0 for a single study. They rest on the scatter of the estimates
// and are given beside a common effect too.
//
// The Q-profile solves Q(τ²) = χ² quantiles on k − 1 degrees of freedom; a limit
// is 0 where Q(0) is below its quantile. The profile likelihood holds all τ²
// whose log-likelihood lies within z²/2 of the maximum: the restricted
// likelihood for the restricted estimator and the full one for the others.
//
// Sources: Viechtbauer (2007), Statistics in Medicine 26:37-52; Hardy & Thompson
// (1996), Statistics in Medicine 15:619-629.
func (p *Pooler) tau2Limits() (Limits, error) {
	if p.data.k() < 2 {
		return Limits{}, nil
	}
	alpha := 1 - p.model.Level
	if p.model.TauInterval == TauProfileLikelihood {
		l := likelihood{data: &p.data, kind: fullLikelihood}
		if p.model.Tau == RestrictedML {
			l.kind = restrictedLikelihood
		}
		if _, err := p.highestMode(l, l.point(0)); err != nil {
			return Limits{}, err
		}
		p.compareModes(l)
		z := numeric.NormalCritical(alpha)
		return p.tau2Above(l, p.height-0.5*z*z)
	}
	low, err := tau2WhereQ(&p.data, p.zero, numeric.ChiSquareUpperQuantile(alpha/2, p.data.df()))
	if err != nil {
		return Limits{}, err
	}
	high, err := tau2WhereQ(&p.data, p.zero, numeric.ChiSquareQuantile(alpha/2, p.data.df()))
	return Limits{Low: low, High: high}, err
}
