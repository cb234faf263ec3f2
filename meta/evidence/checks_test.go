package evidence

import (
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"strings"
	"testing"
)

// near reports whether got is within relTol of want, relative to want where that
// is above 1 in size. NaN is near nothing.
func near(got, want, relTol float64) bool {
	return got == want || math.Abs(got-want) <= relTol*max(1, math.Abs(want))
}

// rows reads a file of testdata/checks; its README says how the values were
// computed.
func rows(t *testing.T, name string) [][]string {
	t.Helper()
	file, err := os.Open("../../testdata/checks/" + name)
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	all, err := csv.NewReader(file).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	return all[1:]
}

func number(t *testing.T, text string) float64 {
	t.Helper()
	x, err := strconv.ParseFloat(text, 64)
	if err != nil {
		t.Fatal(err)
	}
	return x
}

// region reads "low;high|low;high".
func region(t *testing.T, text string) Region {
	t.Helper()
	var r Region
	for _, part := range strings.Split(text, "|") {
		low, high, ok := strings.Cut(part, ";")
		if !ok {
			t.Fatalf("region %q", text)
		}
		r = append(r, Interval{Low: number(t, low), High: number(t, high)})
	}
	return r
}

// arguments of a check row, with what is asked of them.
type arguments struct {
	t    *testing.T
	text []string
}

func (a arguments) number(i int) float64 { return number(a.t, a.text[i]) }
func (a arguments) region(i int) Region  { return region(a.t, a.text[i]) }

// normalAt is an estimate of z with standard error 1 and a normal error.
func normalAt(z float64) Location { return Location{Estimate: z, SE: 1, DF: math.Inf(1)} }

// at is an estimate in units of its standard error with degrees of freedom and
// form, moved and scaled so that both are exercised.
func at(t, df float64, form Form) Location { return Location{Estimate: t, SE: 1, DF: df, Form: form} }

func (a arguments) weigh(l Location) float64 {
	a.t.Helper()
	ratio, err := l.Region(a.region(0), a.region(1))
	if err != nil {
		a.t.Fatal(err)
	}
	return ratio.Ln()
}

// forms are the rows of evidence.csv by name.
var forms = map[string]func(a arguments) float64{
	"normal":      func(a arguments) float64 { return Normal(a.number(0)).Ln() },
	"one_sided":   func(a arguments) float64 { return OneSided(a.number(0)).Ln() },
	"chi_square":  func(a arguments) float64 { return ChiSquare(a.number(0), a.number(1)).Ln() },
	"t":           func(a arguments) float64 { return Student(a.number(0), a.number(1)).Ln() },
	"f":           func(a arguments) float64 { return F(a.number(0), a.number(1), a.number(2)).Ln() },
	"p_value":     func(a arguments) float64 { return PValue(a.number(0)).Ln() },
	"one_sided_t": func(a arguments) float64 { return OneSidedStudent(a.number(0), a.number(1)).Ln() },
	"t_matched":   func(a arguments) float64 { return Matched(a.number(0), a.number(1)).Ln() },
	"region_ln_M": func(a arguments) float64 {
		return normalAt(a.number(2)).LnM(Region{{Low: a.number(0), High: a.number(1)}})
	},
	"region_t_ln_M": func(a arguments) float64 {
		return at(a.number(1), a.number(2), StudentForm).LnM(a.region(0))
	},
}

func TestFormsAgainstChecks(t *testing.T) {
	seen := map[string]bool{}
	for _, row := range rows(t, "evidence.csv") {
		f, ok := forms[row[0]]
		if !ok {
			t.Fatalf("no form %q", row[0])
		}
		seen[row[0]] = true
		want := number(t, row[4])
		if got := f(arguments{t: t, text: row[1:4]}); !near(got, want, 1e-9) {
			t.Errorf("%v: ln ER = %.15g, want %.15g (40-digit arithmetic)", row[:4], got, want)
		}
	}
	if len(seen) != len(forms) {
		t.Errorf("evidence.csv covers %d of %d forms", len(seen), len(forms))
	}
}

// extras are the rows of evidence_extra.csv that belong to this package; others
// are checked where their method lives.
var extras = map[string]func(a arguments) float64{
	"region_correction_beta":           func(a arguments) float64 { return normalAt(a.number(2)).Correction(a.region(0)) },
	"region_ln_M_union":                func(a arguments) float64 { return normalAt(a.number(2)).LnM(a.region(0)) },
	"region_ln_evidence_ratio":         func(a arguments) float64 { return a.weigh(normalAt(a.number(2))) },
	"region_t_ln_evidence_ratio":       func(a arguments) float64 { return a.weigh(at(a.number(2), a.number(3), StudentForm)) },
	"region_matched_ln_evidence_ratio": func(a arguments) float64 { return a.weigh(at(a.number(2), a.number(3), Empirical)) },
	"t_corrections_b1_minus_b0":        func(a arguments) float64 { return correctionF(1, a.number(0)) },
	"p_value_exact_ln_evidence_ratio":  func(a arguments) float64 { return PValueExact(a.number(0)).Ln() },
	"doubters_prior":                   func(a arguments) float64 { return DoubtersPrior(FromLn(math.Log(a.number(0))), a.number(1)) },
}

func TestExtrasAgainstChecks(t *testing.T) {
	seen := map[string]int{}
	for _, row := range rows(t, "evidence_extra.csv") {
		f, ok := extras[row[0]]
		if !ok {
			continue
		}
		seen[row[0]]++
		want, tol := number(t, row[5]), number(t, row[6])
		got := f(arguments{t: t, text: row[1:5]})
		if !near(got, want, tol) {
			t.Errorf("%v = %.17g, want %.17g within %g (%s)", row[:5], got, want, tol, row[7])
		}
	}
	if len(seen) != len(extras) {
		t.Errorf("evidence_extra.csv covers %v of %d functions", seen, len(extras))
	}
}
