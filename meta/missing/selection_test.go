package missing

import (
	"errors"
	"math"
	"testing"

	"gonum.org/v1/gonum/optimize"
	"pgregory.net/rapid"

	"steelyard/meta"
)

// writtenOut is the log likelihood of the selection model as published, for effects
// sought above 0 and a step at z = 1.959963984540054 (one-sided p 0.025).
func writtenOut(y, s []float64, mu, tau, rate float64) float64 {
	const c = 1.959963984540054
	phi := func(z float64) float64 { return math.Erfc(-z/math.Sqrt2) / 2 }
	sum := 0.0
	for i := range y {
		sigma := math.Sqrt(s[i]*s[i] + tau*tau)
		above := phi((c*s[i] - mu) / sigma)
		weight := 1.0
		if y[i] <= c*s[i] {
			weight = rate
		}
		density := math.Exp(-math.Pow((y[i]-mu)/sigma, 2)/2) / (sigma * math.Sqrt(2*math.Pi))
		sum += math.Log(density * weight / (1 - above + rate*above))
	}
	return sum
}

// highest maximises the written-out likelihood over what is free by the simplex of
// Nelder and Mead from several starts.
func highest(t *testing.T, f func(x []float64) float64, starts ...[]float64) float64 {
	t.Helper()
	best := math.Inf(-1)
	for _, start := range starts {
		r, err := optimize.Minimize(optimize.Problem{Func: func(x []float64) float64 { return -f(x) }}, start,
			&optimize.Settings{Converger: &optimize.FunctionConverge{Absolute: 1e-13, Iterations: 400}}, &optimize.NelderMead{})
		if r == nil {
			t.Fatal(err)
		}
		best = math.Max(best, -r.F)
	}
	return best
}

// TestSelectionAgainstReference compares with the maximum of the written-out
// likelihood by Newton's method in 25 digits with mpmath, started from the best of
// a grid.
func TestSelectionAgainstReference(t *testing.T) {
	for name, want := range map[string][3]float64{
		"bcg_lor":         {-0.66360228484862735, 0.31340329801062381, 0.68358107496806889},
		"betablocker_lor": {-0.25793939553936388, 0.010606521166186784, 1.128851138581},
		"aspirin_lor":     {-0.28329377322622128, 0.025549010366443816, 8.8296942951896688},
	} {
		y, s := pairs(t, name)
		r, err := OneStep(plain, y, s, 0.025, Lower)
		if err != nil {
			t.Fatal(err)
		}
		near(t, name+" mean", r.Mean.Estimate, want[0], 3e-7)
		near(t, name+" τ²", r.Mean.Tau2, want[1], 3e-6)
		near(t, name+" rate", r.Rate, want[2], 3e-6)
	}
}

// TestSelectionAgainstDirectMaximum holds interval, test against no effect and test
// of selection against direct maximisation of the written-out likelihood.
func TestSelectionAgainstDirectMaximum(t *testing.T) {
	y, s := pairs(t, "bcg_lor")
	r, err := OneStep(plain, y, s, 0.025, Lower)
	if err != nil {
		t.Fatal(err)
	}
	turned := make([]float64, len(y))
	for i := range y {
		turned[i] = -y[i]
	}
	rest := [][]float64{{-1, 0}, {-2, 1}, {0, -2}}
	at := func(mu float64) float64 {
		return highest(t, func(x []float64) float64 { return writtenOut(turned, s, mu, math.Exp(x[0]), math.Exp(x[1])) }, rest...)
	}
	all := highest(t, func(x []float64) float64 { return writtenOut(turned, s, x[0], math.Exp(x[1]), math.Exp(x[2])) },
		[]float64{0.5, -1, 0}, []float64{0, -1, -1}, []float64{1, -2, 1})
	near(t, "maximum", writtenOut(turned, s, -r.Mean.Estimate, math.Sqrt(r.Mean.Tau2), r.Rate), all, 1e-10)
	const chi = 3.841458820694124 // 95% quantile of χ² on 1 df, published tables
	near(t, "at the lower limit", 2*(all-at(-r.Mean.Low)), chi, 1e-6)
	near(t, "at the upper limit", 2*(all-at(-r.Mean.High)), chi, 1e-6)
	near(t, "statistic against no effect", r.Mean.Statistic, -math.Sqrt(2*(all-at(0))), 1e-6)
	plainest := highest(t, func(x []float64) float64 { return writtenOut(turned, s, x[0], math.Exp(x[1]), 1) }, []float64{0.5, -1})
	near(t, "χ² of selection", r.Chi2, 2*(all-plainest), 1e-6)
}

