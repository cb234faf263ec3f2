package effect

import (
	"errors"
	"math"
	"testing"

	"pgregory.net/rapid"
)

// Source: evidence_extra.csv (40-digit arithmetic); the other rows are Γ ratios
// in 30-digit arithmetic by python3 mpmath, and the limits of the formula.
func TestSmallSampleFactor(t *testing.T) {
	checked := 0
	for _, r := range records(t, "evidence_extra.csv") {
		if r["form"] != "hedges_exact_correction" {
			continue
		}
		checked++
		if got, want := SmallSampleFactor(number(t, r["arg1"])), number(t, r["value"]); !relative(got, want, 1e-12) {
			t.Errorf("m = %s: %v, want %v", r["arg1"], got, want)
		}
	}
	if checked != 5 {
		t.Errorf("%d values found in the check file, want 5", checked)
	}
	for _, tt := range []struct{ m, want float64 }{
		{1.5, 0.390276218869176306949}, {2.5, 0.661579868984308898891}, {100, 0.992478054981444866601},
		{1e6, 0.99999924999978124992969}, {1e12, 0.99999999999925000010735},
		{math.Inf(1), 1}, {1, 0}, {0, 0}, {-3, 0}, {math.NaN(), 0},
	} {
		if got := SmallSampleFactor(tt.m); !near(got, tt.want, 1e-13) {
			t.Errorf("m = %v: %.17g, want %.17g", tt.m, got, tt.want)
		}
	}
}

// Source: evidence_extra.csv (40-digit arithmetic): g and its variance for arms
// of arg1 and arg2 people whose uncorrected standardised difference is arg3.
func TestStandardisedAgainstChecks(t *testing.T) {
	checked := 0
	for _, r := range records(t, "evidence_extra.csv") {
		if r["form"] != "standardised_difference_g" && r["form"] != "standardised_difference_variance_handbook" {
			continue
		}
		checked++
		d := number(t, r["arg3"])
		e, _, err := FromArms(StandardisedMeanDifference,
			Arm{Mean: 10 + 2*d, SD: 2, N: number(t, r["arg1"])}, Arm{Mean: 10, SD: 2, N: number(t, r["arg2"])})
		if err != nil {
			t.Fatal(err)
		}
		got := e.Y
		if r["form"] == "standardised_difference_variance_handbook" {
			got = e.SE * e.SE
		}
		if want := number(t, r["value"]); !relative(got, want, 1e-12) {
			t.Errorf("%s %s %s %s = %v, want %v", r["form"], r["arg1"], r["arg2"], r["arg3"], got, want)
		}
	}
	if checked != 4 {
		t.Errorf("%d values found in the check file, want 4", checked)
	}
}

// Source: closed forms written out in each row.
func TestFromArmsByHand(t *testing.T) {
	treated, control := Arm{Mean: 12, SD: 3, N: 9}, Arm{Mean: 10, SD: 4, N: 25}
	pooled := math.Sqrt((8*9 + 24*16) / 32.)
	for _, tt := range []struct {
		measure Measure
		y, v    float64
	}{
		{MeanDifference, 2, 3*3/9. + 4*4/25.},
		{RatioOfMeans, math.Log(1.2), 9/(9*144.) + 16/(25*100.)},
		// J(32): Γ(16)/(√16 Γ(15.5)) with Γ(15.5) = 29!!·√π/2¹⁵.
		{StandardisedMeanDifference, gamma32 * 2 / pooled, 34/225. + math.Pow(gamma32*2/pooled, 2)/(2*30.06)},
	} {
		e, steps, err := FromArms(tt.measure, treated, control)
		if err != nil {
			t.Fatal(err)
		}
		if !relative(e.Y, tt.y, 1e-13) || !relative(e.SE*e.SE, tt.v, 1e-13) {
			t.Errorf("%v: %v, variance %v; want %v, %v", tt.measure, e.Y, e.SE*e.SE, tt.y, tt.v)
		}
		if len(steps) != 1 || len(steps[0].From) != 6 || steps[0].To[0].Value != e.Y || steps[0].To[1].Value != e.SE {
			t.Errorf("%v: conversion %+v", tt.measure, steps)
		}
	}
}

// Source: ln(1+x) = x − x²/2 + x³/3 at x = 1e-9; the difference of two logarithms
// would keep seven digits of it.
func TestRatioOfMeansNearOne(t *testing.T) {
	e, _, err := FromArms(RatioOfMeans, Arm{Mean: 1e9 + 1, SD: 1, N: 10}, Arm{Mean: 1e9, SD: 1, N: 10})
	if err != nil || !relative(e.Y, 1e-9-0.5e-18, 1e-14) {
		t.Errorf("%v, %v; want 9.999999995e-10", e.Y, err)
	}
}

// gamma32 is J at 32 degrees of freedom: 15!·2¹⁵ / (4·29!!·√π).
var gamma32 = 1307674368000 * 32768 / (4 * 6190283353629375 * math.Sqrt(math.Pi))

