package numeric

import (
	"errors"
	"math"
	"testing"
)

func TestRoot(t *testing.T) {
	for _, tt := range []struct {
		name      string
		f         func(float64) float64
		lo, hi    float64
		want, tol float64
	}{
		{"square root of 2", func(x float64) float64 { return x*x - 2 }, 0, 2, math.Sqrt2, 1e-15},
		{"ends swapped", func(x float64) float64 { return x*x - 2 }, 2, 0, math.Sqrt2, 1e-15},
		{"root at the low end", func(x float64) float64 { return x }, 0, 1, 0, 0},
		{"root at the low end of a falling function", func(x float64) float64 { return -x }, 0, 1, 0, 0},
		{"root at the high end", func(x float64) float64 { return x - 1 }, 0, 1, 1, 0},
		{"cos x = x: 0.7390851332151607 (Dottie's number)", func(x float64) float64 { return math.Cos(x) - x }, 0, 1, 0.73908513321516064, 1e-15},
		{"triple root", func(x float64) float64 { return (x - 3) * (x - 3) * (x - 3) }, 0, 10, 3, 1e-5},
		{"jump", func(x float64) float64 {
			if x < 0.3 {
				return -1
			}
			return 1
		}, 0, 1, 0.3, 1e-15},
		{"infinite value at an end", func(x float64) float64 { return math.Log(x) + 5 }, 0, 1, math.Exp(-5), 1e-14},
		{"pole between", func(x float64) float64 { return math.Tan(x) - 1000 }, 0, 1.57, math.Atan(1000), 1e-14},
		{"tiny root over a huge range", func(x float64) float64 { return x - 1e-200 }, -1e300, 1e300, 1e-200, 1e-14},
		{"flat then steep", func(x float64) float64 { return math.Exp(x) - 1e-10 }, -700, 700, math.Log(1e-10), 1e-13},
	} {
		t.Run(tt.name, func(t *testing.T) {
			got, err := Root(tt.f, tt.lo, tt.hi, 0)
			if err != nil || !near(got, tt.want, tt.tol) {
				t.Errorf("Root = %.17g, %v, want %.17g within %g", got, err, tt.want, tt.tol)
			}
		})
	}
}

func TestRootStopsAtItsTolerance(t *testing.T) {
	calls := 0
	f := func(x float64) float64 { calls++; return math.Exp(x) - 2 }
	got, err := Root(f, 0, 10, 1e-3)
	if err != nil || !near(got, math.Ln2, 1e-3) {
		t.Fatalf("Root = %g, %v, want ln 2 within 1e-3", got, err)
	}
	if loose := calls; loose > 0 {
		calls = 0
		if _, err := Root(f, 0, 10, 0); err != nil || calls <= loose {
			t.Errorf("full precision took %d calls, 1e-3 took %d; error %v", calls, loose, err)
		}
	}
}

func TestRootErrors(t *testing.T) {
	nan := math.NaN()
	for _, tt := range []struct {
		name   string
		f      func(float64) float64
		lo, hi float64
		want   error
	}{
		{"no sign change", func(x float64) float64 { return x*x + 1 }, -1, 1, ErrNoBracket},
		{"NaN at the low end", func(x float64) float64 { return math.Log(x) }, -1, 2, ErrNotFinite},
		{"NaN at the high end", func(x float64) float64 { return math.Sqrt(1 - x) }, 0, 2, ErrNotFinite},
		{"NaN between", func(x float64) float64 {
			if x > 0 && x < 1 {
				return nan
			}
			return x - 0.5
		}, 0, 1, ErrNotFinite},
		{"NaN limit", func(x float64) float64 { return x }, nan, 1, ErrNotFinite},
		{"infinite limit", func(x float64) float64 { return x }, -1, math.Inf(1), ErrNotFinite},
	} {
		t.Run(tt.name, func(t *testing.T) {
			if x, err := Root(tt.f, tt.lo, tt.hi, 0); !errors.Is(err, tt.want) || x != 0 {
				t.Errorf("Root = %g, %v, want 0 and %v", x, err, tt.want)
			}
		})
	}
}

