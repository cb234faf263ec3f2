package layout

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"steelyard/meta"
)

// nineY and nineS are the log risk ratios of the nine invented trials with their
// standard errors.
var (
	nineY = []float64{-0.57124, -0.31353, -1.1956, -0.28222, 0.1215, -0.59356, -0.39738, -0.34249, -0.3872}
	nineS = []float64{0.30684, 0.24534, 0.72696, 0.19395, 0.17973, 0.17421, 0.22265, 0.18703, 0.15436}
)

// subsetsOf is the chart of all subsets of some log ratios, pooled by the
// DerSimonian–Laird estimator; chosen is a row, or −1 for none.
func subsetsOf(tb testing.TB, y, s []float64, chosen int) SubsetsInput {
	tb.Helper()
	model := meta.Model{Effects: meta.RandomEffects, Tau: meta.DerSimonianLaird, Level: 0.95}
	pairs, err := meta.NewPairs(model, y, s)
	if err != nil {
		tb.Fatal(err)
	}
	fit, err := model.Fit(y, s)
	if err != nil {
		tb.Fatal(err)
	}
	options := meta.SubsetOptions{Important: &meta.Limits{Low: math.Log(260.0 / 300), High: math.Log(340.0 / 300)}, Sample: 1 << 16}
	if chosen >= 0 {
		options.Chosen = &chosen
	}
	all, err := meta.AllSubsets(context.Background(), pairs, options)
	if err != nil {
		tb.Fatal(err)
	}
	in := SubsetsInput{
		Title: "What would other sets of trials say?", Subtitle: "Brindle against none, flare within 24 weeks · every subset of the trials, pooled",
		Study: "trial", Scale: EffectScale{Measure: "risk ratio", Ratio: true}, Sides: Sides{Lower: "fewer flares", Higher: "more"},
		Grid: SubsetsGrid{
			Estimate: GridAxis(all.Grid.Estimate), Steps: GridAxis(all.Grid.Steps), Counts: all.Grid.Counts, Outside: all.Grid.Outside,
		},
		Drawn:     SubsetsDrawn{Count: all.Count, Failed: all.Failed, Every: all.Every},
		Full:      SubsetsFull{Estimate: fit.Mean.Estimate, LnEvidence: fit.Mean.Evidence.Ln(), K: len(y)},
		Important: &EffectZone{options.Important.Low, options.Important.High},
		Notes:     []Note{{"Model", "random effects, DerSimonian–Laird; Hartung–Knapp interval, evidence matched to it. Invented data."}},
	}
	in.Shares = SubsetsShares{BelowNull: all.Sides.BelowNull, AboveNull: all.Sides.AboveNull, BelowZone: *all.Sides.BelowZone, AboveZone: *all.Sides.AboveZone}
	for i := range in.Shares.Reach {
		for _, w := range all.Words[5+i:] {
			in.Shares.Reach[i] += w.Share
		}
	}
	if chosen >= 0 {
		in.Chosen = &SubsetsChosen{Name: fmt.Sprintf("%s %s", ninetrials[chosen%9].name, ninetrials[chosen%9].year), With: all.With.Counts}
	}
	return in
}

// nineSubsets is the chart of the 511 subsets of the nine invented trials, with
// and without Marchetti-Ruiz.
func nineSubsets(tb testing.TB) SubsetsInput { return subsetsOf(tb, nineY, nineS, 4) }

// manySubsets is a chart of the subsets of k invented trials about a log ratio.
func manySubsets(tb testing.TB, k int, centre float64) SubsetsInput {
	src := rand.New(rand.NewPCG(11, uint64(k)))
	y, s := make([]float64, k), make([]float64, k)
	for i := range k {
		s[i] = 0.12 + 0.4*src.Float64()*src.Float64()
		y[i] = centre + math.Hypot(0.2, s[i])*src.NormFloat64()
	}
	y[0] = centre + 0.6 // one that disagrees
	return subsetsOf(tb, y, s, 0)
}

// difficultSubsets are charts that strain the layout.
func difficultSubsets(tb testing.TB) map[string]SubsetsInput {
	nine := nineSubsets(tb)

	extreme := manySubsets(tb, 11, -3)
	extreme.Title = "A title that is far too long for one line of a chart, so that it has to go on to a second and perhaps to a third line"
	extreme.Chosen.Name = "Brindle after Mask Ventilation Study Group (multicentre, crossover period 1 only) 中文 2014"
	extreme.Sides = Sides{Lower: "fewer flares of Vane syndrome within twenty-four weeks", Higher: "more flares of Vane syndrome within 24 weeks"}

	linear := nine
	linear.Scale = EffectScale{Measure: "standardised mean difference of a long name", Decimals: 3}
	linear.Study, linear.Title, linear.Subtitle, linear.Notes, linear.Chosen, linear.Important = "", "", "", nil, nil, nil

	far := nine // no effect lies off the axis
	far.Grid.Estimate.Low, far.Grid.Estimate.High = 8, 8.2
	far.Full.Estimate = 8.1

	none := nine // strong evidence for none, and many steps
	none.Grid.Steps = GridAxis{-5000, -20, none.Grid.Steps.Cells}
	none.Full.LnEvidence = -3000

	point := SubsetsInput{
		Scale: EffectScale{Measure: "difference"}, Full: SubsetsFull{K: 1}, Drawn: SubsetsDrawn{Count: 1, Every: true},
		Grid: SubsetsGrid{Estimate: GridAxis{0, 1e-12, 1}, Steps: GridAxis{-1e-9, 1e-9, 1}, Counts: []int{1}},
	}
	heap := point // all in one cell
	heap.Grid.Counts, heap.Drawn.Count, heap.Drawn.Failed = []int{1 << 20}, 1<<20, 77
	heap.Chosen = &SubsetsChosen{Name: "A", With: []int{1 << 20}}

	wide := nine
	wide.Grid.Estimate.Low, wide.Grid.Estimate.High = -600, 600
	wide.Important = &EffectZone{-0.1, 0.1}
	return map[string]SubsetsInput{"extreme": extreme, "linear": linear, "far": far, "none": none, "point": point, "heap": heap, "wide": wide}
}