func TestFromArmsRefuses(t *testing.T) {
	good := Arm{Mean: 10, SD: 4, N: 25}
	for _, tt := range []struct {
		name             string
		measure          Measure
		treated, control Arm
		what             string
	}{
		{"no mean", MeanDifference, Arm{Mean: math.NaN(), SD: 1, N: 5}, good, "mean treated"},
		{"infinite mean", MeanDifference, good, Arm{Mean: math.Inf(-1), SD: 1, N: 5}, "mean control"},
		{"sd 0", MeanDifference, Arm{Mean: 1, SD: 0, N: 5}, good, "sd treated"},
		{"sd below 0", StandardisedMeanDifference, good, Arm{Mean: 1, SD: -2, N: 5}, "sd control"},
		{"no sd", StandardisedMeanDifference, good, Arm{Mean: 1, SD: math.NaN(), N: 5}, "sd control"},
		{"one person", MeanDifference, Arm{Mean: 1, SD: 1, N: 1}, good, "total treated"},
		{"endless arm", MeanDifference, good, Arm{Mean: 1, SD: 1, N: math.Inf(1)}, "total control"},
		{"ratio of a mean of 0", RatioOfMeans, Arm{Mean: 0, SD: 1, N: 5}, good, "mean treated"},
		{"ratio of a mean below 0", RatioOfMeans, good, Arm{Mean: -1, SD: 1, N: 5}, "mean control"},
		{"difference too large", MeanDifference, Arm{Mean: 1.5e308, SD: 1, N: 5}, Arm{Mean: -1.5e308, SD: 1, N: 5}, "estimate"},
		{"standard error too small", RatioOfMeans, Arm{Mean: 1e308, SD: 1e-300, N: 5}, Arm{Mean: 1e308, SD: 1e-300, N: 5}, "se"},
	} {
		t.Run(tt.name, func(t *testing.T) {
			e, steps, err := FromArms(tt.measure, tt.treated, tt.control)
			var input *InputError
			if !errors.As(err, &input) || input.What != tt.what {
				t.Errorf("error %v, want one that names %q", err, tt.what)
			}
			if (e != Estimate{}) || steps != nil {
				t.Errorf("%v and %v beside an error", e, steps)
			}
		})
	}
	var measure *MeasureError
	if _, _, err := FromArms(OddsRatio, good, good); !errors.As(err, &measure) {
		t.Errorf("odds ratio from means: %v", err)
	}
	var input *InputError
	if err := (Arm{Mean: 1, SD: 1, N: 1}).Check(); !errors.As(err, &input) || input.What != "total" {
		t.Errorf("arm of one person: %v", err)
	}
	if err := good.Check(); err != nil {
		t.Errorf("a good arm: %v", err)
	}
}

// arm draws an arm with a mean and a spread of ordinary size.
func arm(t *rapid.T, name string) Arm {
	return Arm{
		Mean: rapid.Float64Range(0.5, 200).Draw(t, name+" mean"),
		SD:   rapid.Float64Range(0.1, 50).Draw(t, name+" sd"),
		N:    float64(rapid.IntRange(2, 4000).Draw(t, name+" total")),
	}
}

// Exchanging the arms turns the sign; another unit (a factor and, for
// differences, an offset) changes a difference by that factor and leaves the
// other two measures as they are; se > 0 always.
func TestFromArmsProperties(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		m := rapid.SampledFrom([]Measure{MeanDifference, StandardisedMeanDifference, RatioOfMeans}).Draw(t, "measure")
		x, y := arm(t, "treated"), arm(t, "control")
		factor := rapid.Float64Range(0.01, 100).Draw(t, "factor")
		offset := 0.0
		if m != RatioOfMeans {
			offset = rapid.Float64Range(-50, 50).Draw(t, "offset")
		}
		unit := func(a Arm) Arm { return Arm{Mean: factor*a.Mean + offset, SD: factor * a.SD, N: a.N} }
		e, _, err := FromArms(m, x, y)
		swapped, _, errSwapped := FromArms(m, y, x)
		scaled, _, errScaled := FromArms(m, unit(x), unit(y))
		if err := errors.Join(err, errSwapped, errScaled); err != nil {
			t.Fatal(err)
		}
		if !(e.SE > 0) || !near(swapped.Y, -e.Y, 1e-12) || !relative(swapped.SE, e.SE, 1e-12) {
			t.Fatalf("%+v; swapped %+v", e, swapped)
		}
		by := 1.0
		if m == MeanDifference {
			by = factor
		}
		// The offset costs digits of a small difference: 1e-10 of the larger mean.
		slack := 1e-10 * math.Max(1, by*200)
		if m == StandardisedMeanDifference {
			slack = 1e-12 * (200*factor + 50) / (0.1 * factor)
		}
		if !(math.Abs(scaled.Y-by*e.Y) <= slack) || !relative(scaled.SE, by*e.SE, 1e-9) {
			t.Fatalf("%+v; in another unit %+v (factor %v, offset %v)", e, scaled, factor, offset)
		}
	})
}