func TestMinimum(t *testing.T) {
	for _, tt := range []struct {
		name        string
		f           func(float64) float64
		lo, hi      float64
		x, fx, xTol float64
	}{
		{"parabola", func(x float64) float64 { return (x-2)*(x-2) + 1 }, 0, 5, 2, 1, 1e-7},
		{"ends swapped", func(x float64) float64 { return (x-2)*(x-2) + 1 }, 5, 0, 2, 1, 1e-7},
		{"fourth power", func(x float64) float64 { return math.Pow(x-1, 4) }, -3, 4, 1, 0, 1e-3},
		{"kink", func(x float64) float64 { return math.Abs(x - 0.3) }, 0, 1, 0.3, 0, 1e-7},
		{"at the low end", func(x float64) float64 { return x }, 0, 1, 0, 0, 1e-7},
		{"at the high end", func(x float64) float64 { return -x }, 0, 1, 1, -1, 1e-7},
		{"x ln x: 1/e, -1/e", func(x float64) float64 { return x * math.Log(x) }, 1e-9, 3, 1 / math.E, -1 / math.E, 1e-7},
		{"constant", func(x float64) float64 { return 4 }, 0, 1, 0.5, 4, 1},
	} {
		t.Run(tt.name, func(t *testing.T) {
			x, fx, err := Minimum(tt.f, tt.lo, tt.hi, 1e-9)
			if err != nil || !(math.Abs(x-tt.x) <= tt.xTol) || !(math.Abs(fx-tt.fx) <= 1e-7) {
				t.Errorf("Minimum = %.10g, %.10g, %v, want %g, %g", x, fx, err, tt.x, tt.fx)
			}
		})
	}
	if _, _, err := Minimum(func(x float64) float64 { return math.NaN() }, 0, 1, 1e-8); !errors.Is(err, ErrNotFinite) {
		t.Errorf("a function that is NaN gives %v, want ErrNotFinite", err)
	}
	if _, _, err := Minimum(func(x float64) float64 { return x }, 0, math.Inf(1), 1e-8); !errors.Is(err, ErrNotFinite) {
		t.Errorf("an infinite limit gives %v, want ErrNotFinite", err)
	}
	nanLater := 0
	f := func(x float64) float64 {
		if nanLater++; nanLater > 3 {
			return math.NaN()
		}
		return x * x
	}
	if _, _, err := Minimum(f, -1, 2, 1e-8); !errors.Is(err, ErrNotFinite) {
		t.Errorf("a function that turns NaN gives %v, want ErrNotFinite", err)
	}
}

func TestIntegrate(t *testing.T) {
	inf := math.Inf(1)
	normal := func(x float64) float64 { return math.Exp(-x*x/2) / math.Sqrt(2*math.Pi) }
	for _, tt := range []struct {
		name         string
		f            func(float64) float64
		lo, hi, want float64
	}{
		{"cube", func(x float64) float64 { return x * x * x }, 0, 2, 4},
		{"limits swapped", func(x float64) float64 { return x * x * x }, 2, 0, -4},
		{"empty range", math.Exp, 1, 1, 0},
		{"odd function", math.Sin, -3, 3, 0},
		{"1/√x, singular at 0", func(x float64) float64 { return 1 / math.Sqrt(x) }, 0, 1, 2},
		{"ln x, singular at 0", math.Log, 0, 1, -1},
		{"kink", func(x float64) float64 { return math.Abs(x - 1./3) }, 0, 1, 5. / 18},
		{"narrow peak: π/1e3·…", func(x float64) float64 { return 1 / (1e-6 + (x-0.3)*(x-0.3)) }, -1, 1, 1e3 * (math.Atan(700) + math.Atan(1300))},
		{"normal, whole line", normal, -inf, inf, 1},
		{"normal, sd 0.01 at 3, whole line", func(x float64) float64 { return 100 * normal(100*(x-3)) }, -inf, inf, 1},
		{"normal, upper tail", normal, 2, inf, 0.5 * math.Erfc(math.Sqrt2)},
		{"normal, lower tail", normal, -inf, -2, 0.5 * math.Erfc(math.Sqrt2)},
		{"Cauchy, whole line", func(x float64) float64 { return 1 / (1 + x*x) }, -inf, inf, math.Pi},
		{"x^(-1.5), upper range", func(x float64) float64 { return math.Pow(x, -1.5) }, 1, inf, 2},
		{"exponential, lower range", math.Exp, -inf, 1, math.E},
	} {
		t.Run(tt.name, func(t *testing.T) {
			got, absErr, err := Integrate(tt.f, tt.lo, tt.hi, 1e-10)
			if err != nil || !(math.Abs(got-tt.want) <= 1e-10*max(1, math.Abs(tt.want))) {
				t.Fatalf("Integrate = %.15g ± %.1g, %v, want %.15g", got, absErr, err, tt.want)
			}
			if off := math.Abs(got - tt.want); off > absErr+1e-15*math.Abs(tt.want) {
				t.Errorf("error estimate %g is below the true error %g", absErr, off)
			}
		})
	}
}

