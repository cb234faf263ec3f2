package layout

import (
	"fmt"

	"steelyard/forest/words"
	"steelyard/meta/accrual"
	"steelyard/meta/evidence"
	"steelyard/meta/synthesis"
)

// NextTrialOf returns what the chart of the next study of an outcome shows. It returns
// an error if the outcome has no result, no value of no effect, or no size curve: the
// standard error alone has no size.
func NextTrialOf(s *synthesis.Synthesis, o *synthesis.Outcome) (NextTrialInput, error) {
	if err := drawable(o); err != nil {
		return NextTrialInput{}, err
	}
	if o.Accrual == nil || o.Accrual.Next == nil || len(o.Accrual.Next.Curve) == 0 {
		return NextTrialInput{}, fmt.Errorf("%s has no curve over sizes to draw: give the next %s with --size or --arms in place of --se", o.Called(), words.Noun(s, 1))
	}
	n := o.Accrual.Next
	noun := words.Noun(s, 1)
	in := NextTrialInput{
		Title: "What the next " + noun + " could change", Subtitle: accrualSubtitle(s, o, effectsText(o)),
		Unit: "people in all", Planned: n.Wanted.Treated + n.Wanted.Control, Wanted: n.Wanted.Chance, Smallest: n.Smallest.Size,
	}
	part := 1.0
	if n.Wanted.Treated == n.Wanted.Control {
		in.Unit, part = "people in each arm", 0.5
	}
	in.Planned *= part
	in.Smallest *= part
	for i, c := range n.Outlook.Passing {
		in.Curves = append(in.Curves, chanceCurve(n, words.Odds(c.Steps*evidence.LnStep), func(o *accrual.Outlook) float64 { return o.Passing[i].Value.Value }))
		in.Curves[i].Wanted = c.Steps == n.Wanted.Toward
	}
	interval := chanceCurve(n, words.Level(o.Result.Fit.Model.Level)+" interval", func(o *accrual.Outlook) float64 { return o.ExcludesNull.Value })
	interval.Interval = true
	in.Curves = append(in.Curves, interval)
	for _, point := range n.Curve {
		in.Sizes = append(in.Sizes, part*point.Size)
	}
	in.Notes = append([]Note{
		{Head: "Smallest size", Text: words.SmallestSize(n)},
		{Head: "Now", Text: fmt.Sprintf("%s. The interval: chance that it excludes no effect.", words.OddsInSentence(n.Now*evidence.LnStep))},
	}, biasNotes(o)...)
	return in, nil
}

// chanceCurve is the chance of one event over the sizes.
func chanceCurve(n *synthesis.Next, label string, of func(*accrual.Outlook) float64) ChanceCurve {
	c := ChanceCurve{Label: label, Planned: of(n.Outlook)}
	for _, point := range n.Curve {
		c.Chances = append(c.Chances, of(point.Outlook))
	}
	return c
}
