package layout

import (
	"fmt"
	"math"
	"slices"
)

// NextTrialInput is what a chart of the next study shows: the chance that the updated
// review reaches something, over sizes of the study.
type NextTrialInput struct {
	Title, Subtitle string
	Unit            string    // of the sizes, such as "people in each arm"
	Sizes           []float64 // ascending
	Curves          []ChanceCurve
	Planned         float64 // size of the study that is thought of
	Wanted          float64 // chance that is wanted
	Smallest        float64 // size that reaches it by the wanted curve; 0: none does
	Notes           []Note
}

// ChanceCurve is the chance of one event at each size.
type ChanceCurve struct {
	Label    string // such as "14 : 1"
	Chances  []float64
	Planned  float64 // the chance at the planned size
	Wanted   bool    // the event that is wanted: a heavier line
	Interval bool    // of the interval, not of the evidence: a dashed line in ink
}

// mostSize bounds the sizes of a chart of the next study.
const mostSize = 1e10

func (in *NextTrialInput) validate() error {
	const chart = "next-trial chart"
	if len(in.Sizes) < 2 || len(in.Curves) == 0 {
		return fmt.Errorf("%s: %d sizes and %d curves; give two sizes or more, and a curve", chart, len(in.Sizes), len(in.Curves))
	}
	last := 0.0
	for _, size := range append(slices.Clone(in.Sizes), mostSize) {
		if !(size > last && size <= mostSize) {
			return fmt.Errorf("%s: size %v after %v; give ascending sizes from above 0 to below %g", chart, size, last, mostSize)
		}
		last = size
	}
	if !(in.Planned > 0 && in.Planned <= mostSize) || !(in.Smallest >= 0 && in.Smallest <= mostSize) {
		return fmt.Errorf("%s: planned size %v, smallest %v; give sizes from above 0 to %g, or 0 for no smallest one", chart, in.Planned, in.Smallest, mostSize)
	}
	chances := []float64{in.Wanted}
	for _, c := range in.Curves {
		if len(c.Chances) != len(in.Sizes) {
			return fmt.Errorf("%s: %q has %d chances for %d sizes", chart, c.Label, len(c.Chances), len(in.Sizes))
		}
		chances = append(append(chances, c.Planned), c.Chances...)
	}
	for _, p := range chances {
		if math.IsNaN(p) || p < 0 || p > 1 {
			return fmt.Errorf("%s: a chance of %v; give 0 to 1", chart, p)
		}
	}
	return nil
}

// cleaned returns a copy whose texts may stand in a drawing.
func (in *NextTrialInput) cleaned() NextTrialInput {
	out := *in
	out.Title, out.Subtitle, out.Unit, out.Notes = Clean(in.Title), Clean(in.Subtitle), Clean(in.Unit), cleanNotes(in.Notes)
	out.Curves = slices.Clone(in.Curves)
	for i := range out.Curves {
		out.Curves[i].Label = Clean(out.Curves[i].Label)
	}
	return out
}
