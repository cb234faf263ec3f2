package bayes

import (
	"math"

	"steelyard/meta"
	"steelyard/meta/evidence"
)

// Hypothesis is one of the four models {no effect, effect} × {common, random}.
type Hypothesis int

// The models: with the mean at the null or free, and with τ 0 or free.
const (
	NoEffectCommon Hypothesis = iota
	EffectCommon
	NoEffectRandom
	EffectRandom
	hypotheses = iota
)

// Correction says what is taken off the log posterior-marginal likelihood of a
// model for using the data twice, with its Monte-Carlo standard error: 0 where
// it was not simulated.
type Correction struct{ Value, Error float64 }

// standardCorrections are half the number of free parameters.
var standardCorrections = [hypotheses]Correction{{}, {Value: 0.5}, {Value: 0.5}, {Value: 1}}

// Integrated is evidence with τ integrated over its prior.
type Integrated struct {
	K     int
	Prior TauPrior
	// LnMarginal is ln of the posterior-marginal likelihood of each model, up to a
	// constant that all share.
	LnMarginal  [4]float64
	Corrections [4]Correction
	Tau         float64 // the restricted-likelihood estimate; 0 for one study
	Exceeded    bool    // Tau lies where the prior puts little: see TauPrior.Exceeded
	common      evidence.Ratio
}

// Integrate weighs the four models for the estimates y with standard errors s
// against the mean effect null under H0, all on the analysis scale. Given τ the
// likelihood is integrated over the mean under a flat prior, then over τ:
//
//	PML = ∫∫L²p(τ)dμdτ / ∫∫L p(τ)dμdτ,  ln ER = ln PML₁ − ln PML₀ − ½
//
// It returns the errors of meta.Pooler.Pool for the studies and the null, a
// *PriorError, ErrUniformNeedsThree, and ErrOutOfRange for numbers more than
// about 1e100 apart. A nil error guarantees finite numbers.
//
// Source of the posterior-marginal likelihood: Aitkin (1991), Journal of the
// Royal Statistical Society B 53:111-142; of its correction: Dudbridge (2024),
// PLoS ONE 19(2):e0297874.
func Integrate(y, s []float64, null float64, prior TauPrior) (*Integrated, error) {
	d, err := newStudies(y, s, null, prior)
	if err != nil {
		return nil, err
	}
	return d.integrated(prior, y, s)
}

func (d *studies) integrated(prior TauPrior, y, s []float64) (*Integrated, error) {
	var pool meta.Pooler
	mean, err := pool.Pool(meta.Model{Tau: meta.RestrictedML, Interval: meta.Wald, Level: 0.95}, y, s)
	if err != nil {
		return nil, err
	}
	r := &Integrated{K: d.k(), Prior: prior, Corrections: standardCorrections, Tau: math.Sqrt(mean.Tau2)}
	r.Exceeded = prior.Exceeded(r.Tau)
	zero := d.at(0)
	r.common = evidence.Normal((zero.mean - d.null) * math.Sqrt(zero.w))
	r.LnMarginal[NoEffectCommon] = zero.lnC - 0.5*zero.q0
	r.LnMarginal[EffectCommon] = zero.lnC - 0.5*zero.q - 0.5*math.Ln2
	if r.LnMarginal[NoEffectRandom], err = d.lnPosteriorMarginal(false); err != nil {
		return nil, err
	}
	if r.LnMarginal[EffectRandom], err = d.lnPosteriorMarginal(true); err != nil {
		return nil, err
	}
	return r, nil
}

// score returns the corrected log marginal likelihood of a model.
func (r *Integrated) score(h Hypothesis) float64 {
	return r.LnMarginal[h] - r.Corrections[h].Value
}

// Effect returns the evidence for an effect with τ free: the integrated form.
func (r *Integrated) Effect() evidence.Ratio {
	return evidence.FromLn(r.score(EffectRandom) - r.score(NoEffectRandom))
}

// EffectGivenCommon returns the evidence for an effect with τ = 0, the normal
// form of the common effect.
func (r *Integrated) EffectGivenCommon() evidence.Ratio { return r.common }

// Heterogeneity returns the evidence for τ > 0 over τ = 0, the mean being free.
// With the standard corrections it is understated, up to twofold, near τ = 0.
func (r *Integrated) Heterogeneity() evidence.Ratio {
	return evidence.FromLn(r.score(EffectRandom) - r.score(EffectCommon))
}

// Probabilities returns the posterior probabilities of the four models, all of
// which were equally probable before.
func (r *Integrated) Probabilities() [4]float64 {
	var p [4]float64
	top := math.Inf(-1)
	for h := range p {
		top = max(top, r.score(Hypothesis(h)))
	}
	total := 0.0
	for h := range p {
		p[h] = math.Exp(r.score(Hypothesis(h)) - top)
		total += p[h]
	}
	for h := range p {
		p[h] /= total
	}
	return p
}

// EffectAveraged returns the evidence for an effect averaged over τ = 0 and τ
// free, equally probable before.
func (r *Integrated) EffectAveraged() evidence.Ratio {
	return evidence.FromLn(lnSum(r.score(EffectCommon), r.score(EffectRandom)) -
		lnSum(r.score(NoEffectCommon), r.score(NoEffectRandom)))
}

// HeterogeneityAveraged returns the evidence for τ > 0 averaged over no effect
// and an effect, equally probable before.
func (r *Integrated) HeterogeneityAveraged() evidence.Ratio {
	return evidence.FromLn(lnSum(r.score(NoEffectRandom), r.score(EffectRandom)) -
		lnSum(r.score(NoEffectCommon), r.score(EffectCommon)))
}

// lnSum returns ln(exp(a) + exp(b)) for finite a and b.
func lnSum(a, b float64) float64 {
	return max(a, b) + math.Log1p(math.Exp(-math.Abs(a-b)))
}
