package effect

import (
	"errors"
	"math"
	"testing"

	"pgregory.net/rapid"
)

// Source: closed forms: 3² + 4² − 2r·12 at r 0, ½, 1, −1.
func TestChangeSD(t *testing.T) {
	for _, tt := range []struct{ r, variance float64 }{{0, 25}, {0.5, 13}, {1, 1}, {-1, 49}} {
		sd, step, err := ChangeSD(3, 4, tt.r)
		if err != nil || !relative(sd*sd, tt.variance, 1e-14) || step.To[0].Value != sd {
			t.Errorf("r = %v: %v, %v; want √%v", tt.r, sd, err, tt.variance)
		}
		r, _, err := ImpliedCorrelation(3, 4, math.Sqrt(tt.variance))
		if err != nil || !near(r, tt.r, 1e-14) {
			t.Errorf("implied correlation %v, %v; want %v", r, err, tt.r)
		}
	}
}

func TestChangeArm(t *testing.T) {
	a, step, err := ChangeArm(Arm{Mean: 7, SD: 4, N: 20}, 9.5, 3, 0.5)
	if err != nil || a.Mean != -2.5 || a.N != 20 || !relative(a.SD, math.Sqrt(13), 1e-14) || len(step.From) != 5 {
		t.Errorf("%+v, %+v, %v; want -2.5, √13, 20", a, step, err)
	}
}

// The correlation implied by a change with a stated correlation is that
// correlation, and the change in another unit is the change times the unit.
func TestChangeProperties(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		b, f := rapid.Float64Range(0.1, 50).Draw(t, "baseline sd"), rapid.Float64Range(0.1, 50).Draw(t, "sd")
		r := rapid.Float64Range(-0.99, 0.99).Draw(t, "r")
		unit := rapid.Float64Range(1e-6, 1e6).Draw(t, "unit")
		sd, _, err := ChangeSD(b, f, r)
		if err != nil {
			t.Fatal(err)
		}
		back, _, err := ImpliedCorrelation(b, f, sd)
		if err != nil || !(math.Abs(back-r) <= 1e-14*(b/f+f/b)) {
			t.Fatalf("r %v comes back as %v, %v", r, back, err)
		}
		if scaled, _, err := ChangeSD(unit*b, unit*f, r); err != nil || !relative(scaled, unit*sd, 1e-12) {
			t.Fatalf("%v in another unit %v, %v", sd, scaled, err)
		}
	})
}

// Source: Cochrane Handbook 5.1, 16.4.6.4 [seen]: means 7.0 (SD 2.38) and 6.5
// (2.21) in ten people; with SD of differences 2 the mean difference 0.5 has se
// 0.632; with correlation 0.68 se 0.583, standardised 0.218, se 0.256.
// More digits [recalc]: 0.632456, 0.582681, 0.217716, 0.255963.
func TestPairedPublished(t *testing.T) {
	e, _, err := FromDifferences(0.5, 2, 10)
	if err != nil || e.Y != 0.5 || !(math.Abs(e.SE-0.632456) <= 5e-7) {
		t.Errorf("%+v, %v; want 0.5, 0.632", e, err)
	}
	treated, control := Arm{Mean: 7, SD: 2.38, N: 10}, Arm{Mean: 6.5, SD: 2.21, N: 10}
	e, steps, err := FromPaired(MeanDifference, treated, control, 0.68)
	if err != nil || e.Y != 0.5 || !(math.Abs(e.SE-0.582681) <= 5e-7) || len(steps) != 2 || !(math.Abs(steps[0].To[0].Value-1.842599) <= 5e-7) {
		t.Errorf("%+v, %+v, %v; want 0.5, 0.583", e, steps, err)
	}
	e, steps, err = FromPaired(StandardisedMeanDifference, treated, control, 0.68)
	if err != nil || !(math.Abs(e.Y-0.217716) <= 5e-7) || !(math.Abs(e.SE-0.255963) <= 5e-7) || len(steps) != 1 {
		t.Errorf("%+v, %+v, %v; want 0.218, 0.256", e, steps, err)
	}
}

// Exchanging the treatments turns the sign, another unit leaves the standardised
// difference, and a correlation of 0 gives the difference the standard error of
// separate groups.
func TestPairedProperties(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		x, y := arm(t, "treated"), arm(t, "control")
		y.N = x.N
		r := rapid.Float64Range(-0.9, 0.9).Draw(t, "r")
		unit := rapid.Float64Range(0.01, 100).Draw(t, "unit")
		in := func(a Arm) Arm { return Arm{Mean: unit * a.Mean, SD: unit * a.SD, N: a.N} }
		for m, factor := range map[Measure]float64{MeanDifference: unit, StandardisedMeanDifference: 1} {
			e, _, err := FromPaired(m, x, y, r)
			turned, _, errTurned := FromPaired(m, y, x, r)
			other, _, errOther := FromPaired(m, in(x), in(y), r)
			if err := errors.Join(err, errTurned, errOther); err != nil {
				t.Fatal(err)
			}
			if turned.Y != -e.Y || !relative(turned.SE, e.SE, 1e-12) {
				t.Fatalf("%v: %+v, turned %+v", m, e, turned)
			}
			if !(math.Abs(other.Y-factor*e.Y) <= 1e-9*factor*(1+math.Abs(e.Y))) || !relative(other.SE, factor*e.SE, 1e-9) {
				t.Fatalf("%v: %+v, in another unit %+v", m, e, other)
			}
		}
		paired, _, err := FromPaired(MeanDifference, x, y, 0)
		apart, _, errApart := FromArms(MeanDifference, x, y)
		if err != nil || errApart != nil || !relative(paired.SE, apart.SE, 1e-12) {
			t.Fatalf("correlation 0: %+v, groups apart %+v", paired, apart)
		}
	})
}