// TestSelectionFinds simulated selection: of 400 studies with no effect, those that
// are not significant are seen with a chance of 0.2; the plain mean is far above 0,
// the adjusted one near it, and the rate near 0.2.
func TestSelectionFinds(t *testing.T) {
	random := newTestRandom(5)
	var y, s []float64
	for len(y) < 400 {
		se := 0.1 + 0.4*random()
		est := 0.2*normal(random) + se*normal(random)
		if est > 1.959964*se || random() < 0.2 {
			y, s = append(y, est), append(s, se)
		}
	}
	r, err := OneStep(plain, y, s, 0.025, Higher)
	if err != nil {
		t.Fatal(err)
	}
	naive, _ := plain.Fit(y, s)
	if !(naive.Mean.Estimate > 0.1 && math.Abs(r.Mean.Estimate) < 0.08 && r.Rate > 0.12 && r.Rate < 0.35 && r.Evidence.Steps() > 4) {
		t.Errorf("plain %v, adjusted %v, rate %v, %v steps", naive.Mean.Estimate, r.Mean.Estimate, r.Rate, r.Evidence.Steps())
	}
}

func newTestRandom(seed uint64) func() float64 {
	return func() float64 { // a linear congruence by Knuth, high bits
		seed = seed*6364136223846793005 + 1442695040888963407
		return float64(seed>>11) / (1 << 53)
	}
}

func normal(random func() float64) float64 {
	return math.Sqrt(-2*math.Log(1-random())) * math.Cos(2*math.Pi*random())
}

// TestSelectionOneSide: nothing is told about what is not seen if no study lies on
// the other side of the step.
func TestSelectionOneSide(t *testing.T) {
	for _, y := range [][]float64{{5, 6, 7}, {0, 0.1, -0.1}} {
		if _, err := OneStep(plain, y, []float64{1, 1.5, 2}, 0.025, Higher); !errors.Is(err, ErrOneSide) {
			t.Errorf("%v: %v", y, err)
		}
	}
	for _, step := range []float64{0, -1, 0.5, math.NaN()} {
		if _, err := OneStep(plain, []float64{1, 2, 9}, []float64{1, 1.5, 2}, step, Higher); err == nil {
			t.Errorf("step %v was taken", step)
		}
	}
}

// TestUnits: another unit or origin of the estimates changes what it must and nothing
// else, for any studies.
func TestUnits(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		k := rapid.IntRange(4, 12).Draw(t, "k")
		y := rapid.SliceOfN(rapid.Float64Range(-3, 3), k, k).Draw(t, "y")
		s := rapid.SliceOfN(rapid.Float64Range(0.1, 2), k, k).Draw(t, "s")
		for i := range y {
			y[i] = math.Round(1024*y[i]) / 1024 // a shift must not take digits away
		}
		shift, scale := rapid.Float64Range(-5, 5).Draw(t, "shift"), rapid.SampledFrom([]float64{0.25, 4, 1024}).Draw(t, "scale")
		moved := meta.Model{Level: 0.95, Null: shift}
		y2, s2 := make([]float64, k), make([]float64, k)
		for i := range y {
			y2[i], s2[i] = shift+scale*y[i], scale*s[i]
		}
		same := func(what string, a, b meta.Mean, size float64) {
			if math.Abs(shift+scale*a.Estimate-b.Estimate) > 1e-5*scale*size || math.Abs(a.Evidence.Ln()-b.Evidence.Ln()) > 1e-4*(1+math.Abs(a.Evidence.Ln())) {
				t.Errorf("%s: %v becomes %v, evidence %v becomes %v", what, a.Estimate, b.Estimate, a.Evidence.Ln(), b.Evidence.Ln())
			}
		}
		if a, err := PETPEESE(plain, y, s); err == nil {
			b, err := PETPEESE(moved, y2, s2)
			if err != nil {
				t.Fatal(err)
			}
			same("PET", a.PET, b.PET, 1+math.Abs(a.PET.Estimate))
			same("PEESE", a.PEESE, b.PEESE, 1+math.Abs(a.PEESE.Estimate))
		}
		if rapid.IntRange(0, 4).Draw(t, "selection") > 0 {
			return // it takes longest
		}
		a, err := OneStep(plain, y, s, 0.025, Higher)
		if err != nil {
			return
		}
		if math.IsNaN(a.Rate) || math.IsNaN(a.Mean.Low) || math.IsNaN(a.Mean.High) || !(a.Mean.Low <= a.Mean.Estimate && a.Mean.Estimate <= a.Mean.High) {
			t.Errorf("%+v", a)
		}
	})
}

func BenchmarkOneStep(b *testing.B) {
	for _, k := range []int{13, 200} {
		random := newTestRandom(1)
		y, s := make([]float64, k), make([]float64, k)
		for i := range y {
			s[i] = 0.1 + 0.4*random()
			y[i] = 0.3 + 0.2*normal(random) + s[i]*normal(random)
		}
		b.Run(map[int]string{13: "13", 200: "200"}[k], func(b *testing.B) {
			for b.Loop() {
				if _, err := OneStep(plain, y, s, 0.025, Higher); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}

func BenchmarkTests(b *testing.B) {
	y, s := pairs(b, "betablocker_lor")
	for b.Loop() {
		_, _ = Egger(plain, y, s)
		_, _ = EggerMixed(plain, y, s)
		_, _ = BeggMazumdar(y, s)
		_, _ = TrimAndFill(plain, y, s, TrimAndFillL, Lower)
	}
}
