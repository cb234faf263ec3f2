package layout

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"steelyard/meta/review"
)

// TestCumulativeNinePlaces compares places with those of the design drawing
// (design/mock/cumulative.svg), which was computed apart from this code.
func TestCumulativeNinePlaces(t *testing.T) {
	page := mustCumulative(t, ninePoints(), Style{})
	near := func(what string, got, want float64) {
		t.Helper()
		if !(math.Abs(got-want) <= 0.05) {
			t.Errorf("%s at %.3f, the design has %.2f", what, got, want)
		}
	}
	near("height", page.Height, 366.89)
	evidence := group(t, page, "evidence").Items
	open := discsOf(evidence, Paper)
	if len(open) != 1 {
		t.Fatalf("%d open points, want the first alone", len(open))
	}
	near("Halvorsen's point", open[0].X, 56.83)
	near("its height", open[0].Y, 164.15)
	want := []Point{{102.61, 190.11}, {135.9, 177.36}, {179.6, 165.35}, {219.14, 182.92}, {271.16, 163.88}, {312.78, 148.91}, {358.56, 131.95}, {441.8, 107.76}}
	for i, d := range discsOf(evidence, Evidence) {
		near(fmt.Sprintf("point %d", i+2), d.X, want[i].X)
		near("its height", d.Y, want[i].Y)
	}
	heights := []float64{281.09, 273.79, 276.15, 272.11, 266.22, 270.24, 270.42, 270.23, 270.47}
	for i, d := range discsOf(group(t, page, "estimates").Items, Estimate) {
		near(fmt.Sprintf("estimate %d", i+1), d.Y, heights[i])
	}
	for _, label := range []struct {
		text string
		x, y float64
	}{
		{"Evidence ratio", 3, 45.67}, {"194 : 1", 26.4, 66.67}, {"faint", 26.4, 171.67}, {"none", 26.4, 201.67},
		{"Probability", 469.4, 45.67}, {"20% prior", 469.4, 186.67}, {"50%", 469.4, 155.1}, {"10%", 469.4, 205.15}, {"98%", 469.4, 66.44},
		{"88%", 470.4, 110.3}, {"29 : 1, firm", 436.8, 103.26}, {"0.3", 26.4, 312.79}, {"1.5", 26.4, 238.1}, {"more", 26.4, 247.51},
		{"fewer", 26.4, 265.19}, {"0.71", 469.4, 268.51}, {"2010", 76.59, 326.61}, {"2024", 426.19, 326.61}, {"Abernethy", 312.78, 45.67}, {"+0.5", 312.78, 53.34},
	} {
		x, y := placeOf(t, page, label.text)
		near(label.text, x, label.x)
		near(label.text+" (height)", y, label.y)
	}
}

// placeOf returns where a text stands.
func placeOf(t *testing.T, d Drawing, text string) (x, y float64) {
	t.Helper()
	found := false
	d.Each(func(it Item) {
		if line, ok := it.(Text); ok && line.Spans[0].Text == text && !found {
			x, y, found = line.Spans[0].X, line.Y, true
		}
	})
	if !found {
		t.Fatalf("no text %q", text)
	}
	return x, y
}

// TestCumulativeScales reads both upright scales from their labels: a point's
// height must say its evidence on the left, and on the right the probability that
// Bayes' rule gives from the prior.
func TestCumulativeScales(t *testing.T) {
	for _, prior := range []float64{0.02, 0.2, 0.5, 0.9} {
		in := ninePoints()
		in.Prior = prior
		page := mustCumulative(t, in, Style{})
		_, even := placeOf(t, page, "1 : 1")
		_, one := placeOf(t, page, "3.7 : 1")
		step := even - one
		point := discsOf(group(t, page, "evidence").Items, Evidence)[7]
		offset := even - uprightText*6.67
		if got, want := (offset-point.Y)/step, 3.361864/1.3169578969; !(math.Abs(got-want) < 0.01) { // ln(2+√3)
			t.Errorf("the last point stands at %.3f steps, want %.3f", got, want)
		}
		for _, percent := range []float64{10, 50, 80, 95} {
			label := fmt.Sprintf("%.0f%%", percent)
			if !slices.Contains(textsOf(group(t, page, "probability").Items), label) {
				continue
			}
			_, y := placeOf(t, Drawing{Items: group(t, page, "probability").Items}, label)
			odds := math.Exp((even - y) / step * 1.3169578969)
			if got := prior * odds / (1 - prior + prior*odds); !(math.Abs(got-percent/100) < 0.002) {
				t.Errorf("prior %v: the label %s stands at a probability of %.4f", prior, label, got)
			}
		}
	}
}

