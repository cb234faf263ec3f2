package bayes

import (
	"errors"
	"math"
	"testing"

	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
)

func mustWeigh(t testing.TB, o Observation, p EffectPrior) float64 {
	t.Helper()
	r, err := o.Weigh(p)
	if err != nil {
		t.Fatalf("%+v under %+v: %v", o, p, err)
	}
	return r.Ln()
}

// TestHalvesAverageToWhole: a symmetric prior is the even mixture of its halves.
func TestHalvesAverageToWhole(t *testing.T) {
	for _, kind := range []EffectPriorKind{NormalPrior, CauchyPrior} {
		for _, z := range []float64{0, 0.3, -2, 5, -40, 300, 20000} {
			for _, g := range []float64{1e-6, 0.01, 0.7, 30, 1e5} {
				o := Observation{Estimate: 1 + 0.1*z, SE: 0.1, Null: 1}
				whole := mustWeigh(t, o, EffectPrior{Kind: kind, Scale: 0.1 * g})
				above := mustWeigh(t, o, EffectPrior{Kind: kind, Scale: 0.1 * g, Side: AboveNull})
				below := mustWeigh(t, o, EffectPrior{Kind: kind, Scale: 0.1 * g, Side: BelowNull})
				if got := lnSum(above, below) - math.Ln2; !near(got, whole, 1e-9) {
					t.Errorf("%v, z = %v, g = %v: halves %v and %v give %.12g, whole %.12g", kind, z, g, above, below, got, whole)
				}
				if !(whole <= evidence.Bound(o.Z()).Ln()*(1+1e-12)+1e-12) {
					t.Errorf("%v, z = %v, g = %v: %v exceeds the bound", kind, z, g, whole)
				}
				mirrored := Observation{Estimate: 1 - 0.1*z, SE: 0.1, Null: 1}
				if got := mustWeigh(t, mirrored, EffectPrior{Kind: kind, Scale: 0.1 * g, Side: BelowNull}); !near(got, above, 1e-9) {
					t.Errorf("%v, z = %v, g = %v: mirrored %v, want %v", kind, z, g, got, above)
				}
			}
		}
	}
}

// TestHalfNormalByQuadrature integrates the definition for a prior off the null.
func TestHalfNormalByQuadrature(t *testing.T) {
	for _, c := range []struct{ z, m, g float64 }{{2, 1, 0.5}, {-1, 2, 1}, {0.5, -1, 2}, {-3, -0.5, 1}} {
		o := Observation{Estimate: c.z, SE: 1}
		got := mustWeigh(t, o, EffectPrior{Mean: c.m, Scale: c.g, Side: AboveNull})
		area, _, err := numeric.Integrate(func(x float64) float64 {
			return math.Exp(c.z*x-0.5*x*x-0.5*(x-c.m)*(x-c.m)/c.g/c.g) / (c.g * math.Sqrt(2*math.Pi))
		}, 0, 40, 1e-12)
		if err != nil {
			t.Fatal(err)
		}
		if want := math.Log(area / numeric.NormalTail(-c.m/c.g)); !near(got, want, 1e-10) {
			t.Errorf("%+v: %.12g, by quadrature %.12g", c, got, want)
		}
	}
}

// TestPriorLimits: a prior of no width says nothing; a wide one says nothing but
// its own density at the estimate.
func TestPriorLimits(t *testing.T) {
	o := Observation{Estimate: 2, SE: 1}
	for _, kind := range []EffectPriorKind{NormalPrior, CauchyPrior} {
		if got := mustWeigh(t, o, EffectPrior{Kind: kind, Scale: 1e-12}); !near(got, 0, 1e-9) {
			t.Errorf("%v: narrow %v, want 0", kind, got)
		}
	}
	// ln ER → z²/2 + ½ln 2π + ln density of the prior at the estimate.
	const g = 1e9
	flat := 2 + 0.5*math.Log(2*math.Pi)
	if got, want := mustWeigh(t, o, EffectPrior{Scale: g}), flat-math.Log(g*math.Sqrt(2*math.Pi)); !near(got, want, 1e-10) {
		t.Errorf("wide normal %.12g, want %.12g", got, want)
	}
	if got, want := mustWeigh(t, o, EffectPrior{Kind: CauchyPrior, Scale: g}), flat-math.Log(math.Pi*g); !near(got, want, 1e-10) {
		t.Errorf("wide Cauchy %.12g, want %.12g", got, want)
	}
	// A far estimate sees only the Cauchy density there: 1/(πr(1 + z²/r²)), to 1/z².
	far := Observation{Estimate: 1e6, SE: 1}
	want := 0.5e12 + 0.5*math.Log(2*math.Pi) - math.Log(math.Pi*2*(1+0.25e12))
	if got := mustWeigh(t, far, EffectPrior{Kind: CauchyPrior, Scale: 2}); !near(got-0.5e12, want-0.5e12, 1e-3) {
		t.Errorf("z = 1e6: %.15g, want %.15g", got, want)
	}
}

