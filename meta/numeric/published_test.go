package numeric

import (
	"math"
	"testing"
)

// TestStudentCriticalPublished compares with printed tables and closed forms.
func TestStudentCriticalPublished(t *testing.T) {
	const nist = "NIST/SEMATECH e-Handbook 1.3.6.7.2, 3 decimals, from memory"
	inf := math.Inf(1)
	for _, tt := range []struct {
		source          string
		alpha, df, want float64
		absTol          float64
	}{
		{nist, 0.20, 1, 3.078, 5e-4},
		{nist, 0.10, 1, 6.314, 5e-4},
		{nist, 0.05, 2, 4.303, 5e-4},
		{nist, 0.05, 4, 2.776, 5e-4},
		{nist, 0.05, 10, 2.228, 5e-4},
		{nist, 0.02, 10, 2.764, 5e-4},
		{nist, 0.01, 10, 3.169, 5e-4},
		{nist, 0.05, 20, 2.086, 5e-4},
		{nist, 0.01, 30, 2.750, 5e-4},
		{nist, 0.05, 60, 2.000, 5e-4},
		{nist, 0.05, 100, 1.984, 5e-4},
		{nist, 0.002, 100, 3.174, 5e-4},
		{"closed form, 1 df: tan(π(1-α)/2)", 0.05, 1, math.Tan(0.475 * math.Pi), 1e-11},
		{"closed form, 1 df: 1", 0.5, 1, 1, 1e-14},
		{"closed form, 2 df: (1-α)√(2/(α(2-α)))", 0.05, 2, 0.95 * math.Sqrt(2/(0.05*1.95)), 1e-13},
		{"closed form, 2 df", 1e-9, 2, (1 - 1e-9) * math.Sqrt(2/(1e-9*(2-1e-9))), 1e-8},
		{"normal limit: 1.959963984540054 (Abramowitz & Stegun, table 26.1)", 0.05, inf, 1.959963984540054, 1e-14},
		{"normal limit (Abramowitz & Stegun 26.7.5): z + (z³+z)/(4·df)", 0.05, 1e9, 1.959963984540054 + 2.3722712e-9, 1e-13},
	} {
		if got := StudentCritical(tt.alpha, tt.df); !(math.Abs(got-tt.want) <= tt.absTol) {
			t.Errorf("StudentCritical(%g, %g) = %.15g, want %.15g ± %g (%s)", tt.alpha, tt.df, got, tt.want, tt.absTol, tt.source)
		}
	}
}

// TestChiSquarePublished compares with printed tables.
func TestChiSquarePublished(t *testing.T) {
	const nist = "NIST/SEMATECH e-Handbook 1.3.6.7.4, 3 decimals, from memory"
	for _, tt := range []struct {
		upper, df, want float64
	}{
		{0.10, 1, 2.706}, {0.05, 1, 3.841}, {0.025, 1, 5.024}, {0.01, 1, 6.635}, {0.001, 1, 10.828},
		{0.05, 2, 5.991}, {0.05, 10, 18.307}, {0.01, 10, 23.209}, {0.05, 30, 43.773}, {0.05, 100, 124.342},
		{0.975, 10, 3.247}, {0.95, 5, 1.145}, {0.99, 20, 8.260}, {0.95, 100, 77.929},
	} {
		if got := ChiSquareUpperQuantile(tt.upper, tt.df); !(math.Abs(got-tt.want) <= 5.001e-4) {
			t.Errorf("ChiSquareUpperQuantile(%g, %g) = %.6f, want %.3f (%s)", tt.upper, tt.df, got, tt.want, nist)
		}
		if got := ChiSquareQuantile(1-tt.upper, tt.df); !(math.Abs(got-tt.want) <= 5.001e-4) {
			t.Errorf("ChiSquareQuantile(%g, %g) = %.6f, want %.3f (%s)", 1-tt.upper, tt.df, got, tt.want, nist)
		}
	}
}

