package dependence

import (
	"errors"
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/optimize"
	"pgregory.net/rapid"

	"steelyard/meta"
	"steelyard/meta/evidence"
)

// Invented estimates of six studies, of which four give several.
var (
	within   = []float64{0.61, 0.02, 0.95, 0.18, 0.61, -0.40, 0.15, 1.30, 0.52, 0.83, 0.20, 0.35}
	between  = []float64{0.31, 0.12, 0.55, 0.48, 0.61, -0.10, 0.05, 0.90, 0.72, 0.83, 0.20, 0.35}
	se       = []float64{0.12, 0.20, 0.15, 0.18, 0.25, 0.10, 0.14, 0.30, 0.22, 0.26, 0.16, 0.11}
	clusters = []int{0, 0, 1, 1, 1, 2, 2, 3, 3, 3, 4, 5}
)

var model = meta.Model{Level: 0.95}

func near(t *testing.T, what string, got, want, relTol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= relTol*math.Abs(want)) {
		t.Errorf("%s: %.17g, want %.17g", what, got, want)
	}
}

// TestAgainstReference compares with dense matrices in 30 digits with mpmath: the
// restricted likelihood by its gradient's root, the robust variance and its degrees
// of freedom by full projection matrices.
func TestAgainstReference(t *testing.T) {
	for _, c := range []struct {
		y                               []float64
		b2, a2, mean, meanSE            float64
		tau2, robust, robustSE, freedom float64
	}{
		{between, 0.070734402963452294, 0, 0.34032327030656759, 0.11887628988710217, 0.058611838337224469, 0.36466040951593725, 0.13933090740028283, 4.4723873398118674},
		{within, 0.065951280955270184, 0.10663062543728034, 0.38508034507496415, 0.15289715380653056, 0.16740655326129458, 0.41265886075355325, 0.16521110689747101, 4.3564585355287903},
	} {
		f, err := Fit(ThreeLevel, model, c.y, se, clusters)
		if err != nil {
			t.Fatal(err)
		}
		near(t, "between", f.Clustered.Between, c.b2, 3e-7)
		near(t, "within", f.Clustered.Within, c.a2, 3e-7)
		near(t, "mean", f.Mean.Estimate, c.mean, 1e-7)
		near(t, "its se", f.Mean.SE, c.meanSE, 1e-7)
		near(t, "df", f.Mean.DF, 5, 0)
		if f.Mean.Evidence != evidence.Matched(f.Mean.Statistic, 5) {
			t.Errorf("evidence %v is not that of t on 5 df", f.Mean.Evidence)
		}
		f, err = Fit(Robust, model, c.y, se, clusters)
		if err != nil {
			t.Fatal(err)
		}
		near(t, "τ²", f.Mean.Tau2, c.tau2, 1e-8)
		near(t, "robust mean", f.Mean.Estimate, c.robust, 1e-9)
		near(t, "robust se", f.Mean.SE, c.robustSE, 1e-9)
		near(t, "robust df", f.Mean.DF, c.freedom, 1e-9)
		if f.Mean.Evidence != evidence.Matched(f.Mean.Statistic, f.Mean.DF) {
			t.Errorf("evidence %v is not that of t on %v df", f.Mean.Evidence, f.Mean.DF)
		}
	}
}

// dense is the covariance matrix of all estimates under three levels.
func dense(v []float64, groups []int, b2, a2 float64) *mat.SymDense {
	k := len(v)
	m := mat.NewSymDense(k, nil)
	for i := range k {
		for j := i; j < k; j++ {
			x := 0.0
			if groups[i] == groups[j] {
				x = b2
			}
			if i == j {
				x += v[i] + a2
			}
			m.SetSym(i, j, x)
		}
	}
	return m
}

// densely returns −2 × the restricted log likelihood, but for a constant, with the
// mean and its variance, by the inverse of the full matrix.
func densely(y, v []float64, groups []int, b2, a2 float64) (deviance, mean, variance float64) {
	k := len(y)
	m := dense(v, groups, b2, a2)
	var inverse mat.Dense
	if err := inverse.Inverse(m); err != nil {
		return math.Inf(1), 0, 0
	}
	lnDet, _ := mat.LogDet(m)
	ones, ys := mat.NewVecDense(k, nil), mat.NewVecDense(k, y)
	for i := range k {
		ones.SetVec(i, 1)
	}
	weight := mat.Inner(ones, &inverse, ones)
	mean = mat.Inner(ones, &inverse, ys) / weight
	r := mat.NewVecDense(k, nil)
	r.AddScaledVec(ys, -mean, ones)
	return lnDet + math.Log(weight) + mat.Inner(r, &inverse, r), mean, 1 / weight
}

// drawn is a random set of estimates from random studies.
type drawn struct {
	y, s   []float64
	groups []int
}

