package layout

import (
	"fmt"
	"math"
)

// PriorSensitivityInput is what a prior-sensitivity chart shows, as plain display
// data. Evidence is the natural log of the ratio, effect over none.
type PriorSensitivityInput struct {
	Title, Subtitle string
	ScaleName       string       // of the prior's scale, such as "log risk ratio"
	RangeName       string       // of what the ranges give, such as "risk ratios"
	LevelName       string       // what the level line is; blank for the empirical Bayes factor
	LnEvidence      float64      // of the level line
	LnBound         float64      // what no prior can pass
	Scales          []PriorScale // labelled, ascending; the axis ends at the outermost
	Curve           []PriorPoint // ascending, from the first of the scales to the last
	Notes           []Note
}

// PriorScale is a labelled scale of a prior.
type PriorScale struct {
	Scale          float64
	Range          string  // 95% of the normal prior, in the reader's unit, such as "0.82 to 1.22"; blank is not written
	Normal, Cauchy float64 // evidence under the priors of this scale
}

// PriorPoint is the evidence under the normal and the Cauchy prior of one scale.
type PriorPoint struct{ Scale, Normal, Cauchy float64 }

func (in *PriorSensitivityInput) validate() error {
	const chart = "prior-sensitivity chart"
	if len(in.Scales) < 2 || len(in.Curve) < 2 {
		return fmt.Errorf("%s: %d scales and %d points of the curves; give at least 2 of each", chart, len(in.Scales), len(in.Curve))
	}
	evidence := []float64{in.LnEvidence, in.LnBound}
	var scales []float64
	for _, s := range in.Scales {
		scales, evidence = append(scales, s.Scale), append(evidence, s.Normal, s.Cauchy)
	}
	if err := ascending(scales); err != nil {
		return fmt.Errorf("%s: scales: %w", chart, err)
	}
	first, last := scales[0], scales[len(scales)-1]
	scales = scales[:0]
	for _, p := range in.Curve {
		scales, evidence = append(scales, p.Scale), append(evidence, p.Normal, p.Cauchy)
	}
	if err := ascending(scales); err != nil {
		return fmt.Errorf("%s: curve: %w", chart, err)
	}
	if slack := 1 + 1e-9; scales[0]*slack < first || scales[len(scales)-1] > last*slack {
		return fmt.Errorf("%s: the curve runs from %v to %v, beyond the scales from %v to %v", chart, scales[0], scales[len(scales)-1], first, last)
	}
	for _, ln := range evidence {
		if !(math.Abs(ln) <= mostLnEvidence) {
			return fmt.Errorf("%s: ln of an evidence ratio is %v; it must be finite", chart, ln)
		}
	}
	return nil
}

// ascending refuses scales that no axis holds, and such as do not ascend.
func ascending(scales []float64) error {
	for i, s := range scales {
		switch {
		case !(s > 0) || math.IsInf(s, 1):
			return fmt.Errorf("%v must be finite and above 0", s)
		case i > 0 && s <= scales[i-1]:
			return fmt.Errorf("%v follows %v; put them in ascending order", s, scales[i-1])
		}
	}
	return nil
}

// cleaned returns a copy whose texts may stand in a drawing.
func (in *PriorSensitivityInput) cleaned() PriorSensitivityInput {
	out := *in
	out.Title, out.Subtitle = Clean(in.Title), Clean(in.Subtitle)
	if out.LevelName = Clean(in.LevelName); out.LevelName == "" {
		out.LevelName = "empirical Bayes factor"
	}
	out.ScaleName, out.RangeName = Clean(in.ScaleName), Clean(in.RangeName)
	out.Notes = cleanNotes(in.Notes)
	out.Scales = make([]PriorScale, len(in.Scales))
	for i, s := range in.Scales {
		s.Range = Clean(s.Range)
		out.Scales[i] = s
	}
	return out
}
