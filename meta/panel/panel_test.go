package panel

import (
	"context"
	"errors"
	"math"
	"testing"

	"pgregory.net/rapid"

	"steelyard/meta"
	"steelyard/meta/effect"
)

var withAbsolute = []effect.Measure{effect.OddsRatio, effect.RiskRatio, effect.RiskDifference,
	effect.HazardRatio, effect.RateRatio, effect.ArcsineDifference}

func near(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance) {
		t.Errorf("%s is %.12g, want %.12g", what, got, want)
	}
}

// TestRiskRatioOfTheHandbook: RR 0.75 takes 80% to 60% and 20% to 15% (Cochrane
// Handbook 5.1, 11.5.5 [seen]).
func TestRiskRatioOfTheHandbook(t *testing.T) {
	for baseline, want := range map[float64]float64{0.8: 0.6, 0.2: 0.15} {
		risk, capped, err := Risk(effect.RiskRatio, baseline, math.Log(0.75))
		if err != nil || capped {
			t.Fatalf("baseline %v: capped %v, %v", baseline, capped, err)
		}
		near(t, "the risk", risk, want, 1e-15)
	}
}

// TestRiskClosedForms: values by hand. Odds ratio 2 at 1/3: odds 1/2 become 1, risk
// 1/2. Hazard ratio 2 at 0.3: 1−0.7² = 0.51. Rate ratio 3 at 0.5: 1.5. Arcsine
// π/12 at sin²(π/6) = 1/4: sin²(π/4) = 1/2. Difference 0.1 at 0.25: 0.35.
func TestRiskClosedForms(t *testing.T) {
	for _, c := range []struct {
		m             effect.Measure
		baseline, y   float64
		risk          float64
		stopsAtTheEnd bool
	}{
		{effect.OddsRatio, 1.0 / 3, math.Ln2, 0.5, false},
		{effect.HazardRatio, 0.3, math.Ln2, 0.51, false},
		{effect.RateRatio, 0.5, math.Log(3), 1.5, false},
		{effect.ArcsineDifference, 0.25, math.Pi / 12, 0.5, false},
		{effect.RiskDifference, 0.25, 0.1, 0.35, false},
		{effect.RiskDifference, 0.25, -0.3, 0, true},
		{effect.RiskRatio, 0.6, math.Ln2, 1, true},
		{effect.ArcsineDifference, 0.25, -2, 0, true},
		{effect.OddsRatio, 0.2, math.Inf(-1), 0, false},
		{effect.HazardRatio, 0.2, math.Inf(1), 1, false},
	} {
		risk, capped, err := Risk(c.m, c.baseline, c.y)
		if err != nil || capped != c.stopsAtTheEnd {
			t.Errorf("%s at %v: capped %v, %v", c.m, c.baseline, capped, err)
		}
		near(t, c.m.String(), risk, c.risk, 1e-15)
	}
}

// TestEffectInvertsRisk: an effect that makes a risk of a baseline is the one that was
// put in, and no effect makes no difference.
func TestEffectInvertsRisk(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		m := rapid.SampledFrom(withAbsolute).Draw(t, "measure")
		p := rapid.Float64Range(0.001, 0.999).Draw(t, "baseline")
		y := rapid.Float64Range(-2, 2).Draw(t, "effect")
		risk, capped, err := Risk(m, p, y)
		if err != nil {
			t.Fatal(err)
		}
		if same, _, _ := Risk(m, p, 0); math.Abs(same-p) > 1e-12 {
			t.Fatalf("no effect makes %v of %v", same, p)
		}
		if capped || risk > 1-1e-9 || risk < 1e-9 {
			return
		}
		back, err := Effect(m, p, risk)
		if err != nil || math.Abs(back-y) > 1e-6*(1+math.Abs(y)) {
			t.Fatalf("%s: %v became %v, %v", m, y, back, err)
		}
		if (y > 0) != (risk > p) && math.Abs(y) > 1e-9 {
			t.Fatalf("%s: an effect of %v makes %v of %v", m, y, risk, p)
		}
	})
}

// TestMirroredEvents: an odds ratio or an arcsine difference turned round acts on the
// people without the event as it does on those with it.
func TestMirroredEvents(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		m := rapid.SampledFrom([]effect.Measure{effect.OddsRatio, effect.ArcsineDifference, effect.RiskDifference}).Draw(t, "measure")
		p := rapid.Float64Range(0.01, 0.99).Draw(t, "baseline")
		y := rapid.Float64Range(-1, 1).Draw(t, "effect")
		with, _, _ := Risk(m, p, y)
		without, _, _ := Risk(m, 1-p, -y)
		if math.Abs(with+without-1) > 1e-12 {
			t.Fatalf("%s: %v and %v", m, with, without)
		}
	})
}