func draw(t *rapid.T) drawn {
	k := rapid.IntRange(4, 12).Draw(t, "k")
	return drawn{
		y:      rapid.SliceOfN(rapid.Float64Range(-2, 2), k, k).Draw(t, "y"),
		s:      rapid.SliceOfN(rapid.Float64Range(0.1, 1), k, k).Draw(t, "s"),
		groups: rapid.SliceOfN(rapid.IntRange(0, 4), k, k).Draw(t, "studies"),
	}
}

func (d drawn) v() []float64 {
	v := make([]float64, len(d.s))
	for i, x := range d.s {
		v[i] = x * x
	}
	return v
}

// TestThreeLevelsAgainstDense: for any estimates no variances by the simplex of
// Nelder and Mead, from several starts, are likelier than the fit's by the
// written-out likelihood of the full matrix, and mean, variance and weights are
// those of its inverse.
func TestThreeLevelsAgainstDense(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		d := draw(t)
		f, err := Fit(ThreeLevel, model, d.y, d.s, d.groups)
		if errors.Is(err, ErrNoRepeats) || errors.Is(err, ErrOneStudy) {
			return
		}
		if err != nil {
			t.Fatal(err)
		}
		v := d.v()
		deviance, mean, variance := densely(d.y, v, d.groups, f.Clustered.Between, f.Clustered.Within)
		if math.Abs(mean-f.Mean.Estimate) > 1e-9 || math.Abs(math.Sqrt(variance)-f.Mean.SE) > 1e-9 {
			t.Errorf("mean %v (%v), dense %v (%v)", f.Mean.Estimate, f.Mean.SE, mean, math.Sqrt(variance))
		}
		total := 0.0
		for i, w := range f.Weights {
			total += w
			mean -= w * d.y[i]
		}
		if math.Abs(total-1) > 1e-12 || math.Abs(mean) > 1e-9 {
			t.Errorf("weights sum to %v and miss the mean by %v", total, mean)
		}
		for _, start := range [][]float64{{0.1, 0.1}, {1, 0.1}, {0.1, 1}} {
			r, _ := optimize.Minimize(optimize.Problem{Func: func(x []float64) float64 {
				dev, _, _ := densely(d.y, v, d.groups, x[0]*x[0], x[1]*x[1])
				return dev
			}}, start, &optimize.Settings{Converger: &optimize.FunctionConverge{Absolute: 1e-11, Iterations: 100}}, &optimize.NelderMead{})
			if r != nil && r.F < deviance-1e-7 {
				t.Errorf("deviance %.12g at %v and %v, but %.12g at %v", deviance, f.Clustered.Between, f.Clustered.Within, r.F, r.X)
			}
		}
	})
}

// TestRobustAgainstDense compares with the formulas in full matrices: the projection,
// the adjustment by the inverse root of DBD, and the degrees of freedom by traces.
func TestRobustAgainstDense(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		d := draw(t)
		f, err := Fit(Robust, model, d.y, d.s, d.groups)
		if errors.Is(err, ErrNoRepeats) || errors.Is(err, ErrOneStudy) {
			return
		}
		if err != nil {
			t.Fatal(err)
		}
		variance, freedom := denseRobust(d, f.Mean.Tau2, f.Mean.Estimate)
		if math.Abs(math.Sqrt(variance)/f.Mean.SE-1) > 1e-8 || math.Abs(freedom/f.Mean.DF-1) > 1e-8 {
			t.Errorf("se %v on %v df, dense %v on %v", f.Mean.SE, f.Mean.DF, math.Sqrt(variance), freedom)
		}
	})
}

func denseRobust(d drawn, tau2, mean float64) (variance, freedom float64) {
	k := len(d.y)
	phi, hat := mat.NewDense(k, k, nil), mat.NewDense(k, k, nil)
	total := 0.0
	for i, v := range d.v() {
		phi.Set(i, i, v+tau2)
		total += 1 / (v + tau2)
	}
	for i := range k {
		for j := range k {
			hat.Set(i, j, -1/phi.At(j, j)/total)
		}
		hat.Set(i, i, 1+hat.At(i, i)) // I − H
	}
	var half, residual mat.Dense
	half.Mul(hat, phi)
	residual.Mul(&half, hat.T())
	g := mat.NewDense(k, k, nil)
	for study := range 5 {
		var rows []int
		for i, c := range d.groups {
			if c == study {
				rows = append(rows, i)
			}
		}
		if len(rows) == 0 {
			continue
		}
		n := len(rows)
		b := mat.NewSymDense(n, nil)
		for i, r := range rows {
			for j := i; j < n; j++ {
				b.SetSym(i, j, math.Sqrt(phi.At(r, r)*phi.At(rows[j], rows[j]))*residual.At(r, rows[j]))
			}
		}
		var eigen mat.EigenSym
		eigen.Factorize(b, true)
		var q, root mat.Dense
		eigen.VectorsTo(&q)
		inverse := mat.NewDiagDense(n, nil)
		for i, value := range eigen.Values(nil) {
			inverse.SetDiag(i, 1/math.Sqrt(value))
		}
		root.Product(&q, inverse, q.T())
		full := mat.NewVecDense(k, nil)
		score := 0.0
		for i, r := range rows {
			a := 0.0
			for j, c := range rows {
				a += math.Sqrt(phi.At(r, r)) * root.At(i, j) * math.Sqrt(phi.At(c, c)) / phi.At(c, c) / total
			}
			full.SetVec(r, a)
			score += a * (d.y[r] - mean)
		}
		variance += score * score
		var along mat.VecDense
		along.MulVec(hat.T(), full)
		g.RankOne(g, 1, &along, &along)
	}
	var p, pp mat.Dense
	p.Mul(g, phi)
	pp.Mul(&p, &p)
	return variance, mat.Trace(&p) * mat.Trace(&p) / mat.Trace(&pp)
}

