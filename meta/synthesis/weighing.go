package synthesis

import (
	"fmt"
	"math"

	"steelyard/meta"
	"steelyard/meta/bayes"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/review"
)

// settleWeighing decides which evidence the outcome's means carry and under which
// priors. It returns an error for a form that the pooling gives nothing to weigh
// for, and for priors that are incomplete or contradict each other.
func (o *Outcome) settleWeighing(asked review.Analysis) error {
	w := &o.Analysis.Weighing
	*w = bayes.Weighing{Form: asked.Weighing.Form}
	var err error
	if w.Tau, err = asked.Weighing.Spread(o.usualTauPrior()); err != nil {
		return err
	}
	if o.Analysis.NullMissing {
		w.Form = evidence.Empirical
		return nil
	}
	if w.Form.OverTau() {
		if _, isTables := o.Analysis.Method.Tables(); isTables {
			return fmt.Errorf("evidence: %s integrates τ over the studies' own estimates and standard errors, and %s pools counts without them; choose empirical, normal-prior or cauchy-prior, or --method inverse-variance", w.Form, o.Analysis.Method)
		}
		if o.Analysis.Model.Effects == meta.CommonEffect {
			return fmt.Errorf("evidence: %s integrates over τ, and a common effect has none; choose random effects, or empirical, normal-prior or cauchy-prior", w.Form)
		}
		return nil
	}
	if !w.Form.UnderPrior() {
		return nil
	}
	centre := 0.0
	if mean := asked.Weighing.EffectMean; mean != nil {
		y, err := effect.FromReader(o.Analysis.Measure, *mean)
		if err != nil {
			return fmt.Errorf("%s: %w", review.SettingEffectMean, err)
		}
		centre = y - o.Analysis.Model.Null
	}
	w.Effect, err = asked.Weighing.Effect(centre)
	return err
}

// weigh gives a fit of studies the evidence of the outcome's form. A common effect
// beside random ones keeps its own, as it has no τ to integrate over.
func (o *Outcome) weigh(fit *meta.Fit, studies []Study) error {
	w := o.Analysis.Weighing
	if w.Own() || o.Analysis.NullMissing || !o.Weighs(fit) {
		return nil
	}
	y, s := estimates(studies)
	ratio, err := w.Evidence(fit.Mean, fit.Model.Null, y, s)
	if err != nil {
		return fmt.Errorf("evidence: %w", err)
	}
	fit.Mean.Evidence = ratio
	return nil
}

// Weighs reports whether a fit carries the evidence of the outcome's form, rather
// than that of its own model.
func (o *Outcome) Weighs(fit *meta.Fit) bool {
	return !(o.Analysis.Weighing.Form.OverTau() && fit.Model.Effects == meta.CommonEffect)
}

// FormOf returns the form of the evidence that a fit of the outcome carries.
func (o *Outcome) FormOf(fit *meta.Fit) evidence.Form {
	form := o.Analysis.Weighing.Form
	switch {
	case !o.Weighs(fit):
		return evidence.Empirical
	case form == evidence.StudentForm && (fit.Mean.K < 2 || math.IsInf(fit.Mean.DF, 1)):
		return evidence.Empirical // beside a normal interval both forms are one
	}
	return form
}

// PriorsDocument are the priors behind the evidence of a form that has some. What
// belongs to the effect is on the analysis scale; its centre is counted from the
// null. Empirical is the evidence in the empirical form.
type PriorsDocument struct {
	Tau       *TauPriorDocument    `json:"tau,omitempty"`
	Effect    *EffectPriorDocument `json:"effect,omitempty"`
	Empirical *EvidenceDocument    `json:"empirical,omitempty"`
}

// TauPriorDocument is a prior for τ: MeanLog and SDLog, of ln τ, are those of a
// log-normal one.
type TauPriorDocument struct {
	Prior   string   `json:"prior"`
	Scale   float64  `json:"scale,omitempty"`
	MeanLog *float64 `json:"mean_ln_tau,omitempty"`
	SDLog   *float64 `json:"sd_ln_tau,omitempty"`
}

// EffectPriorDocument is a prior for the effect.
type EffectPriorDocument struct {
	Prior string  `json:"prior"`
	Mean  float64 `json:"mean"`
	Scale float64 `json:"scale"`
	Side  string  `json:"side"`
}

func tauPriorDocument(p bayes.TauPrior) *TauPriorDocument {
	d := &TauPriorDocument{Prior: p.Kind.String(), Scale: p.Scale}
	if p.Kind == bayes.LogNormal {
		d.MeanLog, d.SDLog = &p.MeanLog, &p.SDLog
	}
	return d
}

func effectPriorDocument(p bayes.EffectPrior) *EffectPriorDocument {
	return &EffectPriorDocument{Prior: p.Kind.String(), Mean: p.Mean, Scale: p.Scale, Side: p.Side.String()}
}

// priorsDocument writes the priors behind the evidence of a fit; nil where it has
// none.
func (o *Outcome) priorsDocument(fit *meta.Fit) *PriorsDocument {
	w := o.Analysis.Weighing
	if w.Own() || !o.Weighs(fit) {
		return nil
	}
	d := &PriorsDocument{}
	if w.Form.OverTau() {
		d.Tau = tauPriorDocument(w.Tau)
	} else {
		d.Effect = effectPriorDocument(w.Effect)
	}
	if own := o.Result.Empirical; own != nil && fit == o.Result.Fit {
		empirical := evidenceDocument(*own)
		d.Empirical = &empirical
	}
	return d
}
