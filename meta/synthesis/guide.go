package synthesis

import (
	"fmt"
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
	for _, size := range o.informationSizes(plan) {
		add(size.name, "", size.before, size.now, true)
		guides[len(guides)-1].Bound = 1
		guides[len(guides)-1].Crossed = (size.before < 1) != (size.now < 1)
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

// informationSize is the share of the optimal information size that the people reach.
type informationSize struct {
	name        string
	before, now float64
}

// informationSizes returns it at each baseline, of means without one; none where a
// state has no such size, or states no people.
func (o *OutcomeChange) informationSizes(plan *review.Plan) []informationSize {
	asked, err := plan.Analysis(o.Name)
	if err != nil {
		return nil
	}
	at := func(state *Outcome, risk float64) *Adequacy {
		zone, err := state.zoneAt(risk, asked.Panel.Per1000)
		if err != nil || state.Analysis.NullMissing {
			return nil
		}
		return state.adequacy(risk, zone, asked.Panel, state.panelSD(asked.Panel, plan))
	}
	places := []AbsoluteChange{{}}
	if len(o.Absolute) > 0 {
		places = o.Absolute
	}
	var all []informationSize
	for i := range places {
		risk := places[i].Baseline.Risk
		before, now := at(o.Previous, risk), at(o.Current, risk)
		if before == nil || now == nil || before.People == 0 || now.People == 0 {
			continue
		}
		name := "optimal information size (imprecision)"
		if len(places) > 1 {
			name = fmt.Sprintf("optimal information size, baseline %s", places[i].short())
		}
		all = append(all, informationSize{name: name, before: before.Share(), now: now.Share()})
	}
	return all
}

// short calls the baseline by its name, else by its risk per 1000.
func (a *AbsoluteChange) short() string {
	if a.Baseline.Name != "" {
		return a.Baseline.Name
	}
	return fmt.Sprintf("%.3g per 1000", per*a.Baseline.Risk)
}
