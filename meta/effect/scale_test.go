package effect

import (
	"errors"
	"math"
	"testing"

	"pgregory.net/rapid"
)

// everyMeasure returns all measures, the unspecified one included.
func everyMeasure() []Measure {
	all := make([]Measure, len(MeasureNames()))
	for i := range all {
		all[i] = Measure(i)
	}
	return all
}

// Source: closed forms: artanh 0.6 = ln 2, logit 0.8 = ln 4, asin √¼ = π/6,
// asin √½ = π/4.
func TestScales(t *testing.T) {
	for _, tt := range []struct {
		m    Measure
		x, y float64
	}{
		{Correlation, 0.6, math.Ln2}, {Correlation, -0.6, -math.Ln2}, {Correlation, 0, 0},
		{Proportion, 0.8, math.Log(4)}, {Proportion, 0.2, -math.Log(4)}, {Proportion, 0.5, 0},
		{ArcsineProportion, 0.25, math.Pi / 6}, {ArcsineProportion, 0, 0}, {ArcsineProportion, 1, math.Pi / 2},
		{DoubleArcsineProportion, 0.5, math.Pi / 4},
		{Rate, math.E, 1}, {OddsRatio, 2, math.Ln2}, {ArcsineDifference, -0.11, -0.11},
	} {
		y, err := FromReader(tt.m, tt.x)
		if err != nil || !near(y, tt.y, 1e-15) {
			t.Errorf("%v %v is %v, %v; want %v", tt.m, tt.x, y, err, tt.y)
		}
		if x := ToReader(tt.m, tt.y); !near(x, tt.x, 1e-15) {
			t.Errorf("%v of %v is %v, want %v", tt.m, tt.y, x, tt.x)
		}
	}
	for _, tt := range []struct {
		m    Measure
		y, x float64
	}{
		{Proportion, 800, 1}, {Proportion, -800, 0}, {ArcsineProportion, -0.1, 0}, {ArcsineProportion, 2, 1},
		{Correlation, 50, 1}, {Rate, -1000, 0},
	} {
		if x := ToReader(tt.m, tt.y); x != tt.x {
			t.Errorf("%v of %v is %v, want %v", tt.m, tt.y, x, tt.x)
		}
	}
	// A small share keeps its digits: logit x = ln x + x + …
	if y, err := FromReader(Proportion, 1e-12); err != nil || !relative(y, math.Log(1e-12)+1e-12, 1e-15) {
		t.Errorf("logit of 1e-12 is %v, %v", y, err)
	}
	if x := ToReader(Proportion, math.Log(1e-300)); !relative(x, 1e-300, 1e-12) {
		t.Errorf("share of logit ln 1e-300 is %v", x)
	}
}

func TestScalesRefuse(t *testing.T) {
	for _, tt := range []struct {
		m Measure
		x float64
	}{
		{Correlation, 1}, {Correlation, -1}, {Correlation, 1.2}, {Correlation, math.NaN()},
		{Proportion, 0}, {Proportion, 1}, {Proportion, 12.5}, {Proportion, math.Inf(-1)},
		{ArcsineProportion, -0.1}, {ArcsineProportion, 1.01}, {DoubleArcsineProportion, math.NaN()},
		{Rate, 0}, {Rate, -1}, {ArcsineDifference, math.NaN()}, {ArcsineDifference, math.Inf(1)},
	} {
		_, err := FromReader(tt.m, tt.x)
		var input *InputError
		if !errors.As(err, &input) || input.What != "estimate" || !(input.Value == tt.x || tt.x != tt.x) {
			t.Errorf("%v %v: %v", tt.m, tt.x, err)
		}
	}
}

// What is read is shown as it was; limits give back the standard error they were
// made from, at any level, by the normal and by Student's law; what a reader sees
// rises with the analysis scale. Half-widths by an independent inverse (Erfinv).
func TestScaleProperties(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		m := rapid.SampledFrom(everyMeasure()).Draw(t, "measure")
		y := rapid.Float64Range(-3, 3).Draw(t, "y")
		se := rapid.Float64Range(1e-3, 1).Draw(t, "se")
		if m == ArcsineProportion || m == DoubleArcsineProportion {
			y = rapid.Float64Range(0.6, 0.9).Draw(t, "angle")
			se = rapid.Float64Range(1e-3, 0.15).Draw(t, "se of the angle")
		}
		level := rapid.Float64Range(0.5, 0.99).Draw(t, "level")
		x := ToReader(m, y)
		back, err := FromReader(m, x)
		if err != nil || !near(back, y, 1e-12) {
			t.Fatalf("%v: %v reads as %v, %v", m, y, back, err)
		}
		half := se * math.Sqrt2 * math.Erfinv(level)
		low, high := ToReader(m, y-half), ToReader(m, y+half)
		if !(low < x && x < high) {
			t.Fatalf("%v: %v, %v, %v do not rise", m, low, x, high)
		}
		e, steps, err := FromLimits(m, x, low, high, level)
		if err != nil || !near(e.Y, y, 1e-12) || !relative(e.SE, se, 1e-8) {
			t.Fatalf("%v: %v ± %v at %v gives %+v, %v", m, y, half, level, e, err)
		}
		if scaled := m.scale() != nil; (len(steps) == 2) != scaled || scaled && steps[0].To[0].Value != e.Y {
			t.Fatalf("%v: conversions %+v", m, steps)
		}
	})
}

