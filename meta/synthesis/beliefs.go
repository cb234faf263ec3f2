package synthesis

import (
	"fmt"
	"math"

	"steelyard/meta/bayes"
	"steelyard/meta/evidence"
)

// Beliefs is what sceptics of different strength make of an outcome's evidence:
// probabilities before and after, and the evidence that priors for the size of
// the effect would give instead.
type Beliefs struct {
	Posterior []Belief // over a range of prior probabilities, ascending
	Doubters  []Belief // Posterior is the level, Prior the doubter's prior
	// Scepticism is the scepticism limit, on the analysis scale from the null; nil
	// where the interval includes the null.
	Scepticism *float64
	// At is what the priors are weighed against: the estimate at the z matched to
	// its interval.
	At    bayes.Observation
	Table []PriorFactors // at round scales, ascending
	Curve []PriorFactors // at many scales from the first to the last of the table
	Bound evidence.Ratio // what no prior for the effect can pass
}

// PriorFactors are the Bayes factors, as evidence for an effect, under priors of
// one scale round the null.
type PriorFactors struct {
	Scale          float64 // analysis scale
	Normal, Cauchy evidence.Ratio
}

// startingBeliefs are the prior probabilities of the range, and firmBeliefs the
// posterior ones that a doubter is asked about.
var (
	startingBeliefs = []float64{0.01, 0.05, 0.1, 0.25, 0.5, 0.75, 0.9, 0.95}
	firmBeliefs     = []float64{0.95, 0.99}
)

// curveScales is the number of scales of a curve, and mostScales bounds the round
// ones.
const (
	curveScales = 241
	mostScales  = 60
)

// believe weighs a result with many priors, where there is a result and a null; a
// note says where no prior can be weighed.
func (o *Outcome) believe() {
	if o.Result == nil || o.Analysis.NullMissing {
		return
	}
	b, err := o.beliefs()
	if err != nil {
		o.note(fmt.Sprintf("Priors for the size of the effect cannot be weighed: %s.", err))
		return
	}
	o.Beliefs = b
}

func (o *Outcome) beliefs() (*Beliefs, error) {
	mean, null := o.Result.Fit.Mean, o.Result.Fit.Model.Null
	b := &Beliefs{}
	for _, p := range startingBeliefs {
		b.Posterior = append(b.Posterior, Belief{Prior: p, Posterior: evidence.Posterior(p, mean.Evidence)})
	}
	for _, level := range firmBeliefs {
		b.Doubters = append(b.Doubters, Belief{Prior: evidence.DoubtersPrior(mean.Evidence, level), Posterior: level})
	}
	if limit, err := bayes.ScepticismLimit(mean.Low, mean.High, null); err == nil {
		b.Scepticism = &limit
	}
	location := mean.Location()
	var err error
	if b.At, err = bayes.Matched(location, null); err != nil {
		return nil, err
	}
	b.Bound = evidence.Bound(b.At.Z())
	if location.Form == evidence.StudentForm && !math.IsInf(location.DF, 1) {
		b.Bound = evidence.BoundStudent((location.Estimate-null)/location.SE, location.DF)
	}
	scales := roundScales(b.At)
	if b.Table, err = factors(b.At, scales); err != nil {
		return nil, err
	}
	first, last := math.Log(scales[0]), math.Log(scales[len(scales)-1])
	fine := make([]float64, curveScales)
	for i := range fine {
		fine[i] = math.Exp(first + (last-first)*float64(i)/(curveScales-1))
	}
	b.Curve, err = factors(b.At, fine)
	return b, err
}

// roundScales returns the scales 1, 2, 5 × 10ⁿ from half the standard error over
// three decades, or to ten times the estimate's distance from the null if that is
// more: from priors that expect hardly any effect to such as expect any.
func roundScales(at bayes.Observation) []float64 {
	n := int(math.Floor(math.Log10(at.SE/2))) - 1
	last := math.Max(1000*at.SE/2, 10*math.Abs(at.Estimate-at.Null))
	var scales []float64
	for ; ; n++ {
		for _, m := range []float64{1, 2, 5} {
			scale := m * math.Pow10(n)
			if n < 0 {
				scale = m / math.Pow10(-n)
			}
			if scale <= at.SE/2*(1+1e-9) {
				scales = []float64{scale}
				continue
			}
			if scale > last || len(scales) == mostScales {
				return scales
			}
			scales = append(scales, scale)
		}
	}
}

func factors(at bayes.Observation, scales []float64) ([]PriorFactors, error) {
	normal, err := at.Curve(bayes.EffectPrior{Kind: bayes.NormalPrior}, scales)
	if err != nil {
		return nil, err
	}
	cauchy, err := at.Curve(bayes.EffectPrior{Kind: bayes.CauchyPrior}, scales)
	if err != nil {
		return nil, err
	}
	all := make([]PriorFactors, len(scales))
	for i := range scales {
		all[i] = PriorFactors{Scale: scales[i], Normal: normal[i], Cauchy: cauchy[i]}
	}
	return all, nil
}

// BeliefsDocument is what sceptics make of the evidence. The scepticism limit is
// absent where the interval includes the null.
type BeliefsDocument struct {
	Posterior  []PosteriorDocument    `json:"posterior"`
	Doubters   []DoubterDocument      `json:"doubters_priors"`
	Scepticism *float64               `json:"scepticism_limit,omitempty"`
	Z          float64                `json:"z"`
	SE         float64                `json:"se"`
	Factors    []PriorFactorsDocument `json:"prior_scales"`
	Bound      EvidenceDocument       `json:"bound"`
}

// PriorFactorsDocument are the natural logs of the Bayes factors, effect over
// none, under priors of one scale.
type PriorFactorsDocument struct {
	Scale  float64 `json:"scale"`
	Normal float64 `json:"ln_normal"`
	Cauchy float64 `json:"ln_cauchy"`
}

func (b *Beliefs) document() *BeliefsDocument {
	if b == nil {
		return nil
	}
	d := &BeliefsDocument{Scepticism: b.Scepticism, Z: b.At.Z(), SE: b.At.SE, Bound: evidenceDocument(b.Bound)}
	for _, belief := range b.Posterior {
		d.Posterior = append(d.Posterior, PosteriorDocument(belief))
	}
	for _, belief := range b.Doubters {
		d.Doubters = append(d.Doubters, DoubterDocument{Level: belief.Posterior, Prior: belief.Prior})
	}
	for _, f := range b.Table {
		d.Factors = append(d.Factors, PriorFactorsDocument{Scale: f.Scale, Normal: f.Normal.Ln(), Cauchy: f.Cauchy.Ln()})
	}
	return d
}
