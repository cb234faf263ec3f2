package explain

import (
	"context"
	"encoding/csv"
	"errors"
	"fmt"
	"math"
	"os"
	"strconv"
	"strings"
	"testing"

	"steelyard/meta"
	"steelyard/meta/evidence"
)

// bcg returns the log odds ratios of the 13 BCG trials with latitude and year:
// Colditz et al., JAMA 1994;271:698-702.
func bcg(t testing.TB) (y, s, latitude, year []float64) {
	t.Helper()
	y, s, year = readChecks(t, "bcg_lor")
	return y, s, []float64{44, 55, 42, 52, 13, 44, 19, 13, 27, 42, 18, 33, 33}, year
}

// readChecks returns the estimates of a data set of the check values.
func readChecks(t testing.TB, name string) (y, s, order []float64) {
	t.Helper()
	f, err := os.Open("../../testdata/checks/" + name + ".csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	number := func(text string) float64 {
		x, err := strconv.ParseFloat(text, 64)
		if err != nil {
			t.Fatal(err)
		}
		return x
	}
	for _, row := range rows[1:] {
		y, s = append(y, number(row[1])), append(s, number(row[2]))
		if len(row) > 3 {
			order = append(order, number(row[3]))
		}
	}
	return y, s, order
}

// numbers returns a covariate of numbers.
func numbers(t testing.TB, name string, values []float64) *Covariate {
	t.Helper()
	var cells []Cell
	for i, x := range values {
		cells = append(cells, Cell{Study: fmt.Sprint("trial ", i+1), Where: fmt.Sprint("S!B", i+2), Text: fmt.Sprint(x), Number: x, Numeric: true})
	}
	c, err := ReadCovariate(name, cells, "")
	if err != nil {
		t.Fatal(err)
	}
	return c
}

// texts returns the cells of a column of texts.
func texts(values ...string) []Cell {
	var cells []Cell
	for i, text := range values {
		x, err := strconv.ParseFloat(text, 64)
		cells = append(cells, Cell{Study: fmt.Sprint("trial ", i+1), Where: fmt.Sprint("S!B", i+2), Text: text, Number: x, Numeric: err == nil})
	}
	return cells
}

// designed returns the design of a formula over covariates.
func designed(t testing.TB, formula string, covariates ...*Covariate) *Design {
	t.Helper()
	terms, err := ParseTerms(formula)
	if err != nil {
		t.Fatal(err)
	}
	d, err := NewDesign(terms, covariates)
	if err != nil {
		t.Fatal(err)
	}
	return d
}

func near(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance*max(1e-300, math.Abs(want))) {
		t.Errorf("%s: got %.15g, want %.15g", what, got, want)
	}
}

// The residual τ² of the BCG trials by each estimator. The values are from dense
// matrix algebra in 40-digit arithmetic (mpmath): P = W − WX(XᵀWX)⁻¹XᵀW written out
// for each method of moments, the Paule–Mandel root and all roots of the two scores
// by bracketing.
func TestResidualTau2OfBCG(t *testing.T) {
	y, s, latitude, year := bcg(t)
	one := designed(t, "latitude", numbers(t, "latitude", latitude))
	two := designed(t, "latitude, year", numbers(t, "latitude", latitude), numbers(t, "year", year))
	for _, c := range []struct {
		method   meta.TauMethod
		one, two float64
	}{
		{meta.DerSimonianLaird, 0.04798952020857209, 0.06665247184392781},
		{meta.TwoStepDerSimonianLaird, 0.1031673490097345, 0.1342015961443516},
		{meta.HedgesOlkin, 0.2090913238672222, 0.2321581516927833},
		{meta.HunterSchmidt, 0.02160687740530021, 0.02145811553915243},
		{meta.SidikJonkman, 0.2365106395691528, 0.255168530546966},
		{meta.PauleMandel, 0.1373638259785645, 0.1632035551062784},
		{meta.MaximumLikelihood, 0.003998401009823107, 0.002094393009769211},
		{meta.RestrictedML, 0.05043307403124557, 0.09133613229517244},
	} {
		for _, d := range []struct {
			design *Design
			want   float64
		}{{one, c.one}, {two, c.two}} {
			r, err := Regress(meta.Model{Tau: c.method, Level: 0.95}, y, s, d.design)
			if err != nil {
				t.Fatal(err)
			}
			near(t, c.method.String(), r.Residual.Tau2, d.want, 1e-9)
		}
	}
}

