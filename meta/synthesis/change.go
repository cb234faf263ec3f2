package synthesis

import (
	"math"
	"slices"
	"strings"

	"steelyard/meta"
	"steelyard/meta/choice"
	"steelyard/meta/review"
)

// State is a review at one time: its sheet as read, and its results.
type State struct {
	Extraction *review.Extraction
	Synthesis  *Synthesis
}

// Change is what differs between two states of a review.
type Change struct {
	Previous, Current State
	Settings          []SettingChange
	Outcomes          []OutcomeChange // in the order of the current sheet, those that are gone last
}

// SettingChange is a setting with another value than before.
type SettingChange struct {
	Setting, Outcome string // a blank outcome: for all
	Before, After    review.Value
}

// OutcomeChange is what differs in one outcome.
type OutcomeChange struct {
	Name     string
	Previous *Outcome // nil: a new outcome
	Current  *Outcome // nil: the outcome is gone
	Rows     RowChanges
	Weights  []WeightChange // of studies pooled before or now, in the order of the current sheet
	Absolute []AbsoluteChange
	Guides   []Guide // inputs to certainty, each with the bound it may cross
	Triggers []Trigger
	Looks    *RepeatedLooks // how often the review has looked; nil unless worked out
}

// WeightChange is a study's share of the pooled weight, negative where it was not
// pooled.
type WeightChange struct {
	Study         string
	Before, After float64
}

// Compare returns what differs between two states of a review: rows, results, and
// which triggers for a full update are met, by the thresholds of the current plan.
// Neither state is modified.
func Compare(previous, current State) *Change {
	c := &Change{Previous: previous, Current: current}
	c.Settings = settingChanges(previous, current)
	for i := range current.Synthesis.Outcomes {
		now := &current.Synthesis.Outcomes[i]
		c.Outcomes = append(c.Outcomes, c.outcome(now.Name, outcomeNamed(previous.Synthesis, now.Name), now))
	}
	for i := range previous.Synthesis.Outcomes {
		before := &previous.Synthesis.Outcomes[i]
		if outcomeNamed(current.Synthesis, before.Name) == nil {
			c.Outcomes = append(c.Outcomes, c.outcome(before.Name, before, nil))
		}
	}
	return c
}

func outcomeNamed(s *Synthesis, name string) *Outcome {
	for i := range s.Outcomes {
		if choice.Fold(s.Outcomes[i].Name) == choice.Fold(name) {
			return &s.Outcomes[i]
		}
	}
	return nil
}

// outcome compares one outcome.
func (c *Change) outcome(name string, before, now *Outcome) OutcomeChange {
	o := OutcomeChange{Name: name, Previous: before, Current: now}
	o.Rows = rowChanges(rowsOf(c.Previous.Extraction, name), rowsOf(c.Current.Extraction, name))
	o.Rows.SecondReports = secondReports(c.Previous.Synthesis, c.Current.Synthesis, &o)
	o.Weights = o.weights()
	o.Absolute = o.absolute(c.Current.Synthesis.Plan)
	o.Guides = o.guides(c.Current.Synthesis.Plan)
	o.Triggers = o.triggers(c.Current.Synthesis.Plan)
	return o
}

func rowsOf(x *review.Extraction, outcome string) []*review.Study {
	var rows []*review.Study
	for i := range x.Studies {
		if choice.Fold(x.Studies[i].Outcome) == choice.Fold(outcome) {
			rows = append(rows, &x.Studies[i])
		}
	}
	return rows
}

// settingChanges returns the settings whose values differ, for all outcomes and for
// those that have one of their own.
func settingChanges(previous, current State) []SettingChange {
	var all []SettingChange
	a, b := previous.Synthesis.Plan, current.Synthesis.Plan
	names := []string{""}
	for _, plan := range []*review.Plan{a, b} {
		own, _ := plan.Outcomes()
		for _, name := range own {
			if !slices.Contains(names, name) {
				names = append(names, name)
			}
		}
	}
	for _, outcome := range names {
		for _, s := range review.Settings() {
			change := SettingChange{Setting: s.Name, Outcome: outcome, Before: a.Value(s.Name, outcome), After: b.Value(s.Name, outcome)}
			general := outcome != "" && change.Before.Text == a.Value(s.Name, "").Text && change.After.Text == b.Value(s.Name, "").Text
			if change.Before.Text != change.After.Text && !general {
				all = append(all, change)
			}
		}
	}
	return all
}

// Comparable reports whether the outcome has results before and now that mean the
// same: the same measure, and the same value of no effect.
func (o *OutcomeChange) Comparable() bool {
	if !o.hadResult() || !o.hasResult() {
		return false
	}
	a, b := &o.Previous.Analysis, &o.Current.Analysis
	return a.Measure == b.Measure && a.NullMissing == b.NullMissing && (a.NullMissing || a.Model.Null == b.Model.Null)
}

