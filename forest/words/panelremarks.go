package words

import (
	"fmt"
	"slices"
	"strings"

	"steelyard/meta/dependence"
	"steelyard/meta/effect"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// panelRemarks says where baselines and thresholds come from, and what was assumed.
func panelRemarks(s *synthesis.Synthesis, o *synthesis.Outcome) []string {
	p := o.Panel
	var all []string
	if text := baselineSource(s, o); text != "" {
		all = append(all, text)
	}
	all = append(all, thresholdRemarks(o)...)
	if hasZone(p) && o.Analysis.Better == review.BetterUnknown {
		all = append(all, "No direction is called better, so that neither side is called benefit or harm: state it with --better or in the sheet.")
	}
	for i := range p.Rows {
		r := &p.Rows[i]
		if r.Trouble != "" {
			all = append(all, fmt.Sprintf("From %s: %s.", BaselineName(r.Baseline), r.Trouble))
		}
		if r.Absolute != nil && r.Absolute.Capped {
			all = append(all, fmt.Sprintf("From %s the effect would take a risk beyond 0 or 1; the table stops there. The measure does not suit that baseline.", BaselineName(r.Baseline)))
		}
	}
	all = append(all, sdRemark(o)...)
	if o.Analysis.Measure == effect.HazardRatio && p.NoAbsolute == "" {
		all = append(all, "The hazard ratio is of the event by the time that the baseline risk is for; for survival it must be turned round first.")
	}
	if hasTrial(p) {
		all = append(all, nullTrialRemark(o))
	}
	if form := o.Analysis.Weighing; hasZone(p) && !form.Own() {
		all = append(all, fmt.Sprintf("The ranges are weighed in the empirical form, not with the %s.", formNames[form.Form]))
	}
	if hasZone(p) {
		all = append(all, "Probability is the share of the estimate's own distribution in a region, before any belief about it; evidence weighs a region against all other effects. Both are of the mean effect, not of one setting.")
	}
	all = append(all, "The interval is one number beside two domains: do not rate down twice for one cause.")
	for _, c := range o.Result.Fit.Caveats {
		all = append(all, c.Text())
	}
	return append(all, o.Notes...)
}

// baselineSource says where the baselines come from, and what the studies' own were.
func baselineSource(s *synthesis.Synthesis, o *synthesis.Outcome) string {
	p := o.Panel
	if p.NoAbsolute != "" {
		return "No effect per 1000: " + p.NoAbsolute + "."
	}
	own := ""
	if m := p.Median; m != nil {
		own = fmt.Sprintf("the control arms of %s have a median of %s per 1000", Number(m.Studies, Noun(s, 1), Noun(s, 2)), Per1000(m.Risk))
		if m.Used {
			return fmt.Sprintf("No baseline risk is given: %s, which is offered in its place. It is of these %s, not of your people; give your own with --baseline or in the plan.", own, Noun(s, 2))
		}
		own = " For comparison, " + own + "."
	}
	text := fmt.Sprintf("Baseline risks from %s", Origin(review.SettingBaseline, p.Baselines))
	if p.Baselines.Reason != "" {
		text += ": " + strings.TrimSuffix(p.Baselines.Reason, ".")
	}
	return text + "." + own
}

// thresholdRemarks says where the important difference comes from and when it was set.
func thresholdRemarks(o *synthesis.Outcome) []string {
	t := o.Panel.Threshold
	if t == nil {
		return nil
	}
	text := fmt.Sprintf("Threshold: %s %s from %s", t.Setting, t.Value.Text, Origin(t.Setting, t.Value))
	if t.Value.Date.Year != 0 {
		text += ", agreed " + t.Value.Date.String()
	}
	if t.Value.Reason != "" {
		text += ": " + strings.TrimSuffix(t.Value.Reason, ".")
	}
	all := []string{text + "."}
	if t.Replaced != nil {
		all = append(all, fmt.Sprintf("The setting important (%s, %s) is not used here: the difference per 1000 goes before it.", t.Replaced.Text, Origin(review.SettingImportant, *t.Replaced)))
	}
	for _, f := range t.Flags {
		all = append(all, FlagWords(f))
	}
	return all
}

// FlagWords says what is known of when a threshold was set.
func FlagWords(f synthesis.ThresholdFlag) string {
	switch f.Kind {
	case synthesis.FlagCalled:
		return "CAUTION: the threshold was given with this call, so nothing records that it was agreed before the results were seen; write it into the plan with its date."
	case synthesis.FlagUndated:
		return "The plan has no date beside the threshold: whether it was agreed before the results is not on record. A column date in the plan records it."
	case synthesis.FlagAfterJudgement:
		return fmt.Sprintf("CAUTION: the threshold was agreed after the judgement of %s (%s): it may have been chosen by the results.", f.Date, f.Place)
	case synthesis.FlagChanged:
		was := "had none"
		if f.Was != "" {
			was = "had " + f.Was
		}
		return fmt.Sprintf("CAUTION: the threshold was entered after results existed: %s %s.", f.File, was)
	}
	return fmt.Sprintf("The threshold stood already in the earlier result %s.", f.File)
}

// sdRemark says which standard deviation is in use, or why one is needed.
func sdRemark(o *synthesis.Outcome) []string {
	sd, m := o.Panel.SD, o.Analysis.Measure
	switch {
	case sd == nil && m == effect.StandardisedMeanDifference:
		return []string{"A standardised difference is no clinical unit: state the standard deviation of a scale that your readers know with --standard-deviation or in the plan, and it is read in that unit."}
	case sd == nil || m == effect.StandardisedMeanDifference:
		return nil
	case m != effect.MeanDifference:
		return []string{fmt.Sprintf("The setting standard-deviation (%s) is not used: %s needs none.", plain(sd.Value), m.WithArticle())}
	case sd.Stated == nil:
		return []string{fmt.Sprintf("Information size and null trial rest on a standard deviation of %s, the median of the control arms; state your own with --standard-deviation.", plain(sd.Value))}
	}
	return []string{fmt.Sprintf("Information size and null trial rest on a standard deviation of %s (%s).", plain(sd.Value), Origin(review.SettingSD, *sd.Stated))}
}

func nullTrialRemark(o *synthesis.Outcome) string {
	text := "A trial that found no effect: two equal arms, the baseline risk in both, its estimate exactly none; pooled with the others anew, τ too. The smallest one is searched in steps of a fifth, then narrowed to two people."
	if len(o.Studies) == 1 {
		text += " Beside one study it makes two, whose interval on one degree of freedom is wide whatever its size."
	}
	if way := o.Analysis.Dependence; way != dependence.Independent {
		text += fmt.Sprintf(" It is pooled with the estimates as if independent, not by the dependence of the plan (%s).", way)
	}
	if o.Analysis.Method != review.InverseVariance {
		text += fmt.Sprintf(" It is pooled by %s, not by %s.", review.InverseVariance, o.Analysis.Method)
	}
	return text
}

func hasZone(p *synthesis.Panel) bool {
	return slices.ContainsFunc(p.Rows, func(r synthesis.PanelRow) bool { return r.Zone != nil })
}

func hasTrial(p *synthesis.Panel) bool {
	has := func(b *synthesis.Boundary) bool { return b != nil && b.Trial != nil }
	return slices.ContainsFunc(p.Rows, func(r synthesis.PanelRow) bool {
		return has(r.Null) || (r.Zone != nil && (has(r.Zone.Low) || has(r.Zone.High)))
	})
}
