package meta

import (
	"math"
	"slices"

	"steelyard/meta/evidence"
)

// Quantile is the value that a share P of subsets does not exceed.
type Quantile struct{ P, Value float64 }

// Spread is a distribution over subsets. Quantiles interpolate between order
// statistics. Where there are more subsets than are kept, they come from a
// histogram and lie within Resolution of an order statistic; the smallest and the
// largest value, and all quantiles beyond the histogram's range, are then still
// bounded by the exact extremes.
type Spread struct {
	Quantiles  []Quantile // at quantileShares
	Resolution float64    // 0: exact
}

// quantileShares are the shares at which quantiles are given.
var quantileShares = [...]float64{0, 0.025, 0.05, 0.1, 0.25, 0.5, 0.75, 0.9, 0.95, 0.975, 1}

// Grid counts subsets by estimate and by steps of evidence: the row of Counts
// that starts at e·Steps.Cells belongs to the e-th cell of estimates. Few subsets
// may lie Outside its range, which was fixed by a part of them.
type Grid struct {
	Estimate, Steps Axis
	Counts          []int
	Outside         int
}

// Axis divides a range into equal cells.
type Axis struct {
	Low, High float64
	Cells     int
}

// cell returns the cell of x, −1 below the range and Cells above it.
func (a Axis) cell(x float64) int {
	share := (x - a.Low) / (a.High - a.Low)
	switch {
	case share < 0:
		return -1
	case share >= 1:
		return a.Cells
	}
	return min(a.Cells-1, int(share*float64(a.Cells)))
}

const (
	gridSteps     = 240     // cells along the steps
	gridEstimates = 160     // cells along the estimates
	histogramBins = 1 << 16 // of each distribution
)

func newGrid(estimate, steps Limits) *Grid {
	return &Grid{
		Estimate: Axis{estimate.Low, estimate.High, gridEstimates},
		Steps:    Axis{steps.Low, steps.High, gridSteps},
		Counts:   make([]int, gridEstimates*gridSteps),
	}
}

func (g *Grid) add(estimate, steps float64) {
	e, s := g.Estimate.cell(estimate), g.Steps.cell(steps)
	if e < 0 || e >= gridEstimates || s < 0 || s >= gridSteps {
		g.Outside++
		return
	}
	g.Counts[e*gridSteps+s]++
}

// plus adds sign times the counts of another grid of the same ranges.
func (g *Grid) plus(other *Grid, sign int) {
	for i, n := range other.Counts {
		g.Counts[i] += sign * n
	}
	g.Outside += sign * other.Outside
}

// histogram counts values in equal bins, with one more bin at either end for
// what lies outside.
type histogram struct {
	axis            Axis
	counts          []int
	lowest, highest float64
}

func newHistogram(l Limits) *histogram {
	return &histogram{
		axis: Axis{l.Low, l.High, histogramBins}, counts: make([]int, histogramBins+2),
		lowest: math.Inf(1), highest: math.Inf(-1),
	}
}

func (h *histogram) add(x float64) {
	h.counts[h.axis.cell(x)+1]++
	h.lowest, h.highest = min(h.lowest, x), max(h.highest, x)
}

func (h *histogram) merge(other *histogram) {
	for i, n := range other.counts {
		h.counts[i] += n
	}
	h.lowest, h.highest = min(h.lowest, other.lowest), max(h.highest, other.highest)
}

// spread returns the quantiles of n values.
func (h *histogram) spread(n int) Spread {
	width := (h.axis.High - h.axis.Low) / float64(h.axis.Cells)
	s := Spread{Resolution: width}
	if n == 0 {
		return s
	}
	bin, before := 0, 0
	for _, share := range quantileShares {
		rank := share * float64(n-1)
		for float64(before+h.counts[bin]) <= rank {
			before += h.counts[bin]
			bin++
		}
		low, high := h.axis.Low+float64(bin-1)*width, h.axis.Low+float64(bin)*width
		if bin == 0 {
			low = h.lowest
		}
		if bin == h.axis.Cells+1 {
			high = h.highest
		}
		inside := (rank - float64(before) + 0.5) / float64(h.counts[bin])
		value := min(max(low+inside*(high-low), h.lowest), h.highest)
		switch share {
		case 0:
			value = h.lowest
		case 1:
			value = h.highest
		}
		s.Quantiles = append(s.Quantiles, Quantile{share, value})
	}
	return s
}