// TestCumulativeTies: what arrives together is one point with its names stacked.
func TestCumulativeTies(t *testing.T) {
	in := ninePoints()
	in.Points[3].Entered = append(in.Points[2].Entered, in.Points[3].Entered...)
	in.Points[3].Entered = append(in.Points[3].Entered, Arrival{"Third", "2014"}, Arrival{"Fourth", "2014"})
	in.Points = slices.Delete(in.Points, 2, 3)
	for i := 2; i < len(in.Points); i++ {
		in.Points[i].K += 2
	}
	page := mustCumulative(t, in, Style{})
	x1, y1 := placeOf(t, page, "Okwuosa")
	x2, y2 := placeOf(t, page, "Brandão")
	_, y3 := placeOf(t, page, "and 2 more")
	if x1 != x2 || !(y1 < y2 && y2 < y3) {
		t.Errorf("names at (%.1f, %.1f), (%.1f, %.1f) and %.1f, want a stack", x1, y1, x2, y2, y3)
	}
	if got := len(discsOf(group(t, page, "estimates").Items, Estimate)); got != 8 {
		t.Errorf("%d points, want 8", got)
	}
	narrow := mustCumulative(t, in, Style{Width: NarrowWidth})
	if texts := textsOf(group(t, narrow, "arrivals").Items); !slices.Contains(texts, "3–6") {
		t.Errorf("numbers %q, want 3–6 for what entered together", texts)
	}
	if notes := strings.Join(textsOf(group(t, narrow, "notes").Items), " "); !strings.Contains(notes, "1 Halvorsen 2009") {
		t.Errorf("the notes do not say what the numbers stand for: %s", notes)
	}
}

// TestCumulativeNamesOnlyMovers: over 12 points only those that move the evidence
// by half a step are named.
func TestCumulativeNamesOnlyMovers(t *testing.T) {
	in := manyPoints(30)
	for i := range in.Points {
		in.Points[i].LnEvidence = 0.49 * lnStep * float64(i%2)
		in.Points[i].Entered[0].Name = fmt.Sprintf("Trial %d", i)
	}
	in.Points[20].LnEvidence = -0.51 * lnStep
	texts := textsOf(group(t, mustCumulative(t, in, Style{}), "arrivals").Items)
	if want := []string{"Trial 20", "−1.0", "Trial 21", "+1.0"}; !slices.Equal(texts, want) {
		t.Errorf("labels %q, want %q", texts, want)
	}
}

// TestCumulativePastTheAxes: evidence past the ladder and intervals past their
// axis end in heads, and no disc stands there.
func TestCumulativePastTheAxes(t *testing.T) {
	in := ninePoints()
	in.Points[8].LnEvidence = 40
	page := mustCumulative(t, in, Style{})
	evidence := group(t, page, "evidence").Items
	if heads := polygonsOf(evidence, Evidence); len(heads) != 1 || len(discsOf(evidence, Evidence)) != 7 {
		t.Errorf("%d heads and %d discs, want 1 and 7", len(heads), len(discsOf(evidence, Evidence)))
	}
	texts := textsOf(page.Items)
	for _, want := range []string{"> 10,000 : 1, massive", "> 99.9%", "2,700 : 1"} {
		if !slices.Contains(texts, want) {
			t.Errorf("no %q", want)
		}
	}
	clipped := polygonsOf(group(t, page, "estimates").Items, Estimate)
	if len(clipped) != 2 { // the interval of two trials, 0.058 to 7.54, as in the design
		t.Errorf("%d heads on the intervals, want 2", len(clipped))
	}
}

