package layout

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"
)

// nineFunnel is the funnel chart of the nine invented trials.
func nineFunnel() FunnelInput {
	forest := nineTrials()
	pooled := forest.Pooled.Estimate
	in := FunnelInput{
		Title: "Do small trials show larger effects?", Subtitle: "Brindle against none, flare within 24 weeks", Study: "trial",
		Scale: forest.Scale, Sides: forest.Sides, Pooled: &pooled,
		Notes: []Note{{"Asymmetry", "not tested: 9 trials, the test needs 10; uneven scatter has several causes. Invented data."}},
	}
	for _, r := range forest.Rows {
		in.Rows = append(in.Rows, FunnelRow{Name: r.Name, Year: r.Year, Estimate: r.Estimate, SE: (r.High - r.Low) / (2 * 1.959964)})
	}
	return in
}

// manyFunnel is a funnel chart of k invented trials.
func manyFunnel(k int) FunnelInput {
	in := nineFunnel()
	in.Rows, in.Notes = nil, nil
	src := rand.New(rand.NewPCG(4, uint64(k)))
	for i := range k {
		s := 0.06 + 0.5*src.Float64()
		in.Rows = append(in.Rows, FunnelRow{Name: inventedNames[i%len(inventedNames)], Year: fmt.Sprint(1998 + i*26/k), Estimate: -0.3 + 0.1*src.NormFloat64() + s*src.NormFloat64(), SE: s})
	}
	return in
}

// difficultFunnels are charts that strain the layout.
func difficultFunnels() map[string]FunnelInput {
	long := nineFunnel()
	long.Title = "A title that is far too long for one line of a chart, so that it has to go on to a second and perhaps to a third line"
	long.Sides = Sides{Lower: "fewer flares of Vane syndrome within twenty-four weeks", Higher: "more flares of Vane syndrome within 24 weeks"}
	long.Scale.Measure = "standardised mean difference of a name without end"
	long.Rows[0].Name, long.Rows[1].Name, long.Rows[2].Year = "中文作者和同事", strings.Repeat("Unbroken", 30), ""

	far := nineFunnel()
	far.Rows[0].Estimate, far.Rows[1].Estimate, far.Rows[2].SE, far.Rows[3].SE = 13, -13, 1e9, 1e-9

	linear := nineFunnel()
	linear.Scale = EffectScale{Measure: "mean difference", Decimals: 3}
	linear.Rows[0].Estimate, linear.Rows[1].Estimate = 1e11, -1e11

	one := nineFunnel()
	one.Rows, one.Pooled = one.Rows[:1], nil

	same := nineFunnel()
	for i := range same.Rows {
		same.Rows[i].Estimate, same.Rows[i].SE = 0, 0.2
	}
	same.Title, same.Subtitle, same.Study = "", "", ""

	off := nineFunnel() // all far from no effect
	for i := range off.Rows {
		off.Rows[i].Estimate += 8
	}
	*off.Pooled = 8
	return map[string]FunnelInput{"long": long, "far": far, "linear": linear, "one": one, "same": same, "off": off}
}

func radialOf(in FunnelInput) RadialInput {
	r := RadialInput{FunnelInput: in, Level: 0.95}
	if in.Pooled != nil {
		r.Low, r.High = *in.Pooled-0.2, *in.Pooled+0.2
	}
	return r
}

func contributionOf(in FunnelInput) ContributionInput {
	out := ContributionInput{Title: in.Title, Subtitle: in.Subtitle, Study: in.Study, Notes: in.Notes}
	for _, r := range in.Rows {
		z := (r.Estimate + 0.3) / r.SE
		out.Rows = append(out.Rows, ContributionRow{Name: r.Name, Year: r.Year, QShare: math.Min(z*z, 1e12), Pull: clamp(z/5, -1e12, 1e12)})
	}
	return out
}

var smallStudyStyles = []Style{{}, {Width: NarrowWidth}, {Width: 400, NoTitle: true}, {Width: NarrowWidth, TypeSize: 8.3}, {TypeSize: 9}, {Contours: PContours}, {Width: NarrowWidth, Contours: PContours, NoTitle: true}}

