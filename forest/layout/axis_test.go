package layout

import (
	"math"
	"slices"
	"strings"
	"testing"
)

func labelsOf(ticks []tick) []string {
	var all []string
	for _, t := range ticks {
		if t.label != "" {
			all = append(all, t.label)
		}
	}
	return all
}

// TestAxisTicks names the labels of a few axes; those of the first two are the
// design drawings' (design/mock/forest.svg and forest-85mm.svg), the others
// follow from the ladders of the style guide by hand.
func TestAxisTicks(t *testing.T) {
	for _, tt := range []struct {
		name      string
		low, high float64
		ratio     bool
		width     float64
		size      float64
		want      string
	}{
		{"wide", 0.2, 2, true, 96.09, 6.75, "0.2 0.3 0.5 0.7 1 1.5 2"},
		{"narrow", 0.2, 2, true, 78.82, 6.525, "0.2 0.5 1 2"},
		{"decades", 0.001, 1000, true, 100, 6.5, "0.01 1 100"},
		{"every second decade from 1", 1e-6, 1e6, true, 200, 6.5, "0.000001 0.0001 0.01 1 100 10,000 1,000,000"},
		{"near one", 0.99, 1.01, true, 100, 6.5, "0.990 0.995 1.000 1.005 1.010"},
		{"difference", -12, 4, false, 100, 6.5, "−10 −5 0"},
		{"small difference", -0.02, 0.03, false, 100, 6.5, "−0.02 0.00 0.02"},
	} {
		a := axis{low: tt.low, high: tt.high, x1: tt.width, ratio: tt.ratio}
		if tt.ratio {
			a.low, a.high = math.Log(tt.low), math.Log(tt.high)
		}
		a.setTicks(tt.size)
		if got := strings.Join(labelsOf(a.ticks), " "); got != tt.want {
			t.Errorf("%s: labels %s, want %s", tt.name, got, tt.want)
		}
		for i, tick := range a.ticks {
			if i > 0 && tick.x-a.ticks[i-1].x < (Width(tick.label, tt.size, false)+Width(a.ticks[i-1].label, tt.size, false))/2+4 {
				t.Errorf("%s: %s is less than 4 pt from the label before", tt.name, tick.label)
			}
		}
	}
}

// TestAxisAlwaysLabelled tries axes of any size: there are labels, they lie on
// the axis, and no effect (1 or 0) is among them when the axis holds it.
func TestAxisAlwaysLabelled(t *testing.T) {
	for _, ratio := range []bool{true, false} {
		for exponent := -3.0; exponent <= 11; exponent += 0.37 {
			if ratio && exponent > 1.1 {
				break
			}
			reach := math.Pow(10, exponent)
			for _, left := range []float64{0, 0.1, 0.5, 0.9} {
				low, high := outward(-left*reach, (1-left)*reach, ratio)
				a := axis{low: low, high: high, x1: 85, ratio: ratio}
				a.setTicks(6.5)
				if len(a.ticks) == 0 || len(a.ticks) > 40 {
					t.Errorf("ratio %v, reach %.3g: %d labels", ratio, reach, len(a.ticks))
					continue
				}
				none := slices.IndexFunc(a.ticks, func(k tick) bool { return math.Abs(k.x-a.x(0)) < 1e-6 })
				if none < 0 {
					t.Errorf("ratio %v, %.3g to %.3g: no effect is not labelled: %q", ratio, low, high, labelsOf(a.ticks))
				}
				for _, k := range a.ticks {
					if k.x < -1e-6 || k.x > 85+1e-6 {
						t.Errorf("label %s lies outside the axis", k.label)
					}
				}
			}
		}
	}
}

func TestOutward(t *testing.T) {
	for _, tt := range []struct {
		low, high, wantLow, wantHigh float64
		ratio                        bool
	}{
		{0.32, 1.61, 0.3, 2, true},       // 2% of the log span is 1.033-fold: 0.310 and 1.66
		{0.305, 1.96, 0.2, 3, true},      // 2% of the span is 1.038-fold: 0.294 and 2.03
		{0.8, 1.2, 0.7, 1.3, true},       // fine ladder below 4-fold
		{0.98, 1.01, 0.975, 1.015, true}, // steps of 0.005 near 1
		{-11.3, 3.2, -12, 4, false},      // steps of 2
	} {
		low, high := tt.low, tt.high
		if tt.ratio {
			low, high = math.Log(low), math.Log(high)
		}
		gotLow, gotHigh := outward(low, high, tt.ratio)
		if tt.ratio {
			gotLow, gotHigh = math.Exp(gotLow), math.Exp(gotHigh)
		}
		if !(math.Abs(gotLow-tt.wantLow) < 1e-9 && math.Abs(gotHigh-tt.wantHigh) < 1e-9) {
			t.Errorf("%v to %v rounds to %v to %v, want %v to %v", tt.low, tt.high, gotLow, gotHigh, tt.wantLow, tt.wantHigh)
		}
	}
}

