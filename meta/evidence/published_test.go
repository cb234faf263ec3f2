package evidence

import (
	"math"
	"testing"

	"steelyard/meta/numeric"
)

// TestNormalPublished: the corrected column of PUBLISHED.md §14, recomputed
// there from the closed form exp((z²-1)/2)/√2; p is printed beside it.
func TestNormalPublished(t *testing.T) {
	for _, tt := range []struct{ z, p, corrected, bound, calibrated float64 }{
		{0, 1, 0.42888, 1, math.NaN()},
		{1, 0.31731, 0.7071, 0.60653, 0.99009},
		{1.645, 0.09997, 1.6594, 0.25846, 0.62580},
		{1.96, 0.05000, 2.9277, 0.14649, 0.40714},
		{2.576, 0.01000, 11.8380, 0.03623, 0.12513},
		{2.807, 0.00500, 22.0442, 0.01946, 0.07202},
		{3.291, 0.00100, 96.4251, 0.00445, 0.01875},
		{3.890, 0.00010, 828.38, 0.00052, 0.00251},
	} {
		if got := Normal(tt.z).Odds(); !(math.Abs(got-tt.corrected) <= 6e-6*max(10, tt.corrected)) {
			t.Errorf("Normal(%g) = %.6g : 1, want %g", tt.z, got, tt.corrected)
		}
		if got := 1 / Bound(tt.z).Odds(); !(math.Abs(got-tt.bound) <= 6e-6) {
			t.Errorf("1/Bound(%g) = %.6g, want %g", tt.z, got, tt.bound)
		}
		p := 2 * numeric.NormalTail(tt.z)
		if math.Abs(p-tt.p) > 6e-6 {
			t.Errorf("p of z = %g is %.6g, want %g", tt.z, p, tt.p)
		}
		if math.IsNaN(tt.calibrated) {
			continue
		}
		if got := 1 / PValueBound(p).Odds(); !(math.Abs(got-tt.calibrated) <= 6e-6) {
			t.Errorf("1/PValueBound(%.5g) = %.6g, want %g", p, got, tt.calibrated)
		}
	}
	// Goodman, Annals of Internal Medicine 1999;130:1005-1013, from memory.
	for z, want := range map[float64]float64{1.64: 0.26, 1.96: 0.15, 2.58: 0.036, 3.28: 0.005} {
		if got := 1 / Bound(z).Odds(); !(math.Abs(got-want) <= 0.0055) {
			t.Errorf("smallest Bayes factor at z = %g is %.4f, want %g", z, got, want)
		}
	}
}

