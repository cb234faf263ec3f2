package layout

import (
	"fmt"
	"math"
	"strings"
	"testing"
)

// nextSample is an invented chart of the next study; its chances are no results.
func nextSample() NextTrialInput {
	in := NextTrialInput{
		Title: "What the next trial could change", Subtitle: "Brindle against none, flare within 24 weeks · risk ratio, random effects",
		Unit: "people in each arm", Planned: 200, Wanted: 0.8, Smallest: 1000,
		Notes: []Note{{"Now", "29 : 1. Invented data."}},
	}
	curves := []struct {
		label string
		most  float64
	}{{"3.7 : 1", 0.99}, {"14 : 1", 0.97}, {"52 : 1", 0.85}, {"194 : 1", 0.5}, {"1 : 1.9", 0}, {"95% interval", 0.98}}
	for i := range 16 {
		in.Sizes = append(in.Sizes, math.Round(25*math.Pow(1.5, float64(i))))
	}
	for i, c := range curves {
		curve := ChanceCurve{Label: c.label, Planned: c.most * 0.8, Wanted: i == 2, Interval: i == 5}
		for _, size := range in.Sizes {
			curve.Chances = append(curve.Chances, c.most*size/(size+50))
		}
		in.Curves = append(in.Curves, curve)
	}
	return in
}

func mustNextTrial(t *testing.T, in NextTrialInput, style Style) Drawing {
	t.Helper()
	document, err := NextTrial(in, style)
	if err != nil {
		t.Fatal(err)
	}
	return document.Pages[0]
}

// TestGoldenNextTrial holds both widths to files that were looked at.
func TestGoldenNextTrial(t *testing.T) {
	checkGolden(t, "next-trial", mustNextTrial(t, nextSample(), Style{}), Light)
	checkGolden(t, "next-trial-narrow", mustNextTrial(t, nextSample(), Style{Width: NarrowWidth}), Mono)
}

// TestNextTrialPlaces: sizes stand on a logarithmic axis and chances on a linear one,
// so that equal factors and equal differences are equally far apart; discs stand where
// both lines of what is planned and wanted cross.
func TestNextTrialPlaces(t *testing.T) {
	in := nextSample()
	in.Sizes = []float64{10, 100, 1000, 10000}
	for i := range in.Curves {
		in.Curves[i].Chances = []float64{0, 0.25, 0.5, 1}
		in.Curves[i].Planned = 0.25
	}
	in.Planned, in.Smallest = 100, 1000
	page := mustNextTrial(t, in, Style{})
	wanted := group(t, page, "curve-3").Items
	lines := linesOf(wanted, Probability)
	if len(lines) != 3 || lines[0].Width != nextWantedLine {
		t.Fatalf("the wanted curve has lines %+v", lines)
	}
	step := lines[0].X2 - lines[0].X1
	for i, l := range lines {
		rise := []float64{0.25, 0.25, 0.5}[i] * nextHeight
		if math.Abs(l.X2-l.X1-step) > 1e-9 || math.Abs(l.Y1-l.Y2-rise) > 1e-9 {
			t.Errorf("piece %d runs %v by %v; want %v by %v", i, l.X2-l.X1, l.Y1-l.Y2, step, rise)
		}
	}
	planned := linesOf(group(t, page, "planned").Items, Ordinary)[0]
	level := linesOf(group(t, page, "wanted").Items, Ordinary)[0]
	discs := discsOf(wanted, Probability)
	var open []Disc // of all curves: none but the wanted one has any
	page.Each(func(it Item) {
		if d, ok := it.(Disc); ok && d.Paint.Fill == Paper {
			open = append(open, d)
		}
	})
	if len(discs) == 0 || math.Abs(discs[0].X-planned.X1) > 1e-9 || discs[0].Y != lines[0].Y2 {
		t.Errorf("planned at %v, disc %+v", planned.X1, discs)
	}
	if len(open) != 1 || math.Abs(open[0].X-lines[1].X2) > 1e-9 || open[0].Y != level.Y1 || math.Abs(lines[0].Y1-level.Y1-0.8*nextHeight) > 1e-9 {
		t.Errorf("the smallest size is at %+v, the level at %v", open, level.Y1)
	}
	in.Planned, in.Smallest = 5, 0
	page = mustNextTrial(t, in, Style{})
	text := strings.Join(textsOf(group(t, page, "notes").Items), " ")
	if len(group(t, page, "planned").Items) > 0 || !strings.Contains(text, "beyond the axis") || strings.Contains(text, "Open disc") {
		t.Errorf("a size beyond the axis is drawn, or not told: %s", text)
	}
}

// TestNextTrialNothingOverlaps: texts keep apart in every style, with curves that end
// together and a planned size beyond the axis.
func TestNextTrialNothingOverlaps(t *testing.T) {
	together := nextSample()
	for i := range together.Curves {
		for j := range together.Curves[i].Chances {
			together.Curves[i].Chances[j] = 0
		}
	}
	together.Planned = 1e9
	for name, in := range map[string]NextTrialInput{"sample": nextSample(), "together": together} {
		for _, style := range accrualStyles {
			checkPage(t, fmt.Sprintf("%s, %+v", name, style), mustNextTrial(t, in, style))
		}
	}
}

// TestNextTrialErrors: what cannot be drawn is refused by name.
func TestNextTrialErrors(t *testing.T) {
	for says, change := range map[string]func(*NextTrialInput){
		"two sizes or more":  func(in *NextTrialInput) { in.Sizes = in.Sizes[:1] },
		"ascending sizes":    func(in *NextTrialInput) { in.Sizes[3] = 1 },
		"planned size NaN":   func(in *NextTrialInput) { in.Planned = math.NaN() },
		"chances for":        func(in *NextTrialInput) { in.Curves[0].Chances = nil },
		"a chance of 1.5":    func(in *NextTrialInput) { in.Curves[1].Chances[2] = 1.5 },
		"a chance of NaN":    func(in *NextTrialInput) { in.Curves[1].Planned = math.NaN() },
		"smallest -1; give ": func(in *NextTrialInput) { in.Smallest = -1 },
	} {
		in := nextSample()
		change(&in)
		if _, err := NextTrial(in, Style{}); err == nil || !strings.Contains(err.Error(), says) {
			t.Errorf("want an error that says %q, got %v", says, err)
		}
	}
	if _, err := NextTrial(nextSample(), Style{Width: 120}); err == nil || !strings.Contains(err.Error(), "too narrow") {
		t.Errorf("a width of 120 points: %v", err)
	}
}
