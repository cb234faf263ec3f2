package numeric

import (
	"math"
	"testing"

	"pgregory.net/rapid"
)

// freedom draws degrees of freedom over the whole range in use.
func freedom(t *rapid.T) float64 {
	return math.Pow(10, rapid.Float64Range(-1, 9).Draw(t, "log10 df"))
}

// TestQuantilesInvertTails: a tail's quantile has that tail.
func TestQuantilesInvertTails(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		lnTail := -math.Pow(10, rapid.Float64Range(-6, 2.5).Draw(t, "log10 of -ln tail"))
		df := freedom(t)
		if got := LogNormalTail(NormalFromLogTail(lnTail)); !near(got, lnTail, 1e-12) {
			t.Errorf("normal: tail of the quantile of %g is %g", lnTail, got)
		}
		if x := StudentFromLogTail(lnTail, df); !math.IsInf(x, 0) {
			if got := LogStudentTail(x, df); !near(got, lnTail, 1e-12*max(1, df*1e-6)) {
				t.Errorf("Student, %g df: tail of the quantile %g of %g is %g", df, x, lnTail, got)
			}
		}
		if x := ChiSquareFromLogTail(lnTail, df); x > 1e-290 {
			// A rounding of x moves the log of the tail by x·(density/tail)·2⁻⁵³.
			slack := math.Exp(gammaLogFront(x/2, df/2)-lnTail) * 1e-15
			if got := LogChiSquareTail(x, df); !(math.Abs(got-lnTail) <= 1e-11*math.Abs(lnTail)+slack) {
				t.Errorf("chi-square, %g df: tail of the quantile %g of %g is %g", df, x, lnTail, got)
			}
		}
	})
}

// TestTailsFallAndMirror: tails fall with the statistic, both sides of a
// symmetric law add to 1, and heavier tails are heavier.
func TestTailsFallAndMirror(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a := rapid.Float64Range(-50, 50).Draw(t, "a")
		b := a + rapid.Float64Range(1e-3, 50).Draw(t, "b - a")
		df := freedom(t)
		for name, tail := range map[string]func(x float64) float64{
			"normal":  LogNormalTail,
			"Student": func(x float64) float64 { return LogStudentTail(x, df) },
		} {
			if !(tail(b) <= tail(a)) || !(tail(b) <= 0) {
				t.Errorf("%s: ln tail rises from %g at %g to %g at %g (%g df)", name, tail(a), a, tail(b), b, df)
			}
			if got := math.Exp(tail(a)) + math.Exp(tail(-a)); !near(got, 1, 1e-13) {
				t.Errorf("%s: tails of %g and its mirror add to %.17g", name, a, got)
			}
		}
		if x := math.Abs(a); x > 3 && LogStudentTail(x, df) < LogNormalTail(x) {
			t.Errorf("the tail of Student's t beyond %g with %g df is lighter than the normal one", x, df)
		}
		if x, y := math.Abs(a), math.Abs(a)+b-a; !(LogChiSquareTail(y, df) <= LogChiSquareTail(x, df)) {
			t.Errorf("chi-square, %g df: tail rises from %g to %g", df, x, y)
		}
		if x, y := math.Abs(a), math.Abs(a)+b-a; !(LogFTail(y, 3, df) <= LogFTail(x, 3, df)) {
			t.Errorf("F, 3 and %g df: tail rises from %g to %g", df, x, y)
		}
	})
}

// TestBetweenIsAdditive: the parts of an interval add to the whole, and the
// whole to the difference of the tails where that has digits.
func TestBetweenIsAdditive(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a := rapid.Float64Range(-1000, 1000).Draw(t, "a")
		w := math.Pow(10, rapid.Float64Range(-4, 2).Draw(t, "log10 width"))
		m, b := a+0.4*w, a+w
		df := freedom(t)
		for name, between := range map[string]func(x, y float64) float64{
			"normal":  LogNormalBetween,
			"Student": func(x, y float64) float64 { return LogStudentBetween(x, y, df) },
		} {
			whole, left, right := between(a, b), between(a, m), between(m, b)
			// The ends carry the width to 1e-16·|a|/width.
			tol := 1e-12*max(1, math.Abs(whole)) + 1e-15*math.Abs(a)/w*max(1, math.Abs(a))
			top := max(left, right)
			if got := top + math.Log(math.Exp(left-top)+math.Exp(right-top)); !(math.Abs(got-whole) <= tol) {
				t.Errorf("%s: (%g, %g) + (%g, %g) = %.17g, whole %.17g (%g df)", name, a, m, m, b, got, whole, df)
			}
			if mirror := between(-b, -a); !(math.Abs(mirror-whole) <= 1e-13*max(1, math.Abs(whole))) {
				t.Errorf("%s: (%g, %g) has %.17g, its mirror %.17g", name, a, b, whole, mirror)
			}
		}
	})
}

// TestGammaRecurrence: Γ(x+1) = xΓ(x) and ψ(x+1) = ψ(x) + 1/x.
func TestGammaRecurrence(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		x := math.Pow(10, rapid.Float64Range(-3, 12).Draw(t, "log10 x"))
		if got := LogGammaRise(x, 1); !(math.Abs(got-math.Log(x)) <= 1e-14*max(1, math.Abs(math.Log(x)))) {
			t.Errorf("lnΓ(x+1) - lnΓ(x) at %g = %.17g, want ln x = %.17g", x, got, math.Log(x))
		}
		// Legendre's duplication: Γ(x)Γ(x+½) = 2^(1-2x) √π Γ(2x).
		if x < 1e6 {
			left := 2*LogGamma(x) + LogGammaRise(x, 0.5)
			right := (1-2*x)*math.Ln2 + lnSqrtPi + LogGamma(2*x)
			// Shifting to a large argument rounds about a dozen logarithms.
			if !(math.Abs(left-right) <= 5e-14*max(1, math.Abs(LogGamma(2*x)))) {
				t.Errorf("duplication at %g: %.17g and %.17g", x, left, right)
			}
		}
		if got, want := Digamma(x+1)-Digamma(x), 1/x; !(math.Abs(got-want) <= 4e-15*max(1, math.Abs(Digamma(x)))) {
			t.Errorf("ψ(x+1) - ψ(x) at %g = %.17g, want 1/x = %.17g", x, got, want)
		}
	})
}

// TestRootFindsRandomRoots: the root of an increasing function is found
// wherever it is.
func TestRootFindsRandomRoots(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		at := rapid.Float64Range(-100, 100).Draw(t, "root")
		steep := math.Pow(10, rapid.Float64Range(-2, 2).Draw(t, "log10 steepness"))
		lo, hi := at-rapid.Float64Range(0, 50).Draw(t, "below"), at+rapid.Float64Range(0, 50).Draw(t, "above")
		f := func(x float64) float64 { return math.Expm1(steep*(x-at)) + (x - at) }
		if got, err := Root(f, lo, hi, 0); err != nil || !(math.Abs(got-at) <= 1e-12*max(1, math.Abs(at))) {
			t.Errorf("Root = %.17g, %v, want %.17g", got, err, at)
		}
		g := func(x float64) float64 { return math.Cosh(min(steep, 1) * (x - at)) }
		if got, _, err := Minimum(g, lo-1, hi+1, 1e-8); err != nil || !(math.Abs(got-at) <= 1e-5*max(1, math.Abs(at))/min(steep, 1)) {
			t.Errorf("Minimum = %.17g, %v, want %.17g", got, err, at)
		}
	})
}
