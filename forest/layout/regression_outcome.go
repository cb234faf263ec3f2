package layout

import (
	"fmt"
	"math"
	"slices"

	"steelyard/forest/words"
	"steelyard/meta/explain"
	"steelyard/meta/synthesis"
)

// linePlaces is at how many values of the covariate the line is worked out.
const linePlaces = 65

// RegressionOf returns what the chart of an outcome's regression along its first
// covariate of numbers shows, the others at their means and references. It returns an
// error if the outcome has no regression or no such covariate.
func RegressionOf(s *synthesis.Synthesis, o *synthesis.Outcome) (RegressionInput, error) {
	if o.Result == nil {
		return RegressionInput{}, fmt.Errorf("%s has no result to draw: %s", o.Called(), o.Problem)
	}
	if o.Explain == nil || o.Explain.Regression == nil {
		return RegressionInput{}, fmt.Errorf("%s has no regression to draw: name columns with --on", o.Called())
	}
	r := o.Explain.Regression
	if r.Problem != "" {
		return RegressionInput{}, fmt.Errorf("%s has no regression to draw: %s", o.Called(), r.Problem)
	}
	at := slices.IndexFunc(r.Design.Covariates, func(c *explain.Covariate) bool { return c.Levels == nil })
	if at < 0 {
		return RegressionInput{}, fmt.Errorf("%s has no covariate of numbers to draw along: categories are drawn by \"chart subgroups\"", o.Called())
	}
	c := r.Design.Covariates[at]
	in := RegressionInput{
		Title: chartTitle(s, o), Study: words.Noun(s, 1), Covariate: c.Name, Level: r.Model.Level, NoNull: o.Analysis.NullMissing,
		Subtitle: fmt.Sprintf("%s %s · %s along %s", words.Count(r.K), words.Noun(s, r.K), words.Measure(o.Analysis.Measure), c.Name),
		Scale: EffectScale{
			Measure: words.Measure(o.Analysis.Measure), Ratio: o.Analysis.Measure.Log(),
			Null: drawn(o, o.Result.Fit.Model.Null), Decimals: words.OutcomeNotation(o).Decimals,
		},
		Notes: regressionNotes(o, r, c),
	}
	for i, row := range r.Rows {
		study := o.Studies[row]
		in.Points = append(in.Points, RegressionPoint{
			Name: study.Source.Name, X: c.Values[i], Estimate: drawn(o, study.Estimate.Y),
			Weight: 1 / (study.Estimate.SE*study.Estimate.SE + r.Residual.Tau2),
		})
	}
	low, high := slices.Min(c.Values), slices.Max(c.Values)
	for i := range linePlaces {
		x := low + (high-low)*float64(i)/(linePlaces-1)
		row, err := r.Design.Row([]explain.Point{{Covariate: c.Name, Number: x}})
		if err != nil {
			return in, err
		}
		in.Line = append(in.Line, linePlace(o, x, r.Regression.At(row)))
	}
	return in, nil
}

func linePlace(o *synthesis.Outcome, x float64, f explain.Fitted) RegressionLine {
	l := RegressionLine{X: x, Estimate: drawn(o, f.Estimate), Low: drawn(o, f.Low), High: drawn(o, f.High)}
	if p := f.Prediction; p != nil {
		l.Prediction = &ForestPrediction{Low: drawn(o, p.Low), High: drawn(o, p.High)}
	}
	return l
}

// regressionNotes word the change along the covariate, what is left, and what the
// chart cannot show.
func regressionNotes(o *synthesis.Outcome, r *synthesis.RegressionResult, c *explain.Covariate) []Note {
	at := 1
	var change, others string
	for _, t := range r.Design.Terms {
		if t.Name == c.Name {
			k := r.Coefficients[at]
			step, per := words.TermStep(r.Design, t)
			change = fmt.Sprintf("%s %s of %s: %s; %s, %s.", words.Contrast(o.Analysis.Measure), per, c.Name,
				words.ContrastValue(o, step*k.Estimate, step*k.Low, step*k.High), words.Difference(k.Evidence), words.Strength(k.Evidence))
		}
		at += len(t.Columns)
	}
	if len(r.Design.Covariates) > 1 {
		others = " The line holds the other covariates at their means and references; the bubbles are as reported, not adjusted for them."
	}
	if len(r.Design.Terms) > len(r.Design.Covariates) {
		others += " With an interaction the change along the line is that there alone."
	}
	left := fmt.Sprintf("%s. Spread left, τ %s", words.RegressionModel(r.Model), words.Tau(math.Sqrt(r.Residual.Tau2)))
	if r.R2 != nil {
		left += fmt.Sprintf(", from %s without covariates", words.Tau(math.Sqrt(r.Without)))
	}
	caution := "observational: other things that differ between the studies may be the reason, and people within a study need not follow the line"
	if !o.Explain.Planned {
		caution += "; not stated to have been planned"
	}
	if n := len(r.Coefficients) - 1; r.K < 10*n {
		caution += fmt.Sprintf("; fewer than 10 studies for each of %s", words.Number(n, "coefficient", "coefficients"))
	}
	notes := []Note{{Head: "Change", Text: capital(change) + others}, {Head: "Model", Text: left + "."}, {Head: "Caution", Text: caution + "."}}
	if len(r.Omitted) > 0 {
		notes = append(notes, Note{Head: "Left out", Text: fmt.Sprintf("%d without an entry.", len(r.Omitted))})
	}
	return append(notes, biasNotes(o)...)
}
