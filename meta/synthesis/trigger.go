package synthesis

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"steelyard/meta"
	"steelyard/meta/choice"
	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// TriggerID names a trigger for a full update of a living review.
type TriggerID int

// The triggers.
const (
	SignificanceTrigger TriggerID = iota + 1 // T1
	EffectTrigger
	AbsoluteTrigger
	CertaintyTrigger
	ScopeTrigger
	InformationTrigger
	CorrectionTrigger
	PredictionTrigger
)

var triggerTitles = []string{
	"significance", "size of the effect", "importance", "certainty", "scope", "information", "corrections", "prediction",
}

// String returns "T1" to "T8".
func (t TriggerID) String() string { return fmt.Sprintf("T%d", int(t)) }

// Title names what the trigger watches: "significance".
func (t TriggerID) Title() string { return triggerTitles[t-1] }

// Verdict says whether a trigger is met.
type Verdict int

// A trigger is met, not met, or lacks what it is judged by.
const (
	TriggerNotMet Verdict = iota
	TriggerMet
	TriggerNotJudged
)

var verdictNames = choice.Of[Verdict]("verdict", "not met", "met", "not judged")

// String returns "met", "not met" or "not judged".
func (v Verdict) String() string { return verdictNames.String(v) }

// Trigger is one trigger for an outcome.
type Trigger struct {
	ID        TriggerID
	Verdict   Verdict
	Why       string        // why it is not judged
	Threshold *review.Value // of the plan, with its origin; nil where the trigger has none
	Before    *float64      // what was measured; nil where nothing is: see ID
	After     *float64      // for EffectTrigger and InformationTrigger the share that is held against the threshold
	Named     []string      // what met it, or came near: studies, cells, thresholds, guides
}

// triggers judges all triggers of an outcome.
func (o *OutcomeChange) triggers(plan *review.Plan) []Trigger {
	return []Trigger{
		o.significance(), o.effectSize(plan), o.importance(plan), o.certainty(),
		o.scope(), o.information(plan), o.correction(), o.prediction(),
	}
}

// notJudged says why a trigger that compares results cannot be judged; blank if it can.
func (o *OutcomeChange) notJudged() string {
	switch {
	case o.Current == nil:
		return "the outcome is gone"
	case o.Previous == nil:
		return "the outcome is new"
	case !o.hadResult():
		return "there was no result before"
	case !o.hasResult():
		return "there is no result now"
	case !o.Comparable():
		return "the measure or the value of no effect is another than before"
	}
	return ""
}

// againstNull is notJudged for what is held against no effect.
func (o *OutcomeChange) againstNull() string {
	if why := o.notJudged(); why != "" {
		return why
	}
	if o.Current.Analysis.NullMissing {
		return "the measure has no value of no effect; state one with --null"
	}
	return ""
}

func verdict(met bool) Verdict {
	if met {
		return TriggerMet
	}
	return TriggerNotMet
}

// reaches reports whether a share is at least a threshold, rounding errors apart.
func reaches(share, threshold float64) bool {
	const rounding = 1e-12
	return share >= threshold*(1-rounding)
}

// significance is T1.
func (o *OutcomeChange) significance() Trigger {
	t := Trigger{ID: SignificanceTrigger, Why: o.againstNull()}
	if t.Why != "" {
		t.Verdict = TriggerNotJudged
		return t
	}
	before, now := o.Previous.excludesNull(o.Previous.limits()), o.Current.excludesNull(o.Current.limits())
	t.Verdict = verdict(before != now)
	return t
}

// effectSize is T2: the distance of the estimate from no effect, on the analysis
// scale, has changed by a share of what it was. Shojania et al. (2007), Ann Intern Med
// 147:224-233, take half as a signal.
func (o *OutcomeChange) effectSize(plan *review.Plan) Trigger {
	t := Trigger{ID: EffectTrigger, Why: o.againstNull(), Threshold: threshold(plan, review.SettingTriggerEffect, o.Name)}
	if t.Why == "" && o.Previous.Result.Fit.Mean.Estimate == o.Previous.Analysis.Model.Null {
		t.Why = "the estimate was at no effect, of which there is no share"
	}
	if t.Why != "" {
		t.Verdict = TriggerNotJudged
		return t
	}
	before, now := o.Previous.Result.Fit.Mean.Estimate, o.Current.Result.Fit.Mean.Estimate
	share := math.Abs(now-before) / math.Abs(before-o.Previous.Analysis.Model.Null)
	t.After = finite(share)
	t.Verdict = verdict(reaches(share, triggerNumber(plan, review.SettingTriggerEffect, o.Name)))
	return t
}

// importance is T3: the estimate crossed a limit of the important difference, or the
// absolute difference at a baseline risk crossed its own.
func (o *OutcomeChange) importance(plan *review.Plan) Trigger {
	t := Trigger{ID: AbsoluteTrigger, Why: o.notJudged()}
	if t.Why != "" {
		t.Verdict = TriggerNotJudged
		return t
	}
	judged := false
	if zone := o.Current.Analysis.Important; zone != nil {
		judged = true
		before, now := o.Previous.Result.Fit.Mean.Estimate, o.Current.Result.Fit.Mean.Estimate
		for _, limit := range []float64{zone.Low, zone.High} {
			if (before < limit) != (now < limit) {
				t.Named = append(t.Named, fmt.Sprintf("the important difference, %.4g", effect.ToReader(o.Current.Analysis.Measure, limit)))
			}
		}
	}
	per1000 := plan.Value(review.SettingPer1000, o.Name)
	for i := range o.Absolute {
		if a := &o.Absolute[i]; per1000.Text != "" && a.comparable() {
			judged, t.Threshold = true, &per1000
			t.Named = append(t.Named, a.crossed(per1000Limits(plan, o.Name))...)
		}
	}
	if !judged {
		t.Verdict, t.Why = TriggerNotJudged, "no threshold is set: give an important difference, or one per 1000"
		return t
	}
	t.Verdict = verdict(len(t.Named) > 0)
	return t
}

