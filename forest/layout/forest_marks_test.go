package layout

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"
)

// TestForestNinePlaces compares places with those of the design drawing
// (design/mock/forest.svg), which was computed apart from this code.
func TestForestNinePlaces(t *testing.T) {
	doc := mustForest(t, nineTrials(), ForestStyle{})
	if len(doc.Pages) != 1 || len(doc.Missing) != 0 {
		t.Fatalf("%d pages, missing %q; want one page with all glyphs", len(doc.Pages), doc.Missing)
	}
	page := doc.Pages[0]
	near := func(what string, got, want float64) {
		t.Helper()
		if !(math.Abs(got-want) <= 0.011) {
			t.Errorf("%s at %.3f, the design has %.2f", what, got, want)
		}
	}
	near("width", page.Width, 510.24)
	near("height", page.Height, 284.74)
	whiskers := linesOf(group(t, page, "row-1").Items, Estimate)
	near("Halvorsen's lower limit", whiskers[0].X1, 180.56)
	near("Halvorsen's upper limit", whiskers[0].X2, 230.75)
	near("Halvorsen's row", whiskers[0].Y1, 66.5)
	bar := rectsOf(group(t, page, "row-6").Items, Solid(Evidence))[0]
	near("Lindqvist's bar", bar.X, 388.47)
	near("its length", bar.Width, 78.42)
	square := rectsOf(group(t, page, "row-9").Items, Solid(Estimate))[0]
	near("Obradović's square", square.X, 208.84)
	near("its side", square.Width, 9)
	near("Halvorsen's side", rectsOf(group(t, page, "row-1").Items, Solid(Estimate))[0].Width, 5.5)
	near("start of Okwuosa's clipped whisker", linesOf(group(t, page, "row-3").Items, Estimate)[0].X1, 164.33)
	head := polygonsOf(group(t, page, "row-3").Items, Estimate)[0]
	near("tip of Okwuosa's clipped whisker", head.Points[0].X, 162.33)
	axes := group(t, page, "axes")
	near("the axes", linesOf(axes.Items, Ordinary)[1].Y1, 230)
}

// TestForestIntervalEnds holds whiskers to the axis: ticks of known value give
// the scale, and each interval end stands where that scale puts it, or ends in
// an arrow at the end of the axis.
func TestForestIntervalEnds(t *testing.T) {
	for _, linear := range []bool{false, true} {
		in := nineTrials()
		if linear {
			in.Scale = EffectScale{Measure: "difference", Decimals: 1}
		}
		page := mustForest(t, in, ForestStyle{}).Pages[0]
		place := axisOf(t, page, linear)
		for i, r := range in.Rows {
			items := group(t, page, fmt.Sprintf("row-%d", i+1)).Items
			whisker := linesOf(items, Estimate)[0]
			clipped := len(polygonsOf(items, Estimate))
			if !(math.Abs(whisker.X2-place(r.High)) < 0.02) {
				t.Errorf("linear %v, row %d: upper limit at %.2f, the axis has it at %.2f", linear, i+1, whisker.X2, place(r.High))
			}
			if clipped == 0 && !(math.Abs(whisker.X1-place(r.Low)) < 0.02) {
				t.Errorf("linear %v, row %d: lower limit at %.2f, the axis has it at %.2f", linear, i+1, whisker.X1, place(r.Low))
			}
			if wantClipped := i == 2; (clipped == 1) != wantClipped {
				t.Errorf("linear %v, row %d: %d arrow heads", linear, i+1, clipped)
			}
		}
	}
}

// axisOf reads the effect axis from its printed labels.
func axisOf(t *testing.T, page Drawing, linear bool) func(float64) float64 {
	t.Helper()
	var xs, values []float64
	for _, it := range group(t, page, "axes").Items {
		text, ok := it.(Text)
		if !ok || text.Spans[0].X > 300 {
			continue
		}
		var v float64
		if _, err := fmt.Sscan(strings.Replace(text.Spans[0].Text, "−", "-", 1), &v); err != nil {
			continue
		}
		if !linear {
			v = math.Log(v)
		}
		xs, values = append(xs, text.Spans[0].X), append(values, v)
	}
	if len(xs) < 3 {
		t.Fatalf("only %d labels on the effect axis", len(xs))
	}
	last := len(xs) - 1
	return func(v float64) float64 {
		return xs[0] + (v-values[0])/(values[last]-values[0])*(xs[last]-xs[0])
	}
}