func TestCumulativeAxes(t *testing.T) {
	in := ninePoints()
	in.Order = "by risk of bias"
	for i := range in.Points {
		in.Points[i].Label = fmt.Sprintf("level %d", i)
	}
	texts := textsOf(group(t, mustCumulative(t, in, Style{}), "axis").Items)
	if !slices.Contains(texts, "level 0") || !slices.Contains(texts, "by risk of bias") || slices.Contains(texts, "2010") {
		t.Errorf("an order by a column has the axis %q", texts)
	}
	in = ninePoints()
	in.Points[8].Date = review.Date{}
	page := mustCumulative(t, in, Style{})
	if texts := textsOf(group(t, page, "axis").Items); !slices.Contains(texts, "no date") || !slices.Contains(texts, "2010") {
		t.Errorf("with an undated study the axis is %q", texts)
	}
	discs := discsOf(group(t, page, "evidence").Items, Evidence)
	if !(discs[7].X > discs[6].X) {
		t.Error("the undated study does not stand last")
	}
	for i := range in.Points {
		in.Points[i].Date = review.Date{}
	}
	page = mustCumulative(t, in, Style{})
	if texts := textsOf(group(t, page, "axis").Items); !slices.Contains(texts, "9") || !slices.Contains(texts, "trials so far") {
		t.Errorf("without dates the axis is %q", texts)
	}
	open, discs := discsOf(group(t, page, "evidence").Items, Paper), discsOf(group(t, page, "evidence").Items, Evidence)
	first, second := discs[0].X-open[0].X, discs[7].X-discs[6].X
	if !(math.Abs(first-second) < 1e-6) {
		t.Errorf("undated studies stand %.3f and %.3f apart, want equal distances", first, second)
	}
	in = ninePoints()
	in.Prior = 0
	page = mustCumulative(t, in, Style{})
	if len(group(t, page, "probability").Items) != 0 || slices.Contains(textsOf(page.Items), "Probability") {
		t.Error("a scale of probability without a prior")
	}
}

// TestCumulativeDescription holds the description to the numbers of the design
// drawing's description.
func TestCumulativeDescription(t *testing.T) {
	got := mustCumulative(t, ninePoints(), Style{}).Description
	for _, want := range []string{
		"Halvorsen 2009, 2009-03: 2.4 : 1, 0.7 steps, risk ratio 0.56 (0.31 to 1.03)",
		"Zielińska 2011, 2011-01: 1 : 1.3, −0.2 steps (−0.87), risk ratio 0.66 (0.058 to 7.54)",
		"Okwuosa 2012", "1.4 : 1", "0.63 (0.28 to 1.39)", "Brandão 2014", "0.69 (0.45 to 1.05)", "Marchetti-Ruiz 2015", "0.78 (0.51 to 1.19)",
		"Lindqvist 2017", "2.5 : 1", "0.71 (0.50 to 1.02)", "Abernethy 2019", "4.7 : 1", "0.71 (0.53 to 0.95)", "Dvořák 2021", "10 : 1", "0.71 (0.56 to 0.91)",
		"Obradović 2024, 2024-08: 29 : 1, 2.6 steps (+0.81), risk ratio 0.71 (0.58 to 0.86).",
		"With a prior probability of 20% the probability of an effect is now 88%.",
	} {
		if !strings.Contains(got, want) {
			t.Errorf("the description lacks %q:\n%s", want, got)
		}
	}
}