// The coefficients and F of BCG on latitude and on latitude and year by restricted
// ML, in 40-digit dense matrix algebra (mpmath) at the root of the score.
func TestCoefficientsOfBCG(t *testing.T) {
	y, s, latitude, year := bcg(t)
	model := meta.Model{Interval: meta.HartungKnapp, Level: 0.95}
	r, err := Regress(model, y, s, designed(t, "latitude", numbers(t, "latitude", latitude)))
	if err != nil {
		t.Fatal(err)
	}
	near(t, "intercept", r.Coefficients[0].Estimate, -0.7541244653560953, 1e-9)
	near(t, "its se", r.Coefficients[0].SE, 0.1140548440995891, 1e-9)
	near(t, "slope", r.Coefficients[1].Estimate, -0.03153380345615264, 1e-9)
	near(t, "its se", r.Coefficients[1].SE, 0.007517037192266669, 1e-9)
	near(t, "F", r.Whole.F, 17.59783797551344, 1e-8)
	near(t, "residual Q", r.Residual.Q, 25.09541766635601, 1e-9)
	near(t, "t² and F", r.Coefficients[1].Statistic*r.Coefficients[1].Statistic, r.Whole.F, 1e-10)
	near(t, "evidence of t and of F", r.Whole.Evidence.Ln(), evidence.Matched(math.Sqrt(17.59783797551344), 11).Ln(), 1e-8)
	near(t, "R²", *r.R2, 1-0.05043307403124557/0.337772, 1e-5) // τ² without latitude: checks/PUBLISHED.md
	if r.DF != 11 {
		t.Errorf("df %v, want 11", r.DF)
	}

	r, err = Regress(model, y, s, designed(t, "latitude, year", numbers(t, "latitude", latitude), numbers(t, "year", year)))
	if err != nil {
		t.Fatal(err)
	}
	near(t, "latitude", r.Coefficients[1].Estimate, -0.0288178703746754, 1e-8)
	near(t, "se of latitude", r.Coefficients[1].SE, 0.01077437305880991, 1e-8)
	near(t, "year", r.Coefficients[2].Estimate, 0.005455802473943379, 1e-8)
	near(t, "se of year", r.Coefficients[2].SE, 0.01565695698709334, 1e-8)
	near(t, "F", r.Whole.F, 6.327930076371062, 1e-8)

	r, err = Regress(meta.Model{Interval: meta.Wald, Level: 0.95}, y, s, designed(t, "latitude", numbers(t, "latitude", latitude)))
	if err != nil {
		t.Fatal(err)
	}
	near(t, "model's se", r.Coefficients[1].SE, 0.006275800018416898, 1e-9)
	near(t, "χ²", r.Whole.F, 25.24727558660768, 1e-8)
	near(t, "ln p", r.Coefficients[1].LnP, r.Whole.LnP, 1e-9)
}

// The second route for BCG on latitude: the log-likelihoods written out with the
// closed form of a straight line, maximised by golden section over ln τ².
func TestBCGByMaximisingTheLikelihood(t *testing.T) {
	y, s, x, _ := bcg(t)
	line := func(tau2 float64) (slope, q, logs, logDet float64) {
		var sw, swx, swxx, swy, swxy float64
		for i := range y {
			w := 1 / (s[i]*s[i] + tau2)
			sw, swx, swxx, swy, swxy = sw+w, swx+w*x[i], swxx+w*x[i]*x[i], swy+w*y[i], swxy+w*x[i]*y[i]
			logs -= math.Log(w)
		}
		det := sw*swxx - swx*swx
		slope = (sw*swxy - swx*swy) / det
		intercept := (swy - slope*swx) / sw
		for i := range y {
			residual := y[i] - intercept - slope*x[i]
			q += residual * residual / (s[i]*s[i] + tau2)
		}
		return slope, q, logs, math.Log(det)
	}
	for _, restricted := range []bool{true, false} {
		height := func(lnTau2 float64) float64 {
			_, q, logs, logDet := line(math.Exp(lnTau2))
			if !restricted {
				logDet = 0
			}
			return -(logs + q + logDet) / 2
		}
		low, high := math.Log(1e-5), math.Log(2.)
		for range 200 {
			const golden = 0.6180339887498949
			a, b := high-golden*(high-low), low+golden*(high-low)
			if height(a) > height(b) {
				high = b
			} else {
				low = a
			}
		}
		tau2 := math.Exp((low + high) / 2)
		slope, _, _, _ := line(tau2)
		method := meta.MaximumLikelihood
		if restricted {
			method = meta.RestrictedML
		}
		r, err := Regress(meta.Model{Tau: method, Level: 0.95}, y, s, designed(t, "latitude", numbers(t, "latitude", x)))
		if err != nil {
			t.Fatal(err)
		}
		near(t, method.String(), r.Residual.Tau2, tau2, 1e-6) // a maximum by its heights alone
		near(t, "slope", r.Coefficients[1].Estimate, slope, 1e-6)
	}
}