func (o *OutcomeChange) hadResult() bool { return o.Previous != nil && o.Previous.Result != nil }
func (o *OutcomeChange) hasResult() bool { return o.Current != nil && o.Current.Result != nil }

// Gained reports whether the outcome has a result now and had none.
func (o *OutcomeChange) Gained() bool { return o.hasResult() && !o.hadResult() }

// Lost reports whether the outcome had a result and has none now.
func (o *OutcomeChange) Lost() bool { return o.hadResult() && !o.hasResult() }

// Met returns the triggers of the outcome that are met.
func (o *OutcomeChange) Met() []Trigger {
	return slices.DeleteFunc(slices.Clone(o.Triggers), func(t Trigger) bool { return t.Verdict != TriggerMet })
}

// Material reports whether a trigger is met, or a result gained or lost.
func (o *OutcomeChange) Material() bool { return o.Gained() || o.Lost() || len(o.Met()) > 0 }

// Material reports whether any outcome has changed materially.
func (c *Change) Material() bool {
	return slices.ContainsFunc(c.Outcomes, func(o OutcomeChange) bool { return o.Material() })
}

// Nothing reports whether sheet, plan and results are the same.
func (c *Change) Nothing() bool {
	if len(c.Settings) > 0 || c.Material() {
		return false
	}
	return !slices.ContainsFunc(c.Outcomes, func(o OutcomeChange) bool {
		return o.Rows.Any() || o.Previous == nil || o.Current == nil || !sameResult(o.Previous, o.Current)
	})
}

func sameResult(a, b *Outcome) bool {
	if a.Result == nil || b.Result == nil {
		return a.Result == b.Result && a.Problem == b.Problem
	}
	x, y := a.Result.Fit.Mean, b.Result.Fit.Mean
	return x.K == y.K && x.Estimate == y.Estimate && x.Low == y.Low && x.High == y.High
}

// weights pairs the pooled studies of both states.
func (o *OutcomeChange) weights() []WeightChange {
	const not = -1
	before := map[*review.Study]float64{}
	if o.hadResult() {
		for i := range o.Previous.Studies {
			before[o.Previous.Studies[i].Source] = o.Previous.Studies[i].Weight
		}
	}
	now := map[*review.Study]float64{}
	var order []*review.Study
	if o.hasResult() {
		for i := range o.Current.Studies {
			source := o.Current.Studies[i].Source
			now[source], order = o.Current.Studies[i].Weight, append(order, source)
		}
	}
	var all []WeightChange
	for _, source := range order {
		w := WeightChange{Study: source.Name, Before: not, After: now[source]}
		if old := o.Rows.pairs[source]; old != nil {
			if share, pooled := before[old]; pooled {
				w.Before = share
				delete(before, old)
			}
		}
		all = append(all, w)
	}
	if o.hadResult() {
		for i := range o.Previous.Studies {
			if source := o.Previous.Studies[i].Source; hasKey(before, source) {
				all = append(all, WeightChange{Study: source.Name, Before: before[source], After: not})
			}
		}
	}
	return all
}

func hasKey(m map[*review.Study]float64, key *review.Study) bool {
	_, ok := m[key]
	return ok
}

// addedShare returns the share of the current weight that new rows carry.
func (o *OutcomeChange) addedShare() float64 {
	share := 0.0
	for i := range o.Current.Studies {
		if study := &o.Current.Studies[i]; slices.Contains(o.Rows.New, study.Source) {
			share += study.Weight
		}
	}
	return share
}

// excludesNull reports whether limits leave out no effect.
func (o *Outcome) excludesNull(l meta.Limits) bool {
	null := o.Analysis.Model.Null
	return l.Low > null || l.High < null
}

// limits returns the interval of an outcome's pooled mean.
func (o *Outcome) limits() meta.Limits {
	m := o.Result.Fit.Mean
	return meta.Limits{Low: m.Low, High: m.High}
}

// highRisk returns the share of the pooled weight of studies whose risk of bias is
// called high, serious or critical; known is false where no study has a judgement.
func (o *Outcome) highRisk() (share float64, known bool) {
	for i := range o.Studies {
		risk := strings.ToLower(o.Studies[i].Source.Cell("risk-of-bias"))
		known = known || risk != ""
		if strings.Contains(risk, "high") || strings.Contains(risk, "serious") || strings.Contains(risk, "critical") {
			share += o.Studies[i].Weight
		}
	}
	return math.Min(share, 1), known
}