// Source: t(0.975, 7) = 2.364624251592785341681 and t(0.95, 7) =
// 1.894578605090007389472 in 40-digit arithmetic by python3 mpmath (root of the
// regularised incomplete beta).
func TestFromStudentLimits(t *testing.T) {
	for _, tt := range []struct{ level, quantile float64 }{{0.95, 2.364624251592785341681}, {0.9, 1.894578605090007389472}} {
		half := 1.5 * tt.quantile
		e, steps, err := FromStudentLimits(MeanDifference, 4, 4-half, 4+half, tt.level, 7)
		if err != nil || !relative(e.SE, 1.5, 1e-12) || len(steps) != 1 || len(steps[0].From) != 4 {
			t.Errorf("level %v: %+v, %v, %+v; want 1.5", tt.level, e, err, steps)
		}
		e, steps, err = FromStudentLimits(Correlation, math.Tanh(0.2), math.Tanh(0.2-half/10), math.Tanh(0.2+half/10), tt.level, 7)
		if err != nil || !relative(e.SE, 0.15, 1e-12) || len(steps) != 2 {
			t.Errorf("level %v, correlation: %+v, %v, %+v; want 0.15", tt.level, e, err, steps)
		}
		sd, step, err := SDFromLimits(10-half, 10+half, tt.level, 8, 7)
		if err != nil || !relative(sd, 1.5*math.Sqrt(8), 1e-12) || step.To[0].Value != sd {
			t.Errorf("level %v: sd %v, %v; want 1.5·√8", tt.level, sd, err)
		}
	}
	// Cochrane Handbook 6.5.2.2: SD = √n·(high − low)/3.92.
	if sd, _, err := SDFromLimits(30, 34.2, 0.95, 25, math.Inf(1)); err != nil || !relative(sd, 5*4.2/3.92, 1e-4) {
		t.Errorf("sd %v, %v; want %v", sd, err, 5*4.2/3.92)
	}
}

func TestMeasures(t *testing.T) {
	for _, m := range everyMeasure() {
		var back Measure
		if err := back.UnmarshalText([]byte(m.String())); err != nil || back != m {
			t.Errorf("%q reads as %v, %v", m, back, err)
		}
		y, err := FromReader(m, m.Null())
		if m.HasNull() && (err != nil || y != 0) {
			t.Errorf("the null of %v is %v on the analysis scale, %v", m, y, err)
		}
		if !m.HasNull() && m.Null() != 0 {
			t.Errorf("%v has no null, yet it is %v", m, m.Null())
		}
	}
	for _, m := range []Measure{Proportion, ArcsineProportion, DoubleArcsineProportion, Rate} {
		if m.HasNull() {
			t.Errorf("%v has a null", m)
		}
	}
	for _, m := range []Measure{OddsRatio, RateRatio, RatioOfMeans, Correlation, ArcsineDifference, MeanDifference, Unspecified} {
		if !m.HasNull() {
			t.Errorf("%v has no null", m)
		}
	}
}

func TestDirectionAndResultTypeNames(t *testing.T) {
	for text, want := range map[string]Direction{"higher": Higher, "Lower": Lower, "fewer": Lower, "increase": Higher, "": DirectionUnknown} {
		var d Direction
		if err := d.UnmarshalText([]byte(text)); err != nil || d != want {
			t.Errorf("direction %q is %v, %v", text, d, err)
		}
		if back, err := d.MarshalText(); err != nil || string(back) != want.String() {
			t.Errorf("direction %v writes as %q, %v", d, back, err)
		}
	}
	for text, want := range map[string]ResultType{"change": Change, "Final": Final, "endpoint": Final, "change-from-baseline": Change, "": ResultTypeUnknown} {
		var r ResultType
		if err := r.UnmarshalText([]byte(text)); err != nil || r != want {
			t.Errorf("result type %q is %v, %v", text, r, err)
		}
		if back, err := r.MarshalText(); err != nil || string(back) != want.String() {
			t.Errorf("result type %v writes as %q, %v", r, back, err)
		}
	}
	if _, err := ParseDirection("sideways"); err == nil || len(DirectionNames()) != 2 {
		t.Errorf("%v; names %v", err, DirectionNames())
	}
	if _, err := ParseResultType("middle"); err == nil || len(ResultTypeNames()) != 2 {
		t.Errorf("%v; names %v", err, ResultTypeNames())
	}
}
