package sparse

import (
	"errors"
	"math"
	"testing"

	"pgregory.net/rapid"

	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
)

// Sources: the first row of BCG is the fit of a general statistics environment
// (README of the check values: 21-point adaptive quadrature, its optimiser leaves
// about 2e-6). All other numbers: the same likelihood with the intercepts at
// their maxima by 4,001 equally spaced points over ±9, maximised by Nelder–Mead
// and solved for by bisection in numpy and scipy 1.10.1, which leaves about 1e-7
// in the mean, 1e-6 in τ² and se.
func TestBinomialNormalAgainstReference(t *testing.T) {
	random := Model{Method: BinomialNormal}
	r := mustFit(t, random, bcg(t))
	compare(t,
		want{"estimate", r.Mean.Estimate, -0.7450017, 5e-6}, want{"se", r.Mean.SE, 0.1755564, 1e-5}, want{"τ²", r.Mean.Tau2, 0.2948871, 5e-6},
	)
	for _, tt := range []struct {
		name                    string
		tables                  []effect.Table
		mu, tau2, z, low, high  float64
		tau2Low, tau2High, se   float64
		seTol, tauTol, limitTol float64
	}{
		{"BCG", bcg(t), -0.745003462, 0.294885978, -3.39259780, -1.12729549, -0.38138027, 0.11377009, 0.86375490, 0.1755622, 1e-6, 1e-6, 1e-7},
		{"magnesium", magnesium, -0.650219508, 0.131537805, -2.39850364, -1.36331010, -0.16167405, 0, 1.32196483, 0.2795238, 1e-5, 1e-6, 1e-6},
		{"thin", thin, -1.105842480, 0, -2.26033025, -2.05279806, -0.24684555, 0, 2.45043193, 0, math.Inf(1), 1e-7, 1e-6},
	} {
		t.Run(tt.name, func(t *testing.T) {
			r := mustFit(t, random, tt.tables)
			compare(t,
				want{"estimate", r.Mean.Estimate, tt.mu, 2e-7}, want{"τ²", r.Mean.Tau2, tt.tau2, tt.tauTol},
				want{"se", r.Mean.SE, tt.se, tt.seTol}, want{"z", r.Mean.Statistic, tt.z, 1e-6},
				want{"low", r.Mean.Low, tt.low, tt.limitTol}, want{"high", r.Mean.High, tt.high, tt.limitTol},
				want{"τ² low", r.Tau2.Low, tt.tau2Low, 1e-6}, want{"τ² high", r.Tau2.High, tt.tau2High, 1e-5},
				want{"evidence", r.Mean.Evidence.Ln(), evidence.Normal(tt.z).Ln(), 1e-5},
			)
		})
	}
}

// twoMaxima are two tables whose likelihood, at means around 3, has one maximum at
// a small spread and another at a large one.
var twoMaxima = tablesOf([4]float64{5, 6, 106, 111}, [4]float64{20, 34, 27, 145})

// Source: as TestBinomialNormalAgainstReference, the best spread for a mean being
// the best of 17 starts.
func TestBinomialNormalTwoMaxima(t *testing.T) {
	r := mustFit(t, Model{Method: BinomialNormal}, twoMaxima)
	compare(t,
		want{"estimate", r.Mean.Estimate, 1.6766262665, 1e-7}, want{"τ²", r.Mean.Tau2, 0, 0},
		want{"low", r.Mean.Low, -1.58628380, 1e-7}, want{"high", r.Mean.High, 2.54806547, 1e-7},
		want{"z", r.Mean.Statistic, 1.46085275, 1e-7},
	)
}

// No spread on a fine grid has a higher likelihood than the best one, whatever
// the mean, also where τ = 0 is a maximum beside it.
func TestBestSpreadIsHighest(t *testing.T) {
	l := newLogistic(tablesOf([4]float64{3, 10, 99, 161}, [4]float64{128, 166, 2, 7}), 1.96)
	common, err := l.bestMean(0, 0)
	if err != nil {
		t.Fatal(err)
	}
	if err := l.search(common); err != nil {
		t.Fatal(err)
	}
	both := false
	for mu := -3.0; mu <= 3; mu += 0.25 {
		best, err := l.bestSpreadAnywhere(mu)
		if err != nil {
			t.Fatal(err)
		}
		none, err := l.at(mu, 0)
		if err != nil {
			t.Fatal(err)
		}
		both = both || best.tau > 0 && none.slopeTau2 < 0
		for tau := 0.0; tau < 20; tau += 0.05 {
			if p, err := l.at(mu, tau); err != nil || p.lnL > best.lnL+1e-9 {
				t.Fatalf("mean %v: %v at spread %v, %v at the best %v; %v", mu, p.lnL, tau, best.lnL, best.tau, err)
			}
		}
	}
	if !both {
		t.Error("no mean has two maxima: they try nothing")
	}
}

