package evidence

import (
	"math"
	"slices"
	"testing"

	"pgregory.net/rapid"
)

// freedom draws degrees of freedom, infinite ones among them.
func freedom(t *rapid.T) float64 {
	x := rapid.Float64Range(0, 7).Draw(t, "log10 df")
	if x > 6 {
		return math.Inf(1)
	}
	return math.Pow(10, x)
}

// TestEvidenceGrows: every two-sided form grows with |t| and is even; one-sided
// forms grow with t; the bound is never passed by a form with frequency meaning.
func TestEvidenceGrows(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a := rapid.Float64Range(0, 60).Draw(t, "a")
		b := a + rapid.Float64Range(1e-3, 20).Draw(t, "b - a")
		df := freedom(t)
		for name, f := range map[string]func(x float64) Ratio{
			"Normal":       Normal,
			"Matched":      func(x float64) Ratio { return Matched(x, df) },
			"Student":      func(x float64) Ratio { return Student(x, df) },
			"BoundStudent": func(x float64) Ratio { return BoundStudent(x, df) },
		} {
			if !(f(b).Ln() > f(a).Ln()) {
				t.Errorf("%s falls from %g at %g to %g at %g (%g df)", name, f(a).Ln(), a, f(b).Ln(), b, df)
			}
			if f(a) != f(-a) {
				t.Errorf("%s differs at ±%g", name, a)
			}
		}
		for name, f := range map[string]func(x float64) Ratio{
			"OneSided":        OneSided,
			"OneSidedMatched": func(x float64) Ratio { return OneSidedMatched(x, df) },
		} {
			if !(f(b).Ln() > f(a).Ln()) || !(f(-b).Ln() < f(-a).Ln()+1e-12) {
				t.Errorf("%s does not grow between ±%g and ±%g (%g df)", name, a, b, df)
			}
		}
		if Normal(a).Ln() > Bound(a).Ln() || Student(a, df).Ln() > BoundStudent(a, df).Ln() {
			t.Errorf("the bound at %g is passed (%g df)", a, df)
		}
		if got, want := Matched(a, df).Ln(), Normal(a).Ln(); got > want+1e-9*max(1, math.Abs(want)) {
			t.Errorf("the matched form at t = %g, %g df, %g, is above the normal form %g", a, df, got, want)
		}
		p := rapid.Float64Range(1e-12, 1).Draw(t, "p")
		q := p * rapid.Float64Range(0.01, 0.99).Draw(t, "q/p")
		for name, f := range map[string]func(p float64) Ratio{"PValue": PValue, "PValueExact": PValueExact, "PValueBound": PValueBound} {
			if f(q).Ln() < f(p).Ln() {
				t.Errorf("%s falls from p = %g to the smaller %g", name, p, q)
			}
		}
	})
}

// drawRegion draws one to three intervals, some of them to infinity.
func drawRegion(t *rapid.T) Region {
	ends := rapid.SliceOfNDistinct(rapid.IntRange(-600, 600), 2, 6, rapid.ID[int]).Draw(t, "ends in hundredths")
	slices.Sort(ends)
	var r Region
	for i := 0; i+1 < len(ends); i += 2 {
		r = append(r, Interval{Low: float64(ends[i]) / 100, High: float64(ends[i+1]) / 100})
	}
	if rapid.Bool().Draw(t, "from -Inf") {
		r[0].Low = math.Inf(-1)
	}
	if rapid.Bool().Draw(t, "to +Inf") {
		r[len(r)-1].High = math.Inf(1)
	}
	return r
}

