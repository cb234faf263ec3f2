package layout

import (
	"fmt"
	"math"
)

// SubsetsInput is what a chart of subsets shows, as plain display data.
// Estimates stand on the analysis scale: natural logs for ratio measures;
// evidence stands in steps for an effect.
type SubsetsInput struct {
	Title, Subtitle string
	Study           string // what is left out or in: "trial" or "study"; empty is "study"
	Scale           EffectScale
	Sides           Sides // Lower and Higher stand under the line of no effect
	Grid            SubsetsGrid
	Drawn           SubsetsDrawn
	Shares          SubsetsShares
	Full            SubsetsFull
	Chosen          *SubsetsChosen // nil: no study is told apart
	Important       *EffectZone    // nil: no important difference was stated
	Notes           []Note         // after the notes that the chart writes itself
}

// SubsetsGrid counts subsets by estimate and evidence: the run of Counts that
// starts at e·Steps.Cells belongs to the e-th cell of estimates.
type SubsetsGrid struct {
	Estimate, Steps GridAxis
	Counts          []int
	Outside         int // subsets beyond its ranges
}

// GridAxis divides a range into equal cells.
type GridAxis struct {
	Low, High float64
	Cells     int
}

// SubsetsDrawn says which subsets were pooled.
type SubsetsDrawn struct {
	Count  int    // subsets taken
	Failed int    // of these, what could not be pooled: in no share and no cell
	Every  bool   // all of them; else a random sample
	Seed   uint64 // of the sample
}

// SubsetsShares are shares of the subsets, 0 to 1.
type SubsetsShares struct {
	Reach                [5]float64 // evidence for an effect at or above 0, 1, 2, 3 and 4 steps
	BelowNull, AboveNull float64
	BelowZone, AboveZone float64 // beyond the important difference, where it is stated
}

// SubsetsFull is the result of all studies.
type SubsetsFull struct {
	Estimate, LnEvidence float64
	K                    int // studies
}

// SubsetsChosen tells the subsets with one study apart from those without.
type SubsetsChosen struct {
	Name string
	With []int // as SubsetsGrid.Counts, of the subsets that hold it
}

// EffectZone holds the effects that are too small to matter; beyond its limits
// lies an important difference.
type EffectZone struct{ Low, High float64 }

// Bounds of the grid of a chart of subsets.
const (
	mostGridCells = 1000
	mostSteps     = 1e9
)

func (in *SubsetsInput) validate() error {
	c := in.checks()
	if err := c.frame(in.Scale, 0.5); err != nil {
		return err
	}
	if err := in.Grid.validate(c); err != nil {
		return err
	}
	f := in.Full
	if err := c.value("the estimate of all "+in.plural(2), f.Estimate, true); err != nil {
		return err
	}
	if !(math.Abs(f.LnEvidence/lnStep) <= mostSteps) || f.K < 1 {
		return fmt.Errorf("subsets chart: ln of the evidence ratio of all %d %s is %v; it must be finite", f.K, in.plural(f.K), f.LnEvidence)
	}
	s := in.Shares
	for _, share := range append(s.Reach[:], s.BelowNull, s.AboveNull, s.BelowZone, s.AboveZone) {
		if !(0 <= share && share <= 1) {
			return fmt.Errorf("subsets chart: a share of %v must lie from 0 to 1", share)
		}
	}
	if z := in.Important; z != nil {
		if err := c.limits("important difference", z.Low, z.High); err != nil {
			return err
		}
	}
	return in.validateCounts()
}

func (g SubsetsGrid) validate(c checks) error {
	for _, a := range []struct {
		what string
		axis GridAxis
	}{{"estimates", g.Estimate}, {"steps", g.Steps}} {
		if !(a.axis.Low < a.axis.High) || !(math.Abs(a.axis.Low) <= mostSteps) || !(math.Abs(a.axis.High) <= mostSteps) ||
			a.axis.Cells < 1 || a.axis.Cells > mostGridCells {
			return fmt.Errorf("%s: the grid's %s run from %v to %v in %d cells; give finite, ascending ends and 1 to %d cells",
				c.chart, a.what, a.axis.Low, a.axis.High, a.axis.Cells, mostGridCells)
		}
	}
	if err := c.value("the lower end of the grid", g.Estimate.Low, false); err != nil {
		return err
	}
	return c.value("the upper end of the grid", g.Estimate.High, false)
}

func (in *SubsetsInput) validateCounts() error {
	cells := in.Grid.Estimate.Cells * in.Grid.Steps.Cells
	if len(in.Grid.Counts) != cells {
		return fmt.Errorf("subsets chart: %d counts for a grid of %d cells", len(in.Grid.Counts), cells)
	}
	if in.Chosen != nil && len(in.Chosen.With) != cells {
		return fmt.Errorf("subsets chart: %d counts with %s for a grid of %d cells", len(in.Chosen.With), Clean(in.Chosen.Name), cells)
	}
	total := 0
	for i, n := range in.Grid.Counts {
		with := 0
		if in.Chosen != nil {
			with = in.Chosen.With[i]
		}
		if n < 0 || with < 0 || with > n {
			return fmt.Errorf("subsets chart: cell %d counts %d subsets, %d of them with the chosen one; give the number of all and a part of it", i, n, with)
		}
		total += n
	}
	if total == 0 || in.Grid.Outside < 0 || in.Drawn.Failed < 0 {
		return fmt.Errorf("subsets chart: %d subsets in the grid, %d outside it, %d without a result; it takes one in the grid", total, in.Grid.Outside, in.Drawn.Failed)
	}
	return nil
}

func (in *SubsetsInput) checks() checks {
	return checks{chart: "subsets chart", ratio: in.Scale.Ratio}
}

// cleaned returns a copy whose texts may stand in a drawing.
func (in *SubsetsInput) cleaned() SubsetsInput {
	out := *in
	out.Title, out.Subtitle, out.Study = Clean(in.Title), Clean(in.Subtitle), Clean(in.Study)
	out.Scale, out.Sides, out.Notes = in.Scale.cleaned(), in.Sides.cleaned(), cleanNotes(in.Notes)
	if in.Chosen != nil {
		out.Chosen = &SubsetsChosen{Name: Clean(in.Chosen.Name), With: in.Chosen.With}
		if out.Chosen.Name == "" {
			out.Chosen.Name = "the chosen " + out.plural(1)
		}
	}
	return out
}

func (in *SubsetsInput) plural(n int) string { return noun(in.Study, n) }

// pooled is the number of subsets with a result.
func (in *SubsetsInput) pooled() int {
	n := in.Grid.Outside
	for _, c := range in.Grid.Counts {
		n += c
	}
	return n
}