func TestCumulativeRefuses(t *testing.T) {
	for _, bad := range []float64{math.NaN(), math.Inf(1), math.Inf(-1), 1e308, -1e308} {
		for field, set := range map[string]func(*CumulativeInput){
			"estimate": func(in *CumulativeInput) { in.Points[1].Estimate = bad },
			"low":      func(in *CumulativeInput) { in.Points[1].Low = bad },
			"high":     func(in *CumulativeInput) { in.Points[1].High = bad },
			"evidence": func(in *CumulativeInput) { in.Points[1].LnEvidence = bad },
			"null":     func(in *CumulativeInput) { in.Scale.Null = bad },
			"level":    func(in *CumulativeInput) { in.Level = bad },
			"prior":    func(in *CumulativeInput) { in.Prior = bad },
		} {
			for _, ratio := range []bool{true, false} {
				in := ninePoints()
				in.Scale.Ratio = ratio
				set(&in)
				if _, err := Cumulative(in, Style{}); err == nil {
					t.Errorf("%s of %v was drawn (ratio %v)", field, bad, ratio)
				}
			}
		}
		if _, err := Cumulative(ninePoints(), Style{Width: bad}); err == nil {
			t.Errorf("width of %v was taken", bad)
		}
	}
	for what, set := range map[string]func(*CumulativeInput){
		"no points":       func(in *CumulativeInput) { in.Points = nil },
		"a falling count": func(in *CumulativeInput) { in.Points[4].K = 2 },
		"nobody entering": func(in *CumulativeInput) { in.Points[4].Entered = nil },
		"falling dates":   func(in *CumulativeInput) { in.Points[4].Date.Year = 1999 },
		"no such month":   func(in *CumulativeInput) { in.Points[4].Date.Month = 13 },
	} {
		in := ninePoints()
		set(&in)
		if _, err := Cumulative(in, Style{}); err == nil {
			t.Errorf("%s was drawn", what)
		}
	}
	if _, err := Cumulative(ninePoints(), Style{Width: 120}); err == nil || !strings.Contains(err.Error(), "too narrow") {
		t.Errorf("a width of 120 pt gave %v", err)
	}
}

// TestPushApart compares with the least-squares solution by hand: two labels of
// width 10 wanted at the same place share the shift; at an end they stay inside.
func TestPushApart(t *testing.T) {
	for _, tt := range []struct{ wanted, widths, want []float64 }{
		{[]float64{50, 50}, []float64{10, 10}, []float64{44, 56}},
		{[]float64{2, 3}, []float64{10, 10}, []float64{5, 17}},
		{[]float64{98, 99}, []float64{10, 10}, []float64{83, 95}},
		{[]float64{20, 80}, []float64{10, 10}, []float64{20, 80}},
		{nil, nil, nil},
	} {
		got := pushApart(tt.wanted, tt.widths, 2, span{0, 100})
		if len(got) != len(tt.want) {
			t.Fatalf("%d places, want %d", len(got), len(tt.want))
		}
		for i := range got {
			if !(math.Abs(got[i]-tt.want[i]) < 1e-9) {
				t.Errorf("%v pushed apart to %v, want %v", tt.wanted, got, tt.want)
			}
		}
	}
}

// TestCumulativeValueIsClear: the line of evidence and the line of even odds do
// not run through the odds of the last point.
func TestCumulativeValueIsClear(t *testing.T) {
	for k := 1; k <= 40; k++ {
		for _, style := range accrualStyles {
			page := mustCumulative(t, manyPoints(k), style)
			items := group(t, page, "evidence").Items
			value := boxes(Drawing{Items: items[len(items)-1:]})[0]
			lines := append(linesOf(items, Evidence), linesOf(group(t, page, "ladder").Items, Ordinary)...)
			for _, l := range lines {
				across := min(l.X1, l.X2) < value.x2 && value.x1 < max(l.X1, l.X2) || l.X1 == l.X2 && value.x1 < l.X1 && l.X1 < value.x2
				down := min(l.Y1, l.Y2) < value.y2 && value.y1 < max(l.Y1, l.Y2) || l.Y1 == l.Y2 && value.y1 < l.Y1 && l.Y1 < value.y2
				if across && down {
					t.Errorf("%d points, style %+v: a line runs through %s", k, style, value.what)
				}
			}
		}
	}
}