// Published regression of the log odds ratio on latitude by maximum likelihood: van
// Houwelingen, Arends & Stijnen, Statistics in Medicine 2002;21:589-624, from memory:
// 0.371 (se 0.106) − 0.0327 (0.0034) × latitude, τ² 0.004.
func TestPublishedBCGOnLatitude(t *testing.T) {
	y, s, latitude, _ := bcg(t)
	d := designed(t, "latitude", numbers(t, "latitude", latitude))
	r, err := Regress(meta.Model{Tau: meta.MaximumLikelihood, Interval: meta.Wald, Level: 0.95}, y, s, d)
	if err != nil {
		t.Fatal(err)
	}
	row, err := d.Row([]Point{{Covariate: "Latitude", Number: 0}})
	if err != nil {
		t.Fatal(err)
	}
	zero := r.At(row)
	for _, c := range []struct {
		what            string
		got, want, half float64
	}{
		{"effect at latitude 0", zero.Estimate, 0.371, 0.0005}, {"its se", zero.SE, 0.106, 0.0005},
		{"slope", r.Coefficients[1].Estimate, -0.0327, 0.00005}, {"its se", r.Coefficients[1].SE, 0.0034, 0.00005},
		{"τ²", r.Residual.Tau2, 0.004, 0.0005},
	} {
		if math.Abs(c.got-c.want) > c.half {
			t.Errorf("%s: %v, published %v", c.what, c.got, c.want)
		}
	}
}

// With equal standard errors and a common effect the variance factor makes the
// regression the general one of least squares. Anscombe (1973), American Statistician
// 27:17-21, table of the first data set: y = 3 + 0.5x, se of the slope 0.118, R²
// 0.667, regression sum of squares 27.50 on 1 df, residual 13.75 on 9.
func TestGeneralRegressionInTheCommonEffectLimit(t *testing.T) {
	x := []float64{10, 8, 13, 9, 11, 14, 6, 4, 12, 7, 5}
	y := []float64{8.04, 6.95, 7.58, 8.81, 8.33, 9.96, 7.24, 4.26, 10.84, 4.82, 5.68}
	s := make([]float64, len(x))
	for i := range s {
		s[i] = 1
	}
	d := designed(t, "x", numbers(t, "x", x))
	r, err := Regress(meta.Model{Effects: meta.CommonEffect, Interval: meta.HartungKnapp, Level: 0.95}, y, s, d)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "slope", r.Coefficients[1].Estimate, 0.5, 0.001)
	near(t, "se", r.Coefficients[1].SE, 0.118, 0.002)
	near(t, "F", r.Whole.F, 27.50/(13.75/9), 0.002)
	near(t, "residual", r.Residual.Q, 13.75, 0.001)
	if r.R2 != nil || r.Fitted[0].Prediction != nil {
		t.Error("a common effect has no τ² to share out, and no prediction")
	}
}

