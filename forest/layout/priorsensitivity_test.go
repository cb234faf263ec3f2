package layout

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"steelyard/meta/bayes"
	"steelyard/meta/evidence"
)

// priorsOf is the chart of an observation: z standard errors s from the null, over
// round scales.
func priorsOf(tb testing.TB, z, s float64, scales []float64) PriorSensitivityInput {
	tb.Helper()
	at := bayes.Observation{Estimate: z * s, SE: s}
	curve := func(kind bayes.EffectPriorKind, scales []float64) []evidence.Ratio {
		all, err := at.Curve(bayes.EffectPrior{Kind: kind}, scales)
		if err != nil {
			tb.Fatal(err)
		}
		return all
	}
	in := PriorSensitivityInput{
		Title: "Would another prior change the answer?", Subtitle: "Flare within 24 weeks · evidence by the width of the prior",
		ScaleName: "log risk ratio", RangeName: "risk ratios", LnEvidence: evidence.Normal(z).Ln(), LnBound: evidence.Bound(z).Ln(),
		Notes: []Note{{"Level line", "the evidence of this review, which needs no prior scale. Invented data."}},
	}
	normal, cauchy := curve(bayes.NormalPrior, scales), curve(bayes.CauchyPrior, scales)
	for i, g := range scales {
		text := ""
		if g < 5 {
			text = fmt.Sprintf("%.2g to %.2g", math.Exp(-1.96*g), math.Exp(1.96*g))
		}
		in.Scales = append(in.Scales, PriorScale{Scale: g, Range: text, Normal: normal[i].Ln(), Cauchy: cauchy[i].Ln()})
	}
	var fine []float64
	first, last := math.Log(scales[0]), math.Log(scales[len(scales)-1])
	for i := range 121 {
		fine = append(fine, math.Exp(first+(last-first)*float64(i)/120))
	}
	normal, cauchy = curve(bayes.NormalPrior, fine), curve(bayes.CauchyPrior, fine)
	for i, g := range fine {
		in.Curve = append(in.Curve, PriorPoint{Scale: g, Normal: normal[i].Ln(), Cauchy: cauchy[i].Ln()})
	}
	return in
}

var threeDecades = []float64{0.05, 0.1, 0.2, 0.5, 1, 2, 5, 10, 20, 50}

// ninePriors is the chart of the nine invented trials: t = −4.0435 with 8 degrees
// of freedom is z = −2.9012, from 0.3425 on the log scale.
func ninePriors(tb testing.TB) PriorSensitivityInput {
	return priorsOf(tb, -2.9012, 0.3425008/2.9012, threeDecades)
}

func mustPriors(tb testing.TB, in PriorSensitivityInput, style Style) Drawing {
	tb.Helper()
	doc, err := PriorSensitivity(in, style)
	if err != nil {
		tb.Fatal(err)
	}
	return doc.Pages[0]
}

// TestPriorSensitivityPlaces measures the drawing. Source of the numbers: the
// Bayes factors of the nine trials in Python with SciPy (normal 14.05 at 0.33,
// 7.44 at 1; below even from 7.9), their bound 67.3 and evidence 28.8.
func TestPriorSensitivityPlaces(t *testing.T) {
	for _, style := range []Style{{}, {Width: NarrowWidth}} {
		page := mustPriors(t, ninePriors(t), style)
		var even, step float64
		for _, l := range linesOf(group(t, page, "ladder").Items, Grid) {
			if step == 0 || l.Y1 > step {
				step = l.Y1 // the lowest grid line: one step
			}
		}
		for _, l := range linesOf(group(t, page, "ladder").Items, Ordinary) {
			if l.X2-l.X1 > 50 {
				even = l.Y1
			}
		}
		pitch := even - step
		if pitch <= 0 {
			t.Fatalf("even odds at %v, one step at %v", even, step)
		}
		odds := func(y float64) float64 { return math.Exp((even - y) / pitch * lnStep) }
		level := linesOf(group(t, page, "curves").Items, Evidence)
		if len(level) != 1 || level[0].Width != 1.8 || math.Abs(odds(level[0].Y1)-28.8) > 0.1 {
			t.Errorf("level lines %+v, want one 1.8 wide at 28.8 : 1", level)
		}
		bound := linesOf(group(t, page, "curves").Items, Ordinary)
		if len(bound) != 1 || !slices.Equal(bound[0].Dash, []float64{4, 2}) || math.Abs(odds(bound[0].Y1)-67.3) > 0.2 {
			t.Errorf("bounds %+v, want one, dashed, at 67.3 : 1", bound)
		}
		axis := linesOf(group(t, page, "axis").Items, Ordinary)[0]
		scale := func(x float64) float64 { return 0.05 * math.Pow(1000, (x-axis.X1)/(axis.X2-axis.X1)) }
		normal := linesOf(group(t, page, "normal").Items, PriorBased)
		top, crossing := normal[0], 0.0
		for _, l := range normal {
			if l.Y1 < top.Y1 {
				top = l
			}
			if l.Y1 <= even && even < l.Y2 {
				crossing = scale(l.X1)
			}
		}
		if math.Abs(odds(top.Y1)-14.05) > 0.05 || math.Abs(scale(top.X1)-0.325) > 0.02 {
			t.Errorf("normal curve rises to %.2f : 1 at %.3f, want 14.05 : 1 at 0.33", odds(top.Y1), scale(top.X1))
		}
		if math.Abs(crossing-7.9) > 0.5 {
			t.Errorf("normal curve meets even odds at %.2f, want 7.9", crossing)
		}
		if last := normal[len(normal)-1]; math.Abs(last.Y2-axis.Y1) > 0.01 {
			t.Errorf("normal curve ends at %.2f, want the axis at %.2f", last.Y2, axis.Y1)
		}
	}
}

