package layout

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"
)

func mustSubsets(t testing.TB, in SubsetsInput, style Style) Document {
	t.Helper()
	doc, err := Subsets(in, style)
	if err != nil {
		t.Fatal(err)
	}
	return doc
}

func TestSubsetsNothingOverlaps(t *testing.T) {
	styles := []Style{{}, {Width: NarrowWidth}, {Width: 400, NoTitle: true}, {Width: NarrowWidth, TypeSize: 8.3}, {TypeSize: 9}}
	check := func(name string, in SubsetsInput) {
		for _, style := range styles {
			page := mustSubsets(t, in, style).Pages[0]
			checkPage(t, fmt.Sprintf("%s, style %+v", name, style), page)
			if page.Height > maxPageHeight {
				t.Errorf("%s: page of %.0f pt, at most %.0f (230 mm)", name, page.Height, maxPageHeight)
			}
		}
	}
	for _, k := range []int{2, 3, 5, 7, 8, 13, 40} {
		check(fmt.Sprintf("%d trials", k), manySubsets(t, k, -0.19))
		check(fmt.Sprintf("%d trials, higher", k), manySubsets(t, k, 0.5))
	}
	for name, in := range difficultSubsets(t) {
		check(name, in)
	}
}

// panel returns the axes of a chart of subsets: places of estimates by the
// labels under the panel, and of steps by the labels at its left.
func panel(t *testing.T, d Drawing) (x, y func(float64) float64) {
	t.Helper()
	at := map[string]Point{}
	each(d.Items, func(it Item) {
		if text, ok := it.(Text); ok {
			run := text.Runs()[0]
			at[run.Text] = Point{run.Left + run.Width/2, text.Y}
		}
	})
	left, right := at["0.6"].X, at["0.9"].X
	one, two := at["1 : 1"].Y-uprightText*6.67, at["14 : 1"].Y-uprightText*6.67
	x = func(ratio float64) float64 {
		return left + (math.Log(ratio)-math.Log(0.6))/(math.Log(0.9)-math.Log(0.6))*(right-left)
	}
	return x, func(steps float64) float64 { return one + steps/2*(two-one) }
}

// TestSubsetsPlaces holds the marked result and the lines to the axes' labels.
// The result of all nine trials with the DerSimonian–Laird estimator, by SciPy:
// risk ratio 0.71041, 2.61746 steps.
func TestSubsetsPlaces(t *testing.T) {
	in := nineSubsets(t)
	page := mustSubsets(t, in, Style{}).Pages[0]
	x, y := panel(t, page)
	disc := group(t, page, "full").Items[0].(Disc)
	if math.Abs(disc.X-x(0.71041)) > 0.02 || math.Abs(disc.Y-y(2.61746)) > 0.02 {
		t.Errorf("the full result stands at (%.2f, %.2f), want (%.2f, %.2f)", disc.X, disc.Y, x(0.71041), y(2.61746))
	}
	lines := linesOf(group(t, page, "lines").Items, Ordinary)
	if len(lines) != 2 || math.Abs(lines[0].X1-x(260.0/300)) > 0.05 || math.Abs(lines[1].X1-x(1)) > 0.05 {
		t.Fatalf("lines at %+v, want the important difference at %.2f and no effect at %.2f", lines, x(260.0/300), x(1))
	}
	if lines[0].Dash == nil || lines[1].Dash != nil {
		t.Error("the important difference is dashed, no effect is not")
	}
}

// TestSubsetsShares prints what brute force over all 511 subsets in Python with
// SciPy found: 0.8200, 0.3875, 0.0959, 0.0157 and 0 reach 0 to 4 steps; 0.9980 lie
// below 1 and 0.9863 below 260/300.
func TestSubsetsShares(t *testing.T) {
	for _, width := range []float64{WideWidth, NarrowWidth} {
		page := mustSubsets(t, nineSubsets(t), Style{Width: width}).Pages[0]
		got := textsOf(group(t, page, "shares").Items)
		want := []string{"82%", "for an effect", "39%", "reach fair", "10%", "reach firm", "2%", "reach heavy", "0%", "reach massive", "18%", "for none",
			"> 99%", "below 1", "99%", "below 0.87"}
		if !slices.Equal(got, want) {
			t.Errorf("width %.0f: shares %q, want %q", width, got, want)
		}
	}
	page := mustSubsets(t, nineSubsets(t), Style{}).Pages[0]
	_, y := panel(t, page)
	each(group(t, page, "shares").Items, func(it Item) {
		if text := it.(Text); text.Spans[1].Text == "reach firm" && math.Abs(text.Y-uprightText*text.Size-y(2)) > 0.05 {
			t.Errorf("the share that reaches firm stands at %.2f, want its line at %.2f", text.Y-uprightText*text.Size, y(2))
		}
	})
}

