package numeric

import (
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"testing"
)

// near reports whether got is within relTol of want relative to want, or, where
// want is 0, within relTol of it. NaN is near nothing.
func near(got, want, relTol float64) bool {
	if got == want {
		return true
	}
	size := math.Abs(want)
	if size == 0 {
		size = 1
	}
	return math.Abs(got-want) <= relTol*size
}

// referenced are the functions of reference.csv by name.
var referenced = map[string]func(a [3]float64) float64{
	"log_normal_tail":           func(a [3]float64) float64 { return LogNormalTail(a[0]) },
	"normal_tail":               func(a [3]float64) float64 { return NormalTail(a[0]) },
	"log_mills":                 func(a [3]float64) float64 { return LogMills(a[0]) },
	"log_normal_between":        func(a [3]float64) float64 { return LogNormalBetween(a[0], a[1]) },
	"log_student_tail":          func(a [3]float64) float64 { return LogStudentTail(a[0], a[1]) },
	"student_critical":          func(a [3]float64) float64 { return StudentCritical(a[0], a[1]) },
	"log_chi_square_tail":       func(a [3]float64) float64 { return LogChiSquareTail(a[0], a[1]) },
	"log_chi_square_lower":      func(a [3]float64) float64 { return logGammaLower(a[0]/2, a[1]/2) },
	"chi_square_tail":           func(a [3]float64) float64 { return ChiSquareTail(a[0], a[1]) },
	"chi_square_quantile":       func(a [3]float64) float64 { return ChiSquareQuantile(a[0], a[1]) },
	"chi_square_upper_quantile": func(a [3]float64) float64 { return ChiSquareUpperQuantile(a[0], a[1]) },
	"log_gamma_ratio":           func(a [3]float64) float64 { return LogGammaRatio(a[0], a[1]) },
	"log_gamma_rise":            func(a [3]float64) float64 { return LogGammaRise(a[0], a[1]) },
	"digamma":                   func(a [3]float64) float64 { return Digamma(a[0]) },
	"digamma_less_log":          func(a [3]float64) float64 { return DigammaLessLog(a[0]) },
	"log_f_tail":                func(a [3]float64) float64 { return LogFTail(a[0], a[1], a[2]) },
	"log_student_between":       func(a [3]float64) float64 { return LogStudentBetween(a[0], a[1], a[2]) },
	"log_student_strip":         func(a [3]float64) float64 { return LogStudentStrip(a[0], a[1], a[2]) },
}

// TestReference compares with the values of testdata/reference.csv; its README
// says how they were computed.
func TestReference(t *testing.T) {
	file, err := os.Open("testdata/reference.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	rows, err := csv.NewReader(file).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	seen := map[string]bool{}
	for i, row := range rows[1:] {
		f, ok := referenced[row[0]]
		if !ok {
			t.Fatalf("row %d: no function %q", i+2, row[0])
		}
		seen[row[0]] = true
		var arg [3]float64
		for j := range arg {
			arg[j] = number(t, row[1+j])
		}
		want, tol := number(t, row[4]), number(t, row[5])
		if got := f(arg); !near(got, want, tol) {
			t.Errorf("%s(%s, %s, %s) = %.17g, want %.17g within %.0e, off by %.2g (mpmath)",
				row[0], row[1], row[2], row[3], got, want, tol, math.Abs(got/want-1))
		}
	}
	if len(seen) != len(referenced) {
		t.Errorf("reference.csv covers %d of %d functions", len(seen), len(referenced))
	}
}

func number(t *testing.T, text string) float64 {
	t.Helper()
	if text == "" {
		return math.NaN()
	}
	x, err := strconv.ParseFloat(text, 64)
	if err != nil {
		t.Fatal(err)
	}
	return x
}