// Fitted values and predictions against the formula, with the 2×2 covariance
// written out.
func TestFittedValues(t *testing.T) {
	y, s, x, _ := bcg(t)
	d := designed(t, "latitude", numbers(t, "latitude", x))
	r, err := Regress(meta.Model{Interval: meta.HartungKnapp, Level: 0.9}, y, s, d)
	if err != nil {
		t.Fatal(err)
	}
	const tau2, q = 0.05043307403124557, 1.434680534150734 // mpmath, as above
	const t11, t10 = 1.795884818704043, 1.812461122811676  // Student's t, 90 %: published tables, 1.796 and 1.812
	var sw, swx, swxx float64
	for i := range y {
		w := 1 / (s[i]*s[i] + tau2)
		sw, swx, swxx = sw+w, swx+w*x[i], swxx+w*x[i]*x[i]
	}
	for i := range y {
		variance := (swxx - 2*x[i]*swx + x[i]*x[i]*sw) / (sw*swxx - swx*swx)
		fit := -0.7541244653560953 - 0.03153380345615264*(x[i]-435./13)
		f := r.Fitted[i]
		near(t, "fit", f.Estimate, fit, 1e-8)
		near(t, "low", f.Low, fit-t11*math.Sqrt(q*variance), 1e-8)
		near(t, "predicted high", f.Prediction.High, fit+t10*math.Sqrt(tau2+variance), 1e-8)
	}
}

func TestRegressionRefuses(t *testing.T) {
	y, s, latitude, year := bcg(t)
	sum := make([]float64, len(y))
	for i := range sum {
		sum[i] = 2*latitude[i] - 3*year[i] + 7
	}
	lat, yr := numbers(t, "latitude", latitude), numbers(t, "year", year)
	for _, c := range []struct {
		name   string
		y, s   []float64
		design *Design
		want   []string
	}{
		{"collinear", y, s, designed(t, "latitude, year, sum", lat, yr, numbers(t, "sum", sum)), []string{`"sum"`, `"latitude", "year"`, "leave one"}},
		{"too few", y[:3], s[:3], designed(t, "latitude, year", numbers(t, "latitude", latitude[:3]), numbers(t, "year", year[:3])), []string{"3 studies cannot carry 3 coefficients", "at least 4"}},
		{"rows", y[:5], s[:5], designed(t, "latitude", lat), []string{"5 estimates", "13 studies"}},
	} {
		_, err := Regress(meta.Model{Level: 0.95}, c.y, c.s, c.design)
		var design *DesignError
		if !errors.As(err, &design) {
			t.Errorf("%s: error %v, want a DesignError", c.name, err)
			continue
		}
		for _, part := range c.want {
			if !strings.Contains(err.Error(), part) {
				t.Errorf("%s: %q lacks %q", c.name, err, part)
			}
		}
	}
	bad := append([]float64{math.NaN()}, y[1:]...)
	if _, err := Regress(meta.Model{Level: 0.95}, bad, s, designed(t, "latitude", lat)); err == nil {
		t.Error("an estimate that is no number was taken")
	}
}

func TestPermutationsStopWhenTold(t *testing.T) {
	y, s, latitude, _ := bcg(t)
	d := designed(t, "latitude", numbers(t, "latitude", latitude))
	r, err := Regress(meta.Model{Level: 0.95}, y, s, d)
	if err != nil {
		t.Fatal(err)
	}
	ctx, stop := context.WithCancel(context.Background())
	done := 0
	err = r.Permute(ctx, y, s, d, 1_000_000, 1, meta.Work{Progress: func(n, total int) {
		if done = n; total != 1_000_000 {
			t.Errorf("total %d", total)
		}
		stop()
	}})
	if !errors.Is(err, context.Canceled) || done > 10_000 {
		t.Errorf("error %v after %d permutations", err, done)
	}
}

