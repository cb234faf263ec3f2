package synthesis

import (
	"slices"

	"steelyard/meta"
	"steelyard/meta/bayes"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/review"
)

// mostFew is up to how many studies the evidence integrated over τ stands beside
// the primary one, which then knows little of the agreement of the studies.
const mostFew = 5

// usualScale is the scale of the half-normal prior for τ, in the unit of log
// ratios and of standardised differences, and in SDs of mean differences.
//
// Source: Röver et al. (2021), Research Synthesis Methods 12:448-474.
const usualScale = 0.5

// integrate returns the evidence integrated over τ for few studies under random
// effects; nil where it is not given: more studies, a common effect, another
// method, a prior that needs a third study, or evidence that is of this form.
func (o *Outcome) integrate() *bayes.Integrated {
	k := len(o.Studies)
	model := o.Analysis.Model
	if k < 2 || k > mostFew || o.dependent() || model.Effects != meta.RandomEffects || o.Analysis.Method != review.InverseVariance ||
		o.Analysis.Weighing.Form == evidence.IntegratedForm {
		return nil
	}
	y, s := estimates(o.Studies)
	result, err := bayes.Integrate(y, s, model.Null, o.Analysis.Weighing.Tau)
	if err != nil {
		return nil
	}
	return result
}

// mostIntegrated bounds the studies whose differing is weighed with τ integrated:
// the time grows with their number, to a tenth of a second here.
const mostIntegrated = 1000

// weighDiffering weighs effects that differ against one common effect, with τ
// integrated over its usual prior; not where Q is not that of inverse variances,
// or where the prior needs more studies.
func (o *Outcome) weighDiffering() {
	k := len(o.Studies)
	if o.Result == nil || o.dependent() || o.Analysis.Method != review.InverseVariance || k < 2 || k > mostIntegrated {
		return
	}
	y, s := estimates(o.Studies)
	null := y[0] // the mean is free: its null plays no part
	if result, err := bayes.Integrate(y, s, null, o.Analysis.Weighing.Tau); err == nil {
		o.Result.Differing = result
	}
}

// usualTauPrior returns the usual prior for τ of the outcome's measure: half-normal
// where its unit is known, else uniform.
func (o *Outcome) usualTauPrior() bayes.TauPrior {
	m := o.Analysis.Measure
	if m.Log() || m == effect.StandardisedMeanDifference {
		return bayes.TauPrior{Kind: bayes.HalfNormal, Scale: usualScale}
	}
	if sd := o.medianSD(); m == effect.MeanDifference && sd > 0 {
		return bayes.TauPrior{Kind: bayes.HalfNormal, Scale: usualScale * sd}
	}
	return bayes.TauPrior{Kind: bayes.Uniform}
}

// medianSD returns the median standard deviation of the arms that give one; 0 if
// none does.
func (o *Outcome) medianSD() float64 {
	var all []float64
	for _, study := range o.Studies {
		for _, n := range study.Source.Numbers {
			if n.Field == review.SDTreated || n.Field == review.SDControl {
				all = append(all, n.Value)
			}
		}
	}
	if len(all) == 0 {
		return 0
	}
	return medianOf(all)
}

// medianOf returns the median of some numbers, which it sorts.
func medianOf(all []float64) float64 {
	slices.Sort(all)
	return (all[(len(all)-1)/2] + all[len(all)/2]) / 2
}

// IntegratedDocument is the evidence with τ integrated over its prior.
type IntegratedDocument struct {
	TauPriorDocument
	Exceeded bool `json:"exceeded,omitempty"` // τ is estimated at more than twice the prior's scale
	EvidenceDocument
}

// integratedDocument writes one of the ratios of r; nil where r is nil.
func integratedDocument(r *bayes.Integrated, ratio func(*bayes.Integrated) evidence.Ratio) *IntegratedDocument {
	if r == nil {
		return nil
	}
	return &IntegratedDocument{
		TauPriorDocument: *tauPriorDocument(r.Prior), Exceeded: r.Exceeded,
		EvidenceDocument: evidenceDocument(ratio(r)),
	}
}