// TestSubsetsOutlines counts the subsets inside both outlines by the even-odd
// rule: 95%, less what one row of cells more or fewer makes.
func TestSubsetsOutlines(t *testing.T) {
	for name, in := range map[string]SubsetsInput{"nine": nineSubsets(t), "thirteen": manySubsets(t, 13, -0.19)} {
		settled, err := Style{}.settled("subsets", "subsets chart")
		if err != nil {
			t.Fatal(err)
		}
		c := &subsets{in: in.cleaned(), style: settled, metrics: subsetsMetrics(settled)}
		if err := c.arrange(); err != nil {
			t.Fatal(err)
		}
		without := make([]int, len(in.Grid.Counts))
		for i, n := range in.Grid.Counts {
			without[i] = n - in.Chosen.With[i]
		}
		for what, outline := range map[string]struct {
			counts []int
			loops  [][]Point
		}{"with": {in.Chosen.With, c.density.with}, "without": {without, c.density.without}} {
			held, total := 0, 0
			g := in.Grid
			for i, n := range outline.counts {
				estimate := g.Estimate.Low + (float64(i/g.Steps.Cells)+0.5)/float64(g.Estimate.Cells)*(g.Estimate.High-g.Estimate.Low)
				steps := g.Steps.Low + (float64(i%g.Steps.Cells)+0.5)/float64(g.Steps.Cells)*(g.Steps.High-g.Steps.Low)
				total += n
				if insideOf(outline.loops, Point{c.axis.x(estimate), c.ladder.y(steps)}) {
					held += n
				}
			}
			if share := float64(held) / float64(total); math.Abs(share-0.95) > 0.02 {
				t.Errorf("%s: the outline %s the chosen trial holds %.3f of its subsets, want 0.95", name, what, share)
			}
		}
	}
}

// insideOf applies the even-odd rule.
func insideOf(loops [][]Point, p Point) bool {
	inside := false
	for _, loop := range loops {
		for i, a := range loop {
			b := loop[(i+1)%len(loop)]
			if (a.Y > p.Y) != (b.Y > p.Y) && p.X < a.X+(p.Y-a.Y)/(b.Y-a.Y)*(b.X-a.X) {
				inside = !inside
			}
		}
	}
	return inside
}

// TestSubsetsGreys: each grey lies on a lighter one, and the image stays small.
func TestSubsetsGreys(t *testing.T) {
	page := mustSubsets(t, nineSubsets(t), Style{}).Pages[0]
	order := map[Ink]int{}
	for i, ink := range greyInks {
		order[ink] = i
	}
	last, areas := 0, make([]float64, len(greyInks))
	for _, it := range group(t, page, "density").Items {
		r := it.(Rect)
		now, ok := order[r.Paint.Fill]
		if !ok || now < last || r.Paint.OutlineWidth != 0 {
			t.Fatalf("a cell is painted %+v after grey %d", r.Paint, last)
		}
		last = now
		areas[now] += r.Width * r.Height
	}
	for i := 1; i < len(areas); i++ {
		if !(0 < areas[i] && areas[i] < areas[i-1]) {
			t.Errorf("grey %d covers %.0f, the lighter one %.0f", i, areas[i], areas[i-1])
		}
	}
	if size := len(written(t, page, Light)); size > 100_000 {
		t.Errorf("the image has %d bytes, at most 100,000", size)
	}
}

// TestSubsetsFew draws up to 127 subsets as discs: of three trials 7, 4 of them
// with the chosen one.
func TestSubsetsFew(t *testing.T) {
	in := manySubsets(t, 3, -0.19)
	page := mustSubsets(t, in, Style{}).Pages[0]
	solid, open := 0, 0
	for _, it := range group(t, page, "density").Items {
		switch it.(Disc).Paint {
		case Solid(Soft):
			solid++
		case Hollow(Soft, 0.7):
			open++
		}
	}
	if solid != 4 || open != 3 {
		t.Errorf("%d solid and %d open discs, want 4 and 3", solid, open)
	}
	if n := len(group(t, page, "outlines").Items); n != 0 {
		t.Errorf("%d pieces of outlines around few subsets", n)
	}
}

func TestSubsetsLadder(t *testing.T) {
	difficult := difficultSubsets(t)
	labels := func(name string) []string {
		return textsOf(group(t, mustSubsets(t, difficult[name], Style{}).Pages[0], "ladder").Items)
	}
	for _, want := range []string{"1 : 1", "3.7 : 1", "14 : 1", "52 : 1", "194 : 1", "none", "faint", "fair", "firm", "heavy"} { // (2 + √3)ⁿ
		if !slices.Contains(labels("linear"), want) {
			t.Errorf("the ladder lacks %q: %q", want, labels("linear"))
		}
	}
	if got := labels("none"); !slices.Contains(got, "−4,000 steps") || slices.Contains(got, "faint") {
		t.Errorf("a ladder of thousands of steps reads %q", got)
	}
	far := mustSubsets(t, difficult["far"], Style{}).Pages[0]
	if notes := strings.Join(textsOf(group(t, far, "notes").Items), " "); !strings.Contains(notes, "No effect, 1, lies beyond the axis.") {
		t.Errorf("no effect is off the axis, and the notes do not say so: %s", notes)
	}
}