// TestPriorSensitivityTexts: odds, words, scales and ranges stand in the chart.
func TestPriorSensitivityTexts(t *testing.T) {
	page := mustPriors(t, ninePriors(t), Style{Width: NarrowWidth})
	texts := textsOf(page.Items)
	for _, want := range []string{
		"194 : 1", "52 : 1", "14 : 1", "3.7 : 1", "1 : 1", "none", "faint", "fair", "firm", "heavy", "normal prior", "Cauchy prior",
		"no prior can pass 67 : 1", "empirical Bayes factor  29 : 1", "0.05", "0.5", "50", "0.82 to 1.2", "0.38 to 2.7", "0.02 to 50",
		"Scale of the prior, log risk ratio (grey: 95% of its risk ratios)",
	} {
		if !slices.Contains(texts, want) {
			t.Errorf("no %q in %q", want, texts)
		}
	}
	for _, want := range []string{
		"29 : 1, firm, 2.6 steps", "Normal prior: at most 14 : 1, at scale 0.3", "below 1 : 1 for scales above 7.9", "No prior can pass 67 : 1",
		"1 (0.14 to 7.1), normal 7.4 : 1, Cauchy 5.6 : 1",
	} {
		if !strings.Contains(page.Description, want) {
			t.Errorf("the description lacks %q:\n%s", want, page.Description)
		}
	}
}

// TestPriorSensitivityNothingOverlaps lays out charts from no effect to a massive
// one in all styles; neither a curve nor a level line runs through a curve's name.
func TestPriorSensitivityNothingOverlaps(t *testing.T) {
	wide := []float64{1e-3, 2e-3, 5e-3, 0.01, 0.02, 0.05, 0.1, 1, 10, 100, 1000, 1e4}
	for _, z := range []float64{0, 0.3, 1, 1.3, 1.69, 2, 2.9, 3.5, 5, 8, 12, 30, 100, 1000} {
		for _, scales := range [][]float64{threeDecades, wide, {1e-9, 2e-9}, {1e6, 1e12}} {
			in := priorsOf(t, z, 0.118, scales)
			for _, style := range accrualStyles {
				name := fmt.Sprintf("z %v, %d scales, style %+v", z, len(scales), style)
				page := mustPriors(t, in, style)
				checkPage(t, name, page)
				labels := group(t, page, "labels").Items
				strokes := slices.Concat(linesOf(group(t, page, "curves").Items, PriorBased), linesOf(group(t, page, "curves").Items, Evidence))
				for _, b := range boxes(Drawing{Items: labels}) {
					if !b.text || !strings.Contains(b.what, "prior\"") {
						continue
					}
					for _, l := range strokes {
						if min(l.X1, l.X2) < b.x2 && b.x1 < max(l.X1, l.X2) && min(l.Y1, l.Y2) < b.y2 && b.y1 < max(l.Y1, l.Y2) ||
							l.Y1 == l.Y2 && l.X1 < b.x1 && b.x2 < l.X2 && b.y1 < l.Y1 && l.Y1 < b.y2 {
							t.Errorf("%s: a line runs through %s", name, b.what)
						}
					}
				}
			}
		}
	}
}

// TestDashed cuts a bent path of length 10 by hand: dashes from 0 to 3, 4 to 7 and
// 8 to 10.
func TestDashed(t *testing.T) {
	got := dashed([]Point{{0, 0}, {5, 0}, {5, 5}}, 3, 1)
	want := [][]Point{{{0, 0}, {3, 0}}, {{4, 0}, {5, 0}, {5, 2}}, {{5, 3}, {5, 5}}}
	if !slices.EqualFunc(got, want, func(a, b []Point) bool { return slices.Equal(a, b) }) {
		t.Errorf("dashes %v, want %v", got, want)
	}
	if dashed(nil, 3, 1) != nil {
		t.Error("dashes of no path")
	}
}

func TestPriorSensitivityRefuses(t *testing.T) {
	for what, set := range map[string]func(*PriorSensitivityInput){
		"no scales":          func(in *PriorSensitivityInput) { in.Scales = nil },
		"no curve":           func(in *PriorSensitivityInput) { in.Curve = nil },
		"evidence not known": func(in *PriorSensitivityInput) { in.LnEvidence = math.NaN() },
		"infinite bound":     func(in *PriorSensitivityInput) { in.LnBound = math.Inf(1) },
		"a scale of zero":    func(in *PriorSensitivityInput) { in.Scales[0].Scale = 0 },
		"falling scales":     func(in *PriorSensitivityInput) { in.Curve[7].Scale = 1e-6 },
		"a curve beyond":     func(in *PriorSensitivityInput) { in.Scales = in.Scales[:5] },
		"a factor of NaN":    func(in *PriorSensitivityInput) { in.Curve[7].Cauchy = math.NaN() },
	} {
		in := ninePriors(t)
		set(&in)
		if _, err := PriorSensitivity(in, Style{}); err == nil || !strings.Contains(err.Error(), "prior-sensitivity chart") {
			t.Errorf("%s: %v", what, err)
		}
	}
	if _, err := PriorSensitivity(ninePriors(t), Style{Width: 60}); err == nil || !strings.Contains(err.Error(), "too narrow") {
		t.Errorf("a width of 60 pt gave %v", err)
	}
}

func TestGoldenPriorSensitivity(t *testing.T) {
	checkGolden(t, "prior-sensitivity-nine", mustPriors(t, ninePriors(t), Style{}), Light)
	checkGolden(t, "prior-sensitivity-narrow", mustPriors(t, ninePriors(t), Style{Width: NarrowWidth, ID: "narrow"}), Mono)
}
