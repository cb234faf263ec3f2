package explain

import (
	"math"
	"testing"

	"pgregory.net/rapid"

	"steelyard/meta"
)

var estimators = []meta.TauMethod{
	meta.DerSimonianLaird, meta.TwoStepDerSimonianLaird, meta.HedgesOlkin, meta.HunterSchmidt,
	meta.SidikJonkman, meta.PauleMandel, meta.MaximumLikelihood, meta.RestrictedML,
}

// drawn is a random data set with a covariate of numbers and one of categories.
type drawn struct {
	y, s, x []float64
	group   []int
	method  meta.TauMethod
}

func draw(t *rapid.T) drawn {
	var d drawn
	k := rapid.IntRange(6, 12).Draw(t, "k")
	for i := range k {
		d.y = append(d.y, float64(rapid.IntRange(-3072, 3072).Draw(t, "1024 y"))/1024)
		d.s = append(d.s, math.Pow(10, rapid.Float64Range(-1, 0.7).Draw(t, "log10 s")))
		d.x = append(d.x, float64(i)+float64(rapid.IntRange(-400, 400).Draw(t, "1000 jitter"))/1000)
		d.group = append(d.group, i%3)
	}
	d.method = rapid.SampledFrom(estimators).Draw(t, "estimator")
	return d
}

func (d drawn) regress(t *rapid.T, y, s, x []float64) *Regression {
	c := &Covariate{Name: "x", Values: x}
	for _, v := range x {
		c.Mean += v / float64(len(x))
	}
	design, err := NewDesign([][]string{{"x"}}, []*Covariate{c})
	if err != nil {
		t.Fatal(err)
	}
	r, err := Regress(meta.Model{Tau: d.method, Level: 0.95}, y, s, design)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

func alike(t *rapid.T, what string, got, want, scale, tolerance float64) {
	if !(math.Abs(got-want) <= tolerance*(math.Abs(want)+scale)) {
		t.Fatalf("%s: %.15g and %.15g", what, got, want)
	}
}

// Another unit and origin of the covariate leaves the fit the same; another unit of
// the estimates scales it.
func TestUnitsDoNotMatter(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		d := draw(t)
		a := d.regress(t, d.y, d.s, d.x)
		slope := math.Pow(10, rapid.Float64Range(-4, 4).Draw(t, "log10 unit"))
		origin := rapid.Float64Range(-3000, 3000).Draw(t, "origin") * slope
		x := make([]float64, len(d.x))
		y, s := make([]float64, len(x)), make([]float64, len(x))
		for i := range x {
			x[i] = origin + slope*d.x[i]
			y[i], s[i] = 5-8*d.y[i], 8*d.s[i]
		}
		b, c := d.regress(t, d.y, d.s, x), d.regress(t, y, s, d.x)
		alike(t, "τ²", b.Residual.Tau2, a.Residual.Tau2, 1e-3, 1e-6)
		alike(t, "F", b.Whole.F, a.Whole.F, 1e-6, 1e-5)
		alike(t, "slope", b.Coefficients[1].Estimate*slope, a.Coefficients[1].Estimate, 1e-3, 1e-5)
		alike(t, "τ² of scaled estimates", c.Residual.Tau2, 64*a.Residual.Tau2, 1e-2, 1e-6)
		alike(t, "slope of scaled estimates", c.Coefficients[1].Estimate, -8*a.Coefficients[1].Estimate, 1e-3, 1e-5)
		for i := range a.Fitted {
			alike(t, "fit", b.Fitted[i].Estimate, a.Fitted[i].Estimate, 1, 1e-6)
			alike(t, "fit of scaled estimates", c.Fitted[i].High, 5-8*a.Fitted[i].Low, 1, 1e-5)
		}
	})
}

// The order of the studies does not matter.
func TestOrderDoesNotMatter(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		d := draw(t)
		a := d.regress(t, d.y, d.s, d.x)
		perm := rapid.Permutation(indices(len(d.y))).Draw(t, "order")
		var y, s, x []float64
		for _, i := range perm {
			y, s, x = append(y, d.y[i]), append(s, d.s[i]), append(x, d.x[i])
		}
		b := d.regress(t, y, s, x)
		alike(t, "τ²", b.Residual.Tau2, a.Residual.Tau2, 1e-3, 1e-6)
		alike(t, "F", b.Whole.F, a.Whole.F, 1e-6, 1e-5)
	})
}

func indices(n int) []int {
	all := make([]int, n)
	for i := range all {
		all[i] = i
	}
	return all
}

// With the intercept alone each estimator of τ² is that of a mean.
func TestInterceptAloneIsAMean(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		d := draw(t)
		m, err := newSystem(d.y, d.s, nil, true)
		if err != nil {
			t.Fatal(err)
		}
		tau2, err := m.estimate(d.method)
		if err != nil {
			t.Fatal(err)
		}
		var p meta.Pooler
		mean, err := p.Pool(meta.Model{Tau: d.method, Level: 0.95}, d.y, d.s)
		if err != nil {
			t.Fatal(err)
		}
		alike(t, d.method.String(), tau2*m.unit*m.unit, mean.Tau2, 1e-6, 1e-6)
	})
}

// A regression on indicators of groups gives the means of groups that share τ²: the
// intercept that of the reference, the others their differences.
func TestDummiesAreSharedSubgroups(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		d := draw(t)
		names := []string{"a", "b", "c"}
		c := &Covariate{Name: "group", Levels: names, Index: d.group}
		groups := []Group{{Name: "a"}, {Name: "b"}, {Name: "c"}}
		for row, g := range d.group {
			groups[g].Rows = append(groups[g].Rows, row)
		}
		design, err := NewDesign([][]string{{"group"}}, []*Covariate{c})
		if err != nil {
			t.Fatal(err)
		}
		model := meta.Model{Tau: d.method, Level: 0.95}
		r, err := Regress(model, d.y, d.s, design)
		if err != nil {
			t.Fatal(err)
		}
		g, err := Shared(groups, d.y, d.s, model)
		if err != nil {
			t.Fatal(err)
		}
		alike(t, "τ²", g.Tau2, r.Residual.Tau2, 1e-3, 1e-6)
		alike(t, "F", g.Test.F, r.Whole.F, 1e-5, 1e-5)
		alike(t, "reference", r.Coefficients[0].Estimate, g.Groups[0].Mean.Estimate, 1, 1e-6)
		alike(t, "its limit", r.Coefficients[0].High, g.Groups[0].Mean.High, 1, 1e-5)
		for i := 1; i < 3; i++ {
			alike(t, "difference", r.Coefficients[i].Estimate, g.Groups[i].Against.Estimate, 1, 1e-6)
			alike(t, "its limit", r.Coefficients[i].Low, g.Groups[i].Against.Low, 1, 1e-5)
			row, err := design.Row([]Point{{Covariate: "group", Level: names[i]}})
			if err != nil {
				t.Fatal(err)
			}
			alike(t, "mean", r.At(row).Estimate, g.Groups[i].Mean.Estimate, 1, 1e-6)
			alike(t, "its limit", r.At(row).High, g.Groups[i].Mean.High, 1, 1e-5)
		}
	})
}
