package layout

import (
	"fmt"
	"math"

	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/synthesis"
)

// LeaveOneOutOf returns what the leave-one-out chart of an outcome shows. It
// returns an error if the outcome has no result, no value of no effect, or no
// analysis without each study.
func LeaveOneOutOf(s *synthesis.Synthesis, o *synthesis.Outcome) (LeaveOneOutInput, error) {
	if err := drawable(o); err != nil {
		return LeaveOneOutInput{}, err
	}
	one := words.Noun(s, 1)
	switch {
	case len(o.Studies) < 2:
		return LeaveOneOutInput{}, fmt.Errorf("%s has one %s: without it nothing is left to draw", o.Called(), one)
	case o.Accrual == nil || len(o.Accrual.LeaveOneOut) == 0:
		return LeaveOneOutInput{}, fmt.Errorf("%s has no leave-one-out analysis to draw: ask for one", o.Called())
	}
	in := LeaveOneOutInput{
		Title: "What each " + one + " carries", Subtitle: accrualSubtitle(s, o, effectsText(o)+", pooled again without one "+one), Study: one,
		Scale: accrualScale(o), Sides: sidesOf(s, o), Below: math.NaN(), Notes: methodNotes(o), Level: o.Result.Fit.Model.Level,
		All: omissionOf(o, o.Result.Fit.Mean),
	}
	if t := o.Accrual.Tipping; t != nil {
		in.Below = t.Below
	}
	for _, omission := range o.Accrual.LeaveOneOut {
		row := omissionOf(o, omission.Mean)
		if omission.Problem != nil {
			row = Omission{Problem: omission.Problem.Error()}
		}
		row.Name, row.Year = nameAndYear(o.Studies[omission.Row].Source)
		in.Rows = append(in.Rows, row)
	}
	return in, nil
}

func omissionOf(o *synthesis.Outcome, mean meta.Mean) Omission {
	row := Omission{
		Estimate: drawn(o, mean.Estimate), Low: drawn(o, mean.Low), High: drawn(o, mean.High),
		Tau: math.Sqrt(mean.Tau2), LnEvidence: mean.Evidence.Ln(),
	}
	if o.Result.Fit.Model.Effects == meta.CommonEffect || mean.K == 1 {
		row.Tau = -1
	}
	return row
}
