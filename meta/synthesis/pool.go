package synthesis

import (
	"errors"
	"fmt"
	"math"

	"steelyard/meta"
	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
	"steelyard/meta/review"
	"steelyard/meta/sparse"
)

// pool fits the model and what stands beside it.
func (o *Outcome) pool(asked review.Analysis) error {
	if err := o.settleWeighing(asked); err != nil {
		return err
	}
	fit, err := o.fitOwn(o.Analysis.Model, o.Studies)
	if err != nil {
		return o.explain(err)
	}
	own := fit.Mean.Evidence
	if err := o.weigh(fit, o.Studies); err != nil {
		return err
	}
	o.Result = &Result{Fit: fit, Other: o.otherFit(asked.Model, fit.Model.Null), Without: o.withoutConverted()}
	o.Analysis.Model = fit.Model
	for i := range o.Studies {
		study := &o.Studies[i]
		study.Weight = fit.Weights[i]
		study.Interval.Low, study.Interval.High = studyInterval(study.Estimate, fit.Model.Level)
		if !o.Analysis.NullMissing {
			study.Evidence = evidence.Normal((study.Estimate.Y - fit.Model.Null) / study.Estimate.SE)
		}
	}
	if o.Analysis.NullMissing {
		return nil
	}
	if !o.Analysis.Weighing.Own() {
		o.Result.Empirical = &own
	}
	o.Result.Posterior = o.posterior(fit.Mean.Evidence)
	o.Result.DoubtersPrior = Belief{Prior: evidence.DoubtersPrior(fit.Mean.Evidence, believed), Posterior: believed}
	o.Result.Integrated = o.integrate()
	o.Result.Regions, err = o.regions()
	return err
}

// estimates returns the effects and standard errors of studies.
func estimates(studies []Study) (y, s []float64) {
	for _, study := range studies {
		y, s = append(y, study.Estimate.Y), append(s, study.Estimate.SE)
	}
	return y, s
}

// explain names the study that a model's complaint is about, and words what is
// known of an estimate that is no number.
func (o *Outcome) explain(err error) error {
	var boundary *sparse.BoundaryError
	if errors.As(err, &boundary) {
		return o.explainBoundary(boundary)
	}
	if input, ok := err.(*meta.InputError); ok && input.Index >= 0 && input.Index < len(o.Studies) {
		row := o.Studies[input.Index].Source
		return fmt.Errorf("%s (%s): %w", row.Name, row.Row, err)
	}
	return err
}

// otherFit returns the fit of the effects model that was not asked for, with the
// default methods where the asked ones belong to the other model; nil for a
// single study, where both are the same, and where the method has one alone.
func (o *Outcome) otherFit(asked meta.Model, null float64) *meta.Fit {
	if method, isTables := o.Analysis.Method.Tables(); len(o.Studies) < 2 || (isTables && !method.Random()) {
		return nil
	}
	other := asked
	other.Null = null
	other.Effects = meta.CommonEffect
	other.Interval = meta.DefaultInterval
	if asked.Effects == meta.CommonEffect {
		other.Effects = meta.RandomEffects
	}
	if asked.Interval == meta.ProfileLikelihood || asked.Interval == meta.HenmiCopas {
		other.Tau = meta.DefaultTau
	}
	fit, err := o.fit(other, o.Studies)
	if err != nil {
		return nil
	}
	return fit
}

// regions weighs benefit, trivial effect and harm; nil without an important
// difference.
func (o *Outcome) regions() ([]Region, error) {
	zone := o.Analysis.Important
	if zone == nil {
		return nil, nil
	}
	below, above := "lower", "higher"
	switch o.Analysis.Better {
	case review.BetterLower:
		below, above = "benefit", "harm"
	case review.BetterHigher:
		below, above = "harm", "benefit"
	}
	return regionsOf(o.Result.Fit.Mean.Location(), *zone, below, above, o.settingsWithin)
}

// regionsOf weighs the ranges below, within and above a zone, each against all
// other values; settings gives the predicted share of settings in a range.
func regionsOf(location evidence.Location, zone meta.Limits, below, above string, settings func(low, high float64) float64) ([]Region, error) {
	regions := []Region{
		{Name: below, Low: math.Inf(-1), High: zone.Low},
		{Name: "trivial", Low: zone.Low, High: zone.High},
		{Name: above, Low: zone.High, High: math.Inf(1)},
	}
	for i := range regions {
		r := &regions[i]
		here := evidence.Region{{Low: r.Low, High: r.High}}
		ratio, err := location.Region(here, here.Complement())
		if err != nil {
			return nil, fmt.Errorf("important: %w", err)
		}
		r.Evidence, r.LnM, r.Posterior = ratio, location.LnM(here), location.Posterior(here)
		r.Settings = settings(r.Low, r.High)
	}
	return regions, nil
}

// settingsWithin returns the predicted share of settings whose true effect lies
// between low and high: the distribution behind the prediction interval (Higgins,
// Thompson & Spiegelhalter 2009). It is −1 when there is none.
func (o *Outcome) settingsWithin(low, high float64) float64 {
	fit := o.Result.Fit
	if fit.Prediction == nil {
		return -1
	}
	center := fit.Mean.Estimate
	half := (fit.Prediction.High - fit.Prediction.Low) / 2
	df := fit.Prediction.DF
	scale := half / numeric.StudentCritical(1-fit.Model.Level, df)
	if !(scale > 0) {
		return -1
	}
	tail := func(x float64) float64 { return numeric.StudentTail((x-center)/scale, df) }
	return tail(low) - tail(high)
}
