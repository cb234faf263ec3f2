package effect

import (
	"math"
	"testing"

	"pgregory.net/rapid"

	"steelyard/meta/numeric"
)

// expectedRange returns the expected range of n standard normal numbers,
// ∫ 1 − Φⁿ − (1−Φ)ⁿ, by its definition.
func expectedRange(t *testing.T, n float64) float64 {
	value, _, err := numeric.Integrate(func(x float64) float64 {
		return 1 - math.Pow(numeric.NormalTail(-x), n) - math.Pow(numeric.NormalTail(x), n)
	}, -12, 12, 1e-10)
	if err != nil {
		t.Fatal(err)
	}
	return value
}

// Source: Wan et al. (2014), Table 1 [seen]: ξ(n), the expected range of n
// normal numbers. The approximation used is within 1.5% of it from 5 on [recalc:
// 2.3595, 3.0933, 3.9284, 4.4867 at n 5, 10, 25, 50].
func TestRangeWidth(t *testing.T) {
	for _, tt := range []struct{ n, xi float64 }{
		{2, 1.128}, {3, 1.693}, {4, 2.059}, {5, 2.326}, {6, 2.534}, {7, 2.704}, {8, 2.847}, {9, 2.970}, {10, 3.078},
		{15, 3.472}, {20, 3.735}, {25, 3.931}, {30, 4.086}, {35, 4.213}, {40, 4.322}, {45, 4.415}, {50, 4.498},
	} {
		if exact := expectedRange(t, tt.n); !(math.Abs(exact-tt.xi) <= 1e-3) {
			t.Errorf("expected range of %v is %v, want %v", tt.n, exact, tt.xi)
		}
		tolerance := 0.015
		if tt.n < 5 {
			tolerance = 0.05
		}
		if got := rangeWidth(tt.n); !relative(got, tt.xi, tolerance) {
			t.Errorf("width of the range of %v is %v, want %v", tt.n, got, tt.xi)
		}
	}
	for n, want := range map[float64]float64{5: 2.3595, 10: 3.0933, 25: 3.9284, 50: 4.4867} {
		if got := rangeWidth(n); !(math.Abs(got-want) <= 5e-5) {
			t.Errorf("width of the range of %v is %v, want %v", n, got, want)
		}
	}
	// Hozo et al. (2005) [seen]: SD about range/4 for 15 < n ≤ 70 and range/6 for
	// n > 70, coarse rules that the width crosses where they change.
	for n := 16.0; n <= 70; n++ {
		if w := rangeWidth(n); !(w > 3.4 && w < 5) {
			t.Errorf("width of the range of %v is %v, far from 4", n, w)
		}
	}
	if w := rangeWidth(400); !(math.Abs(w-6) < 0.2) {
		t.Errorf("width of the range of 400 is %v, want about 6", w)
	}
}

// Source: η(n) and ξ(n) in 40-digit arithmetic by python3 mpmath; means by the
// weights of Luo et al. (2018) [memory], written out.
func TestMedianConversions(t *testing.T) {
	const eta25, eta50, xi25 = 1.272073481391651467291, 1.310093015453383083083, 3.92843368389725739598
	for _, tt := range []struct {
		name     string
		got      func() (FromMedian, Conversion, error)
		mean, sd float64
		skew     float64
		skewed   bool
	}{
		{"quartiles, symmetric", func() (FromMedian, Conversion, error) { return FromQuartiles(8, 10, 12, 50) }, 10, 4 / eta50, 0, false},
		{"quartiles, skewed", func() (FromMedian, Conversion, error) { return FromQuartiles(8, 10, 16, 25) },
			(0.7+0.39/25)*12 + (0.3-0.39/25)*10, 8 / eta25, 0.5, true},
		{"quartiles at the limit", func() (FromMedian, Conversion, error) { return FromQuartiles(0, 3, 8, 25) },
			(0.7+0.39/25)*4 + (0.3-0.39/25)*3, 8 / eta25, 0.25, false},
		{"range", func() (FromMedian, Conversion, error) { return FromRange(2, 10, 22, 25) },
			4/(4+math.Pow(25, 0.75))*12 + (1-4/(4+math.Pow(25, 0.75)))*10, 20 / xi25, 0.2, false},
		{"all five", func() (FromMedian, Conversion, error) { return FromFiveNumbers(2, 8, 10, 16, 22, 25) },
			2.2/(2.2+math.Pow(25, 0.75))*12 + (0.7-0.72/math.Pow(25, 0.55))*12 +
				(0.3-2.2/(2.2+math.Pow(25, 0.75))+0.72/math.Pow(25, 0.55))*10,
			(20/xi25 + 8/eta25) / 2, 0.5, true},
	} {
		got, step, err := tt.got()
		if err != nil {
			t.Errorf("%s: %v", tt.name, err)
			continue
		}
		if !relative(got.Arm.Mean, tt.mean, 1e-13) || !relative(got.Arm.SD, tt.sd, 1e-12) {
			t.Errorf("%s: %+v, want mean %v, sd %v", tt.name, got, tt.mean, tt.sd)
		}
		if !near(got.Skewness, tt.skew, 1e-14) || got.Skewed != tt.skewed {
			t.Errorf("%s: skewness %v, %v", tt.name, got.Skewness, got.Skewed)
		}
		if step.To[0].Value != got.Arm.Mean || step.To[1].Value != got.Arm.SD || step.From[len(step.From)-1].Value != got.Arm.N {
			t.Errorf("%s: conversion %+v", tt.name, step)
		}
	}
}