// TestRobustAlike: with equal weights and studies of one size the bias-reduced variance
// is that of the studies' means over their number, on studies − 1 degrees of freedom
// (closed form).
func TestRobustAlike(t *testing.T) {
	y := []float64{0, 1, 2, 3, 5, 6, 1, 4}
	s := []float64{1, 1, 1, 1, 1, 1, 1, 1}
	f, err := Fit(Robust, meta.Model{Level: 0.95, Effects: meta.CommonEffect}, y, s, []int{1, 1, 2, 2, 3, 3, 4, 4})
	if err != nil {
		t.Fatal(err)
	}
	means := []float64{0.5, 2.5, 5.5, 2.5} // of mean 2.75
	variance := 0.0
	for _, m := range means {
		variance += (m - 2.75) * (m - 2.75) / 3
	}
	near(t, "mean", f.Mean.Estimate, 2.75, 1e-14)
	near(t, "se", f.Mean.SE, math.Sqrt(variance/4), 1e-12)
	near(t, "df", f.Mean.DF, 3, 1e-12)
}

// TestRefused: what cannot be fitted is refused in words.
func TestRefused(t *testing.T) {
	y, s := []float64{1, 2, 3}, []float64{1, 1, 2}
	for _, c := range []struct {
		way  Way
		m    meta.Model
		in   []int
		want error
	}{
		{ThreeLevel, model, []int{1, 2, 3}, ErrNoRepeats}, {Robust, model, []int{1, 2, 3}, ErrNoRepeats},
		{ThreeLevel, model, []int{7, 7, 7}, ErrOneStudy}, {Robust, model, []int{7, 7, 7}, ErrOneStudy},
		{ThreeLevel, meta.Model{Level: 0.95, Effects: meta.CommonEffect}, []int{1, 1, 2}, ErrCommon},
	} {
		if _, err := Fit(c.way, c.m, y, s, c.in); !errors.Is(err, c.want) {
			t.Errorf("%v %v: %v", c.way, c.in, err)
		}
	}
	for _, bad := range [][]float64{{math.NaN(), 1, 2}, {math.Inf(1), 1, 2}} {
		var input *meta.InputError
		if _, err := Fit(Robust, model, bad, s, []int{1, 1, 2}); !errors.As(err, &input) {
			t.Errorf("%v: %v", bad, err)
		}
	}
	if f, err := Fit(Independent, model, y, s, []int{1, 1, 2}); err != nil || f.Clustered != nil {
		t.Errorf("independent: %+v, %v", f, err)
	}
}

// TestEdges: two studies, equal estimates, and huge z give numbers and say what is
// weak about them.
func TestEdges(t *testing.T) {
	for _, y := range [][]float64{{1, 1, 1}, {0, 1, 5}, {20000, 20001, 19990}, {1e-9, 1.1e-9, 2e-9}} {
		for _, way := range []Way{ThreeLevel, Robust} {
			f, err := Fit(way, model, y, []float64{0.5, 0.7, 1.5}, []int{1, 1, 2})
			if way == Robust && y[0] == 1 {
				if !errors.Is(err, ErrNoScatter) {
					t.Errorf("equal estimates: %v", err)
				}
				continue
			}
			if err != nil {
				t.Errorf("%v %v: %v", way, y, err)
				continue
			}
			for _, x := range []float64{f.Mean.Estimate, f.Mean.SE, f.Mean.LnP, f.Mean.Low, f.Mean.High, f.Mean.DF} {
				if math.IsNaN(x) || math.IsInf(x, 0) {
					t.Errorf("%v %v: %+v", way, y, f.Mean)
				}
			}
			if len(f.Caveats) == 0 {
				t.Errorf("%v %v: two studies, and no caveat", way, y)
			}
		}
	}
}

func BenchmarkFit(b *testing.B) {
	for _, way := range []Way{ThreeLevel, Robust} {
		for _, k := range []int{12, 300} {
			y, s, c := make([]float64, k), make([]float64, k), make([]int, k)
			for i := range y {
				y[i], s[i], c[i] = within[i%12]+0.01*float64(i%7), se[i%12], i/3
			}
			b.Run(way.String()+map[int]string{12: "/12", 300: "/300"}[k], func(b *testing.B) {
				for b.Loop() {
					if _, err := Fit(way, model, y, s, c); err != nil {
						b.Fatal(err)
					}
				}
			})
		}
	}
}
