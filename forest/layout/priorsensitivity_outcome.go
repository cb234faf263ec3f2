package layout

import (
	"fmt"
	"math"
	"strings"

	"steelyard/forest/words"
	"steelyard/meta/evidence"
	"steelyard/meta/synthesis"
)

// PriorSensitivityOf returns what the prior-sensitivity chart of an outcome shows.
// It returns an error if the outcome has no result, no value of no effect, or no
// priors were weighed.
func PriorSensitivityOf(s *synthesis.Synthesis, o *synthesis.Outcome) (PriorSensitivityInput, error) {
	if err := drawable(o); err != nil {
		return PriorSensitivityInput{}, err
	}
	b := o.Beliefs
	if b == nil {
		return PriorSensitivityInput{}, fmt.Errorf("%s has no priors weighed to draw: ask for them", o.Called())
	}
	in := PriorSensitivityInput{
		Title: "Would another prior change the answer?", Subtitle: accrualSubtitle(s, o, "evidence by the width of the prior"),
		ScaleName: words.PriorUnit(o), RangeName: words.Measure(o.Analysis.Measure) + "s",
		LnEvidence: o.Result.Fit.Mean.Evidence.Ln(), LnBound: b.Bound.Ln(),
		Notes: append([]Note{{Head: "Level line", Text: priorNote(o)}}, biasNotes(o)...),
	}
	if form := o.FormOf(o.Result.Fit); form != evidence.Empirical {
		in.LevelName = words.EvidenceName(form)
	}
	for _, f := range b.Table {
		text := words.PriorRange(o, f.Scale)
		if strings.ContainsAny(text, "<>") {
			text = ""
		}
		in.Scales = append(in.Scales, PriorScale{Scale: f.Scale, Range: text, Normal: f.Normal.Ln(), Cauchy: f.Cauchy.Ln()})
	}
	for _, f := range b.Curve {
		in.Curve = append(in.Curve, PriorPoint{Scale: f.Scale, Normal: f.Normal.Ln(), Cauchy: f.Cauchy.Ln()})
	}
	return in, nil
}

// priorNote says what line and curves are, and what they are weighed against.
func priorNote(o *synthesis.Outcome) string {
	text := "the evidence of this review, " + words.NeedsScale(o) + ". Curves: priors for the " + words.PriorUnit(o) +
		" centred on no effect, normal (solid) and Cauchy (dashed); as they widen, any data drift towards none. "
	location := o.Result.Fit.Mean.Location()
	switch {
	case o.Analysis.Weighing.Form.OverTau():
		return text + "Curves and bound are of the pooled mean at the z matched to its interval, the level line of the studies themselves: it may pass the bound. Grey ranges are a normal prior’s."
	case math.IsInf(location.DF, 1):
		return text + "Grey ranges are a normal prior’s."
	case location.Form == evidence.StudentForm:
		return text + "Curves at the z matched to the interval, level line and bound in the Student-t form. Grey ranges are a normal prior’s."
	}
	return text + "All at the z matched to the interval. Grey ranges are a normal prior’s."
}
