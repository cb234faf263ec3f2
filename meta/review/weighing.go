package review

import (
	"fmt"
	"math"

	"steelyard/meta/bayes"
	"steelyard/meta/evidence"
)

// Weighing is the typed form of the settings on how evidence is weighed: its form,
// the priors that some forms rest on, and what beliefs it is turned into. What
// nobody gave is nil.
type Weighing struct {
	Form       evidence.Form
	Prior      []float64           // probabilities of an effect before the data
	TauPrior   *bayes.TauPriorKind // nil: that of the measure
	TauScale   []float64           // one scale, or mean and standard deviation of ln τ
	EffectMean *float64            // in the reader's unit
	EffectSD   float64             // on the analysis scale; 0: not given
	EffectSide bayes.Side
}

// read fills the settings in by read, which finds the text of a setting.
func (w *Weighing) read(read func(setting string, parse func(text string) error)) {
	read(SettingEvidence, func(t string) (err error) { w.Form, err = evidence.ParseForm(t); return err })
	read(SettingPrior, func(t string) (err error) { w.Prior, err = parseProbabilities(t); return err })
	read(SettingTauPrior, func(t string) error {
		kind, err := bayes.ParseTauPrior(t)
		w.TauPrior = &kind
		return err
	})
	read(SettingTauScale, func(t string) (err error) { w.TauScale, err = parseNumbers(t); return err })
	read(SettingEffectMean, func(t string) error {
		mean, err := parseNumber(t)
		w.EffectMean = &mean
		return err
	})
	read(SettingEffectSD, func(t string) (err error) { w.EffectSD, err = parseNumber(t); return err })
	read(SettingEffectSide, func(t string) (err error) { w.EffectSide, err = bayes.ParseSide(t); return err })
}

// Spread returns the prior for τ: what was given, the rest from usual, the prior of
// the measure. A scale that is not given is the usual one where the usual prior has
// one. It returns an error that says which setting is missing or does not go with
// the prior.
func (w Weighing) Spread(usual bayes.TauPrior) (bayes.TauPrior, error) {
	prior := usual
	if w.TauPrior != nil {
		prior.Kind = *w.TauPrior
	}
	switch prior.Kind {
	case bayes.Uniform:
		if len(w.TauScale) > 0 {
			return prior, fmt.Errorf("%s: a uniform prior for τ has no scale; leave it away, or give %s half-normal, half-cauchy or log-normal", SettingTauScale, SettingTauPrior)
		}
		return bayes.TauPrior{Kind: bayes.Uniform}, nil
	case bayes.LogNormal:
		if len(w.TauScale) != 2 {
			return prior, fmt.Errorf("%s: a log-normal prior for τ needs two numbers, the mean and the standard deviation of ln τ, such as \"-1.3, 0.8\"", SettingTauScale)
		}
		prior = bayes.TauPrior{Kind: bayes.LogNormal, MeanLog: w.TauScale[0], SDLog: w.TauScale[1]}
		return prior, prior.Check()
	}
	if len(w.TauScale) == 1 {
		prior.Scale = w.TauScale[0]
	}
	switch {
	case len(w.TauScale) == 2:
		return prior, fmt.Errorf("%s: a %s prior for τ has one scale, and two numbers are given; two are for log-normal", SettingTauScale, prior.Kind)
	case prior.Scale == 0:
		return prior, fmt.Errorf("%s: a %s prior for τ needs its scale, as no usual one is known in the unit of these estimates", SettingTauScale, prior.Kind)
	}
	return prior, prior.Check()
}

// Effect returns the prior for the effect of a form under one; mean is its centre
// less the null, on the analysis scale. It returns an error that says which setting
// is missing or does not go with the form.
func (w Weighing) Effect(mean float64) (bayes.EffectPrior, error) {
	prior := bayes.EffectPrior{Kind: bayes.NormalPrior, Mean: mean, Scale: w.EffectSD, Side: w.EffectSide}
	if w.Form == evidence.CauchyPriorForm {
		prior.Kind = bayes.CauchyPrior
	}
	switch {
	case w.EffectSD == 0:
		return prior, fmt.Errorf("evidence: %s needs the scale of the prior for the effect, which decides the answer and has no usual value: state it with --%s, such as 0.5 for a log ratio", w.Form, SettingEffectSD)
	case prior.Kind == bayes.CauchyPrior && mean != 0:
		return prior, fmt.Errorf("%s: a Cauchy prior is centred on no effect; leave the centre away, or choose normal-prior", SettingEffectMean)
	}
	return prior, prior.Check()
}

func checkTauScale(text string) error {
	all, err := parseNumbers(text)
	switch {
	case err != nil:
		return err
	case len(all) > 2:
		return fmt.Errorf("%d numbers given; give the scale, or for log-normal the mean and the standard deviation of ln τ", len(all))
	case !(all[len(all)-1] > 0):
		return fmt.Errorf("%q: a scale, or standard deviation, is above 0", text)
	}
	return nil
}

func checkPositive(text string) error {
	x, err := parseNumber(text)
	if err == nil && (!(x > 0) || math.IsInf(x, 1)) {
		err = fmt.Errorf("%q is not above 0", text)
	}
	return err
}