// TestForestBars checks side, fill and clipping of the bars on the rail.
func TestForestBars(t *testing.T) {
	in := nineTrials()
	in.Rows[0].LnEvidence = -0.8 // grey, to the left
	in.Rows[1].LnEvidence, in.Rows[1].Unwanted = 2, true
	in.Rows[2].LnEvidence = 20 * lnStep // past the end
	page := mustForest(t, in, ForestStyle{}).Pages[0]
	zero := linesOf(group(t, page, "axes").Items, Ordinary)[0].X1
	grey := rectsOf(group(t, page, "row-1").Items, Solid(EvidenceNone))
	if len(grey) != 1 || !(math.Abs(grey[0].X+grey[0].Width-zero) < 1e-9) {
		t.Errorf("bar for none is %+v, must end at %v", grey, zero)
	}
	hollow := rectsOf(group(t, page, "row-2").Items, Hollow(Evidence, 0.9))
	if len(hollow) != 1 || !(math.Abs(hollow[0].X-0.45-zero) < 1e-9) {
		t.Errorf("bar of the unwanted direction is %+v, must start at %v", hollow, zero)
	}
	heads := polygonsOf(group(t, page, "row-3").Items, Evidence)
	if len(heads) != 1 {
		t.Fatalf("bar of 20 steps has %d heads", len(heads))
	}
	step := rectsOf(group(t, page, "row-6").Items, Solid(Evidence))[0].Width / (in.Rows[5].LnEvidence / lnStep)
	if tip := heads[0].Points[0].X; !(math.Abs(tip-zero-6*step) < 0.02) {
		t.Errorf("the head ends at %v, want 6 steps of %v from %v", tip, step, zero)
	}
	if notes := strings.Join(textsOf(group(t, page, "notes").Items), " "); !strings.Contains(notes, "hollow") {
		t.Error("a hollow bar, and no word about it in the notes")
	}
}

// TestForestPooledClipped holds the pooled marks to the axis: both ends of a
// diamond and of a prediction interval past it stop in heads whose tips stand at
// the ends of the axis, while the numbers stay whole.
func TestForestPooledClipped(t *testing.T) {
	in := nineTrials()
	in.Pooled.Low, in.Pooled.High = -9, 8
	in.Prediction = &ForestPrediction{Low: -20, High: 20}
	page := mustForest(t, in, ForestStyle{}).Pages[0]
	axis := effectAxis(t, page)
	pooled := group(t, page, "pooled").Items
	marks := polygonsOf(pooled, Estimate)
	heads := append(marks[1:], polygonsOf(pooled, Prediction)...)
	if len(marks) != 3 || len(heads) != 4 {
		t.Fatalf("%d marks of the pooled effect and %d heads, want a diamond with two heads and two of the prediction", len(marks), len(heads))
	}
	for i, head := range heads {
		want := axis.X1
		if i%2 == 1 {
			want = axis.X2
		}
		if tip := head.Points[0].X; !(math.Abs(tip-want) < 1e-9) {
			t.Errorf("head %d ends at %.2f, the axis at %.2f", i, tip, want)
		}
	}
	for _, p := range marks[0].Points {
		if p.X < axis.X1 || p.X > axis.X2 {
			t.Errorf("corner of the diamond at %.2f, the axis runs from %.2f to %.2f", p.X, axis.X1, axis.X2)
		}
	}
	if texts := strings.Join(textsOf(pooled), " "); !strings.Contains(texts, "2,981)") { // e⁸ = 2980.96
		t.Errorf("the limit is not whole in %q", texts)
	}
}

// TestForestNoPrediction gives the reason in place of the interval.
func TestForestNoPrediction(t *testing.T) {
	in := manyTrials(2)
	in.Prediction = &ForestPrediction{Reason: "needs 3 trials"}
	for _, tt := range []struct {
		width float64
		want  string
	}{{WideWidth, "Prediction interval: needs 3 trials"}, {NarrowWidth, "needs 3 trials"}} {
		page := mustForest(t, in, ForestStyle{Width: tt.width}).Pages[0]
		pooled := group(t, page, "pooled").Items
		if texts := textsOf(pooled); !slices.Contains(texts, tt.want) {
			t.Errorf("no %q in %q", tt.want, texts)
		}
		if bars := rectsOf(pooled, Solid(Prediction)); len(bars) != 0 {
			t.Errorf("a bar for no interval: %+v", bars)
		}
		if strings.Contains(strings.Join(textsOf(page.Items), " "), "pale bar") {
			t.Error("the key explains a bar that is not there")
		}
	}
}