// TestSmallStudyChartsNothingOverlaps draws all three charts of 1 to 200 studies and of
// difficult ones in both widths.
func TestSmallStudyChartsNothingOverlaps(t *testing.T) {
	draw := func(name string, in FunnelInput, style Style) {
		for kind, lay := range map[string]func() (Document, error){
			"funnel": func() (Document, error) { return Funnel(in, style) },
			"radial": func() (Document, error) { return Radial(radialOf(in), style) },
			"contribution": func() (Document, error) {
				if len(in.Rows) < 2 {
					return Document{}, nil
				}
				return Contribution(contributionOf(in), style)
			},
		} {
			doc, err := lay()
			if err != nil {
				t.Errorf("%s of %s, style %+v: %v", kind, name, style, err)
				continue
			}
			for _, page := range doc.Pages {
				checkPage(t, fmt.Sprintf("%s of %s, style %+v", kind, name, style), page)
				if svg := written(t, page, Light); strings.Contains(svg, "NaN") || strings.Contains(svg, "Inf") {
					t.Errorf("%s of %s holds a place that is no number", kind, name)
				}
			}
		}
	}
	for _, k := range []int{1, 2, 3, 5, 9, 14, 22, 40, 61, 120, 200} {
		for _, style := range smallStudyStyles[:2] {
			draw(fmt.Sprint(k), manyFunnel(k), style)
		}
	}
	for name, in := range difficultFunnels() {
		for _, style := range smallStudyStyles {
			draw(name, in, style)
		}
	}
}

func mustFunnel(t testing.TB, in FunnelInput, style Style) Drawing {
	t.Helper()
	doc, err := Funnel(in, style)
	if err != nil {
		t.Fatal(err)
	}
	return doc.Pages[0]
}

// slope is how far a contour runs from no effect, on the log scale, for each unit of
// standard error, by the two axes as labelled.
func slope(t *testing.T, page Drawing, l Line) float64 {
	t.Helper()
	var one, half, top, low Point
	for _, it := range group(t, page, "axes").Items {
		text, ok := it.(Text)
		if !ok {
			continue
		}
		at := Point{text.Runs()[0].Left + text.Runs()[0].Width/2, text.Y - baseline(text.Size)}
		switch text.Spans[0].Text {
		case "1":
			one = at
		case "0.5":
			if at.Y > half.Y { // the axis of effects lies lowest
				half = at
			}
		case "0.0":
			top = at
		case "0.4":
			if low == (Point{}) || at.Y < low.Y {
				low = at
			}
		}
	}
	return (l.X2 - l.X1) / ((one.X - half.X) / math.Ln2) / ((l.Y2 - l.Y1) * 0.4 / (low.Y - top.Y))
}

// TestFunnelContours holds the contours to |z| = √(1 + ln 2 + 2n·ln(2 + √3)) for n = 0
// to 4 steps (the closed form of the style guide; |z| = 1.301 for even odds), and to
// the normal quantiles of published tables.
func TestFunnelContours(t *testing.T) {
	for kind, want := range map[Contours][]float64{
		EvidenceContours: {1.3012, 2.0802, 2.6384, 3.0976, 3.4970},
		PContours:        {1.6449, 1.9600, 2.5758, 3.2905},
	} {
		page := mustFunnel(t, nineFunnel(), Style{Contours: kind})
		lines := linesOf(group(t, page, "contours").Items, FunnelLine)
		if len(lines) != 2*len(want) {
			t.Fatalf("%v: %d lines, want %d", kind, len(lines), 2*len(want))
		}
		for i, z := range want {
			right, left := slope(t, page, lines[2*i]), slope(t, page, lines[2*i+1])
			if math.Abs(right-z) > 0.002 || math.Abs(left+z) > 0.002 {
				t.Errorf("%v: contour %d runs at %.4f and %.4f, want ±%.4f", kind, i, right, left, z)
			}
		}
	}
	if z := math.Sqrt(1 + math.Ln2 + 2*math.Log(2+math.Sqrt(3))); math.Abs(z-2.0802) > 1e-4 {
		t.Errorf("one step lies at %v", z)
	}
}

// TestFunnelDescription wants the odds of the mock drawing, which Python computed.
func TestFunnelDescription(t *testing.T) {
	got := mustFunnel(t, nineFunnel(), Style{}).Description
	for _, want := range []string{
		"Halvorsen 2009 0.56, standard error 0.31, 2.4 : 1", "Okwuosa 2012 0.30, standard error 0.73, 1.7 : 1", "Marchetti-Ruiz 2015 1.13, standard error 0.18, 1 : 1.9",
		"Lindqvist 2017 0.55, standard error 0.17, 142 : 1", "Obradović 2024 0.68, standard error 0.15, 10 : 1", "Pooled 0.71.", "Contours mark equal evidence.", "not tested: 9 trials",
	} {
		if !strings.Contains(got, want) {
			t.Errorf("the description lacks %q:\n%s", want, got)
		}
	}
}

// TestFunnelBeyond wants heads at the edge and a note for what lies beyond the axes.
func TestFunnelBeyond(t *testing.T) {
	page := mustFunnel(t, difficultFunnels()["far"], Style{})
	heads := polygonsOf(group(t, page, "trials").Items, Estimate)
	discs := discsOf(group(t, page, "trials").Items, Estimate)
	if len(heads) != 3 || len(discs) != 6 {
		t.Errorf("%d heads and %d discs, want 3 and 6", len(heads), len(discs))
	}
	if notes := strings.Join(textsOf(group(t, page, "notes").Items), " "); !strings.Contains(notes, "3 trials beyond the axes") {
		t.Errorf("the notes do not count them: %s", notes)
	}
}