// TestRegionProperties: antisymmetry, mirror, shift and unit, complements that
// make up the whole, and splitting an interval changing nothing.
func TestRegionProperties(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		r := drawRegion(t)
		rest := r.Complement()
		if len(rest) == 0 {
			return
		}
		// Off the grid of the ends by a share, so that no two ends are equally near:
		// β depends on which of them is taken.
		stat := float64(rapid.IntRange(-800, 800).Draw(t, "t in hundredths"))/100 + 0.0017
		l := at(stat, freedom(t), Form(rapid.IntRange(0, 1).Draw(t, "form")))
		got, err := l.Region(r, rest)
		if err != nil {
			t.Fatal(err)
		}
		back, _ := l.Region(rest, r)
		if got.Ln() != -back.Ln() {
			t.Errorf("ln ER %.15g turned round is %.15g", got.Ln(), back.Ln())
		}
		shift := rapid.Float64Range(-5, 5).Draw(t, "shift")
		unit := math.Pow(10, rapid.Float64Range(-3, 3).Draw(t, "log10 unit"))
		moved := Location{Estimate: shift + unit*l.Estimate, SE: unit, DF: l.DF, Form: l.Form}
		mirrored := Location{Estimate: -l.Estimate, SE: 1, DF: l.DF, Form: l.Form}
		if again, err := moved.Region(affine(r, shift, unit), affine(rest, shift, unit)); err != nil || !near(again.Ln(), got.Ln(), 1e-6) {
			t.Errorf("moved by %g and scaled by %g: ln ER %.12g, %v, want %.12g", shift, unit, again.Ln(), err, got.Ln())
		}
		if again, err := mirrored.Region(affine(r, 0, -1), affine(rest, 0, -1)); err != nil || !near(again.Ln(), got.Ln(), 1e-11) {
			t.Errorf("mirrored: ln ER %.12g, %v, want %.12g", again.Ln(), err, got.Ln())
		}
		share := l.Posterior(r)
		if sum := share + l.Posterior(rest); !near(sum, 1, 1e-13) {
			t.Errorf("posterior shares of %v and its complement add to %.17g", r, sum)
		}
		// The numerators add to the whole's: M₁·share₁ + M₂·share₂ = 1.
		if sum := share*math.Exp(l.LnM(r)) + l.Posterior(rest)*math.Exp(l.LnM(rest)); !near(sum, 1, 1e-12) {
			t.Errorf("mean likelihoods of %v and its complement add to %.17g", r, sum)
		}
		if beta := l.Correction(r); !(beta > -1e-9 && beta < 1.5) {
			t.Errorf("β of %v = %g", r, beta)
		}
		split := slices.Concat(r[:len(r)-1], halves(r[len(r)-1]))
		if again, err := l.Region(split, rest); err != nil || !near(again.Ln(), got.Ln(), 1e-9) {
			t.Errorf("%v split into %v: ln ER %.12g, %v, want %.12g", r, split, again.Ln(), err, got.Ln())
		}
	})
}

// affine returns a + b·r, in ascending order.
func affine(r Region, a, b float64) Region {
	moved := make(Region, 0, len(r))
	for _, x := range r {
		low, high := a+b*x.Low, a+b*x.High
		moved = append(moved, Interval{Low: min(low, high), High: max(low, high)})
	}
	if b < 0 {
		slices.Reverse(moved)
	}
	return moved
}

// halves cuts an interval in two inside its finite part.
func halves(x Interval) Region {
	cut := 0.5 * (x.Low + x.High)
	switch {
	case math.IsInf(x.Low, -1):
		cut = min(x.High, 1) - 1
	case math.IsInf(x.High, 1):
		cut = max(x.Low, -1) + 1
	}
	return Region{{Low: x.Low, High: cut}, {Low: cut, High: x.High}}
}

// TestPriorAndPosterior: doubter's prior and posterior undo each other, and a
// ratio and its inverse.
func TestPriorAndPosterior(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		prior := rapid.Float64Range(1e-6, 1-1e-6).Draw(t, "prior")
		r := FromLn(rapid.Float64Range(-12, 12).Draw(t, "ln ER"))
		after := Posterior(prior, r)
		if back := Posterior(after, r.Inverse()); !near(back/prior, 1, 1e-8) {
			t.Errorf("prior %g → %g → %g", prior, after, back)
		}
		if level := Posterior(DoubtersPrior(r, prior), r); !near(level/prior, 1, 1e-8) {
			t.Errorf("the doubter's prior for level %g leads to %g", prior, level)
		}
		if r.Ln() > 1e-6 && !(after > prior) || r.Ln() < -1e-6 && !(after < prior) {
			t.Errorf("prior %g, ln ER %g: posterior %g is on the wrong side", prior, r.Ln(), after)
		}
	})
}
