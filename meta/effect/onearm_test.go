package effect

import (
	"errors"
	"math"
	"testing"

	"pgregory.net/rapid"
)

// Source: 40-digit arithmetic by python3 mpmath; variances are closed forms.
func TestFromProportion(t *testing.T) {
	for _, tt := range []struct {
		m    Measure
		x    Counts
		y, v float64
	}{
		{Proportion, Counts{7, 40}, -1.550597412411166930352, 1/7. + 1/33.},
		{ArcsineProportion, Counts{7, 40}, 0.4316059450347705218892, 1 / 160.},
		{DoubleArcsineProportion, Counts{7, 40}, 0.4417418341845117540227, 1 / 162.},
		{ArcsineProportion, Counts{0, 40}, 0, 1 / 160.},
		{ArcsineProportion, Counts{40, 40}, math.Pi / 2, 1 / 160.},
	} {
		for _, c := range []Correction{Half, TreatmentArm, NoCorrection} {
			e, steps, err := FromProportion(tt.m, tt.x, c)
			if err != nil || !near(e.Y, tt.y, 1e-15) || !relative(e.SE*e.SE, tt.v, 1e-14) || len(steps) != 1 {
				t.Errorf("%v of %+v: %+v, %v, %+v; want %v, variance %v", tt.m, tt.x, e, err, steps, tt.y, tt.v)
			}
		}
	}
	// Closed form: ln(0.5/40.5) with variance 2 + 1/40.5, and its mirror image.
	for x, sign := range map[Counts]float64{{0, 40}: 1, {40, 40}: -1} {
		for _, c := range []Correction{Half, TreatmentArm} {
			e, steps, err := FromProportion(Proportion, x, c)
			if err != nil || !relative(e.Y, sign*math.Log(0.5/40.5), 1e-15) || !relative(e.SE*e.SE, 2+1/40.5, 1e-14) {
				t.Errorf("%+v: %+v, %v", x, e, err)
			}
			if len(steps) != 2 || !steps[0].Added || steps[0].To[0].Value != 0.5 || steps[1].From[1].Value != 41 {
				t.Errorf("%+v: conversions %+v", x, steps)
			}
		}
	}
}

// Events and non-events exchanged mirror all three measures: the logit at 0, the
// arcsines at π/4; and what a reader sees lies between 0 and 1.
func TestFromProportionProperties(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		n := rapid.IntRange(1, 100000).Draw(t, "total")
		x := rapid.IntRange(0, n).Draw(t, "events")
		for m, middle := range map[Measure]float64{Proportion: 0, ArcsineProportion: math.Pi / 4, DoubleArcsineProportion: math.Pi / 4} {
			e, _, err := FromProportion(m, Counts{float64(x), float64(n)}, Half)
			turned, _, errTurned := FromProportion(m, Counts{float64(n - x), float64(n)}, Half)
			if err != nil || errTurned != nil || !near(e.Y-middle, middle-turned.Y, 1e-13) || !relative(e.SE, turned.SE, 1e-13) {
				t.Fatalf("%v of %v/%v: %+v, %v; turned %+v, %v", m, x, n, e, err, turned, errTurned)
			}
			share := ToReader(m, e.Y)
			if !(share >= 0 && share <= 1) {
				t.Fatalf("%v of %v/%v is %v", m, x, n, share)
			}
			if m == ArcsineProportion && !near(share, float64(x)/float64(n), 1e-13) {
				t.Fatalf("%v/%v comes back as %v", x, n, share)
			}
		}
	})
}

// Source: closed forms written out in each row.
func TestRates(t *testing.T) {
	for _, tt := range []struct {
		x     Events
		y, v  float64
		steps int
	}{
		{Events{18, 1200}, math.Log(0.015), 1 / 18., 1},
		{Events{0, 1200}, math.Log(0.5 / 1200), 2, 2},
	} {
		e, steps, err := FromRate(tt.x, Half)
		if err != nil || !relative(e.Y, tt.y, 1e-14) || !relative(e.SE*e.SE, tt.v, 1e-14) || len(steps) != tt.steps || steps[0].Added != (tt.steps == 2) {
			t.Errorf("%+v: %+v, %v, %+v", tt.x, e, err, steps)
		}
	}
	for _, tt := range []struct {
		treated, control Events
		c                Correction
		y, v             float64
		steps            int
	}{
		{Events{18, 1200}, Events{30, 1000}, NoCorrection, math.Log(0.5), 1/18. + 1/30., 1},
		{Events{0, 1200}, Events{3, 600}, Half, math.Log(0.5 / 1200 / (3.5 / 600)), 1/0.5 + 1/3.5, 2},
		{Events{3, 1200}, Events{0, 600}, Half, math.Log(3.5 / 1200 / (0.5 / 600)), 1/3.5 + 1/0.5, 2},
		{Events{0, 1200}, Events{3, 600}, TreatmentArm, math.Log(2 / 3. / 1200 / ((3 + 1/3.) / 600)), 3/2. + 1/(3+1/3.), 2},
	} {
		e, steps, err := FromRates(tt.treated, tt.control, tt.c)
		if err != nil || !relative(e.Y, tt.y, 1e-13) || !relative(e.SE*e.SE, tt.v, 1e-13) || len(steps) != tt.steps || steps[0].Added != (tt.steps == 2) {
			t.Errorf("%+v: %+v, %v, %+v; want %v, variance %v", tt, e, err, steps, tt.y, tt.v)
		}
	}
}

