package effect

import (
	"errors"
	"math"
	"testing"

	"pgregory.net/rapid"
)

// raw returns the arm of a whole set of measurements, by their definition.
func raw(x []float64) Arm {
	n := float64(len(x))
	var mean, squares float64
	for _, v := range x {
		mean += v / n
	}
	for _, v := range x {
		squares += (v - mean) * (v - mean)
	}
	return Arm{Mean: mean, SD: math.Sqrt(squares / (n - 1)), N: n}
}

// Merged arms are the arm of all their measurements together, in any order.
func TestMergeArmsIsPooling(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		k := rapid.IntRange(1, 5).Draw(t, "arms")
		offset := rapid.SampledFrom([]float64{0, 1e6}).Draw(t, "offset")
		var all []float64
		var arms, turned []Arm
		for range k {
			x := rapid.SliceOfN(rapid.Float64Range(-50, 50), 3, 30).Draw(t, "measurements")
			for i := range x {
				x[i] += offset + float64(i) // never all equal
			}
			all = append(all, x...)
			arms = append(arms, raw(x))
			turned = append([]Arm{raw(x)}, turned...)
		}
		want := raw(all)
		for _, set := range [][]Arm{arms, turned} {
			got, _, err := MergeArms(set...)
			if err != nil || !near(got.Mean, want.Mean, 1e-12) || !relative(got.SD, want.SD, 1e-8) || got.N != want.N {
				t.Fatalf("%+v, %v; want %+v", got, err, want)
			}
		}
	})
}

// Source: Cochrane Handbook 6.5.2.10, its formula for two arms, written out.
func TestMergeArmsFormula(t *testing.T) {
	a, b := Arm{Mean: 5.2, SD: 1.1, N: 30}, Arm{Mean: 4.1, SD: 1.6, N: 45}
	between := 30 * 45 / 75. * (5.2*5.2 + 4.1*4.1 - 2*5.2*4.1)
	sd := math.Sqrt((29*1.21 + 44*2.56 + between) / 74)
	got, step, err := MergeArms(a, b)
	if err != nil || !relative(got.Mean, (30*5.2+45*4.1)/75, 1e-14) || !relative(got.SD, sd, 1e-13) || got.N != 75 || len(step.From) != 6 {
		t.Errorf("%+v, %v; want sd %v", got, err, sd)
	}
}

func TestMergeCounts(t *testing.T) {
	got, step, err := MergeCounts(Counts{3, 40}, Counts{5, 38}, Counts{0, 12})
	if err != nil || got != (Counts{8, 90}) || len(step.From) != 6 {
		t.Errorf("%+v, %v", got, err)
	}
}

// Parts of a split arm merge to the arm: mean and people as they were, the
// standard deviation smaller by √((n−k)/(n−1)), as k−1 of its degrees of freedom
// were lost (closed form).
func TestSplitAndMerge(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a := arm(t, "shared")
		k := rapid.IntRange(1, 5).Draw(t, "comparisons")
		part, _, err := SplitArm(a, k)
		if a.N < float64(2*k) {
			var input *InputError
			if !errors.As(err, &input) {
				t.Fatalf("%v people in %d parts: %v", a.N, k, err)
			}
			return
		}
		if err != nil || !relative(part.N*float64(k), a.N, 1e-14) {
			t.Fatalf("%+v, %v", part, err)
		}
		parts := make([]Arm, k)
		for i := range parts {
			parts[i] = part
		}
		whole, _, err := MergeArms(parts...)
		want := a.SD * math.Sqrt((a.N-float64(k))/(a.N-1))
		if err != nil || !relative(whole.Mean, a.Mean, 1e-12) || !relative(whole.N, a.N, 1e-13) || !relative(whole.SD, want, 1e-11) {
			t.Fatalf("%+v in %d parts merges to %+v, %v; want sd %v", a, k, whole, err, want)
		}
	})
}