// exactSpreads returns the distributions of estimates and steps from all points.
func exactSpreads(points []subsetPoint) (estimate, steps Spread) {
	var estimates, ratios []float64
	for _, p := range points {
		if !p.failed {
			estimates = append(estimates, p.estimate)
			ratios = append(ratios, evidence.FromLn(p.ln).Steps())
		}
	}
	return exactSpread(estimates), exactSpread(ratios)
}

func exactSpread(values []float64) Spread {
	var s Spread
	if len(values) == 0 {
		return s
	}
	slices.Sort(values)
	for _, share := range quantileShares {
		rank := share * float64(len(values)-1)
		i := int(rank)
		value := values[i]
		if part := rank - float64(i); part > 0 {
			value += part * (values[i+1] - values[i])
		}
		s.Quantiles = append(s.Quantiles, Quantile{share, value})
	}
	return s
}

// words is how many words there are for each hypothesis.
const words = int(evidence.Massive) + 1

// tally counts subsets. Merging tallies is exact, so that it does not matter
// which worker counted what.
type tally struct {
	zone             *Limits
	n, failed        int
	below, above     int // of the null
	beyond           [2]int
	words            [2][words]int
	estimates, steps *histogram
	grid, with       *Grid // with: nil without a chosen study
}

func newTally(estimate, steps Limits, options SubsetOptions) *tally {
	t := &tally{zone: options.Important, estimates: newHistogram(estimate), steps: newHistogram(steps), grid: newGrid(estimate, steps)}
	if options.Chosen != nil {
		t.with = newGrid(estimate, steps)
	}
	return t
}

// empty returns a tally of the same ranges with nothing counted.
func (t *tally) empty() *tally {
	axes := t.grid
	e, s := Limits{axes.Estimate.Low, axes.Estimate.High}, Limits{axes.Steps.Low, axes.Steps.High}
	options := SubsetOptions{Important: t.zone}
	if t.with != nil {
		options.Chosen = new(int)
	}
	return newTally(e, s, options)
}

func (t *tally) add(p subsetPoint, chosen bool) {
	if p.failed {
		t.failed++
		return
	}
	ratio := evidence.FromLn(p.ln)
	steps := ratio.Steps()
	t.n++
	switch {
	case p.statistic < 0:
		t.below++
	case p.statistic > 0:
		t.above++
	}
	if t.zone != nil {
		if p.estimate < t.zone.Low {
			t.beyond[0]++
		}
		if p.estimate > t.zone.High {
			t.beyond[1]++
		}
	}
	t.words[ratio.Favours()][ratio.Word()]++
	t.estimates.add(p.estimate)
	t.steps.add(steps)
	t.grid.add(p.estimate, steps)
	if chosen {
		t.with.add(p.estimate, steps)
	}
}

func (t *tally) merge(other *tally) {
	t.n, t.failed = t.n+other.n, t.failed+other.failed
	t.below, t.above = t.below+other.below, t.above+other.above
	for i := range t.beyond {
		t.beyond[i] += other.beyond[i]
		for w := range t.words[i] {
			t.words[i][w] += other.words[i][w]
		}
	}
	t.estimates.merge(other.estimates)
	t.steps.merge(other.steps)
	t.grid.plus(other.grid, 1)
	if t.with != nil {
		t.with.plus(other.with, 1)
	}
}

// summary turns the counts into shares.
func (t *tally) summary() *Subsets {
	share := func(n int) float64 { return float64(n) / float64(max(1, t.n)) }
	s := &Subsets{
		Failed:   t.failed,
		Estimate: t.estimates.spread(t.n), Steps: t.steps.spread(t.n),
		Sides: Sides{BelowNull: share(t.below), AboveNull: share(t.above)},
		Grid:  t.grid, With: t.with,
	}
	if t.zone != nil {
		low, high := share(t.beyond[0]), share(t.beyond[1])
		s.Sides.BelowZone, s.Sides.AboveZone = &low, &high
	}
	for w := evidence.Massive; w >= evidence.Faint; w-- {
		s.Words = append(s.Words, WordShare{evidence.NoEffect, w, share(t.words[evidence.NoEffect][w])})
	}
	for w := evidence.Faint; w <= evidence.Massive; w++ {
		s.Words = append(s.Words, WordShare{evidence.Effect, w, share(t.words[evidence.Effect][w])})
	}
	if t.with != nil {
		s.Without = newGrid(Limits{t.grid.Estimate.Low, t.grid.Estimate.High}, Limits{t.grid.Steps.Low, t.grid.Steps.High})
		s.Without.plus(t.grid, 1)
		s.Without.plus(t.with, -1)
	}
	return s
}