func TestIntegrateErrors(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	for _, tt := range []struct {
		name   string
		f      func(float64) float64
		lo, hi float64
		want   error
	}{
		{"NaN limit", math.Exp, nan, 1, ErrNotFinite},
		{"from +Inf to +Inf", math.Exp, inf, math.Inf(1), nil},
		{"NaN inside", func(x float64) float64 { return math.Sqrt(x) }, -1, 1, ErrNotFinite},
		{"overflow inside", math.Exp, 0, 2000, ErrNotFinite},
		{"diverges at 0", func(x float64) float64 { return 1 / x }, 0, 1, ErrNotConverged},
		{"diverges at infinity", func(x float64) float64 { return 1 / x }, 1, inf, ErrNotConverged},
		{"noise", func(x float64) float64 { return math.Mod(1e9*math.Sin(1e9*x), 1) }, 0, 1, ErrNotConverged},
	} {
		t.Run(tt.name, func(t *testing.T) {
			if got, absErr, err := Integrate(tt.f, tt.lo, tt.hi, 1e-10); !errors.Is(err, tt.want) {
				t.Errorf("Integrate = %g ± %g, %v, want %v", got, absErr, err, tt.want)
			}
		})
	}
}

func TestHermite(t *testing.T) {
	for _, n := range []int{1, 2, 3, 7, 40, 41, 100, 200} {
		nodes, weights := Hermite(n)
		if len(nodes) != n || len(weights) != n {
			t.Fatalf("n = %d: %d nodes, %d weights", n, len(nodes), len(weights))
		}
		for i := range nodes {
			if nodes[i] != -nodes[n-1-i] || weights[i] != weights[n-1-i] || i > 0 && !(nodes[i] > nodes[i-1]) {
				t.Errorf("n = %d: node %d is not in order or not symmetric", n, i)
			}
		}
		// Even moments of the normal law up to degree 2n-1: 1, 1, 3, 15, 105 …
		want := 1.0
		for degree := 0; degree <= min(2*n-1, 20); degree += 2 {
			var sum Sum
			for i, x := range nodes {
				sum.Add(weights[i] * math.Pow(x, float64(degree)))
			}
			if !near(sum.Value(), want, 1e-13) {
				t.Errorf("n = %d: E U^%d = %.17g, want %g", n, degree, sum.Value(), want)
			}
			want *= float64(degree + 1)
		}
		// E exp(sU) = exp(s²/2).
		if n >= 40 {
			var sum Sum
			for i, x := range nodes {
				sum.Add(weights[i] * math.Exp(1.5*x))
			}
			if want := math.Exp(1.125); !near(sum.Value(), want, 1e-13) {
				t.Errorf("n = %d: E exp(1.5 U) = %.17g, want %.17g", n, sum.Value(), want)
			}
		}
	}
	// Two points: ±1 with ½; three: 0, ±√3 with ⅔ and ⅙ (Abramowitz & Stegun, table 25.10, rescaled).
	nodes, weights := Hermite(3)
	for i, want := range [][2]float64{{-math.Sqrt(3), 1. / 6}, {0, 2. / 3}, {math.Sqrt(3), 1. / 6}} {
		if !near(nodes[i], want[0], 1e-15) || !near(weights[i], want[1], 1e-15) {
			t.Errorf("3 points: %v %v, want %v", nodes[i], weights[i], want)
		}
	}
	nodes[0] = 99
	if again, _ := Hermite(3); again[0] == 99 {
		t.Error("writing to a rule changed the next caller's")
	}
	for _, n := range []int{0, -1, 201} {
		if nodes, weights := Hermite(n); nodes != nil || weights != nil {
			t.Errorf("Hermite(%d) = %v, %v, want nil", n, nodes, weights)
		}
	}
}

func TestSum(t *testing.T) {
	var s Sum
	for range 1_000_000 {
		s.Add(0.1)
	}
	// A million times the double nearest 0.1 is 100000.00000000000555: 1e5.
	if s.Value() != 100000 {
		t.Errorf("a million times 0.1 = %.17g, want 100000", s.Value())
	}
	var c Sum
	for _, x := range []float64{1, 1e100, 1, -1e100} {
		c.Add(x)
	}
	if c.Value() != 2 {
		t.Errorf("1 + 1e100 + 1 - 1e100 = %g, want 2", c.Value())
	}
	var inf Sum
	inf.Add(math.Inf(1))
	inf.Add(1)
	if !math.IsInf(inf.Value(), 1) {
		t.Errorf("Inf + 1 = %g, want +Inf", inf.Value())
	}
}
