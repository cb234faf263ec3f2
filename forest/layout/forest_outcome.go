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
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// ForestOf returns what the forest chart of a pooled outcome shows. It returns
// an error if the outcome has no result.
func ForestOf(s *synthesis.Synthesis, o *synthesis.Outcome) (ForestInput, error) {
	if o.Result == nil {
		return ForestInput{}, fmt.Errorf("%s has no result to draw: %s", o.Called(), o.Problem)
	}
	if o.Analysis.NullMissing {
		return ForestInput{}, fmt.Errorf("%s: the measure, %s, has no value of no effect, and the chart needs a null for its evidence rail: give --null", o.Called(), o.Analysis.Measure)
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
			K: fit.Mean.K, Totals: armTotals(o), OfPriors: !o.Analysis.Weighing.Own(),
		}
		if c := fit.Clustered; c != nil {
			in.Pooled.Clusters = c.Clusters
		}
		in.Prediction, in.Spread = forestSpread(fit, words.Noun(s, 3))
	}
	in.dropIdleCounts()
	in.Notes = forestNotes(o)
	in.toReader(o.Analysis.Measure)
	return in, nil
}

// toReader puts the effects of a measure whose scale is no logarithm, such as a
// correlation, into the reader's unit: a linear axis shows them as they are. The
// spread stays on the analysis scale.
func (in *ForestInput) toReader(m effect.Measure) {
	if m.Log() {
		return
	}
	for _, value := range in.effects() {
		*value = effect.ToReader(m, *value)
	}
}

// effects returns every effect and limit that the chart shows.
func (in *ForestInput) effects() []*float64 {
	all := []*float64{&in.Scale.Null}
	for i := range in.Rows {
		r := &in.Rows[i]
		all = append(all, &r.Estimate, &r.Low, &r.High)
	}
	for i := range in.Blocks {
		if p := in.Blocks[i].Pooled; p != nil {
			all = append(all, &p.Estimate, &p.Low, &p.High)
		}
	}
	if p := in.Pooled; p != nil {
		all = append(all, &p.Estimate, &p.Low, &p.High)
	}
	if p := in.Prediction; p != nil {
		all = append(all, &p.Low, &p.High)
	}
	return all
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
	parts := words.Rows(s, o)
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
		Unwanted: unwanted(o, study.Estimate.Y), Dagger: study.Converted(),
	}
	if year := study.Source.Date.Year; year > 0 && !strings.Contains(row.Name, strconv.Itoa(year)) {
		row.Year = strconv.Itoa(year)
	}
	row.Counts[0] = countOf(study, review.EventsTreated, review.TotalTreated)
	row.Counts[1] = countOf(study, review.EventsControl, review.TotalControl)
	return row
}

// dropIdleCounts leaves the counts out where no study gives events: a column of
// dashes tells nothing.
func (in *ForestInput) dropIdleCounts() {
	for _, row := range in.Rows {
		if row.Counts[0].Events != "" || row.Counts[1].Events != "" {
			return
		}
	}
	for i := range in.Rows {
		in.Rows[i].Counts = [2]Count{}
	}
	if in.Pooled != nil {
		in.Pooled.Totals = [2]string{}
	}
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
	if fit.Method != "" {
		return nil, spread
	}
	if fit.Prediction == nil {
		return &ForestPrediction{Reason: "needs 3 " + noun}, spread
	}
	return &ForestPrediction{Low: fit.Prediction.Low, High: fit.Prediction.High}, spread
}

func forestNotes(o *synthesis.Outcome) []Note {
	notes := []Note{{Head: "Model", Text: words.ModelOf(o) + "."}}
	if text := daggerNote(o); text != "" {
		notes[0].Text += " † " + text
	}
	if text := zeroCellNote(o); text != "" {
		notes[0].Text += " " + text
	}
	notes = append(notes, formNotes(o)...)
	if len(o.Excluded) > 0 {
		notes = append(notes, Note{Head: "Left out", Text: leftOutNote(o)})
	}
	return notes
}

// zeroCellNote says, beside a method that pools counts as they are, whose own
// estimate is drawn with a correction.
func zeroCellNote(o *synthesis.Outcome) string {
	var names []string
	for i := range o.Studies {
		if o.Studies[i].Corrected && o.Studies[i].Table != nil && o.Result.Fit.Method != "" {
			names = append(names, o.Studies[i].Source.Name)
		}
	}
	if len(names) == 0 {
		return ""
	}
	if more := len(names) - mostLeftOut; more > 0 {
		names = append(names[:mostLeftOut], fmt.Sprintf("%d more", more))
	}
	return fmt.Sprintf("Drawn with a zero-cell correction that the pooled result does not have: %s.", strings.Join(names, ", "))
}

// mostLeftOut is how many left-out rows a chart names.
const mostLeftOut = 5

// leftOutNote names the rows that are not in the chart.
func leftOutNote(o *synthesis.Outcome) string {
	var names []string
	for i, e := range o.Excluded {
		if i == mostLeftOut {
			names = append(names, fmt.Sprintf("and %d more", len(o.Excluded)-i))
			break
		}
		names = append(names, e.Study)
	}
	return strings.Join(names, ", ") + "."
}

// daggerNote explains the daggers of an outcome: what the marked studies rest on.
func daggerNote(o *synthesis.Outcome) string {
	var reported, corrected, converted bool
	for i := range o.Studies {
		study := &o.Studies[i]
		for _, a := range study.Assumptions {
			switch {
			case study.Corrected && a == synthesis.AssumedCorrection:
				corrected = true
			case a == synthesis.AssumedReport:
				reported = true
			default:
				converted = true
			}
		}
	}
	switch {
	case converted && (reported || corrected):
		return "Converted, taken as reported, or a zero cell corrected."
	case converted:
		return "Converted, with an assumption."
	case reported && corrected:
		return "Effect as reported, or a zero cell corrected."
	case reported:
		return "Effect as reported; events or means not given."
	case corrected:
		return "A zero cell was corrected."
	}
	return ""
}
