package webpage

import (
	"fmt"
	"math"
	"slices"

	"steelyard/forest/words"
	"steelyard/meta/panel"
	"steelyard/meta/synthesis"
)

// panelView is what a guideline panel reads: absolute effects with a slider of
// baseline risks, and the card.
type panelView struct {
	ID       string
	Under    string
	Control  *baselineView // nil without an absolute form
	Absolute *tableView
	Card     words.Card
	Figure   *figureView // nil without an important difference
	Treated  string      // "with Brindle"
	Unit     string
}

// baselineView is the slider of baseline risks, at its start.
type baselineView struct {
	Start, Last int
	From, To    string
	Stop        BaselineStop
	// Places of the bars at the start, as classes.
	Base, With, WhiskerLeft, WhiskerWidth string
}

// Stops of the slider of baseline risks: between a share of the least and a multiple of
// the greatest baseline, and at most so many.
const (
	belowLeast    = 0.4
	aboveGreatest = 1.35
	mostStops     = 36
)

// panel builds the view of a panel's part; nil without one.
func (v *view) panel(s *synthesis.Synthesis, o *synthesis.Outcome, id string) (*panelView, error) {
	if o.Panel == nil {
		return nil, nil
	}
	w := &panelView{ID: id, Card: words.PanelCard(s, o), Treated: words.Treatment(s), Under: o.Panel.NoAbsolute, Unit: "per 1000"}
	if a := w.Card.Absolute; a != nil {
		t := v.table("Absolute effects")
		for i, h := range a.Heads {
			t.Heads = append(t.Heads, headView{Text: words.Capital(h), Number: i > 0 && i < len(a.Heads)-1})
		}
		for _, cells := range a.Rows {
			row := rowView{}
			for i, c := range cells {
				row.Cells = append(row.Cells, cellView{Text: c, Number: i > 0 && i < len(cells)-1})
			}
			t.Rows = append(t.Rows, row)
		}
		w.Absolute = &t
	}
	if o.Panel.Threshold != nil {
		f, err := v.figure(s, o, id, kind("benefit"))
		if err != nil {
			return nil, err
		}
		w.Figure = &f
	}
	stops, start, err := baselineStops(o)
	if err != nil || len(stops) == 0 {
		return w, err
	}
	c := &baselineView{Start: start, Last: len(stops) - 1, From: stops[0].Texts["base"], To: stops[len(stops)-1].Texts["base"], Stop: stops[start]}
	bars := stops[start].Bars
	c.Base, c.With = v.positions.at("width", bars["base"]/100), v.positions.at("width", bars["with"]/100)
	c.WhiskerLeft, c.WhiskerWidth = v.positions.at("left", bars["low"]/100), v.positions.at("width", (bars["high"]-bars["low"])/100)
	w.Control = c
	v.baselines[id] = baselineStopsOf{stops, start}
	return w, nil
}

// baselineStopsOf are the stops of an outcome and where they start.
type baselineStopsOf struct {
	stops []BaselineStop
	start int
}

// baselineStops works out the absolute effect at each stop round the panel's baselines;
// it starts at the middle one of these.
func baselineStops(o *synthesis.Outcome) ([]BaselineStop, int, error) {
	var risks []float64
	for _, r := range o.Panel.Rows {
		if r.Absolute != nil {
			risks = append(risks, r.Baseline.Risk)
		}
	}
	if len(risks) == 0 {
		return nil, 0, nil
	}
	slices.Sort(risks)
	first := risks[(len(risks)-1)/2]
	grid := roundRisks(belowLeast*risks[0], math.Min(0.99, aboveGreatest*risks[len(risks)-1]))
	for _, r := range risks {
		if !slices.ContainsFunc(grid, func(x float64) bool { return math.Abs(x-r) < 1e-9 }) {
			grid = append(grid, r)
		}
	}
	slices.Sort(grid)
	m := o.Result.Fit.Mean
	var all []panel.Absolute
	widest := 0.0
	for _, p := range grid {
		a, err := panel.At(o.Analysis.Measure, p, panel.Range{Value: m.Estimate, Low: m.Low, High: m.High})
		if err != nil {
			return nil, 0, fmt.Errorf("absolute effect at a baseline of %v: %w", p, err)
		}
		all = append(all, a)
		widest = math.Max(widest, math.Max(p, a.Treated.Value))
	}
	var stops []BaselineStop
	start := 0
	for i, a := range all {
		if math.Abs(a.Baseline-first) < 1e-9 {
			start = i
		}
		stops = append(stops, baselineStop(a, widest))
	}
	return stops, start, nil
}

// roundRisks are risks at even distances of 1, 2 or 5 times a power of ten.
func roundRisks(from, to float64) []float64 {
	step := 1e-6
	for i := 0; (to-from)/step > mostStops; i++ {
		step *= []float64{2, 2.5, 2}[i%3]
	}
	var all []float64
	for n := math.Ceil(from/step - 1e-9); n*step <= to; n++ {
		if x := math.Round(n*step*1e9) / 1e9; x > 0 && x < 1 {
			all = append(all, x)
		}
	}
	return all
}

// baselineStop writes an absolute effect; widest is the risk that fills the bars.
func baselineStop(a panel.Absolute, widest float64) BaselineStop {
	d := a.Difference
	share := func(risk float64) float64 { return math.Round(1e4*math.Min(1, risk/widest)) / 100 }
	return BaselineStop{
		Texts: map[string]string{
			"base": words.Per1000(a.Baseline), "difference": words.AbsoluteValue(1000 * d.Value), "interval": words.AbsoluteInterval(1000*d.Low, 1000*d.High),
			"with": words.Per1000(a.Treated.Value), "withinterval": words.Interval(words.Per1000(a.Treated.Low), words.Per1000(a.Treated.High)),
			"needed": words.Needed(panel.NumberNeeded(d)),
		},
		Bars: map[string]float64{"base": share(a.Baseline), "with": share(a.Treated.Value), "low": share(a.Treated.Low), "high": share(a.Treated.High)},
	}
}