// newtonLogistic fits a logistic model with an intercept for each study and one
// coefficient for treatment, coded ±½, by Newton's method on the full matrix, and
// returns the coefficient, its standard error and the deviance.
func newtonLogistic(tables []effect.Table) (beta, se, deviance float64) {
	k := len(tables)
	b := make([]float64, k+1)
	for range 50 {
		size := k + 1
		h := make([][]float64, size)
		for i := range h {
			h[i] = make([]float64, size+1)
		}
		deviance = 0
		for i, x := range tables {
			for _, arm := range [][3]float64{{x.Events1, x.Total1, 0.5}, {x.Events2, x.Total2, -0.5}} {
				y, n, code := arm[0], arm[1], arm[2]
				p := 1 / (1 + math.Exp(-b[i]-code*b[k]))
				w := n * p * (1 - p)
				h[i][i] += w
				h[i][k] += code * w
				h[k][i] += code * w
				h[k][k] += code * code * w
				h[i][size] += y - n*p
				h[k][size] += code * (y - n*p)
				if y > 0 {
					deviance += 2 * y * math.Log(y/(n*p))
				}
				if y < n {
					deviance += 2 * (n - y) * math.Log((n-y)/(n*(1-p)))
				}
			}
		}
		for i := range size { // Gauss–Jordan; the treatment comes last
			for j := range size {
				if j == i {
					continue
				}
				f := h[j][i] / h[i][i]
				for c := i; c <= size; c++ {
					h[j][c] -= f * h[i][c]
				}
			}
		}
		for i := range size {
			b[i] += h[i][size] / h[i][i]
		}
		se = 1 / math.Sqrt(h[k][k])
	}
	return b[k], se, deviance
}

// Source: the logistic model fitted anew in the test on its full matrix; the
// residual deviance is the heterogeneity.
func TestLogisticCommonEffect(t *testing.T) {
	informative := append(append([]effect.Table{}, thin[:3]...), thin[4:]...)
	for name, tables := range map[string][]effect.Table{"BCG": bcg(t), "magnesium": magnesium, "beta-blockers": betaBlockers, "thin": informative} {
		t.Run(name, func(t *testing.T) {
			beta, se, deviance := newtonLogistic(tables)
			r := mustFit(t, Model{Method: BinomialNormal, Effects: meta.CommonEffect}, tables)
			compare(t,
				want{"estimate", r.Mean.Estimate, beta, 1e-9}, want{"se", r.Mean.SE, se, 1e-9},
				want{"deviance", r.Heterogeneity.Q, deviance, 1e-8}, want{"df", float64(r.Heterogeneity.DF), float64(len(tables) - 1), 0},
				want{"τ²", r.Mean.Tau2, 0, 0},
			)
			if r.Tau2 != nil {
				t.Errorf("limits of τ² beside a common effect: %v", r.Tau2)
			}
		})
	}
}

// Source: closed form. One table has the model of two shares: estimate ln ad/bc
// with variance 1/a + 1/b + 1/c + 1/d, and 2(l_max − l(0)) is the likelihood-ratio
// statistic G² = 2Σ O ln(O/E) of the table.
func TestBinomialNormalOneTable(t *testing.T) {
	a, b, c, d := 12.0, 88.0, 25.0, 95.0
	n := a + b + c + d
	g := 0.0
	for _, x := range [][3]float64{{a, a + b, a + c}, {b, a + b, b + d}, {c, c + d, a + c}, {d, c + d, b + d}} {
		g += 2 * x[0] * math.Log(x[0]*n/(x[1]*x[2]))
	}
	for _, effects := range []meta.Effects{meta.RandomEffects, meta.CommonEffect} {
		r := mustFit(t, Model{Method: BinomialNormal, Effects: effects}, tablesOf([4]float64{a, a + b, c, c + d}))
		compare(t,
			want{"estimate", r.Mean.Estimate, math.Log(a * d / (b * c)), 1e-12},
			want{"se", r.Mean.SE, math.Sqrt(1/a + 1/b + 1/c + 1/d), 1e-12},
			want{"z", r.Mean.Statistic, -math.Sqrt(g), 1e-9},
		)
		if r.Model.Effects != meta.CommonEffect || r.Heterogeneity != nil || r.Tau2 != nil {
			t.Errorf("one table: %v, %v, %v", r.Model.Effects, r.Heterogeneity, r.Tau2)
		}
	}
}

// bruteForce returns the marginal log-likelihood of a study by 20,001 equally
// spaced points over ±12 round its mode, less that of the observed shares.
func bruteForce(s study, alpha, mu, tau float64) float64 {
	const half, points = 12.0, 20001
	step := 2 * half / (points - 1)
	lnBinomial := func(y, n, logit float64) float64 {
		if logit > 0 {
			return -(n-y)*logit - n*math.Log1p(math.Exp(-logit))
		}
		return y*logit - n*math.Log1p(math.Exp(logit))
	}
	top, values := math.Inf(-1), make([]float64, points)
	for i := range values {
		u := s.mode - half + step*float64(i)
		theta := mu + tau*u
		values[i] = lnBinomial(s.events1, s.total1, alpha+theta/2) + lnBinomial(s.events2, s.total2, alpha-theta/2) - u*u/2
		top = max(top, values[i])
	}
	sum := 0.0
	for _, v := range values {
		sum += math.Exp(v - top)
	}
	return top + math.Log(sum*step/math.Sqrt(2*math.Pi)) - s.saturated
}

