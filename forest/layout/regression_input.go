package layout

import (
	"fmt"
	"math"
	"slices"
)

// RegressionInput is what a chart of effects along a covariate shows: effects on the
// analysis scale for ratios, else in the reader's unit.
type RegressionInput struct {
	Title, Subtitle string
	Study           string // what a bubble is called; empty is "study"
	Scale           EffectScale
	NoNull          bool // the measure has no value of no effect: no line is drawn for it
	Covariate       string
	Points          []RegressionPoint
	Line            []RegressionLine // ascending
	Level           float64
	Notes           []Note
}

// RegressionPoint is one study.
type RegressionPoint struct {
	Name     string
	X        float64
	Estimate float64
	Weight   float64 // relative to the others
}

// RegressionLine is the expected effect at a value of the covariate, with its interval
// and, if known, the prediction interval of one study's true effect.
type RegressionLine struct {
	X, Estimate, Low, High float64
	Prediction             *ForestPrediction // nil: none
}

// mostCovariate bounds the values of a covariate.
const mostCovariate = 1e12

// validate refuses numbers that no axis can hold.
func (in *RegressionInput) validate() error {
	const chart = "regression chart"
	if len(in.Points) == 0 || len(in.Line) < 2 {
		return fmt.Errorf("%s: %d %s and %d places of the line; give one or more, and two or more", chart, len(in.Points), noun(in.Study, 2), len(in.Line))
	}
	c := checks{chart: chart, ratio: in.Scale.Ratio}
	if err := c.frame(in.Scale, in.Level); err != nil {
		return err
	}
	for i, p := range in.Points {
		where := fmt.Sprintf("%s %d (%s)", noun(in.Study, 1), i+1, Clean(p.Name))
		if err := c.value(where+": estimate", p.Estimate, true); err != nil {
			return err
		}
		if !(p.Weight >= 0 && p.Weight <= math.MaxFloat64) || !(math.Abs(p.X) <= mostCovariate) {
			return fmt.Errorf("%s: %s: weight %v at %v; give a weight from 0 up, and a covariate to ±%g", chart, where, p.Weight, p.X, mostCovariate)
		}
	}
	last := math.Inf(-1)
	for _, l := range in.Line {
		where := fmt.Sprintf("line at %v", l.X)
		if !(l.X > last && math.Abs(l.X) <= mostCovariate) {
			return fmt.Errorf("%s: %s after %v; give ascending values", chart, where, last)
		}
		last = l.X
		if err := c.result(where, l.Estimate, l.Low, l.High, 0); err != nil {
			return err
		}
		if (l.Prediction != nil) != (in.Line[0].Prediction != nil) {
			return fmt.Errorf("%s: %s: a prediction stands at some places of the line and not at others", chart, where)
		}
		if p := l.Prediction; p != nil {
			if err := c.limits(where+": prediction", p.Low, p.High); err != nil {
				return err
			}
		}
	}
	return nil
}

// cleaned returns a copy whose texts may stand in a drawing.
func (in *RegressionInput) cleaned() RegressionInput {
	out := *in
	out.Title, out.Subtitle, out.Study, out.Covariate = Clean(in.Title), Clean(in.Subtitle), Clean(in.Study), Clean(in.Covariate)
	out.Scale, out.Notes = in.Scale.cleaned(), cleanNotes(in.Notes)
	out.Points = slices.Clone(in.Points)
	for i := range out.Points {
		out.Points[i].Name = Clean(out.Points[i].Name)
	}
	return out
}