func TestSubsetsDescription(t *testing.T) {
	got := mustSubsets(t, nineSubsets(t), Style{}).Pages[0].Description
	for _, want := range []string{
		"All 9 trials: pooled risk ratio 0.71; evidence, effect against none, 31 : 1, firm, 2.6 steps.",
		"every one of the 511 that 9 trials have",
		"Of these 82% favour an effect, 39% reach fair, 10% reach firm, 2% reach heavy, 0% reach massive; 18% favour none.",
		"> 99% below 1, < 1% above; 99% below 0.87 and 0% above 1.13, beyond the important difference.",
		"256 of the subsets hold Marchetti-Ruiz 2015.", // 2⁸
	} {
		if !strings.Contains(got, want) {
			t.Errorf("the description lacks %q:\n%s", want, got)
		}
	}
	sample := manySubsets(t, 40, -0.19)
	sample.Drawn.Seed, sample.Drawn.Failed = 7, 12
	if got := mustSubsets(t, sample, Style{}).Pages[0].Description; !strings.Contains(got, "a random sample of 65,536 of those that 40 trials have (seed 7), each pooled by the same model. A further 12 could not be pooled.") {
		t.Errorf("the description does not tell of the sample:\n%s", got)
	}
}

func TestSubsetsRefuses(t *testing.T) {
	nine := nineSubsets(t)
	for _, bad := range []float64{math.NaN(), math.Inf(1), math.Inf(-1), 1e308, -1e308} {
		for field, set := range map[string]func(*SubsetsInput){
			"full":      func(in *SubsetsInput) { in.Full.Estimate = bad },
			"evidence":  func(in *SubsetsInput) { in.Full.LnEvidence = bad },
			"estimates": func(in *SubsetsInput) { in.Grid.Estimate.Low = bad },
			"steps":     func(in *SubsetsInput) { in.Grid.Steps.High = bad },
			"null":      func(in *SubsetsInput) { in.Scale.Null = bad },
			"share":     func(in *SubsetsInput) { in.Shares.Reach[2] = bad },
			"zone":      func(in *SubsetsInput) { in.Important = &EffectZone{bad, 0} },
			"sides":     func(in *SubsetsInput) { in.Shares.BelowNull = bad },
		} {
			in := nine
			set(&in)
			if _, err := Subsets(in, Style{}); err == nil {
				t.Errorf("%s of %v was drawn", field, bad)
			}
		}
	}
	for what, set := range map[string]func(*SubsetsInput){
		"a grid without subsets": func(in *SubsetsInput) { in.Grid.Counts = make([]int, len(in.Grid.Counts)); in.Chosen = nil },
		"too few counts":         func(in *SubsetsInput) { in.Grid.Counts, in.Chosen = in.Grid.Counts[1:], nil },
		"more with than there are": func(in *SubsetsInput) {
			in.Chosen = &SubsetsChosen{With: slices.Repeat([]int{1 << 20}, len(in.Grid.Counts))}
		},
		"a grid with too many cells": func(in *SubsetsInput) { in.Grid.Steps.Cells = 1 << 40 },
		"no studies":                 func(in *SubsetsInput) { in.Full.K = 0 },
	} {
		in := nine
		set(&in)
		if _, err := Subsets(in, Style{}); err == nil {
			t.Errorf("%s was drawn", what)
		}
	}
	var narrow *TooNarrowError
	if _, err := Subsets(nine, Style{Width: 150}); !errors.As(err, &narrow) {
		t.Fatalf("a width of 150 pt gave %v, want a *TooNarrowError", err)
	}
	if _, err := Subsets(nine, Style{Width: narrow.Least}); err != nil {
		t.Errorf("the width said to be enough, %.1f pt, gave %v", narrow.Least, err)
	}
}

func TestSubsetsHostileNames(t *testing.T) {
	in := nineSubsets(t)
	in.Chosen.Name = "<script>\x00\x1b\u202e & \"q\" ]]> <!--"
	in.Title, in.Sides.Lower, in.Scale.Measure = "</title><script>", "<b>&", "<i>\u2067"
	in.Notes[0].Text = "<style>*{display:none}</style>"
	for _, style := range []Style{{ID: `x" onload="y`}, {Width: NarrowWidth}} {
		checkHostile(t, mustSubsets(t, in, style).Pages[0])
	}
}

func TestSubsetsGolden(t *testing.T) {
	checkGolden(t, "subsets-nine", mustSubsets(t, nineSubsets(t), Style{}).Pages[0], Light)
	checkGolden(t, "subsets-narrow", mustSubsets(t, nineSubsets(t), Style{Width: NarrowWidth, ID: "narrow"}).Pages[0], Mono)
	checkGolden(t, "subsets-five", mustSubsets(t, manySubsets(t, 5, -0.19), Style{ID: "five"}).Pages[0], Dark)
}

func BenchmarkSubsets(b *testing.B) {
	for _, k := range []int{9, 16} {
		b.Run(fmt.Sprintf("studies=%d", k), func(b *testing.B) {
			in := manySubsets(b, k, -0.19)
			b.ReportAllocs()
			for b.Loop() {
				if _, err := Subsets(in, Style{}); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
