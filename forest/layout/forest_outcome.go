package layout

import (
	"fmt"
	"math"
	"path"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"

	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// ForestOf returns what the forest chart of a pooled outcome shows. It returns
// an error if the outcome has no result.
func ForestOf(s *synthesis.Synthesis, o *synthesis.Outcome) (ForestInput, error) {
	if o.Result == nil {
		return ForestInput{}, fmt.Errorf("outcome %q has no result to draw: %s", o.Name, o.Problem)
	}
	fit := o.Result.Fit
	notation := words.OutcomeNotation(o)
	in := ForestInput{
		Title:    chartTitle(s, o),
		Subtitle: chartSubtitle(s, o),
		Study:    words.Noun(s, 1),
		Scale: EffectScale{
			Measure: words.Measure(o.Analysis.Measure), Ratio: o.Analysis.Measure.Log(),
			Null: fit.Model.Null, Decimals: notation.Decimals,
		},
		Sides:    sidesOf(s, o),
		BiasOpen: words.BiasRemark(o) != "",
		Level:    fit.Model.Level,
	}
	for _, study := range o.Studies {
		in.Rows = append(in.Rows, forestRow(o, study))
	}
	if fit.Mean.K > 1 {
		in.Pooled = &ForestPooled{
			Estimate: fit.Mean.Estimate, Low: fit.Mean.Low, High: fit.Mean.High,
			LnEvidence: fit.Mean.Evidence.Ln(), Unwanted: unwanted(o, fit.Mean.Estimate),
			K: fit.Mean.K, Totals: armTotals(o),
		}
		in.Prediction, in.Spread = forestSpread(fit, words.Noun(s, 3))
	}
	in.Notes = forestNotes(o)
	return in, nil
}

// chartTitle is the outcome's name, or the file's where the sheet has none.
func chartTitle(s *synthesis.Synthesis, o *synthesis.Outcome) string {
	title := o.Name
	if title == "" {
		return strings.TrimSuffix(s.Source.File, path.Ext(s.Source.File))
	}
	first, size := utf8.DecodeRuneInString(title)
	return string(unicode.ToUpper(first)) + title[size:]
}

func chartSubtitle(s *synthesis.Synthesis, o *synthesis.Outcome) string {
	k := len(o.Studies)
	parts := fmt.Sprintf("%s %s", words.Count(k), words.Noun(s, k))
	if o.Counts.Participants > 0 {
		parts += fmt.Sprintf(", %s participants", words.Count(o.Counts.Participants))
	}
	parts += " · " + words.Measure(o.Analysis.Measure)
	switch {
	case k == 1:
	case o.Result.Fit.Model.Effects == meta.CommonEffect:
		parts += ", common effect"
	default:
		parts += ", random effects"
	}
	if wanted := words.Wanted(o); wanted != "" {
		parts += ", " + wanted
	}
	return parts
}

func sidesOf(s *synthesis.Synthesis, o *synthesis.Outcome) Sides {
	sides := Sides{Lower: "lower", Higher: "higher", Arms: s.Arms}
	switch o.Analysis.Measure {
	case effect.OddsRatio, effect.RiskRatio, effect.RiskDifference, effect.HazardRatio, effect.RateRatio:
		sides.Lower, sides.Higher = "fewer", "more"
	}
	return sides
}

func unwanted(o *synthesis.Outcome, y float64) bool {
	null := o.Analysis.Model.Null
	return (o.Analysis.Better == review.BetterLower && y > null) ||
		(o.Analysis.Better == review.BetterHigher && y < null)
}

func forestRow(o *synthesis.Outcome, study synthesis.Study) ForestRow {
	row := ForestRow{
		Name: study.Source.Name, Estimate: study.Estimate.Y, Low: study.Interval.Low, High: study.Interval.High,
		Weight: study.Weight, LnEvidence: study.Evidence.Ln(),
		Unwanted: unwanted(o, study.Estimate.Y), Dagger: study.Converted(o),
	}
	if year := study.Source.Date.Year; year > 0 && !strings.Contains(row.Name, strconv.Itoa(year)) {
		row.Year = strconv.Itoa(year)
	}
	row.Counts[0] = countOf(study, review.EventsTreated, review.TotalTreated)
	row.Counts[1] = countOf(study, review.EventsControl, review.TotalControl)
	return row
}

func countOf(study synthesis.Study, events, total review.Field) Count {
	text := func(f review.Field) string {
		if n, ok := study.Source.Number(f); ok {
			return words.People(n.Value)
		}
		return ""
	}
	return Count{Events: text(events), Total: text(total)}
}

// armTotals sums the people of each arm; blank where a study does not say.
func armTotals(o *synthesis.Outcome) [2]string {
	var totals [2]string
	for arm, field := range []review.Field{review.TotalTreated, review.TotalControl} {
		sum, all := 0.0, true
		for _, study := range o.Studies {
			n, ok := study.Source.Number(field)
			sum, all = sum+n.Value, all && ok
		}
		if all {
			totals[arm] = words.People(sum)
		}
	}
	return totals
}

func forestSpread(fit *meta.Fit, noun string) (*ForestPrediction, *ForestSpread) {
	if fit.Model.Effects == meta.CommonEffect {
		return nil, nil
	}
	spread := &ForestSpread{
		Tau: math.Sqrt(fit.Mean.Tau2), Low: math.Sqrt(fit.Tau2.Low), High: math.Sqrt(fit.Tau2.High),
		HasLimits: !math.IsInf(fit.Tau2.High, 1),
	}
	if fit.Prediction == nil {
		return &ForestPrediction{Reason: "needs 3 " + noun}, spread
	}
	return &ForestPrediction{Low: fit.Prediction.Low, High: fit.Prediction.High}, spread
}

func forestNotes(o *synthesis.Outcome) []Note {
	notes := []Note{{Head: "Model", Text: words.Model(o.Result.Fit) + "."}}
	var reported, corrected bool
	for _, study := range o.Studies {
		corrected = corrected || study.Corrected
		reported = reported || (study.Converted(o) && !study.Corrected)
	}
	switch {
	case reported && corrected:
		notes[0].Text += " † Effect as reported, or a zero cell corrected."
	case reported:
		notes[0].Text += " † Effect as reported; events or means not given."
	case corrected:
		notes[0].Text += " † A zero cell was corrected."
	}
	if o.Result.Fit.Model.Evidence == evidence.StudentForm {
		notes = append(notes, Note{Head: "Evidence", Text: "Student-t form in place of the matched form."})
	}
	return notes
}
