package layout

import (
	"fmt"

	"steelyard/forest/words"
	"steelyard/meta/synthesis"
)

// InfluenceOf returns what the chart of influence of an outcome shows, rows by
// the size of their pull. It returns an error if the outcome has no result, no
// value of no effect, a single study, or no analysis of influence.
func InfluenceOf(s *synthesis.Synthesis, o *synthesis.Outcome) (InfluenceInput, error) {
	if err := drawable(o); err != nil {
		return InfluenceInput{}, err
	}
	one := words.Noun(s, 1)
	switch {
	case len(o.Studies) < 2:
		return InfluenceInput{}, fmt.Errorf("%s has one %s: there are no others that it could pull", o.Called(), one)
	case o.Accrual == nil || len(o.Accrual.Influence) == 0:
		return InfluenceInput{}, fmt.Errorf("%s has no analysis of influence to draw: ask for one", o.Called())
	}
	mean := o.Result.Fit.Mean
	in := InfluenceInput{
		Title: "What each " + one + " does to the result", Subtitle: accrualSubtitle(s, o, effectsText(o)+", each "+one+" against the others"), Study: one,
		Scale: accrualScale(o), Sides: sidesOf(s, o), ByPull: true, Notes: methodNotes(o), Level: o.Result.Fit.Model.Level,
		Pooled: ForestPooled{
			Estimate: drawn(o, mean.Estimate), Low: drawn(o, mean.Low), High: drawn(o, mean.High), LnEvidence: mean.Evidence.Ln(), K: mean.K,
		},
	}
	for _, influence := range o.Accrual.Influence {
		row := InfluenceRow{Pull: influence.Pull, Carried: influence.Carried}
		row.Name, row.Year = nameAndYear(o.Studies[influence.Row].Source)
		if d := influence.Detail; d != nil {
			row.Weights = &InfluenceWeight{Residual: d.Residual, Leverage: d.Leverage}
		}
		if influence.Problem != nil {
			row.Problem = influence.Problem.Error()
		}
		in.Rows = append(in.Rows, row)
	}
	return in, nil
}

// methodNotes name the model, and say that bias is not in the evidence.
func methodNotes(o *synthesis.Outcome) []Note {
	return append([]Note{{Head: "Model", Text: words.ModelOf(o) + "."}}, biasNotes(o)...)
}