// Every permutation of 7 studies, by Heap's algorithm, with DerSimonian and Laird's
// τ² and the straight line in closed form.
func TestExactPermutationAgainstEnumeration(t *testing.T) {
	y, s, _ := readChecks(t, "aspirin_lor")
	x := []float64{3, 1, 4, 1, 5, 9, 2} // two are tied
	fValue := func(x []float64) float64 {
		sums := func(tau2 float64) (slope, det, sw, q, trace float64) {
			var swx, swxx, swy, swxy, w2, w2x, w2xx float64
			for i := range y {
				w := 1 / (s[i]*s[i] + tau2)
				sw, swx, swxx, swy, swxy = sw+w, swx+w*x[i], swxx+w*x[i]*x[i], swy+w*y[i], swxy+w*x[i]*y[i]
				w2, w2x, w2xx = w2+w*w, w2x+w*w*x[i], w2xx+w*w*x[i]*x[i]
			}
			det = sw*swxx - swx*swx
			slope = (sw*swxy - swx*swy) / det
			intercept := (swy - slope*swx) / sw
			for i := range y {
				residual := y[i] - intercept - slope*x[i]
				q += residual * residual / (s[i]*s[i] + tau2)
			}
			return slope, det, sw, q, sw - (w2*swxx-2*w2x*swx+w2xx*sw)/det
		}
		_, _, _, q, trace := sums(0)
		tau2 := math.Max(0, (q-5)/trace)
		slope, det, sw, q, _ := sums(tau2)
		return slope * slope * det / sw / (q / 5)
	}
	observed, count, total := fValue(x), 0, 0
	var heap func(k int, x []float64)
	heap = func(k int, x []float64) {
		if k == 1 {
			total++
			if fValue(x) >= observed*(1-1e-9) {
				count++
			}
			return
		}
		for i := range k {
			heap(k-1, x)
			if k%2 == 0 {
				x[i], x[k-1] = x[k-1], x[i]
			} else {
				x[0], x[k-1] = x[k-1], x[0]
			}
		}
	}
	heap(7, append([]float64(nil), x...))
	d := designed(t, "x", numbers(t, "x", x))
	r, err := Regress(meta.Model{Tau: meta.DerSimonianLaird, Interval: meta.HartungKnapp, Level: 0.95}, y, s, d)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "F", r.Whole.F, observed, 1e-9)
	if err := r.Permute(context.Background(), y, s, d, 1000, 1, meta.Work{}); err != nil {
		t.Fatal(err)
	}
	if !r.Permutation.Exact || r.Permutation.Count != total || total != 5040 {
		t.Errorf("%+v, want all %d", r.Permutation, total)
	}
	near(t, "p", r.Permutation.P, float64(count)/5040, 1e-12)
	near(t, "p of the term", r.Terms[0].PermutedP, float64(count)/5040, 1e-12)

	drawn, err := Regress(meta.Model{Tau: meta.DerSimonianLaird, Interval: meta.HartungKnapp, Level: 0.95}, y, s, d)
	if err != nil {
		t.Fatal(err)
	}
	m, err := newSystem(y, s, d.Columns(), true)
	if err != nil {
		t.Fatal(err)
	}
	p := &permuting{regression: drawn, terms: 1, n: 20_000, seed: 3}
	counts, err := p.run(context.Background(), m, meta.Work{})
	if err != nil {
		t.Fatal(err)
	}
	exact := float64(count) / 5040
	if got := float64(counts[1]) / 20_000; math.Abs(got-exact) > 5*math.Sqrt(exact*(1-exact)/20_000) {
		t.Errorf("drawn %v, exact %v", got, exact)
	}
}

// BCG's slope is far out: hardly any permutation reaches it, whoever counts.
func TestPermutationsForAnyNumberOfWorkers(t *testing.T) {
	y, s, latitude, year := bcg(t)
	d := designed(t, "latitude*year", numbers(t, "latitude", latitude), numbers(t, "year", year))
	var first *Regression
	for _, workers := range []int{1, 2, 5} {
		r, err := Regress(meta.Model{Level: 0.95}, y, s, d)
		if err != nil {
			t.Fatal(err)
		}
		if err := r.Permute(context.Background(), y, s, d, 500, 7, meta.Work{Workers: workers}); err != nil {
			t.Fatal(err)
		}
		if first == nil {
			first = r
			continue
		}
		for i := range r.Terms {
			if r.Terms[i].PermutedP != first.Terms[i].PermutedP || r.Permutation.P != first.Permutation.P {
				t.Errorf("%d workers: %v, one: %v", workers, r.Terms[i], first.Terms[i])
			}
		}
	}
}

func BenchmarkRegress(b *testing.B) {
	y, s, latitude, _ := bcg(b)
	d := designed(b, "latitude", numbers(b, "latitude", latitude))
	for b.Loop() {
		if _, err := Regress(meta.Model{Level: 0.95}, y, s, d); err != nil {
			b.Fatal(err)
		}
	}
}

// BenchmarkPermute is 1,000 permutations of BCG on latitude.
func BenchmarkPermute(b *testing.B) {
	y, s, latitude, _ := bcg(b)
	d := designed(b, "latitude", numbers(b, "latitude", latitude))
	r, err := Regress(meta.Model{Level: 0.95}, y, s, d)
	if err != nil {
		b.Fatal(err)
	}
	for b.Loop() {
		if err := r.Permute(context.Background(), y, s, d, 1000, 1, meta.Work{}); err != nil {
			b.Fatal(err)
		}
	}
}
