package layout

import (
	"fmt"
	"math"

	"steelyard/forest/words"
	"steelyard/meta/effect"
	"steelyard/meta/synthesis"
)

// FunnelOf returns what the funnel chart of an outcome shows. It returns an error if
// the outcome has no result or no value of no effect.
func FunnelOf(s *synthesis.Synthesis, o *synthesis.Outcome) (FunnelInput, error) {
	if err := drawable(o); err != nil {
		return FunnelInput{}, err
	}
	if !linearScale(o) {
		return FunnelInput{}, fmt.Errorf("%s: a funnel chart needs estimates with their standard errors on one scale, and %s is analysed on another than it is read on", o.Called(), words.Measure(o.Analysis.Measure))
	}
	in := FunnelInput{
		Title: "Do small " + words.Noun(s, 2) + " show other effects?", Subtitle: accrualSubtitle(s, o, effectsText(o)), Study: words.Noun(s, 1),
		Scale: accrualScale(o), Sides: sidesOf(s, o), Notes: append([]Note{asymmetryNote(s, o)}, biasNotes(o)...),
	}
	if o.Result.Fit.Mean.K > 1 {
		pooled := o.Result.Fit.Mean.Estimate
		in.Pooled = &pooled
	}
	for _, study := range o.Studies {
		row := FunnelRow{Estimate: study.Estimate.Y, SE: study.Estimate.SE}
		row.Name, row.Year = nameAndYear(study.Source)
		in.Rows = append(in.Rows, row)
	}
	return in, nil
}

// linearScale reports whether an outcome's estimates are read on the scale on which
// their standard errors stand: a logarithm, or as they are.
func linearScale(o *synthesis.Outcome) bool {
	m := o.Analysis.Measure
	if m.Log() {
		return true
	}
	for _, v := range []float64{-0.7, 0, 0.3, 2} {
		if shown := effect.ToReader(m, v); !(math.Abs(shown-v) < 1e-12) {
			return false
		}
	}
	return true
}

// asymmetryNote says what Egger's test shows, or why it was not run.
func asymmetryNote(s *synthesis.Synthesis, o *synthesis.Outcome) Note {
	const causes = "uneven scatter has several causes, of which missing studies are one."
	a := o.SmallStudy
	switch {
	case a == nil:
		return Note{"Asymmetry", "not tested; " + causes}
	case len(o.Studies) < 10:
		return Note{"Asymmetry", fmt.Sprintf("not tested: %s, the test needs 10; %s", words.Number(len(o.Studies), words.Noun(s, 1), words.Noun(s, 2)), causes)}
	case a.Refused != "" || len(a.Tests) == 0 || a.Tests[0].Slope == nil:
		return Note{"Asymmetry", "not tested: see small-study; " + causes}
	}
	t := a.Tests[0]
	return Note{"Asymmetry", fmt.Sprintf("Egger’s regression, t = %s on %s df, %s; %s", words.Linear(t.Slope.Statistic, 2), words.Count(int(t.Slope.DF)), words.PValue(t.LnP), causes)}
}

// RadialOf returns what the radial chart of an outcome shows. Errors are those of
// FunnelOf.
func RadialOf(s *synthesis.Synthesis, o *synthesis.Outcome) (RadialInput, error) {
	in, err := FunnelOf(s, o)
	if err != nil {
		return RadialInput{}, err
	}
	in.Title = "Do the " + words.Noun(s, 2) + " agree, whatever their precision?"
	in.Notes = methodNotes(o)
	m := o.Result.Fit.Mean
	return RadialInput{FunnelInput: in, Low: m.Low, High: m.High, Level: o.Result.Fit.Model.Level}, nil
}

// ContributionOf returns what the chart of contributions of an outcome shows. It
// returns an error if the outcome has no result or one study, or if its method gives
// studies no weights of which a contribution to Q could be told.
func ContributionOf(s *synthesis.Synthesis, o *synthesis.Outcome) (ContributionInput, error) {
	many := words.Noun(s, 2)
	switch {
	case o.Result == nil:
		return ContributionInput{}, fmt.Errorf("%s has no result to draw: %s", o.Called(), o.Problem)
	case o.Accrual == nil || len(o.Accrual.Influence) < 2:
		return ContributionInput{}, fmt.Errorf("%s has fewer than two %s, or no analysis of influence to draw", o.Called(), many)
	}
	in := ContributionInput{
		Title: "Which " + many + " make the results differ?", Subtitle: accrualSubtitle(s, o, effectsText(o)), Study: words.Noun(s, 1), Notes: methodNotes(o),
	}
	var without []string
	for _, influence := range o.Accrual.Influence {
		study := o.Studies[influence.Row].Source
		if influence.Detail == nil {
			without = append(without, study.Name)
			continue
		}
		row := ContributionRow{QShare: influence.Detail.QShare, Pull: influence.Pull}
		row.Name, row.Year = nameAndYear(study)
		in.Rows = append(in.Rows, row)
	}
	if len(in.Rows) < 2 {
		return ContributionInput{}, fmt.Errorf("%s: %s gives %s no weights, so that no contribution to Q can be told; choose --method inverse-variance", o.Called(), o.Analysis.Method, many)
	}
	if len(without) > 0 {
		in.Notes = append(in.Notes, Note{"Not drawn", fmt.Sprintf("%s without which the rest could not be pooled.", words.Number(len(without), words.Noun(s, 1), many))})
	}
	return in, nil
}
