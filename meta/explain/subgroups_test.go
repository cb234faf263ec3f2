package explain

import (
	"math"
	"strings"
	"testing"

	"steelyard/meta"
	"steelyard/meta/evidence"
)

// pooled fits groups by a model.
func pooled(model meta.Model, y, s []float64) Fitter {
	return func(rows []int) (*meta.Fit, error) {
		var py, ps []float64
		for _, row := range rows {
			py, ps = append(py, y[row]), append(ps, s[row])
		}
		return model.Fit(py, ps)
	}
}

// The BCG trials above and below 40° of latitude under a common effect: Q between
// groups is the total less the Q within, an identity of sums of squares.
func TestBetweenIsTotalLessWithin(t *testing.T) {
	y, s, latitude, _ := bcg(t)
	groups := []Group{{Name: "below 40"}, {Name: "from 40"}}
	for i, x := range latitude {
		groups[b2i(x >= 40)].Rows = append(groups[b2i(x >= 40)].Rows, i)
	}
	model := meta.Model{Effects: meta.CommonEffect, Level: 0.95}
	all, err := model.Fit(y, s)
	if err != nil {
		t.Fatal(err)
	}
	separate, err := Separate(groups, s, pooled(model, y, s), model)
	if err != nil {
		t.Fatal(err)
	}
	shared, err := Shared(groups, y, s, model)
	if err != nil {
		t.Fatal(err)
	}
	want := all.Mean.Q - separate.Groups[0].Mean.Q - separate.Groups[1].Mean.Q
	for _, g := range []*Subgroups{separate, shared} {
		near(t, "Q", g.Test.Q, want, 1e-9)
		near(t, "F", g.Test.F, want, 1e-9)
		near(t, "evidence", g.Test.Evidence.Ln(), evidence.ChiSquare(want, 1).Ln(), 1e-9)
		if !math.IsInf(g.Test.DF2, 1) {
			t.Errorf("df %v, want infinite", g.Test.DF2)
		}
		near(t, "ln p", g.Test.LnP, math.Log(math.Erfc(math.Sqrt(want/2))), 1e-9)
	}
	near(t, "Q within", shared.Groups[1].Mean.Q, separate.Groups[1].Mean.Q, 1e-9)
}

func b2i(b bool) int {
	if b {
		return 1
	}
	return 0
}

// With two groups Welch's F is the square of his t, on Satterthwaite's degrees of
// freedom (Welch 1947, Biometrika 34:28-35), written out here.
func TestWelchOfTwoGroups(t *testing.T) {
	y, s, latitude, _ := bcg(t)
	groups := []Group{{Name: "below 40"}, {Name: "from 40"}}
	for i, x := range latitude {
		groups[b2i(x >= 40)].Rows = append(groups[b2i(x >= 40)].Rows, i)
	}
	model := meta.Model{Level: 0.95}
	g, err := Separate(groups, s, pooled(model, y, s), model)
	if err != nil {
		t.Fatal(err)
	}
	a, b := g.Groups[0].Mean, g.Groups[1].Mean
	va, vb := a.SE*a.SE, b.SE*b.SE
	df := (va + vb) * (va + vb) / (va*va/a.DF + vb*vb/b.DF)
	tStatistic := (b.Estimate - a.Estimate) / math.Sqrt(va+vb)
	near(t, "F", g.Test.F, tStatistic*tStatistic, 1e-9)
	near(t, "df", g.Test.DF2, df, 1e-9)
	near(t, "evidence", g.Test.Evidence.Ln(), evidence.Matched(tStatistic, df).Ln(), 1e-7)
	near(t, "difference", g.Groups[1].Against.Estimate, b.Estimate-a.Estimate, 1e-12)
	near(t, "middle of the interval", (g.Groups[1].Against.Low+g.Groups[1].Against.High)/2, b.Estimate-a.Estimate, 1e-9)
	// The model's own standard errors: 1/√Σ1/(s²+τ²).
	if g.Test.Q <= g.Test.F {
		t.Errorf("Q %v by the model's standard errors, F %v by the intervals'", g.Test.Q, g.Test.F)
	}
}

// Welch's F for three samples: Λ and both degrees of freedom by hand from his
// formulas, for means 0, 1, 3 with squared standard errors 1, 0.5, 2 on 4, 9 and 3 df.
func TestWelchOfThreeGroups(t *testing.T) {
	group := func(mean, variance, df float64) Subgroup {
		return Subgroup{Mean: meta.Mean{Estimate: mean, SE: math.Sqrt(variance), DF: df}}
	}
	b := welch([]Subgroup{group(0, 1, 4), group(1, 0.5, 9), group(3, 2, 3)}, []float64{1, 1, 1}, meta.Model{})
	// u = 1, 2, 0.5; Σu = 3.5; mean = 3.5/3.5 = 1; Q = 1 + 0 + 0.5·4 = 3.
	// Λ = (5/7)²/4 + (3/7)²/9 + (6/7)²/3 = (25/4 + 1 + 12)/49 = 19.25/49.
	const lambda = 19.25 / 49
	near(t, "F", b.F, 3./2/(1+2./8*lambda), 1e-12)
	near(t, "df", b.DF2, 8/(3*lambda), 1e-12)
}

func TestGroupsThatCannotBeCompared(t *testing.T) {
	for _, c := range []struct {
		cells []Cell
		want  string
	}{
		{texts("a", "A ", "a"), "nothing to compare"},
		{texts("a", "b", "c"), "3 different entries in 3 studies"},
	} {
		err := Check("kind", GroupCells(c.cells), len(c.cells))
		if err == nil || !strings.Contains(err.Error(), c.want) || !strings.Contains(err.Error(), `"kind"`) {
			t.Errorf("error %v, want %q", err, c.want)
		}
	}
	if err := Check("kind", GroupCells(texts("a", "b", "a")), 3); err != nil {
		t.Error(err)
	}
	groups := GroupCells(texts("10", "9", "10.0", "9"))
	if len(groups) != 2 || groups[0].Name != "9" || len(groups[1].Rows) != 2 {
		t.Errorf("groups %+v: numbers ascend, and 10 is 10.0", groups)
	}
	if _, err := Shared([]Group{{"a", []int{0}}, {"b", []int{1}}}, []float64{0, 1}, []float64{1, 1}, meta.Model{Level: 0.95}); err == nil {
		t.Error("two studies in two groups have no scatter to share")
	}
}