// TestRadialMarks holds each disc to (1/s, y/s) by the ends of the axes, and the ray's
// number at the right to its effect.
func TestRadialMarks(t *testing.T) {
	in := nineFunnel()
	doc, err := Radial(radialOf(in), Style{})
	if err != nil {
		t.Fatal(err)
	}
	page := doc.Pages[0]
	discs := discsOf(group(t, page, "trials").Items, Estimate)
	place := func(i int) Point { return Point{1 / in.Rows[i].SE, in.Rows[i].Estimate / in.Rows[i].SE} }
	for i := range discs { // any two discs set the scale that all others must follow
		a, b, c := place(0), place(2), place(i)
		x := discs[0].X + (c.X-a.X)/(b.X-a.X)*(discs[2].X-discs[0].X)
		y := discs[0].Y + (c.Y-a.Y)/(b.Y-a.Y)*(discs[2].Y-discs[0].Y)
		if math.Abs(x-discs[i].X) > 1e-6 || math.Abs(y-discs[i].Y) > 1e-6 {
			t.Errorf("disc %d at (%.2f, %.2f), want (%.2f, %.2f)", i, discs[i].X, discs[i].Y, x, y)
		}
	}
	ray := linesOf(group(t, page, "pooled").Items, Estimate)[0]
	slope := (ray.Y2 - ray.Y1) / (ray.X2 - ray.X1)
	units := (discs[2].Y - discs[0].Y) / (place(2).Y - place(0).Y) / ((discs[2].X - discs[0].X) / (place(2).X - place(0).X))
	if got := slope / units; math.Abs(got-*in.Pooled) > 1e-9 {
		t.Errorf("the ray has slope %v, want the pooled log ratio %v", got, *in.Pooled)
	}
	var seven float64
	for _, it := range group(t, page, "axes").Items {
		if text, ok := it.(Text); ok && text.Spans[0].Text == "0.7" {
			seven = text.Y - baseline(text.Size)
		}
	}
	axis := discs[0].Y - place(0).Y*(discs[2].Y-discs[0].Y)/(place(2).Y-place(0).Y) // height of 0
	right := ray.X2
	origin := discs[0].X - place(0).X*(discs[2].X-discs[0].X)/(place(2).X-place(0).X)
	if got := (seven - axis) / (right - origin) / units; math.Abs(got-math.Log(0.7)) > 1e-6 {
		t.Errorf("the number 0.7 stands at the ray of %v, want ln 0.7", got)
	}
}

// TestContributionMarks holds discs to their values, and names those far out.
func TestContributionMarks(t *testing.T) {
	in := contributionOf(nineFunnel())
	doc, err := Contribution(in, Style{})
	if err != nil {
		t.Fatal(err)
	}
	page := doc.Pages[0]
	discs := discsOf(group(t, page, "trials").Items, Estimate)
	for i := range discs {
		x := discs[0].X + (in.Rows[i].QShare-in.Rows[0].QShare)/(in.Rows[4].QShare-in.Rows[0].QShare)*(discs[4].X-discs[0].X)
		y := discs[0].Y + (in.Rows[i].Pull-in.Rows[0].Pull)/(in.Rows[4].Pull-in.Rows[0].Pull)*(discs[4].Y-discs[0].Y)
		if math.Abs(x-discs[i].X) > 1e-6 || math.Abs(y-discs[i].Y) > 1e-6 {
			t.Errorf("disc %d at (%.2f, %.2f), want (%.2f, %.2f)", i, discs[i].X, discs[i].Y, x, y)
		}
	}
	if names := textsOf(group(t, page, "trials").Items); !slices.Contains(names, "Marchetti-Ruiz 2015") {
		t.Errorf("the farthest trial is not named: %q", names)
	}
}