// TestUnreachableRisks: risks that no effect reaches are infinitely far.
func TestUnreachableRisks(t *testing.T) {
	for _, m := range withAbsolute {
		if y, err := Effect(m, 0.02, -0.02); err != nil || !math.IsInf(y, -1) {
			t.Errorf("%s: below 0 gives %v, %v", m, y, err)
		}
		y, err := Effect(m, 0.99, 1.03)
		if m == effect.RateRatio { // a rate has no upper end
			near(t, "a rate", y, math.Log(1.03/0.99), 1e-12)
			continue
		}
		if err != nil || !math.IsInf(y, 1) {
			t.Errorf("%s: above 1 gives %v, %v", m, y, err)
		}
	}
}

// TestRefused: what has no absolute form says what to do, and so does a baseline
// outside 0 to 1.
func TestRefused(t *testing.T) {
	refused := 0
	for i := range effect.MeasureNames() {
		m := effect.Measure(i)
		_, _, err := Risk(m, 0.2, 0.1)
		_, other := Effect(m, 0.2, 0.1)
		var measure *MeasureError
		if HasAbsolute(m) != (err == nil) || HasAbsolute(m) != (other == nil) {
			t.Errorf("%s: %v, %v", m, err, other)
		}
		if err != nil && (!errors.As(err, &measure) || measure.Why == "") {
			t.Errorf("%s: %v", m, err)
		}
		if err != nil {
			refused++
		}
	}
	if refused != len(effect.MeasureNames())-len(withAbsolute) {
		t.Errorf("%d measures are refused", refused)
	}
	for _, p := range []float64{0, 1, -0.1, 1.2, 50, math.NaN(), math.Inf(1)} {
		var input *InputError
		if _, err := At(effect.RiskRatio, p, Range{}); !errors.As(err, &input) {
			t.Errorf("baseline %v: %v", p, err)
		}
	}
}

// TestNumberNeededOfGRADE: a reduction of 1.3% (0.6 to 2.0) is a number of 77 (50 to
// 167) (GRADE guidelines 6 [seen]), rounded up.
func TestNumberNeededOfGRADE(t *testing.T) {
	n := NumberNeeded(Range{Value: -0.013, Low: -0.020, High: -0.006})
	if n.Through || !n.Fewer {
		t.Fatalf("%+v", n)
	}
	near(t, "the number", math.Ceil(n.Value), 77, 0)
	near(t, "its low limit", math.Ceil(n.Low*(1-1e-9)), 50, 0)
	near(t, "its high limit", math.Ceil(n.High), 167, 0)
}

// TestNumberNeededThroughInfinity: an interval that holds no difference has a number
// on each side (Altman 1998): −0.05 to 0.025 is 20 for one fewer and 40 for one more.
func TestNumberNeededThroughInfinity(t *testing.T) {
	n := NumberNeeded(Range{Value: -0.01, Low: -0.05, High: 0.025})
	if !n.Through || !n.Fewer {
		t.Fatalf("%+v", n)
	}
	near(t, "for one fewer", n.ForFewer, 20, 1e-12)
	near(t, "for one more", n.ForMore, 40, 1e-12)
	rapid.Check(t, func(t *rapid.T) {
		low := rapid.Float64Range(-0.9, 0.8).Draw(t, "low")
		high := rapid.Float64Range(low+0.001, 0.9).Draw(t, "high")
		d := Range{Value: (low + high) / 2, Low: low, High: high}
		n, turned := NumberNeeded(d), NumberNeeded(Range{Value: -d.Value, Low: -high, High: -low})
		switch {
		case n.Through != (low < 0 && high > 0) || turned.Through != n.Through:
			t.Fatalf("%+v: %+v", d, n)
		case n.Through:
			// The point is no smaller than the limit on its own side.
			side := n.ForMore
			if n.Fewer {
				side = n.ForFewer
			}
			if n.Value < side || turned.ForFewer != n.ForMore {
				t.Fatalf("%+v: %+v", d, n)
			}
		case !(n.Low <= n.Value && n.Value <= n.High) || n.Value != turned.Value:
			t.Fatalf("%+v: %+v", d, n)
		}
	})
}