// The weights of Luo et al. (2018) are of least variance for normal samples.
// Source: weights of least variance from 100,000 samples each (40,000 of 401) by
// python3 numpy: covariance of mid-range, mid-quartile and median, solved.
func TestLuoWeightsAreBest(t *testing.T) {
	mean := func(got FromMedian, _ Conversion, err error) float64 {
		if err != nil {
			t.Fatal(err)
		}
		return got.Arm.Mean
	}
	for _, tt := range []struct{ n, ends, quarters, five1, five2 float64 }{
		{9, 0.4289, 0.7361, 0.2879, 0.4724}, {25, 0.2653, 0.7161, 0.1656, 0.5710},
		{101, 0.1108, 0.7041, 0.0667, 0.6481}, {401, 0.0389, 0.6960, 0.0246, 0.6774},
	} {
		// A median of 0 and one middle at 1 leave that middle's weight as the mean.
		for _, w := range []struct {
			name      string
			got, want float64
		}{
			{"mid-range", mean(FromRange(-1, 0, 3, tt.n)), tt.ends},
			{"mid-quartile", mean(FromQuartiles(-1, 0, 3, tt.n)), tt.quarters},
			{"mid-range of five", mean(FromFiveNumbers(-2, -1, 0, 1, 4, tt.n)), tt.five1},
			{"mid-quartile of five", mean(FromFiveNumbers(-5, -1, 0, 3, 5, tt.n)), tt.five2},
		} {
			if !(math.Abs(w.got-w.want) <= 0.013) {
				t.Errorf("n = %v: weight of the %s %v, want %v", tt.n, w.name, w.got, w.want)
			}
		}
	}
}

// Another unit and an offset move the mean along and multiply the standard
// deviation; turned round, the mean turns and the rest stays.
func TestMedianProperties(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		n := float64(rapid.IntRange(2, 2000).Draw(t, "total"))
		gap := func(name string) float64 { return rapid.Float64Range(0.01, 10).Draw(t, name) }
		x := []float64{rapid.Float64Range(-50, 50).Draw(t, "min")}
		for _, name := range []string{"to q1", "to median", "to q3", "to max"} {
			x = append(x, x[len(x)-1]+gap(name))
		}
		unit, offset := rapid.Float64Range(0.01, 100).Draw(t, "unit"), rapid.Float64Range(-50, 50).Draw(t, "offset")
		moved, turned := make([]float64, 5), make([]float64, 5)
		for i, v := range x {
			moved[i], turned[4-i] = unit*v+offset, -v
		}
		for name, f := range map[string]func(x []float64) (FromMedian, Conversion, error){
			"quartiles": func(x []float64) (FromMedian, Conversion, error) { return FromQuartiles(x[1], x[2], x[3], n) },
			"range":     func(x []float64) (FromMedian, Conversion, error) { return FromRange(x[0], x[2], x[4], n) },
			"five": func(x []float64) (FromMedian, Conversion, error) {
				return FromFiveNumbers(x[0], x[1], x[2], x[3], x[4], n)
			},
		} {
			a, _, err := f(x)
			b, _, errB := f(moved)
			c, _, errC := f(turned)
			if err != nil || errB != nil || errC != nil {
				t.Fatal(name, err, errB, errC)
			}
			if !(a.Arm.SD > 0) || !(math.Abs(b.Arm.Mean-(unit*a.Arm.Mean+offset)) <= 1e-11*(100+100*unit)) || !relative(b.Arm.SD, unit*a.Arm.SD, 1e-8) {
				t.Fatalf("%s: %+v, moved %+v", name, a, b)
			}
			if !near(c.Arm.Mean, -a.Arm.Mean, 1e-12) || !relative(c.Arm.SD, a.Arm.SD, 1e-10) || !near(c.Skewness, a.Skewness, 1e-10) {
				t.Fatalf("%s: %+v, turned %+v", name, a, c)
			}
		}
	})
}