// TestMethodsNumbers: the numbers that the methods text prints, computed there
// in 40-digit arithmetic or by simulation.
func TestMethodsNumbers(t *testing.T) {
	for _, tt := range []struct {
		what           string
		got, want, tol float64
	}{
		{"z = 0 for no effect", Normal(0).Inverse().Odds(), 2.33, 0.005},
		{"z = 2, BF₀₁", Normal(2).Inverse().Odds(), 0.3156, 5e-5},
		{"t with p = 0.05, 1 df", Student(numeric.StudentCritical(0.05, 1), 1).Odds(), 21, 0.5},
		{"t with p = 0.05, 2 df", Student(numeric.StudentCritical(0.05, 2), 2).Odds(), 8.0, 0.05},
		{"t with p = 0.05, 3 df", Student(numeric.StudentCritical(0.05, 3), 3).Odds(), 5.7, 0.05},
		{"t with p = 0.05, 4 df", Student(numeric.StudentCritical(0.05, 4), 4).Odds(), 4.8, 0.05},
		{"t = 0, 1 df", Student(0, 1).Inverse().Odds(), 7.7, 0.05},
		{"t = 0, 4 df", Student(0, 4).Inverse().Odds(), 3.1, 0.05},
		{"one-sided at z → -∞: (1 + 2 ln 2)/2", OneSided(-1e8).Inverse().Ln(), 0.5 + math.Ln2, 1e-12},
		{"b₁ at n = 3", 2.5 * (numeric.Digamma(2.5) - numeric.Digamma(1) - math.Ln2), 1.468, 5e-4},
		{"b₁ - b₀ at n = 6", correctionF(1, 5), 1.181 - 0.541, 1e-3},
		{"b₁ - b₀ at n = 13", correctionF(1, 12), 1.074 - 0.519, 1e-3},
		{"b₁ - b₀ of many df, 3 parameters", correctionF(3, 1e15), 1.5, 1e-12},
		{"p = 1", PValue(1).Inverse().Odds(), math.E * math.E / 2, 1e-12},
		{"p = 1e-400", PValueFromLn(-400 * math.Ln10).Ln(), 399 * math.Ln10, 1e-9},
		{"p = 0", PValue(0).Ln(), math.Inf(1), 0},
		{"exact form held at its cap", PValueExact(0.9).Inverse().Odds(), math.E * math.E / 2, 1e-12},
		{"exact form for small p: e³/2·p", PValueExact(1e-200).Ln(), math.Ln2 - 3 + 200*math.Ln10, 1e-10},
		{"bound for p ≥ 1/e", PValueBound(0.4).Ln(), 0, 0},
		{"bound at p = 0", PValueBound(0).Ln(), math.Inf(1), 0},
	} {
		if !(tt.got == tt.want || math.Abs(tt.got-tt.want) <= tt.tol) {
			t.Errorf("%s = %.8g, want %g ± %g", tt.what, tt.got, tt.want, tt.tol)
		}
	}
	// The |t| at which the matched form passes steps 1 and 2 at 1 to 4 df, to half a unit of the last digit printed.
	for _, tt := range []struct{ t, df, steps, half float64 }{
		{17, 1, 1, 0.5}, {5.0, 2, 1, 0.05}, {3.6, 3, 1, 0.05}, {3.1, 4, 1, 0.05},
		{76, 1, 2, 0.5}, {11, 2, 2, 0.5}, {6.2, 3, 2, 0.05}, {4.9, 4, 2, 0.05},
	} {
		below, above := Matched(tt.t-tt.half, tt.df).Steps(), Matched(tt.t+tt.half, tt.df).Steps()
		if !(below < tt.steps && tt.steps < above) {
			t.Errorf("matched, %g df: %.4f steps at t = %g and %.4f at %g, want %g between", tt.df, below, tt.t-tt.half, above, tt.t+tt.half, tt.steps)
		}
	}
	// Strong evidence for "no important effect" at z = 0 needs δ of 1.16, 2.24,
	// 2.79, 3.24 standard errors for step 1 to 4 over its complement.
	for i, delta := range []float64{1.16, 2.24, 2.79, 3.24} {
		inside := Region{{Low: -delta, High: delta}}
		r, err := normalAt(0).Region(inside, inside.Complement())
		if want := float64(i + 1); err != nil || !(math.Abs(r.Steps()-want) <= 0.03) {
			t.Errorf("δ = %g: %.4f steps, %v, want %g", delta, r.Steps(), err, want)
		}
	}
}

// TestFormsAgree: forms that are limits or special cases of each other.
func TestFormsAgree(t *testing.T) {
	inf := math.Inf(1)
	for _, z := range []float64{0, 0.3, 1, -2, 3.5, 12, 40, -20000} {
		for name, r := range map[string]Ratio{
			"ChiSquare":         ChiSquare(z*z, 1),
			"Matched, inf df":   Matched(z, inf),
			"MatchedF, inf df":  MatchedF(z*z, 1, inf),
			"Student, inf df":   Student(z, inf),
			"F, inf df":         F(z*z, 1, inf),
			"Student, 1e30 df":  Student(z, 1e30),
			"Matched, 1e30 df":  Matched(z, 1e30),
			"MatchedF, 1e30 df": MatchedF(z*z, 1, 1e30),
		} {
			if want := Normal(z); !near(r.Ln(), want.Ln(), 2e-9) {
				t.Errorf("%s at z = %g: %.12g, want the normal form %.12g", name, z, r.Ln(), want.Ln())
			}
		}
		if got, want := OneSidedStudent(z, 1e14).Ln(), OneSided(z).Ln(); math.Abs(z) < 50 && !near(got, want, 1e-8) {
			t.Errorf("OneSidedStudent(%g, 1e14) = %.12g, want %.12g", z, got, want)
		}
		if OneSidedStudent(z, inf) != OneSided(z) || OneSidedMatched(z, inf) != OneSided(z) || BoundStudent(z, inf) != Bound(z) {
			t.Errorf("infinite df at z = %g differ from the normal law", z)
		}
		if got, want := MatchedF(z*z, 1, 7).Ln(), Matched(z, 7).Ln(); !near(got, want, 1e-10) {
			t.Errorf("MatchedF(%g, 1, 7) = %.12g, want Matched = %.12g", z*z, got, want)
		}
		if got, want := F(z*z, 1, 7).Ln(), Student(z, 7).Ln(); !near(got, want, 1e-12) {
			t.Errorf("F(%g, 1, 7) = %.12g, want Student = %.12g", z*z, got, want)
		}
	}
	// Far out the matched and Student forms stay finite and in order.
	if got := Matched(1e160, 1).Ln(); !(got > 300 && got < 800) {
		t.Errorf("Matched(1e160, 1) = %g, want about ln of its t, 368", got)
	}
	// ln BF falls by (n/2)·ln t² = 2n·ln 10·100 from t = 1 to t = 1e200 at least.
	if got, want := Student(1e200, 3).Ln()-Student(1e100, 3).Ln(), 4*100*math.Ln10; !near(got, want, 1e-12) {
		t.Errorf("Student from 1e100 to 1e200 rises by %.12g, want %.12g", got, want)
	}
}

