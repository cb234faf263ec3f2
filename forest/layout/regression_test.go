package layout

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"
)

// alongX is a chart of k invented trials along a covariate.
func alongX(k int) RegressionInput {
	in := RegressionInput{
		Title: "Flare within 24 weeks, Vane syndrome (invented)", Subtitle: "risk ratio along dose", Study: "trial",
		Scale: EffectScale{Measure: "risk ratio", Ratio: true}, Covariate: "dose", Level: 0.95,
		Notes: []Note{{"Change", "ratio of risk ratios per 10 of dose."}},
	}
	src := rand.New(rand.NewPCG(3, uint64(k)))
	for i := range k {
		x := 20 + 40*src.Float64()
		in.Points = append(in.Points, RegressionPoint{Name: inventedNames[i%len(inventedNames)], X: x, Estimate: 0.4 - 0.02*x + 0.3*src.NormFloat64(), Weight: 1 + 20*src.Float64()})
	}
	for i := range 33 {
		x := 20 + 40*float64(i)/32
		y, half := 0.4-0.02*x, 0.1+0.01*math.Abs(x-40)
		in.Line = append(in.Line, RegressionLine{X: x, Estimate: y, Low: y - half, High: y + half, Prediction: &ForestPrediction{Low: y - half - 0.5, High: y + half + 0.5}})
	}
	return in
}

func TestRegressionNothingOverlaps(t *testing.T) {
	inputs := map[string]RegressionInput{}
	for _, k := range []int{1, 4, 13, 60, 300} {
		inputs[fmt.Sprint(k)] = alongX(k)
	}
	linear := alongX(9)
	linear.Scale, linear.NoNull = EffectScale{Measure: "difference", Decimals: 2}, true
	for i := range linear.Line {
		linear.Line[i].Prediction = nil
	}
	inputs["linear"] = linear
	far := alongX(9)
	for i := range far.Line {
		far.Line[i].Low, far.Line[i].Prediction = -40, &ForestPrediction{Low: -300, High: 300}
	}
	far.Points[0].Name, far.Covariate = strings.Repeat("Unbroken", 30), strings.Repeat("a long name of a covariate ", 9)
	inputs["far"] = far
	offset := alongX(9)
	for i := range offset.Points {
		offset.Points[i].X += 1e6
	}
	for i := range offset.Line {
		offset.Line[i].X += 1e6
	}
	inputs["offset"] = offset
	for name, in := range inputs {
		for _, style := range []Style{{}, {Width: NarrowWidth}, {Width: 400, NoTitle: true}} {
			doc, err := Regression(in, style)
			if err != nil {
				t.Errorf("%s: %v", name, err)
				continue
			}
			page := doc.Pages[0]
			checkPage(t, fmt.Sprintf("%s, width %.0f", name, page.Width), page)
			if bubbles := group(t, page, "trials").Items; len(bubbles) != len(in.Points) {
				t.Errorf("%s: %d bubbles for %d points", name, len(bubbles), len(in.Points))
			}
		}
	}
}

// TestRegressionPlaces: bubbles, line and bands stand where the labelled ticks put
// their values, and the bubbles' areas are as their weights.
func TestRegressionPlaces(t *testing.T) {
	in := alongX(9)
	in.Points[0].Weight, in.Points[1].Weight = 40, 10
	page := mustRegression(t, in).Pages[0]
	ticks := map[string]Point{} // of both axes, by label
	for _, it := range group(t, page, "axes").Items {
		if text, ok := it.(Text); ok {
			run := text.Runs()[0]
			ticks[text.Spans[0].Text] = Point{run.Left + run.Width/2, text.Y - uprightText*text.Size}
		}
	}
	x := func(v float64) float64 {
		return ticks["30"].X + (v-30)/20*(ticks["50"].X-ticks["30"].X)
	}
	y := func(v float64) float64 {
		return ticks["1"].Y + v/math.Log(0.5)*(ticks["0.5"].Y-ticks["1"].Y)
	}
	disc := func(i int) Disc { return group(t, page, fmt.Sprintf("point-%d", i)).Items[0].(Disc) }
	for i, p := range in.Points {
		if d := disc(i + 1); math.Abs(d.X-x(p.X)) > 0.05 || math.Abs(d.Y-y(p.Estimate)) > 0.05 {
			t.Errorf("bubble %d at (%.2f, %.2f), want (%.2f, %.2f)", i+1, d.X, d.Y, x(p.X), y(p.Estimate))
		}
	}
	if a, b := disc(1).Radius, disc(2).Radius; math.Abs(a-2*b) > 1e-9 {
		t.Errorf("radii %v and %v for weights 40 and 10", a, b)
	}
	line := linesOf(group(t, page, "line").Items, Estimate)
	if first := line[0]; math.Abs(first.X1-x(20)) > 0.05 || math.Abs(first.Y1-y(0)) > 0.05 {
		t.Errorf("the line starts at (%.2f, %.2f), want (%.2f, %.2f)", first.X1, first.Y1, x(20), y(0))
	}
	band := polygonsOf(group(t, page, "band").Items, IntervalBand)[0].Points
	if p := band[0]; math.Abs(p.Y-y(0.3)) > 0.05 {
		t.Errorf("the band starts at %.2f, want %.2f", p.Y, y(0.3))
	}
	for _, l := range linesOf(group(t, page, "prediction").Items, Prediction) {
		if len(l.Dash) == 0 {
			t.Error("the prediction is not dashed")
		}
	}
}

func mustRegression(t *testing.T, in RegressionInput) Document {
	t.Helper()
	doc, err := Regression(in, Style{})
	if err != nil {
		t.Fatal(err)
	}
	return doc
}

func TestRegressionRefuses(t *testing.T) {
	for name, change := range map[string]func(*RegressionInput){
		"no point":     func(in *RegressionInput) { in.Points = nil },
		"no line":      func(in *RegressionInput) { in.Line = in.Line[:1] },
		"estimate":     func(in *RegressionInput) { in.Points[2].Estimate = math.NaN() },
		"covariate":    func(in *RegressionInput) { in.Points[2].X = math.Inf(1) },
		"weight":       func(in *RegressionInput) { in.Points[2].Weight = -1 },
		"order":        func(in *RegressionInput) { in.Line[3].X = in.Line[2].X },
		"limits":       func(in *RegressionInput) { in.Line[3].Low = in.Line[3].High + 1 },
		"prediction":   func(in *RegressionInput) { in.Line[3].Prediction = &ForestPrediction{Low: math.NaN()} },
		"some of them": func(in *RegressionInput) { in.Line[3].Prediction = nil },
		"level":        func(in *RegressionInput) { in.Level = 95 },
	} {
		in := alongX(5)
		in.Points, in.Line = slices.Clone(in.Points), slices.Clone(in.Line)
		change(&in)
		if _, err := Regression(in, Style{}); err == nil || !strings.HasPrefix(err.Error(), "regression chart: ") {
			t.Errorf("%s: error %v", name, err)
		}
	}
}