func TestCurveFollowsScales(t *testing.T) {
	o := Observation{Estimate: 0.35, SE: 0.12}
	scales := []float64{0.1, 0.5, 1, 100}
	curve, err := o.Curve(EffectPrior{Kind: CauchyPrior}, scales)
	if err != nil {
		t.Fatal(err)
	}
	for i, scale := range scales {
		if want := mustWeigh(t, o, EffectPrior{Kind: CauchyPrior, Scale: scale}); curve[i].Ln() != want {
			t.Errorf("scale %v: %v, want %v", scale, curve[i].Ln(), want)
		}
	}
	if !(curve[3].Ln() < curve[1].Ln()) {
		t.Error("a vague prior does not drift to no effect")
	}
	if _, err := o.Curve(EffectPrior{}, []float64{1, 0}); err == nil {
		t.Error("a scale of 0 was taken")
	}
}

// TestMatchedKeepsTheP: t = 4.303 on 2 degrees of freedom has p = 0.05 (any t
// table), as z = 1.960.
func TestMatchedKeepsTheP(t *testing.T) {
	l := evidence.Location{Estimate: 4.3026527297494637 * 0.2, SE: 0.2, DF: 2}
	o, err := Matched(l, 0)
	if err != nil {
		t.Fatal(err)
	}
	if o.Estimate != l.Estimate || !near(o.Z(), 1.9599639845400545, 1e-12) {
		t.Errorf("%+v has z = %v", o, o.Z())
	}
	// At the null itself and close by the standard errors join.
	var widths []float64
	for _, x := range []float64{0, 1e-7, 2e-6, 1e-3} {
		at, err := Matched(evidence.Location{Estimate: 1 + x*0.2, SE: 0.2, DF: 3}, 1)
		if err != nil {
			t.Fatal(err)
		}
		widths = append(widths, at.SE)
	}
	for _, w := range widths[1:] {
		if !near(w/widths[0], 1, 1e-6) {
			t.Errorf("standard errors %v near the null", widths)
		}
	}
	normal, err := Matched(evidence.Location{Estimate: 1, SE: 0.2, DF: math.Inf(1)}, 0)
	if err != nil || normal != (Observation{Estimate: 1, SE: 0.2}) {
		t.Errorf("normal: %+v, %v", normal, err)
	}
	if _, err := Matched(evidence.Location{}, 0); !errors.Is(err, evidence.ErrLocation) {
		t.Errorf("no standard error: %v", err)
	}
}

func TestWeighRefusals(t *testing.T) {
	var prior *PriorError
	good := Observation{Estimate: 1, SE: 1}
	for _, p := range []EffectPrior{{}, {Scale: math.NaN()}, {Scale: 1, Mean: math.Inf(1)}, {Kind: CauchyPrior, Mean: 1, Scale: 1}, {Kind: 7, Scale: 1}, {Side: 3, Scale: 1}} {
		if _, err := good.Weigh(p); !errors.As(err, &prior) {
			t.Errorf("%+v: %v", p, err)
		}
	}
	var seen *ObservationError
	for _, o := range []Observation{{Estimate: 1}, {SE: 1, Estimate: math.NaN()}, {SE: -1}, {SE: 1, Null: math.Inf(1)}, {Estimate: 1e300, SE: 1e-300}} {
		if _, err := o.Weigh(EffectPrior{Scale: 1}); !errors.As(err, &seen) {
			t.Errorf("%+v: %v", o, err)
		}
	}
}

// TestScepticismLimit: combined with a normal prior of that limit, the interval
// touches the null.
func TestScepticismLimit(t *testing.T) {
	const low, high, null, z = 0.3, 1.1, 0.1, 1.9599639845400545
	limit, err := ScepticismLimit(low, high, null)
	if err != nil {
		t.Fatal(err)
	}
	se, prior := (high-low)/(2*z), limit/z
	v := 1 / (1/(se*se) + 1/(prior*prior))
	mean := v * ((low+high)/2 - null) / (se * se)
	if got := mean - z*math.Sqrt(v); !near(got, 0, 1e-12) {
		t.Errorf("the combined interval ends at %v", got)
	}
	for _, bad := range [][2]float64{{-1, 1}, {0.1, 2}, {-3, 0.1}} {
		if _, err := ScepticismLimit(bad[0], bad[1], 0.1); !errors.Is(err, ErrIncludesNull) {
			t.Errorf("%v: %v", bad, err)
		}
	}
	var seen *ObservationError
	if _, err := ScepticismLimit(2, 1, 0); !errors.As(err, &seen) {
		t.Errorf("limits in the wrong order: %v", err)
	}
	if _, err := ScepticismLimit(5e-324, 1e200, 0); !errors.As(err, &seen) {
		t.Errorf("limit out of range: %v", err)
	}
}

func TestNamesRoundTrip(t *testing.T) {
	for _, name := range TauPriorNames() {
		var k TauPriorKind
		if err := k.UnmarshalText([]byte(name)); err != nil || k.String() != name {
			t.Errorf("%q: %v, %v", name, k, err)
		}
	}
	for _, name := range EffectPriorNames() {
		var k EffectPriorKind
		if err := k.UnmarshalText([]byte(name)); err != nil || k.String() != name {
			t.Errorf("%q: %v, %v", name, k, err)
		}
	}
	for _, name := range SideNames() {
		var k Side
		if err := k.UnmarshalText([]byte(name)); err != nil || k.String() != name {
			t.Errorf("%q: %v, %v", name, k, err)
		}
	}
}
