package layout

import (
	"math"
	"slices"
	"testing"

	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/synthesis"
)

// TestSubsetsGridBends: proportions are pooled as logits and drawn as they are, so
// that logits −1, 0 and 1 stand at 1/(1 + e), ½ and e/(1 + e).
func TestSubsetsGridBends(t *testing.T) {
	g := &meta.Grid{Estimate: meta.Axis{Low: -1.5, High: 1.5, Cells: 3}, Steps: meta.Axis{Low: 0, High: 2, Cells: 2}, Counts: []int{1, 2, 3, 4, 5, 6}, Outside: 9}
	o := &synthesis.Outcome{Analysis: synthesis.Analysis{Measure: effect.Proportion}}
	grid, cellOf := subsetsGrid(o, g)
	if want := 1 / (1 + math.Exp(1.5)); math.Abs(grid.Estimate.Low-want) > 1e-12 || math.Abs(grid.Estimate.High-(1-want)) > 1e-12 || grid.Outside != 9 {
		t.Errorf("estimates run from %v to %v, want %v to %v", grid.Estimate.Low, grid.Estimate.High, want, 1-want)
	}
	width := (grid.Estimate.High - grid.Estimate.Low) / float64(grid.Estimate.Cells)
	for i, want := range []float64{1 / (1 + math.E), 0.5, math.E / (1 + math.E)} {
		if at := grid.Estimate.Low + (float64(cellOf[i])+0.5)*width; math.Abs(at-want) > width/2+1e-12 {
			t.Errorf("cell %d lies at %v, want %v within %v", i, at, want, width/2)
		}
		if got := grid.Counts[2*cellOf[i] : 2*cellOf[i]+2]; !slices.Equal(got, g.Counts[2*i:2*i+2]) {
			t.Errorf("cell %d holds %v, want %v", i, got, g.Counts[2*i:2*i+2])
		}
	}
	o.Analysis.Measure = effect.RiskRatio
	if grid, _ := subsetsGrid(o, g); !slices.Equal(grid.Counts, g.Counts) || grid.Estimate != GridAxis(g.Estimate) {
		t.Errorf("the grid of a ratio is changed: %+v", grid)
	}
}

func TestSubsetsSharesOfWords(t *testing.T) {
	below := 0.25
	all := &meta.Subsets{Sides: meta.Sides{BelowNull: 0.75, AboveNull: 0.25, BelowZone: &below, AboveZone: new(float64)}, Words: []meta.WordShare{
		{Favours: evidence.NoEffect, Word: evidence.Fair, Share: 0.125}, {Favours: evidence.NoEffect, Word: evidence.Faint, Share: 0.125},
		{Favours: evidence.Effect, Word: evidence.Faint, Share: 0.25}, {Favours: evidence.Effect, Word: evidence.Firm, Share: 0.5},
	}}
	want := SubsetsShares{Reach: [5]float64{0.75, 0.5, 0.5, 0, 0}, BelowNull: 0.75, AboveNull: 0.25, BelowZone: 0.25}
	if got := subsetsShares(all); got != want {
		t.Errorf("shares %+v, want %+v", got, want)
	}
}
