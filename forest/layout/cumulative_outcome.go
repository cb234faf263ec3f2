package layout

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/accrual"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// CumulativeOf returns what the cumulative chart of an outcome shows; its scale of
// probability starts from the first of the stated priors. It returns an error if
// the outcome has no result, no value of no effect, or no cumulative analysis.
func CumulativeOf(s *synthesis.Synthesis, o *synthesis.Outcome) (CumulativeInput, error) {
	if err := drawable(o); err != nil {
		return CumulativeInput{}, err
	}
	if o.Accrual == nil || len(o.Accrual.Cumulative) == 0 {
		return CumulativeInput{}, fmt.Errorf("%s has no cumulative analysis to draw: ask for one", o.Called())
	}
	noun := words.Noun(s, 2)
	in := CumulativeInput{
		Title: "Evidence as the " + noun + " arrived", Subtitle: accrualSubtitle(s, o, effectsText(o)), Study: words.Noun(s, 1),
		Scale: accrualScale(o), Sides: sidesOf(s, o), Method: words.FormText(o, refitText(o.Result.Fit)), Level: o.Result.Fit.Model.Level,
	}
	if len(o.Analysis.Prior) > 0 {
		in.Prior = o.Analysis.Prior[0]
	}
	switch order := o.Accrual.Order; order.By {
	case synthesis.OrderByDate:
	case synthesis.OrderByFile:
		in.Title, in.Order = "Evidence as the "+noun+" were added", "in the order of the sheet"
	default:
		in.Title, in.Order = "Evidence as the "+noun+" were added", "by "+order.By
	}
	var failed int
	in.Points, failed = accrualPoints(o, in.Order != "")
	in.Notes = append([]Note{looksNote(s, o.Accrual.Looks)}, biasNotes(o)...)
	if failed > 0 {
		in.Notes = append(in.Notes, Note{Head: "Left out", Text: fmt.Sprintf("%s of the points, where the %s so far cannot be pooled.", words.Count(failed), noun)})
	}
	return in, nil
}

// accrualPoints returns the points that have a result, and how many have none;
// what entered at those enters at the next point.
func accrualPoints(o *synthesis.Outcome, labelled bool) (points []CumulativePoint, failed int) {
	var waiting []Arrival
	for _, entry := range o.Accrual.Cumulative {
		for _, row := range entry.Entered {
			name, year := nameAndYear(o.Studies[row].Source)
			waiting = append(waiting, Arrival{Name: name, Year: year})
		}
		if entry.Problem != nil {
			failed++
			continue
		}
		p := CumulativePoint{
			Entered: waiting, Date: o.Studies[entry.Entered[0]].Source.Date, K: entry.K,
			LnEvidence: entry.Mean.Evidence.Ln(),
		}
		p.Estimate, p.Low, p.High = drawn(o, entry.Mean.Estimate), drawn(o, entry.Mean.Low), drawn(o, entry.Mean.High)
		if labelled {
			p.Label = entry.At
		}
		points = append(points, p)
		waiting = nil
	}
	return points, failed
}

// looksNote says what repeated looks do: how often they pass each step under no
// effect, if that was simulated.
func looksNote(s *synthesis.Synthesis, l *synthesis.Looks) Note {
	if l == nil {
		return Note{Head: "Repeated looks", Text: "each point is one look at growing data; the more looks, the likelier that chance alone passes a line at one of them."}
	}
	r := l.Scenarios[0]
	pass := func(chances []accrual.Chance) string {
		var all []string
		for _, c := range chances {
			all = append(all, words.Probability(c.Value.Value)+" for "+words.Odds(c.Steps*evidence.LnStep))
		}
		return strings.Join(all, ", ")
	}
	return Note{Head: "Repeated looks", Text: fmt.Sprintf("chance, were there no effect and τ %s, to pass a line at one of the %s from two %s on: %s; at the last look: %s (%s simulated sequences). "+
		"With looks that never end each line is passed in time.",
		words.Tau(math.Sqrt(r.Scenario.Tau2)), words.Number(r.Looks, "look", "looks"), words.Noun(s, 2), pass(r.AnyLook), pass(r.LastLook), words.Count(r.Sequences))}
}

// drawable returns an error if an outcome has no result whose evidence can be
// drawn.
func drawable(o *synthesis.Outcome) error {
	switch {
	case o.Result == nil:
		return fmt.Errorf("%s has no result to draw: %s", o.Called(), o.Problem)
	case o.Analysis.NullMissing:
		return fmt.Errorf("%s: the measure, %s, has no value of no effect, and the chart needs a null for its evidence: give --null", o.Called(), o.Analysis.Measure)
	}
	return nil
}

// drawn is a value as a chart takes it: on the analysis scale for ratios, else in
// the reader's unit, which a linear axis shows as it is.
func drawn(o *synthesis.Outcome, v float64) float64 {
	if o.Analysis.Measure.Log() {
		return v
	}
	return effect.ToReader(o.Analysis.Measure, v)
}

func accrualScale(o *synthesis.Outcome) EffectScale {
	return EffectScale{
		Measure: words.Measure(o.Analysis.Measure), Ratio: o.Analysis.Measure.Log(),
		Null: drawn(o, o.Result.Fit.Model.Null), Decimals: words.OutcomeNotation(o).Decimals,
	}
}

// accrualSubtitle names the outcome and says what is drawn of it.
func accrualSubtitle(s *synthesis.Synthesis, o *synthesis.Outcome, what string) string {
	return chartTitle(s, o) + " · " + what
}

// effectsText is the measure with the model of effects.
func effectsText(o *synthesis.Outcome) string {
	if o.Result.Fit.Model.Effects == meta.CommonEffect {
		return words.Measure(o.Analysis.Measure) + ", common effect"
	}
	return words.Measure(o.Analysis.Measure) + ", random effects"
}

// refitText is the method of each refit.
func refitText(fit *meta.Fit) string {
	if fit.Method != "" {
		return words.Model(fit)
	}
	method := "common effect"
	if fit.Model.Effects == meta.RandomEffects {
		method = words.TauMethod(fit.Model.Tau)
	}
	matched := "evidence matched to it"
	if fit.Model.Evidence == evidence.StudentForm {
		matched = "evidence in the Student-t form"
	}
	return method + ", " + words.IntervalMethod(fit.Model.Interval) + ", " + matched
}

// nameAndYear splits a study's name from its year, which may be part of it.
func nameAndYear(study *review.Study) (name, year string) {
	if study.Date.Year == 0 {
		return study.Name, ""
	}
	year = strconv.Itoa(study.Date.Year)
	if name, ok := strings.CutSuffix(study.Name, " "+year); ok {
		return name, year
	}
	if strings.Contains(study.Name, year) {
		return study.Name, ""
	}
	return study.Name, year
}

// biasNotes says what the evidence rests on, and that bias is not in it while studies
// at high risk of bias are pooled.
func biasNotes(o *synthesis.Outcome) []Note {
	var notes []Note
	if text := words.Rests(o); !o.Analysis.Weighing.Own() && text != "" {
		notes = append(notes, Note{Head: "Evidence", Text: text + "."})
	}
	if words.BiasRemark(o) != "" {
		notes = append(notes, Note{Head: "Bias", Text: "is not in these numbers."})
	}
	return notes
}

// formNotes says, in a chart that shows each study's evidence too, what that of the
// mean rests on where it has another form.
func formNotes(o *synthesis.Outcome) []Note {
	text := words.StudyForm(o)
	if text == "" {
		return nil
	}
	return []Note{{Head: "Evidence", Text: "of the mean: " + words.Rests(o) + ". " + text}}
}