// TestClosedForms compares with laws that have elementary tails.
func TestClosedForms(t *testing.T) {
	for _, x := range []float64{1e-9, 0.1, 1, 2.5, 30, 700, 1e5, 1e9} {
		if got, want := LogChiSquareTail(x, 2), -x/2; !near(got, want, 1e-14) {
			t.Errorf("LogChiSquareTail(%g, 2) = %.17g, want -x/2 = %.17g", x, got, want)
		}
		if got, want := ChiSquareFromLogTail(-x/2, 2), x; !near(got, want, 1e-14) {
			t.Errorf("ChiSquareFromLogTail(%g, 2) = %.17g, want %.17g", -x/2, got, want)
		}
		// Four degrees of freedom: exp(-x/2)(1 + x/2).
		if got, want := LogChiSquareTail(x, 4), -x/2+math.Log1p(x/2); !near(got, want, 1e-12) && math.Abs(got-want) > 1e-16 {
			t.Errorf("LogChiSquareTail(%g, 4) = %.17g, want ln(1+x/2)-x/2 = %.17g", x, got, want)
		}
		// Student, 1 df: ½ - arctan(t)/π = arctan(1/t)/π.
		if got, want := LogStudentTail(x, 1), math.Log(math.Atan(1/x)/math.Pi); !near(got, want, 1e-13) {
			t.Errorf("LogStudentTail(%g, 1) = %.17g, want ln(arctan(1/t)/π) = %.17g", x, got, want)
		}
		// Student, 2 df: ½(1 - t/√(2+t²)) = 1/((2+t²) + t√(2+t²)).
		r := math.Sqrt(2 + x*x)
		if got, want := StudentTail(x, 2), 1/(r*(r+x)); !near(got, want, 1e-13) {
			t.Errorf("StudentTail(%g, 2) = %.17g, want %.17g", x, got, want)
		}
		// F with 2 and d2 df: (1 + 2f/d2)^(-d2/2).
		if got, want := LogFTail(x, 2, 7), -3.5*math.Log1p(2*x/7); !near(got, want, 2e-13) {
			t.Errorf("LogFTail(%g, 2, 7) = %.17g, want %.17g", x, got, want)
		}
		// F with d1 and 2 df: 1 - (1 + 2/(d1·f))^(-d1/2).
		if got, want := LogFTail(x, 5, 2), math.Log(-math.Expm1(-2.5*math.Log1p(2/(5*x)))); !near(got, want, 2e-13) && math.Abs(got-want) > 1e-16 {
			t.Errorf("LogFTail(%g, 5, 2) = %.17g, want %.17g", x, got, want)
		}
		// A gamma variable of shape 1 is exponential.
		if got, want := GammaTail(x, 1), math.Exp(-x); !near(got, want, 1e-13) {
			t.Errorf("GammaTail(%g, 1) = %.17g, want exp(-x) = %.17g", x, got, want)
		}
	}
	for n, want := 1, 0.0; n < 25; n++ {
		if got := LogGamma(float64(n)); !near(got, want, 1e-15) && math.Abs(got-want) > 1e-15 {
			t.Errorf("LogGamma(%d) = %.17g, want ln((n-1)!) = %.17g", n, got, want)
		}
		want += math.Log(float64(n))
	}
	const euler = 0.57721566490153286061
	harmonic := 0.0
	for n := 1; n < 40; n++ {
		if got, want := Digamma(float64(n)), harmonic-euler; !near(got, want, 2e-15) {
			t.Errorf("Digamma(%d) = %.17g, want the harmonic number less Euler's constant = %.17g", n, got, want)
		}
		harmonic += 1 / float64(n)
	}
}

// TestLimits compares laws with those they tend to.
func TestLimits(t *testing.T) {
	inf := math.Inf(1)
	for _, z := range []float64{-3, 0, 0.4, 2, 9, 100, 20000} {
		if got, want := LogStudentTail(z, inf), LogNormalTail(z); got != want {
			t.Errorf("LogStudentTail(%g, +Inf) = %g, want the normal %g", z, got, want)
		}
		// To first order the log of the tail moves by about z⁴/(4·df).
		if got, want := LogStudentTail(z, 1e30), LogNormalTail(z); !near(got, want, 1e-12) {
			t.Errorf("LogStudentTail(%g, 1e30) = %g, want the normal %g", z, got, want)
		}
		if z > 0 {
			if got, want := LogFTail(z*z, 1, inf), math.Ln2+LogNormalTail(z); !near(got, want, 1e-13) {
				t.Errorf("LogFTail(%g, 1, +Inf) = %g, want the two-sided normal %g", z*z, got, want)
			}
			if got, want := LogChiSquareTail(z*z, 1), math.Ln2+LogNormalTail(z); !near(got, want, 1e-12) {
				t.Errorf("LogChiSquareTail(%g, 1) = %g, want the two-sided normal %g", z*z, got, want)
			}
		}
	}
	if got, want := LogFTail(1.7, 3, inf), LogChiSquareTail(5.1, 3); got != want {
		t.Errorf("LogFTail(1.7, 3, +Inf) = %g, want chi-square %g", got, want)
	}
	// P(F > f) with infinite d1 is P(chi-square < d2/f).
	if got, want := LogFTail(2, inf, 5), math.Log1p(-ChiSquareTail(2.5, 5)); !near(got, want, 1e-12) {
		t.Errorf("LogFTail(2, +Inf, 5) = %g, want %g", got, want)
	}
	// The tail of z = 20,000 to the leading terms: -z²/2 - ln(z√(2π)) - 1/z².
	if got, want := LogNormalTail(20000), -2e8-math.Log(20000*math.Sqrt(2*math.Pi))-2.5e-9; !near(got, want, 1e-15) {
		t.Errorf("LogNormalTail(20000) = %.17g, want %.17g", got, want)
	}
}
