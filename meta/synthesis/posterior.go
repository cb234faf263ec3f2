package synthesis

import (
	"fmt"

	"steelyard/meta"
	"steelyard/meta/bayes"
	"steelyard/meta/review"
)

// Posterior is the posterior distribution of an outcome's mean effect and spread, and
// what it says of thresholds.
type Posterior struct {
	*bayes.Posterior
	Exceeded   bool // τ is estimated where its prior puts little
	Thresholds []Beyond
}

// Beyond is an effect, a threshold, with the probabilities of smaller and larger ones: of the mean
// effect, and of the true effect in a new setting.
type Beyond struct {
	Name          string  // "no effect", "important"
	Value         float64 // analysis scale
	Mean, Setting bayes.Chance
}

// posteriorOf fills in the posterior of a pooled outcome; a note says where there is
// none, or what its likelihood is not.
func (o *Outcome) posteriorOf() {
	if o.Result == nil {
		return
	}
	if o.Analysis.Model.Effects == meta.CommonEffect {
		o.note("No posterior is computed: it is of a mean effect and a spread, and a common effect has no spread; choose random effects.")
		return
	}
	if o.dependent() {
		o.note(fmt.Sprintf("No posterior is computed: it is of independent estimates, and beside %s several come from one study.", o.Analysis.Dependence))
		return
	}
	y, s := estimates(o.Studies)
	p, err := bayes.PosteriorOf(y, s, o.Analysis.Weighing.Tau, o.Result.Fit.Model.Level)
	if err != nil {
		o.note(fmt.Sprintf("No posterior is computed: %s.", err))
		return
	}
	if method := o.Analysis.Method; method != review.InverseVariance {
		o.note(fmt.Sprintf("The posterior is of the studies' own estimates with normal errors, not of the counts that %s pools.", method))
	}
	o.Posterior = &Posterior{Posterior: p}
	if d := o.Result.Differing; d != nil {
		o.Posterior.Exceeded = d.Exceeded
	}
	add := func(name string, value float64) {
		o.Posterior.Thresholds = append(o.Posterior.Thresholds, Beyond{Name: name, Value: value, Mean: p.Mean(value), Setting: p.Setting(value)})
	}
	if !o.Analysis.NullMissing {
		add("no effect", o.Analysis.Model.Null)
	}
	if zone := o.Analysis.Important; zone != nil {
		add("important", zone.Low)
		add("important", zone.High)
	}
}

// PosteriorDistributionDocument is the posterior of the mean effect and of τ, with a
// flat prior for the mean and the given one for τ; effects are on the analysis scale.
// The mean is absent where its integral does not exist.
type PosteriorDistributionDocument struct {
	Tau        TauPriorDocument   `json:"tau_prior"`
	Exceeded   bool               `json:"exceeded,omitempty"`
	Level      float64            `json:"level"`
	Effect     QuantilesDocument  `json:"effect"`
	Spread     QuantilesDocument  `json:"tau"`
	New        QuantilesDocument  `json:"new_setting"`
	Thresholds []ChancesDocument  `json:"thresholds"`
	Studies    []ShrunkenDocument `json:"studies"`
}

// QuantilesDocument holds median and limits of a posterior.
type QuantilesDocument struct {
	Low    float64  `json:"low"`
	Median float64  `json:"median"`
	High   float64  `json:"high"`
	Mean   *float64 `json:"mean,omitempty"`
}

// ChancesDocument holds the probabilities of effects below and above a value.
type ChancesDocument struct {
	Name         string  `json:"name"`
	Value        float64 `json:"value"`
	Below        float64 `json:"effect_below"`
	Above        float64 `json:"effect_above"`
	SettingBelow float64 `json:"setting_below"`
	SettingAbove float64 `json:"setting_above"`
}

// ShrunkenDocument is the posterior of one study's own true effect; Toward is the mean
// share of the way from its own estimate to the mean effect.
type ShrunkenDocument struct {
	Study string `json:"study"`
	QuantilesDocument
	Toward float64 `json:"toward_mean"`
}

func (o *Outcome) posteriorDocument() *PosteriorDistributionDocument {
	p := o.Posterior
	if p == nil {
		return nil
	}
	d := &PosteriorDistributionDocument{
		Tau: *tauPriorDocument(p.Prior), Exceeded: p.Exceeded, Level: p.Level,
		Effect: QuantilesDocument(p.Effect), Spread: QuantilesDocument(p.Tau), New: QuantilesDocument(p.New),
		Thresholds: []ChancesDocument{},
	}
	for _, t := range p.Thresholds {
		d.Thresholds = append(d.Thresholds, ChancesDocument{
			Name: t.Name, Value: t.Value, Below: t.Mean.Below, Above: t.Mean.Above, SettingBelow: t.Setting.Below, SettingAbove: t.Setting.Above,
		})
	}
	for i, study := range p.Studies {
		d.Studies = append(d.Studies, ShrunkenDocument{o.Studies[i].Source.Name, QuantilesDocument(study.Quantiles), study.Toward})
	}
	return d
}
