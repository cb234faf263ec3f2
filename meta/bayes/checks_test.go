package bayes

import (
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"strings"
	"testing"
)

// near reports whether got is within a tolerance of want, relative to want where
// that is above 1 in size. NaN is near nothing.
func near(got, want, tolerance float64) bool {
	return got == want || math.Abs(got-want) <= tolerance*max(1, math.Abs(want))
}

// rows reads a file of testdata/checks without its header; the README there says
// how the values were computed.
func rows(t testing.TB, name string) [][]string {
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

func number(t testing.TB, text string) float64 {
	t.Helper()
	x, err := strconv.ParseFloat(text, 64)
	if err != nil {
		t.Fatal(err)
	}
	return x
}

// readStudies reads NAME.csv: study, y, se.
func readStudies(t testing.TB, name string) (y, s []float64) {
	t.Helper()
	for _, row := range rows(t, name+".csv") {
		y, s = append(y, number(t, row[1])), append(s, number(t, row[2]))
	}
	return y, s
}

// tauPrior reads a family and its scale as the check files write them.
func tauPrior(t testing.TB, kind, scale string) TauPrior {
	t.Helper()
	k, err := ParseTauPrior(kind)
	if err != nil {
		t.Fatal(err)
	}
	p := TauPrior{Kind: k}
	if scale != "" {
		p.Scale = number(t, scale)
	}
	return p
}

// TestIntegratedAgainstChecks compares with 40-digit arithmetic.
func TestIntegratedAgainstChecks(t *testing.T) {
	for _, name := range []string{"aspirin_lor", "bcg_lor", "eight_schools"} {
		y, s := readStudies(t, name)
		for _, row := range rows(t, name+".integrated.csv") {
			r, err := Integrate(y, s, 0, tauPrior(t, row[0], row[1]))
			if err != nil {
				t.Fatal(err)
			}
			p := r.Probabilities()
			got := []float64{r.Effect().Ln(), r.EffectGivenCommon().Ln(), r.Heterogeneity().Ln(),
				p[NoEffectCommon], p[EffectCommon], p[NoEffectRandom], p[EffectRandom], r.EffectAveraged().Ln()}
			for i, g := range got {
				want := number(t, row[2+i])
				// The file has 16 digits; probabilities of 1e-50 count relative to themselves.
				if !(math.Abs(g-want) <= 1e-9*math.Abs(want)) {
					t.Errorf("%s, %s, column %d: %.15g, want %.15g (40-digit arithmetic), off by %.1g", name, row[0], 3+i, g, want, g-want)
				}
			}
		}
	}
}

func weighed(t *testing.T, p EffectPrior, row []string) float64 {
	t.Helper()
	r, err := Observation{Estimate: number(t, row[1]), SE: number(t, row[2])}.Weigh(p)
	if err != nil {
		t.Fatal(err)
	}
	return r.Ln()
}

// extras are the rows of evidence_extra.csv about priors for the effect.
var extras = map[string]func(t *testing.T, row []string) float64{
	"prior_normal_ln_evidence_ratio": func(t *testing.T, row []string) float64 {
		return weighed(t, EffectPrior{Mean: number(t, row[3]), Scale: number(t, row[4])}, row)
	},
	"prior_half_normal_ln_evidence_ratio": func(t *testing.T, row []string) float64 {
		return weighed(t, EffectPrior{Mean: number(t, row[3]), Scale: number(t, row[4]), Side: AboveNull}, row)
	},
	"prior_cauchy_ln_evidence_ratio": func(t *testing.T, row []string) float64 {
		return weighed(t, EffectPrior{Kind: CauchyPrior, Scale: number(t, row[4])}, row)
	},
	"prior_half_cauchy_ln_evidence_ratio": func(t *testing.T, row []string) float64 {
		return weighed(t, EffectPrior{Kind: CauchyPrior, Scale: number(t, row[4]), Side: AboveNull}, row)
	},
	"scepticism_limit": func(t *testing.T, row []string) float64 {
		limit, err := ScepticismLimit(number(t, row[1]), number(t, row[2]), 0)
		if err != nil {
			t.Fatal(err)
		}
		return limit
	},
}

func TestExtrasAgainstChecks(t *testing.T) {
	seen := map[string]bool{}
	for _, row := range rows(t, "evidence_extra.csv") {
		f, ok := extras[row[0]]
		if !ok {
			if strings.HasPrefix(row[0], "prior_") {
				t.Errorf("nothing computes %s", row[0])
			}
			continue
		}
		seen[row[0]] = true
		if got, want, tol := f(t, row), number(t, row[5]), number(t, row[6]); !near(got, want, tol) {
			t.Errorf("%v = %.17g, want %.17g within %g (%s)", row[:5], got, want, tol, row[7])
		}
	}
	if len(seen) != len(extras) {
		t.Errorf("evidence_extra.csv covers %v of %d functions", seen, len(extras))
	}
}