func TestSmallStudyChartsRefuse(t *testing.T) {
	for _, bad := range []float64{math.NaN(), math.Inf(1), math.Inf(-1), 1e308, -1e308} {
		for field, set := range map[string]func(*FunnelInput){
			"estimate": func(in *FunnelInput) { in.Rows[1].Estimate = bad },
			"se":       func(in *FunnelInput) { in.Rows[1].SE = bad },
			"pooled":   func(in *FunnelInput) { *in.Pooled = bad },
			"null":     func(in *FunnelInput) { in.Scale.Null = bad },
		} {
			in := nineFunnel()
			set(&in)
			if _, err := Funnel(in, Style{}); err == nil {
				t.Errorf("funnel: %s of %v was drawn", field, bad)
			}
			if _, err := Radial(radialOf(in), Style{}); err == nil {
				t.Errorf("radial: %s of %v was drawn", field, bad)
			}
		}
		c := contributionOf(nineFunnel())
		c.Rows[2].Pull = bad
		if _, err := Contribution(c, Style{}); err == nil {
			t.Errorf("contribution: a pull of %v was drawn", bad)
		}
	}
	in := nineFunnel()
	in.Rows[3].SE = 0
	if _, err := Funnel(in, Style{}); err == nil || !strings.Contains(err.Error(), "row 4 (Brandão): the standard error is 0") {
		t.Errorf("a standard error of 0 gave %v, want an error that names row 4", err)
	}
	if _, err := Funnel(FunnelInput{}, Style{}); err == nil {
		t.Error("a chart without studies was drawn")
	}
	for kind, lay := range map[string]func(Style) (Document, error){
		"funnel":       func(s Style) (Document, error) { return Funnel(nineFunnel(), s) },
		"radial":       func(s Style) (Document, error) { return Radial(radialOf(nineFunnel()), s) },
		"contribution": func(s Style) (Document, error) { return Contribution(contributionOf(nineFunnel()), s) },
	} {
		var narrow *TooNarrowError
		if _, err := lay(Style{Width: 90}); !errors.As(err, &narrow) {
			t.Fatalf("%s: a width of 90 pt gave %v, want a *TooNarrowError", kind, err)
		}
		if _, err := lay(Style{Width: narrow.Least}); err != nil {
			t.Errorf("%s: the width said to be enough, %.1f pt, gave %v", kind, narrow.Least, err)
		}
	}
}

func TestSmallStudyChartsHostileNames(t *testing.T) {
	in := nineFunnel()
	in.Rows[2].Name = "<script>alert(1)</script>\x00\x1b\u202e & \"q\" ]]> <!--"
	in.Title, in.Sides.Lower, in.Scale.Measure = "</title><script>", "<b>&", "<i>\x07 risk"
	in.Notes[0].Text = "<style>*{display:none}</style>"
	for _, style := range []Style{{ID: `x" onload="y`}, {Width: NarrowWidth}} {
		checkHostile(t, mustFunnel(t, in, style))
		radial, err := Radial(radialOf(in), style)
		if err != nil {
			t.Fatal(err)
		}
		checkHostile(t, radial.Pages[0])
		contribution, err := Contribution(contributionOf(in), style)
		if err != nil {
			t.Fatal(err)
		}
		checkHostile(t, contribution.Pages[0])
	}
}

// TestNamesOffPooledLines wants no name laid over the pooled line of a funnel chart, or
// over the pooled ray of a radial chart and those beside it.
func TestNamesOffPooledLines(t *testing.T) {
	for _, k := range []int{9, 14, 40} {
		in := manyFunnel(k)
		radial, err := Radial(radialOf(in), Style{})
		if err != nil {
			t.Fatal(err)
		}
		for kind, page := range map[string]Drawing{"funnel": mustFunnel(t, in, Style{}), "radial": radial.Pages[0]} {
			names := 0
			for _, it := range group(t, page, noun(in.Study, 2)).Items {
				name, ok := it.(Text)
				if !ok {
					continue
				}
				names++
				for _, l := range linesOf(group(t, page, "pooled").Items, Estimate) {
					for i := 0.0; i <= 1000; i++ {
						if at := (Point{l.X1 + i/1000*(l.X2-l.X1), l.Y1 + i/1000*(l.Y2-l.Y1)}); areaOf(name).holds(at) {
							t.Errorf("%s of %d: %q lies over a pooled line", kind, k, name.Spans[0].Text)
							break
						}
					}
				}
			}
			if names == 0 {
				t.Errorf("%s of %d: no study is named", kind, k)
			}
		}
	}
}

func TestSmallStudyChartsGolden(t *testing.T) {
	checkGolden(t, "funnel-nine", mustFunnel(t, nineFunnel(), Style{Width: NarrowWidth}), Light)
	checkGolden(t, "funnel-many", mustFunnel(t, manyFunnel(200), Style{ID: "many", Contours: PContours}), Mono)
	radial, err := Radial(radialOf(nineFunnel()), Style{})
	if err != nil {
		t.Fatal(err)
	}
	checkGolden(t, "radial-nine", radial.Pages[0], Light)
	contribution, err := Contribution(contributionOf(nineFunnel()), Style{Width: NarrowWidth})
	if err != nil {
		t.Fatal(err)
	}
	checkGolden(t, "contribution-nine", contribution.Pages[0], Dark)
}

func BenchmarkFunnel(b *testing.B) {
	for _, k := range []int{13, 200} {
		b.Run(fmt.Sprintf("studies=%d", k), func(b *testing.B) {
			in := manyFunnel(k)
			b.ReportAllocs()
			for b.Loop() {
				if _, err := Funnel(in, Style{}); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
