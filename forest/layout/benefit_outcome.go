package layout

import (
	"fmt"
	"math"
	"strings"

	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/evidence"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// BenefitOf returns what the chart of benefit, trivial effect and harm of an outcome
// shows. It returns an error if the outcome has no result, no value of no effect, no
// panel's part, or no important difference.
func BenefitOf(s *synthesis.Synthesis, o *synthesis.Outcome) (BenefitInput, error) {
	if err := drawable(o); err != nil {
		return BenefitInput{}, err
	}
	if o.Panel == nil {
		return BenefitInput{}, fmt.Errorf("%s has no panel's card to draw: ask for one", o.Called())
	}
	if o.Panel.Threshold == nil {
		return BenefitInput{}, fmt.Errorf("%s has no important difference to draw: set one with --important or --important-per-1000, before the results are seen", o.Called())
	}
	in := BenefitInput{
		Title: "Is the benefit large enough to matter?", Subtitle: accrualSubtitle(s, o, effectsText(o)+", "+words.Treatment(s)),
		Scale: accrualScale(o), Sides: sidesOf(s, o), Under: "without treatment", Level: o.Result.Fit.Model.Level,
	}
	if name := s.Arms[0]; !strings.EqualFold(name, "treated") && name != "" {
		in.Under = "without " + name
	}
	in.nameZones(o)
	for i := range o.Panel.Rows {
		r := &o.Panel.Rows[i]
		if r.Zone == nil {
			continue
		}
		in.PerThousand = in.PerThousand || r.Absolute != nil
		in.Rows = append(in.Rows, benefitRow(o, r))
	}
	if len(in.Rows) == 0 {
		return BenefitInput{}, fmt.Errorf("%s has no baseline at which its important difference can be drawn: %s", o.Called(), firstTrouble(o))
	}
	if in.PerThousand {
		in.Scale = EffectScale{Measure: "difference per 1000"}
	}
	in.Notes = benefitNotes(o)
	return in, nil
}

func firstTrouble(o *synthesis.Outcome) string {
	for _, r := range o.Panel.Rows {
		if r.Trouble != "" {
			return r.Trouble
		}
	}
	return "no reason is known"
}

// nameZones names both sides of the trivial zone, and what is weighed.
func (in *BenefitInput) nameZones(o *synthesis.Outcome) {
	good, bad := "important benefit", "important harm"
	in.Heads = [2]string{"Important benefit : trivial", "Trivial : harm"}
	in.Zones = [2]string{good, bad}
	switch o.Analysis.Better {
	case review.BetterHigher:
		in.Zones = [2]string{bad, good}
	case review.BetterUnknown:
		in.Title = "Is the effect large enough to matter?"
		in.Zones = [2]string{"important, lower", "important, higher"}
		in.Heads = [2]string{"Important, lower : trivial", "Trivial : higher"}
	}
}

func benefitRow(o *synthesis.Outcome, r *synthesis.PanelRow) BenefitRow {
	z := r.Zone
	row := BenefitRow{
		Name: "Baseline", From: math.NaN(), To: math.NaN(), Benefit: lnOrNaN(z.Benefit), Harm: lnOrNaN(z.Harm),
		Settings: settingsText(o, z),
	}
	mean := o.Result.Fit.Mean
	if a := r.Absolute; a != nil {
		row.Below = words.BaselineName(review.Baseline{Risk: r.Baseline.Risk})
		if r.Baseline.Name != "" {
			row.Name = capital(r.Baseline.Name)
		}
		d := a.Difference
		row.Estimate, row.Low, row.High = 1000*d.Value, 1000*d.Low, 1000*d.High
		whole := words.Absolute(row.Estimate, row.Low, row.High)
		row.Value, row.Interval, _ = strings.Cut(strings.TrimSuffix(whole, ")"), " (")
		if z.Low != nil {
			row.From = z.Per1000.Low
		}
		if z.High != nil {
			row.To = z.Per1000.High
		}
		return row
	}
	row.Name = capital(words.Measure(o.Analysis.Measure))
	row.Estimate, row.Low, row.High = drawn(o, mean.Estimate), drawn(o, mean.Low), drawn(o, mean.High)
	row.Value, row.Interval = words.ReaderValue(o, mean.Estimate), words.ReaderInterval(o, meta.Limits{Low: mean.Low, High: mean.High})
	row.From, row.To = drawn(o, z.Limits.Low), drawn(o, z.Limits.High)
	return row
}

func lnOrNaN(r *evidence.Ratio) float64 {
	if r == nil {
		return math.NaN()
	}
	return r.Ln()
}

// settingsText is the share of settings beyond the threshold that the rail weighs.
func settingsText(o *synthesis.Outcome, z *synthesis.PanelZone) string {
	for _, region := range z.Regions {
		wanted := region.Name == "benefit" || region.Name == "lower"
		if wanted && region.Settings >= 0 {
			return words.Probability(region.Settings) + " of settings"
		}
	}
	return ""
}

// benefitNotes say when the thresholds were set, and where the baselines come from.
func benefitNotes(o *synthesis.Outcome) []Note {
	t := o.Panel.Threshold
	text := fmt.Sprintf("%s %s from %s", t.Setting, t.Value.Text, words.Origin(t.Setting, t.Value))
	if t.Value.Date.Year != 0 {
		text += ", agreed " + t.Value.Date.String()
	}
	text += "."
	for _, f := range t.Flags {
		text += " " + words.FlagWords(f)
	}
	notes := []Note{{Head: "Set", Text: text}}
	if m := o.Panel.Median; m != nil && m.Used {
		notes = append(notes, Note{Head: "Baseline", Text: "none was given: the median of the studies’ own control arms stands in its place."})
	}
	return append(notes, biasNotes(o)...)
}