// certainty is T4.
func (o *OutcomeChange) certainty() Trigger {
	t := Trigger{ID: CertaintyTrigger, Why: o.notJudged()}
	if t.Why != "" {
		t.Verdict = TriggerNotJudged
		return t
	}
	for _, g := range o.Guides {
		if g.Crossed {
			t.Named = append(t.Named, g.Name)
		}
	}
	t.Verdict = verdict(len(t.Named) > 0)
	return t
}

// scope is T5: a new outcome, or a new value in the column of subgroups.
func (o *OutcomeChange) scope() Trigger {
	t := Trigger{ID: ScopeTrigger}
	switch {
	case o.Current == nil:
		t.Verdict, t.Why = TriggerNotJudged, "the outcome is gone"
		return t
	case o.Previous == nil:
		t.Verdict, t.Named = TriggerMet, []string{"a new outcome"}
		return t
	}
	known := map[string]bool{}
	for _, old := range o.Rows.pairs {
		known[choice.Fold(subgroup(old))] = true
	}
	for _, old := range o.Rows.Removed {
		known[choice.Fold(subgroup(old))] = true
	}
	now := slices.Clone(o.Rows.New)
	for i := range o.Rows.Changed {
		now = append(now, o.Rows.Changed[i].Study)
	}
	slices.SortFunc(now, func(a, b *review.Study) int { return a.Row.Row - b.Row.Row })
	for _, s := range now {
		if name := subgroup(s); name != "" && !known[choice.Fold(name)] {
			known[choice.Fold(name)] = true
			t.Named = append(t.Named, "subgroup "+name)
		}
	}
	t.Verdict = verdict(len(t.Named) > 0)
	return t
}

func subgroup(s *review.Study) string {
	r, _ := s.Remark(review.Subgroup.String())
	return strings.TrimSpace(r.Text)
}

// information is T6: the share of the current weight that new rows carry.
func (o *OutcomeChange) information(plan *review.Plan) Trigger {
	t := Trigger{ID: InformationTrigger, Threshold: threshold(plan, review.SettingTriggerInformation, o.Name)}
	switch {
	case !o.hasResult():
		t.Verdict, t.Why = TriggerNotJudged, "there is no result now"
		return t
	case !o.hadResult():
		t.Verdict, t.Why = TriggerNotJudged, "there was no result before"
		return t
	}
	share := o.addedShare()
	t.After = &share
	for _, s := range o.Rows.New {
		t.Named = append(t.Named, s.Name)
	}
	t.Verdict = verdict(reaches(share, triggerNumber(plan, review.SettingTriggerInformation, o.Name)))
	return t
}

// retractionWords are what a cell says of a study that is withdrawn or corrected.
var retractionWords = []string{"retract", "withdrawn", "expression of concern", "erratum", "corrigendum", "correction"}

// correction is T7: a number of an earlier row was changed, a row was removed, or a
// cell came to speak of a retraction or correction.
func (o *OutcomeChange) correction() Trigger {
	t := Trigger{ID: CorrectionTrigger}
	for _, row := range o.Rows.Changed {
		for _, cell := range row.Cells {
			if cell.Number || speaksOfRetraction(cell.After) && !speaksOfRetraction(cell.Before) {
				t.Named = append(t.Named, corrected(row.Study.Name, cell.Header))
			}
		}
	}
	for _, s := range o.Rows.Removed {
		t.Named = append(t.Named, corrected(s.Name, "removed"))
	}
	for _, s := range o.Rows.New {
		for _, r := range s.Remarks {
			if speaksOfRetraction(r.Text) {
				t.Named = append(t.Named, corrected(s.Name, r.Header))
			}
		}
	}
	t.Verdict = verdict(len(t.Named) > 0)
	return t
}

// corrected names a row and what of it was corrected.
func corrected(study, what string) string { return study + " (" + what + ")" }

func speaksOfRetraction(text string) bool {
	text = strings.ToLower(text)
	return slices.ContainsFunc(retractionWords, func(w string) bool { return strings.Contains(text, w) })
}

// prediction is T8.
func (o *OutcomeChange) prediction() Trigger {
	t := Trigger{ID: PredictionTrigger, Why: o.againstNull()}
	if t.Why == "" && (o.Previous.Result.Fit.Prediction == nil || o.Current.Result.Fit.Prediction == nil) {
		t.Why = "there is no prediction interval before or now"
	}
	if t.Why != "" {
		t.Verdict = TriggerNotJudged
		return t
	}
	a, b := o.Previous.Result.Fit.Prediction, o.Current.Result.Fit.Prediction
	before := o.Previous.excludesNull(meta.Limits{Low: a.Low, High: a.High})
	now := o.Current.excludesNull(meta.Limits{Low: b.Low, High: b.High})
	t.Verdict = verdict(before != now)
	return t
}

// threshold returns the plan's value of a trigger's setting.
func threshold(plan *review.Plan, setting, outcome string) *review.Value {
	v := plan.Value(setting, outcome)
	return &v
}

// triggerNumber returns the number of a trigger's setting, which Set has checked.
func triggerNumber(plan *review.Plan, setting, outcome string) float64 {
	x, err := review.TriggerNumber(plan.Value(setting, outcome).Text)
	if err != nil {
		return math.Inf(1)
	}
	return x
}