// TestInformationPublished: the rows of the published checks (α 0.05 two-sided, power
// 0.80) [recalc], and for means δ 0.2 and 0.5 standard deviations.
func TestInformationPublished(t *testing.T) {
	for _, c := range []struct{ p0, reduction, perArm, total, events float64 }{
		{0.40, 0.25, 353.2, 708, 247},
		{0.20, 0.25, 902.6, 1806, 316},
		{0.20, 0.20, 1444.2, 2890, 520},
		{0.10, 0.25, 2001.5, 4004, 350},
		{0.05, 0.25, 4199.2, 8400, 367},
	} {
		got, err := RiskInformation(c.p0, c.p0*(1-c.reduction), 0.05, 0.8)
		if err != nil {
			t.Fatal(err)
		}
		near(t, "per arm", got.PerArm, c.perArm, 0.05)
		near(t, "in all", got.Total(), c.total, 0)
		near(t, "events", math.Round(got.Events), c.events, 0)
	}
	for delta, want := range map[float64]float64{0.2: 392.4, 0.5: 62.8} {
		got, err := MeanInformation(-delta, 0.05, 0.8)
		if err != nil {
			t.Fatal(err)
		}
		near(t, "per arm", got.PerArm, want, 0.05)
	}
	// Power one half leaves the level's own quantile: 2·1.959964²/0.04 by hand.
	half, err := MeanInformation(0.2, 0.05, 0.5)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "at power one half", half.PerArm, 2*1.959963984540054*1.959963984540054/0.04, 1e-9)
}

func TestInformationRefused(t *testing.T) {
	for _, c := range [][4]float64{{0, 0.1, 0.05, 0.8}, {0.1, 0.1, 0.05, 0.8}, {0.1, 0.05, 0, 0.8}, {0.1, 0.05, 0.05, 1}, {0.1, math.NaN(), 0.05, 0.8}} {
		if got, err := RiskInformation(c[0], c[1], c[2], c[3]); err == nil {
			t.Errorf("%v gives %+v", c, got)
		}
	}
	for _, delta := range []float64{0, math.NaN(), math.Inf(1)} {
		if got, err := MeanInformation(delta, 0.05, 0.8); err == nil {
			t.Errorf("%v gives %+v", delta, got)
		}
	}
}

// TestNullTrialClosedForm: for a common effect the pooled interval with a trial at 0
// of standard error √(c/n) is known: with w = 1/s² and v = n/c the limit is
// (w·y + z·√(w+v))/(w+v) for y < 0, and crosses 0 from above −w·y = z·√(w+v), which
// gives n = c·((w·y/z)² − w).
func TestNullTrialClosedForm(t *testing.T) {
	const y, s, c, z = -0.5, 0.1, 4.0, 1.959963984540054
	model := meta.Model{Effects: meta.CommonEffect, Level: 0.95}
	trial := NullTrial{Y: []float64{y}, S: []float64{s}, Model: model,
		SE: func(people float64) (float64, error) { return math.Sqrt(c / people), nil }}
	got, err := trial.Smallest(context.Background(), func(_, high float64) bool { return high >= 0 })
	if err != nil || !got.Found {
		t.Fatalf("%+v, %v", got, err)
	}
	w := 1 / (s * s)
	want := c * ((w*y/z)*(w*y/z) - w)
	if got.People < want || got.People > want+2 {
		t.Errorf("%v people, want the even number at or above %v", got.People, want)
	}
	near(t, "the limit with it", got.High, 0, 1e-4)
}

// TestNullTrialNever: no trial at 0 brings a limit beyond 0 to the other side of it,
// and a context that has ended says so.
func TestNullTrialNever(t *testing.T) {
	trial := NullTrial{Y: []float64{-0.5}, S: []float64{0.1}, Model: meta.Model{Effects: meta.CommonEffect, Level: 0.95},
		SE: func(people float64) (float64, error) { return 2 / math.Sqrt(people), nil }}
	got, err := trial.Smallest(context.Background(), func(low, _ float64) bool { return low > 0.01 })
	if err != nil || got.Found || got.People != MostPeople {
		t.Errorf("%+v, %v", got, err)
	}
	ended, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err := trial.Smallest(ended, func(_, _ float64) bool { return false }); !errors.Is(err, context.Canceled) {
		t.Errorf("an ended context gives %v", err)
	}
}
