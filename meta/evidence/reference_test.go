package evidence

import (
	"encoding/csv"
	"math"
	"os"
	"testing"
)

// referenced are the functions of testdata/reference.csv by name.
var referenced = map[string]func(a arguments) float64{
	"one_sided_matched": func(a arguments) float64 { return OneSidedMatched(a.number(0), a.number(1)).Ln() },
	"f_matched":         func(a arguments) float64 { return MatchedF(a.number(0), a.number(1), a.number(2)).Ln() },
	"region":            func(a arguments) float64 { return a.weigh(normalAt(a.number(2))) },
	"region_matched":    func(a arguments) float64 { return a.weigh(at(a.number(2), a.number(3), Empirical)) },
	"region_student_ln_M": func(a arguments) float64 {
		return at(a.number(1), a.number(2), StudentForm).LnM(a.region(0))
	},
	"posterior_share": func(a arguments) float64 {
		share := at(a.number(1), a.number(2), Empirical).Posterior(a.region(0))
		if other := at(a.number(1), a.number(2), StudentForm).Posterior(a.region(0)); other != share {
			a.t.Errorf("the posterior share depends on the form: %g and %g", share, other)
		}
		return share
	},
	"p_value_bound": func(a arguments) float64 { return PValueBound(a.number(0)).Ln() },
	"bound_student": func(a arguments) float64 { return BoundStudent(a.number(0), a.number(1)).Ln() },
}

// TestReference compares with the values of testdata/reference.csv; its README
// says how they were computed.
func TestReference(t *testing.T) {
	file, err := os.Open("testdata/reference.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	all, err := csv.NewReader(file).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	seen := map[string]bool{}
	for _, row := range all[1:] {
		f, ok := referenced[row[0]]
		if !ok {
			t.Fatalf("no function %q", row[0])
		}
		seen[row[0]] = true
		want, tol := number(t, row[5]), number(t, row[6])
		if got := f(arguments{t: t, text: row[1:5]}); !near(got, want, tol) {
			t.Errorf("%v = %.17g, want %.17g within %g, off by %.2g (mpmath)", row[:5], got, want, tol, math.Abs(got-want))
		}
	}
	if len(seen) != len(referenced) {
		t.Errorf("reference.csv covers %d of %d functions", len(seen), len(referenced))
	}
}