// Exchanging the arms turns the sign; another unit of time leaves a ratio and
// moves a log rate by its logarithm.
func TestRatesProperties(t *testing.T) {
	events := func(t *rapid.T, name string) Events {
		return Events{float64(rapid.IntRange(0, 500).Draw(t, name)), rapid.Float64Range(0.1, 1e5).Draw(t, name+" time")}
	}
	rapid.Check(t, func(t *rapid.T) {
		x, y := events(t, "treated"), events(t, "control")
		unit := rapid.Float64Range(0.01, 400).Draw(t, "unit")
		c := rapid.SampledFrom([]Correction{Half, TreatmentArm}).Draw(t, "correction")
		in := func(x Events) Events { return Events{x.Events, unit * x.PersonTime} }
		e, _, err := FromRates(x, y, c)
		if x.Events == 0 && y.Events == 0 {
			if !errors.Is(err, ErrNothingToCompare) {
				t.Fatal(err)
			}
			return
		}
		turned, _, errTurned := FromRates(y, x, c)
		other, _, errOther := FromRates(in(x), in(y), c)
		if err := errors.Join(err, errTurned, errOther); err != nil {
			t.Fatal(err)
		}
		if !near(turned.Y, -e.Y, 1e-12) || !relative(turned.SE, e.SE, 1e-9) || !near(other.Y, e.Y, 1e-12) || !relative(other.SE, e.SE, 1e-9) {
			t.Fatalf("%+v; turned %+v; other unit %+v", e, turned, other)
		}
		one, _, err := FromRate(x, c)
		scaled, _, errScaled := FromRate(in(x), c)
		if err != nil || errScaled != nil || !near(scaled.Y, one.Y-math.Log(unit), 1e-12) || scaled.SE != one.SE {
			t.Fatalf("%+v; other unit %+v", one, scaled)
		}
	})
}

// Source: artanh 0.6 = ln 2; standard error 1/√(28−3) = 0.2.
func TestFromCorrelation(t *testing.T) {
	e, steps, err := FromCorrelation(0.6, 28)
	if err != nil || !relative(e.Y, math.Ln2, 1e-15) || !relative(e.SE, 0.2, 1e-15) || len(steps) != 1 || steps[0].To[0].Value != e.Y {
		t.Errorf("%+v, %+v, %v", e, steps, err)
	}
	if back, _, err := FromCorrelation(-0.6, 28); err != nil || back.Y != -e.Y || back.SE != e.SE {
		t.Errorf("%+v, %v", back, err)
	}
}

// Source: 40-digit arithmetic by python3 mpmath, the second row where two nearly
// equal angles are subtracted.
func TestArcsineDifference(t *testing.T) {
	for _, tt := range []struct {
		x Table
		y float64
	}{
		{Table{7, 40, 12, 45}, -0.1110331572148822060903},
		{Table{500001, 1e6, 500000, 1e6}, 0.000001000000000000666666667},
		{Table{0, 40, 0, 45}, 0}, {Table{40, 40, 45, 45}, 0}, {Table{40, 40, 0, 45}, math.Pi / 2}, {Table{0, 40, 45, 45}, -math.Pi / 2},
	} {
		e, steps, err := FromTable(ArcsineDifference, tt.x, NoCorrection)
		v := (1/tt.x.Total1 + 1/tt.x.Total2) / 4
		if err != nil || !relative(e.Y, tt.y, 1e-14) || !relative(e.SE*e.SE, v, 1e-14) || len(steps) != 1 {
			t.Errorf("%+v: %+v, %v; want %v, variance %v", tt.x, e, err, tt.y, v)
		}
	}
	// The difference is that of the two one-arm arcsines.
	rapid.Check(t, func(t *rapid.T) {
		x := table(t)
		e, _, err := FromTable(ArcsineDifference, x, Half)
		one, _, err1 := FromProportion(ArcsineProportion, Counts{x.Events1, x.Total1}, Half)
		two, _, err2 := FromProportion(ArcsineProportion, Counts{x.Events2, x.Total2}, Half)
		if err := errors.Join(err, err1, err2); err != nil {
			t.Fatal(err)
		}
		if !near(e.Y, one.Y-two.Y, 1e-14) || !relative(e.SE, math.Hypot(one.SE, two.SE), 1e-13) {
			t.Fatalf("%+v: %+v; one by one %+v, %+v", x, e, one, two)
		}
	})
}

// Source: evidence_extra.csv (40-digit arithmetic; unbiased by a simulation of 2
// million draws): arms of arg1 and arg2 people, uncorrected difference arg3.
func TestFromArmsUnbiased(t *testing.T) {
	checked := 0
	for _, r := range records(t, "evidence_extra.csv") {
		if r["form"] != "standardised_difference_variance_unbiased" {
			continue
		}
		checked++
		d := number(t, r["arg3"])
		treated, control := Arm{Mean: 10 + 2*d, SD: 2, N: number(t, r["arg1"])}, Arm{Mean: 10, SD: 2, N: number(t, r["arg2"])}
		e, steps, err := FromArmsUnbiased(treated, control)
		usual, _, errUsual := FromArms(StandardisedMeanDifference, treated, control)
		if err != nil || errUsual != nil || e.Y != usual.Y || len(steps) != 1 {
			t.Fatalf("%+v, %v; %+v, %v", e, err, usual, errUsual)
		}
		if want := number(t, r["value"]); !relative(e.SE*e.SE, want, 1e-12) || !relative(usual.SE, e.SE, 0.01) {
			t.Errorf("%s, %s, %s: variance %v, want %v", r["arg1"], r["arg2"], r["arg3"], e.SE*e.SE, want)
		}
	}
	if checked != 2 {
		t.Errorf("%d values found in the check file, want 2", checked)
	}
	// Closed form: √(3²/9 + 4²/25).
	se, step, err := SEFromArms(Arm{SD: 3, N: 9}, Arm{SD: 4, N: 25})
	if err != nil || !relative(se*se, 1+16/25., 1e-14) || step.To[0].Value != se {
		t.Errorf("%v, %v", se, err)
	}
}