// A control arm divided in k leaves the log odds ratio and multiplies the
// control's share of the variance by k.
func TestSplitControl(t *testing.T) {
	x := Table{Events1: 7, Total1: 40, Events2: 9, Total2: 41}
	split, _, err := SplitControl(x, 2)
	if err != nil || split.Counts() != (Table{7, 40, 4.5, 20.5}) {
		t.Fatalf("%+v, %v", split, err)
	}
	e, _, err := FromEffectiveTable(OddsRatio, split, NoCorrection)
	want := 1/7. + 1/33. + 2*(1/9.+1/32.)
	if err != nil || !relative(e.Y, math.Log(7*32/(33*9.)), 1e-13) || !relative(e.SE*e.SE, want, 1e-13) {
		t.Errorf("%+v, %v; want variance %v", e, err, want)
	}
	var input *InputError
	if _, _, err := FromTable(OddsRatio, split.Counts(), NoCorrection); !errors.As(err, &input) || input.Why != "is not a whole number" {
		t.Errorf("a fraction typed in: %v", err)
	}
}

// Source: Cochrane Handbook 23.1.4, its formula; the numbers by hand.
func TestDesignEffect(t *testing.T) {
	deff, step, err := DesignEffect(21, 0.05)
	if err != nil || deff != 2 || step.To[0].Value != 2 {
		t.Fatalf("%v, %v; want 2", deff, err)
	}
	table, _, err := ClusterTable(Table{Events1: 7, Total1: 40, Events2: 9, Total2: 41}, deff)
	if err != nil || table.Counts() != (Table{3.5, 20, 4.5, 20.5}) {
		t.Errorf("%+v, %v", table, err)
	}
	a, _, err := ClusterArm(Arm{Mean: 3, SD: 2, N: 41}, deff)
	if err != nil || a != (Arm{Mean: 3, SD: 2, N: 20.5}) {
		t.Errorf("%+v, %v", a, err)
	}
	if se, _, err := ClusterSE(0.5, deff); err != nil || !relative(se, math.Sqrt(0.5), 1e-15) {
		t.Errorf("%v, %v; want √½", se, err)
	}
}

// Counts, means and standard errors adjusted for clusters agree: without a zero
// cell the effective counts give the estimate of the real ones and its standard
// error times √deff, for every measure and for Peto's nearly so.
func TestClusterProperties(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		x := table(t)
		deff, _, err := DesignEffect(rapid.Float64Range(1, 60).Draw(t, "size"), rapid.Float64Range(0, 1).Draw(t, "icc"))
		if err != nil || deff < 1 || deff > 60 {
			t.Fatal(deff, err)
		}
		adjusted, _, err := ClusterTable(x, deff)
		if err != nil {
			t.Fatal(err)
		}
		for _, m := range []Measure{OddsRatio, RiskRatio, RiskDifference, ArcsineDifference} {
			if _, needed := needsCorrection(m, x); needed {
				continue
			}
			e, _, err := FromTable(m, x, NoCorrection)
			out, _, errOut := FromEffectiveTable(m, adjusted, NoCorrection)
			if errors.Is(err, ErrNothingToCompare) && errors.Is(errOut, ErrNothingToCompare) {
				continue
			}
			if err != nil || errOut != nil {
				t.Fatal(err, errOut)
			}
			se, _, err := ClusterSE(e.SE, deff)
			if err != nil || !near(out.Y, e.Y, 1e-11) || !relative(out.SE, se, 1e-11) {
				t.Fatalf("%v of %+v: %+v; adjusted %+v, want se %v", m, x, e, out, se)
			}
		}
		d, v, err := Peto(x)
		dOut, vOut, errOut := PetoEffective(adjusted)
		if err != nil || errOut != nil {
			return // nothing to compare, or too few people
		}
		n := x.Total1 + x.Total2
		if !near(dOut, d/deff, 1e-11) || !relative(vOut, v/deff*(n-1)/(n-deff), 1e-9) {
			t.Fatalf("Peto of %+v: %v, %v; adjusted by %v %v, %v", x, d, v, deff, dOut, vOut)
		}
	})
}
