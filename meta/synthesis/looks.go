package synthesis

import (
	"context"
	"fmt"

	"steelyard/meta"
	"steelyard/meta/accrual"
	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// LooksWanted asks what repeated looks at the growing review show by chance.
type LooksWanted struct {
	Draws  int      // sequences in each scenario
	Effect *float64 // the effect that is stated, in the reader's unit; nil for the pooled estimate
}

// Looks is what repeated looks at an outcome's cumulative analysis show, simulated:
// under no effect with τ² as estimated, under no effect with τ² = 0 where the
// estimate is above 0, and under a stated effect.
type Looks struct {
	Effect    float64 // the effect that is stated, on the analysis scale
	Pooled    bool    // it is the pooled estimate, nothing else being stated
	Scenarios []accrual.Repeated
}

// Stated reports whether a scenario has the stated effect rather than none; it is
// the last one.
func (l *Looks) Stated(i int) bool { return i == len(l.Scenarios)-1 }

// LooksEndless says what no simulation of some looks shows.
const LooksEndless = "Every number of steps is a fixed bound on the statistic: with looks that never end each is passed in time, under no effect too. " +
	"A review that goes on for longer than these looks passes it with a greater chance than stands here."

// look simulates the outcome's own sequence of standard errors. An outcome that
// cannot have repeated looks says so in a note. It returns an *accrual.InputError
// for an effect that the measure cannot have, and the cause if ctx ends.
func (w *LooksWanted) look(ctx context.Context, o *Outcome, order *order, work meta.Work) (*Looks, error) {
	switch {
	case o.Analysis.NullMissing:
		o.note("The measure has no value of no effect and none is given, so that there is no evidence to look at again: state one with --null.")
		return nil, nil
	case !o.Analysis.Weighing.Own():
		return nil, &accrual.InputError{Problem: fmt.Sprintf("looks: repeated looks are simulated in the forms of evidence empirical and student-t, as the form %s is too slow or rests on a prior that the simulation does not draw from; choose one of these with --%s, or leave --looks away",
			o.Analysis.Weighing.Form, review.SettingEvidence)}
	case len(o.Studies) < 2:
		o.note("There is one study only: repeated looks begin with two.")
		return nil, nil
	}
	pooled := o.Result.Fit.Mean
	result := &Looks{Effect: pooled.Estimate, Pooled: w.Effect == nil}
	if !result.Pooled {
		var err error
		if result.Effect, err = effect.FromReader(o.Analysis.Measure, *w.Effect); err != nil {
			return nil, &accrual.InputError{Problem: "the stated effect: " + err.Error()}
		}
	}
	if o.Analysis.Method != review.InverseVariance {
		o.note(fmt.Sprintf("Repeated looks are simulated with the standard errors of the studies' own estimates, pooled by %s, not by the method for counts.", review.InverseVariance))
	}
	_, s := estimates(o.Studies)
	sequence := accrual.Sequence{SE: s, Groups: order.groups, Model: o.Analysis.Model}
	scenarios := accrual.Scenarios(pooled, o.Analysis.Model.Null, &result.Effect)
	draws := accrual.Draws{N: w.Draws, Seed: o.Analysis.Model.Seed, Work: work}
	var err error
	if result.Scenarios, err = accrual.Looks(ctx, sequence, scenarios, draws); err != nil {
		return nil, err
	}
	return result, nil
}

// LooksDocument holds the repeated looks: the number of those that count, from two
// studies on, the sequences simulated in each scenario, and the effect stated.
type LooksDocument struct {
	Looks     int                `json:"looks"`
	Sequences int                `json:"sequences"`
	Effect    float64            `json:"stated_effect"`
	Scenarios []ScenarioDocument `json:"scenarios"`
}

// ScenarioDocument is what the looks show if the mean effect and τ² are these. The
// quantiles are of the largest number of steps over the looks; it has no mean.
type ScenarioDocument struct {
	Truth   string            `json:"truth"`
	Mean    float64           `json:"mean"`
	Tau2    float64           `json:"tau2"`
	AnyLook []ChanceDocument  `json:"any_look"`
	Last    []ChanceDocument  `json:"last_look"`
	Median  SimulatedDocument `json:"largest_steps_median"`
	High    SimulatedDocument `json:"largest_steps_95_percent"`
}

// ChanceDocument is the probability that the evidence reaches a number of steps;
// Error is the standard error of a simulation, 0 for what was computed.
type ChanceDocument struct {
	Steps  float64 `json:"steps"`
	Chance float64 `json:"chance"`
	Error  float64 `json:"error"`
}

// SimulatedDocument is a number with the standard error of its simulation, 0 for
// what was computed.
type SimulatedDocument struct {
	Value float64 `json:"value"`
	Error float64 `json:"error"`
}

func looksDocument(l *Looks) *LooksDocument {
	d := &LooksDocument{Looks: l.Scenarios[0].Looks, Sequences: l.Scenarios[0].Sequences, Effect: l.Effect}
	for i, r := range l.Scenarios {
		truth := "no effect"
		if l.Stated(i) {
			truth = "effect"
		}
		d.Scenarios = append(d.Scenarios, ScenarioDocument{
			Truth: truth, Mean: r.Scenario.Mean, Tau2: r.Scenario.Tau2,
			AnyLook: chanceDocuments(r.AnyLook), Last: chanceDocuments(r.LastLook),
			Median: SimulatedDocument(r.Median), High: SimulatedDocument(r.High),
		})
	}
	return d
}

func chanceDocuments(chances []accrual.Chance) []ChanceDocument {
	list := []ChanceDocument{}
	for _, c := range chances {
		list = append(list, ChanceDocument{Steps: c.Steps, Chance: c.Value.Value, Error: c.Error})
	}
	return list
}
