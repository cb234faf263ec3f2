package layout

import (
	"fmt"
	"math"

	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/evidence"
	"steelyard/meta/synthesis"
)

// SubsetsOf returns what the chart of subsets of an outcome shows. It returns an
// error if the outcome has no result, no value of no effect, or no analysis of
// subsets.
func SubsetsOf(s *synthesis.Synthesis, o *synthesis.Outcome) (SubsetsInput, error) {
	if err := drawable(o); err != nil {
		return SubsetsInput{}, err
	}
	if o.Accrual == nil || o.Accrual.Subsets == nil {
		return SubsetsInput{}, fmt.Errorf("%s has no analysis of subsets to draw: ask for one", o.Called())
	}
	all, mean := o.Accrual.Subsets, o.Result.Fit.Mean
	noun := words.Noun(s, 2)
	grid, cellOf := subsetsGrid(o, all.Grid)
	in := SubsetsInput{
		Title: "What would other sets of " + noun + " say?", Subtitle: accrualSubtitle(s, o, effectsText(o)+", subsets of the "+noun), Study: words.Noun(s, 1),
		Scale: accrualScale(o), Sides: sidesOf(s, o), Grid: grid, Shares: subsetsShares(all.Subsets), Notes: methodNotes(o),
		Drawn: SubsetsDrawn{Count: all.Count, Failed: all.Failed, Every: all.Every, Seed: o.Analysis.Model.Seed},
		Full:  SubsetsFull{Estimate: drawn(o, mean.Estimate), LnEvidence: mean.Evidence.Ln(), K: mean.K},
	}
	if zone := o.Analysis.Important; zone != nil {
		in.Important = &EffectZone{drawn(o, zone.Low), drawn(o, zone.High)}
	}
	if all.Chosen >= 0 && all.With != nil {
		source := o.Studies[all.Chosen].Source
		name, year := nameAndYear(source)
		in.Chosen = &SubsetsChosen{Name: joinName(name, year), With: recounted(all.With, cellOf, grid)}
	}
	return in, nil
}

// finerCells is how many cells of estimates the chart has for one of the analysis
// where its scale is not that of the analysis, so that no two of these fall on
// one of the chart's by the rounding of their places alone.
const finerCells = 3

// subsetsGrid returns the grid as the chart takes it, and on which of its cells of
// estimates each one of the analysis falls. Only where the chart's scale bends
// that of the analysis, such as for proportions, do the cells differ.
func subsetsGrid(o *synthesis.Outcome, g *meta.Grid) (grid SubsetsGrid, cellOf []int) {
	grid = SubsetsGrid{Estimate: GridAxis(g.Estimate), Steps: GridAxis(g.Steps), Outside: g.Outside}
	width := (g.Estimate.High - g.Estimate.Low) / float64(g.Estimate.Cells)
	middles, cellOf := make([]float64, g.Estimate.Cells), make([]int, g.Estimate.Cells)
	bent := false
	for i := range middles {
		at := g.Estimate.Low + (float64(i)+0.5)*width
		middles[i], cellOf[i] = drawn(o, at), i
		bent = bent || middles[i] != at
	}
	if bent {
		low, high := drawn(o, g.Estimate.Low), drawn(o, g.Estimate.High)
		for _, v := range middles {
			low, high = math.Min(low, v), math.Max(high, v)
		}
		grid.Estimate = GridAxis{low, high, finerCells * g.Estimate.Cells}
		for i, v := range middles {
			cellOf[i] = min(grid.Estimate.Cells-1, int((v-low)/(high-low)*float64(grid.Estimate.Cells)))
		}
	}
	grid.Counts = recounted(g, cellOf, grid)
	return grid, cellOf
}

// recounted returns the counts of the analysis in the chart's cells.
func recounted(g *meta.Grid, cellOf []int, grid SubsetsGrid) []int {
	counts := make([]int, grid.Estimate.Cells*grid.Steps.Cells)
	for i, n := range g.Counts {
		counts[cellOf[i/g.Steps.Cells]*g.Steps.Cells+i%g.Steps.Cells] += n
	}
	return counts
}

// subsetsShares sums the shares of the words from each step on.
func subsetsShares(all *meta.Subsets) SubsetsShares {
	shares := SubsetsShares{BelowNull: all.Sides.BelowNull, AboveNull: all.Sides.AboveNull}
	if all.Sides.BelowZone != nil && all.Sides.AboveZone != nil {
		shares.BelowZone, shares.AboveZone = *all.Sides.BelowZone, *all.Sides.AboveZone
	}
	for i := range shares.Reach {
		for _, w := range all.Words {
			if w.Favours == evidence.Effect && int(w.Word) >= i {
				shares.Reach[i] += w.Share
			}
		}
		shares.Reach[i] = math.Min(1, shares.Reach[i]) // but for rounding
	}
	return shares
}