// TestInvalidForms: what cannot be weighed holds NaN; nothing panics.
func TestInvalidForms(t *testing.T) {
	nan := math.NaN()
	for name, r := range map[string]Ratio{
		"Normal(NaN)":             Normal(nan),
		"ChiSquare(-1, 3)":        ChiSquare(-1, 3),
		"ChiSquare(1, 0)":         ChiSquare(1, 0),
		"Matched(NaN, 3)":         Matched(nan, 3),
		"Matched(1, 0)":           Matched(1, 0),
		"MatchedF(-1, 1, 3)":      MatchedF(-1, 1, 3),
		"MatchedF(1, 1, -3)":      MatchedF(1, 1, -3),
		"Student(1, 0)":           Student(1, 0),
		"Student(NaN, 3)":         Student(nan, 3),
		"F(-1, 1, 3)":             F(-1, 1, 3),
		"F(1, NaN, 3)":            F(1, nan, 3),
		"OneSided(NaN)":           OneSided(nan),
		"OneSidedStudent(NaN, 3)": OneSidedStudent(nan, 3),
		"OneSidedStudent(1, -3)":  OneSidedStudent(1, -3),
		"OneSidedMatched(1, NaN)": OneSidedMatched(1, nan),
		"PValue(-0.1)":            PValue(-0.1),
		"PValue(1.1)":             PValue(1.1),
		"PValueExact(NaN)":        PValueExact(nan),
		"PValueExact(2)":          PValueExact(2),
		"PValueBound(-1)":         PValueBound(-1),
		"PValueFromLn(0.1)":       PValueFromLn(0.1),
		"Bound(NaN)":              Bound(nan),
		"BoundStudent(1, 0)":      BoundStudent(1, 0),
	} {
		if !math.IsNaN(r.Ln()) {
			t.Errorf("%s = %g, want NaN", name, r.Ln())
		}
	}
}

func TestPosterior(t *testing.T) {
	for _, tt := range []struct {
		name             string
		prior, ln, after float64
	}{
		{"even odds, 3 : 1", 0.5, math.Log(3), 0.75},
		{"1 : 3, 9 : 1", 0.25, math.Log(9), 0.75},
		{"certain stays certain", 1, -1e9, 1},
		{"excluded stays excluded", 0, 1e9, 0},
		{"excluded stays excluded by p = 0", 0, math.Inf(1), 0},
		{"certain stays certain against anything", 1, math.Inf(-1), 1},
		{"overwhelming", 0.01, 2e8, 1},
		{"overwhelming against", 0.99, -2e8, 0},
		{"no evidence", 0.3, 0, 0.3},
		{"tiny prior: odds 1e-300·e^100", 1e-300, 100, 1e-300 * math.Exp(100)},
	} {
		if got := Posterior(tt.prior, FromLn(tt.ln)); !near(got/tt.after, 1, 1e-12) && got != tt.after {
			t.Errorf("%s: %.15g, want %.15g", tt.name, got, tt.after)
		}
	}
	for _, got := range []float64{Posterior(-0.1, Ratio{}), Posterior(1.1, Ratio{}), Posterior(math.NaN(), Ratio{}), Posterior(0.5, invalid()), DoubtersPrior(Ratio{}, 2)} {
		if !math.IsNaN(got) {
			t.Errorf("invalid prior gives %g, want NaN", got)
		}
	}
	// At 194 : 1 for the effect a level of 0.5 needs a prior of 1/195.
	if got := DoubtersPrior(FromLn(math.Log(194)), 0.5); !near(got*195, 1, 1e-12) {
		t.Errorf("doubter's prior at 194 : 1 = %g, want 1/195", got)
	}
}