// TestAxisLimits holds the rules of what an axis must show.
func TestAxisLimits(t *testing.T) {
	in := nineTrials()
	holds := func(in ForestInput, v float64) bool {
		low, high := axisLimits(&in)
		return low <= v && v <= high
	}
	for _, v := range []float64{0, in.Pooled.Low, in.Pooled.High, in.Prediction.Low, in.Prediction.High} {
		if !holds(in, v) {
			t.Errorf("the axis does not hold %v", math.Exp(v))
		}
	}
	if holds(in, in.Rows[2].Low) {
		t.Error("the axis holds the whisker of a trial with 1% of the weight")
	}
	wide := nineTrials()
	wide.Pooled.Low, wide.Pooled.High = -9, 9
	if low, high := axisLimits(&wide); high-low > math.Log(400)*1.5 || high-low < math.Log(400) {
		t.Errorf("a pooled interval without end gives an axis of %.0f-fold, want 400-fold, rounded outwards", math.Exp(high-low))
	}
	for _, r := range wide.Rows {
		if !holds(wide, r.Estimate) {
			t.Errorf("the axis does not hold the estimate %v", r.Estimate)
		}
	}
	stray := nineTrials()
	stray.Rows[0].Estimate, stray.Rows[0].High = 5, 6
	if holds(stray, 5) {
		t.Error("an estimate beyond a 50-fold span stretched the axis")
	}
}

// TestRail checks ends, labels and words of the rail against the style guide:
// from −0.8 to at least 4, at most 6 steps, odds (2+√3)ⁿ at the lines.
func TestRail(t *testing.T) {
	for _, tt := range []struct {
		steps     []float64
		low, high float64
	}{
		{[]float64{0.1}, -0.8, 4}, {[]float64{4}, -0.8, 4}, {[]float64{4.2, -0.64}, -0.8, 5}, {[]float64{77}, -0.8, 6}, {[]float64{-1.3}, -1.4, 4}, {[]float64{-99}, -6, 4},
	} {
		var ln []float64
		for _, s := range tt.steps {
			ln = append(ln, s*lnStep)
		}
		if got := railSpan(railStart, ln); !(math.Abs(got.low-tt.low) < 1e-9 && got.high == tt.high) {
			t.Errorf("bars of %v steps: rail from %v to %v, want %v to %v", tt.steps, got.low, got.high, tt.low, tt.high)
		}
	}
	r := rail{steps: span{-0.8, 4}, place: span{0, 100}}
	whole, bound := r.labels(6.75)
	if got := strings.Join(labelsOf(whole), " "); got != "1 3.7 14 52 194" || bound.label != "2.3" {
		t.Errorf("labels %s and %s", got, bound.label)
	}
	r.steps.high = 6
	if whole, _ = r.labels(6.75); strings.Join(labelsOf(whole), " ") != "1 3.7 14 52 194 2,700" {
		t.Errorf("labels of six steps: %q", labelsOf(whole))
	}
	for _, tt := range []struct {
		steps, width float64
		lines        int
	}{{4, 100, 1}, {6, 100, 2}, {4, 64, 2}, {6, 64, 0}} {
		r := rail{steps: span{-0.8, tt.steps}, place: span{0, tt.width}}
		if words, lines := r.words(6.5); lines != tt.lines {
			t.Errorf("%v steps on %v pt: words on %d lines, want %d: %v", tt.steps, tt.width, lines, tt.lines, words)
		}
	}
}

func TestWrap(t *testing.T) {
	// At a size of 2048/1139 a digit is one point wide, a blank 569/1139.
	const size = 2048.0 / 1139
	got := wrapPlain("11 222 3 44444444", 6.2, size, false)
	if want := []string{"11 222", "3", "44444…"}; !slices.Equal(got[:2], want[:2]) || len(got) != 3 || !strings.HasSuffix(got[2], "…") {
		t.Errorf("wrapped to %q", got)
	}
	for _, line := range got {
		if Width(line, size, false) > 6.2 {
			t.Errorf("%q is wider than 6.2", line)
		}
	}
	lines, bottom := wrapNote(Note{Head: "Key", Text: "11 222 3 44 5"}, 1, 10, 12, size, 2)
	if len(lines) != 2 || bottom != 12 {
		t.Errorf("%d lines down to %v: %v", len(lines), bottom, lines)
	}
	if head := lines[0].(Text).Spans[0]; head.Text != "Key:" || !head.Bold {
		t.Errorf("head %+v", head)
	}
}
