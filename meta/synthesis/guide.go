package synthesis

import (
	"math"

	"steelyard/meta/review"
)

// Guide is a number that people read when they judge certainty, with a bound that it
// may cross. Crossing it is no judgement.
type Guide struct {
	Name          string
	Before, After float64
	Bound         float64
	From          review.From // of the bound
	Share         bool        // the numbers are fractions
	Crossed       bool
}

// asymmetryStudies is the number of studies from which small-study effects can be
// tested: Sterne et al. (2011), BMJ 343:d4002.
const asymmetryStudies = 10

// guides returns the inputs to certainty that both states have: people and thresholds
// within the interval for imprecision, the share of scatter beyond chance for
// inconsistency, the weight at high risk of bias, and whether small-study effects can
// be tested.
func (o *OutcomeChange) guides(plan *review.Plan) []Guide {
	if !o.Comparable() {
		return nil
	}
	a, b := o.Previous, o.Current
	guides := []Guide{{
		Name: "thresholds within the interval (imprecision)", Before: float64(a.thresholdsWithin()), After: float64(b.thresholdsWithin()),
		Crossed: a.thresholdsWithin() != b.thresholdsWithin(),
	}}
	add := func(name, setting string, before, after float64, share bool) {
		g := Guide{Name: name, Before: before, After: after, Share: share, Bound: asymmetryStudies}
		if setting != "" {
			g.Bound, g.From = triggerNumber(plan, setting, o.Name), plan.Value(setting, o.Name).From
		}
		g.Crossed = (before < g.Bound) != (after < g.Bound)
		guides = append(guides, g)
	}
	if a.Counts.Participants > 0 && b.Counts.Participants > 0 {
		add("participants (imprecision)", review.SettingTriggerPeople, float64(a.Counts.Participants), float64(b.Counts.Participants), false)
	}
	if len(a.Studies) > 1 && len(b.Studies) > 1 {
		add("I² (inconsistency)", review.SettingTriggerScatter, a.scatterShare(), b.scatterShare(), true)
	}
	riskBefore, knownBefore := a.highRisk()
	if riskNow, knownNow := b.highRisk(); knownBefore && knownNow {
		add("weight at high risk of bias", review.SettingTriggerRisk, riskBefore, riskNow, true)
	}
	add("studies (small-study effects can be tested)", "", float64(len(a.Studies)), float64(len(b.Studies)), false)
	return guides
}

// scatterShare is I² by τ², or by Q beside a method for counts.
func (o *Outcome) scatterShare() float64 {
	h := o.Result.Fit.Heterogeneity
	if o.Result.Fit.Method != "" {
		return h.I2Q.Value
	}
	return h.I2Tau.Value
}

// thresholdsWithin counts no effect and the limits of the important difference that
// lie within the interval.
func (o *Outcome) thresholdsWithin() int {
	var bounds []float64
	if !o.Analysis.NullMissing {
		bounds = append(bounds, o.Analysis.Model.Null)
	}
	if zone := o.Analysis.Important; zone != nil {
		bounds = append(bounds, zone.Low, zone.High)
	}
	limits, n := o.limits(), 0
	for _, bound := range bounds {
		if !math.IsInf(bound, 0) && limits.Low <= bound && bound <= limits.High {
			n++
		}
	}
	return n
}