// Sources: brute-force integration, and differences of it for the derivatives.
func TestMarginalLikelihood(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		x := drawTable(t, rapid.SampledFrom([]int{20, 3000, 200000}).Draw(t, "size"))
		if m := x.Events1 + x.Events2; m == 0 || m == x.Total1+x.Total2 {
			return
		}
		s := studyOf(x)
		alpha := s.alpha + rapid.Float64Range(-1, 1).Draw(t, "alpha")
		mu, tau := rapid.Float64Range(-3, 3).Draw(t, "mu"), rapid.Float64Range(0.05, 3).Draw(t, "tau")
		got, err := s.integrate(alpha, mu, tau)
		if err != nil {
			t.Fatal(err)
		}
		if direct := bruteForce(s, alpha, mu, tau); !near(got.lnL, direct, 1e-10*(1+math.Abs(direct))) {
			t.Fatalf("%+v at α %v, μ %v, τ %v: %.15g, want %.15g", x, alpha, mu, tau, got.lnL, direct)
		}
		const h = 1e-3
		v := tau * tau
		slope := func(f func(d float64) float64, scale float64) float64 {
			d := h * scale
			return (8*(f(d)-f(-d)) - (f(2*d) - f(-2*d))) / (12 * d)
		}
		scale := 1 / math.Sqrt(1-got.aa)
		for _, w := range []struct {
			name      string
			got, want float64
		}{
			{"α", got.a, slope(func(d float64) float64 { return bruteForce(s, alpha+d, mu, tau) }, scale)},
			{"μ", got.m, slope(func(d float64) float64 { return bruteForce(s, alpha, mu+d, tau) }, scale)},
			{"τ²", got.tau2, slope(func(d float64) float64 { return bruteForce(s, alpha, mu, math.Sqrt(v+d)) }, 0.1*v)},
		} {
			if tol := 1e-4 * (1 + math.Abs(w.want)) * max(1, 1/scale); !near(w.got, w.want, tol) {
				t.Fatalf("%+v at α %v, μ %v, τ %v: slope in %s %.12g, want %.12g", x, alpha, mu, tau, w.name, w.got, w.want)
			}
		}
	})
}

// With large arms and common events the model is that of normal estimates with
// known errors, and its likelihood that of meta. Source: package meta, maximum
// likelihood with the profile-likelihood interval, itself checked against
// 40-digit values; the binomial laws differ from normal ones by 1/√counts.
func TestBinomialNormalTendsToNormal(t *testing.T) {
	const n = 2e6
	var tables []effect.Table
	var y, s []float64
	for i, p := range []float64{0.30, 0.33, 0.28, 0.41, 0.35, 0.38} {
		x := effect.Table{Events1: p * n, Total1: n, Events2: (0.36 + 0.01*float64(i%3)) * n, Total2: n}
		e, _, err := effect.FromTable(effect.OddsRatio, x, effect.NoCorrection)
		if err != nil {
			t.Fatal(err)
		}
		tables, y, s = append(tables, x), append(y, e.Y), append(s, e.SE)
	}
	normal, err := meta.Model{Tau: meta.MaximumLikelihood, Interval: meta.ProfileLikelihood, TauInterval: meta.TauProfileLikelihood, Level: 0.95}.Fit(y, s)
	if err != nil {
		t.Fatal(err)
	}
	r := mustFit(t, Model{Method: BinomialNormal}, tables)
	compare(t,
		want{"estimate", r.Mean.Estimate, normal.Mean.Estimate, 1e-6}, want{"τ²", r.Mean.Tau2, normal.Mean.Tau2, 1e-6},
		want{"low", r.Mean.Low, normal.Mean.Low, 1e-5}, want{"high", r.Mean.High, normal.Mean.High, 1e-5},
		want{"z", r.Mean.Statistic, normal.Mean.Statistic, 1e-4},
		want{"τ² low", r.Tau2.Low, normal.Tau2.Low, 1e-6}, want{"τ² high", r.Tau2.High, normal.Tau2.High, 1e-5},
	)
}

// None against all one way and the other: the tables say nothing of how far they
// are apart, and the likelihood rises with the spread without end.
func TestBinomialNormalUnbounded(t *testing.T) {
	var unbounded *UnboundedError
	_, err := Model{Method: BinomialNormal, Level: 0.95}.Fit(tablesOf([4]float64{0, 10, 10, 10}, [4]float64{10, 10, 0, 10}))
	if !errors.As(err, &unbounded) {
		t.Errorf("none against all, both ways: %v", err)
	}
}
