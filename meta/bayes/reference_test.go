package bayes

import (
	"encoding/csv"
	"math"
	"os"
	"strings"
	"testing"
)

// reference reads a file of testdata, whose README says how it was computed.
func reference(t testing.TB, name string) [][]string {
	t.Helper()
	file, err := os.Open("testdata/" + name)
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

func numbers(t testing.TB, text string) []float64 {
	t.Helper()
	var list []float64
	for _, field := range strings.Fields(text) {
		list = append(list, number(t, field))
	}
	return list
}

// priorOf reads a family with its numbers.
func priorOf(t testing.TB, text string) TauPrior {
	t.Helper()
	name, rest, _ := strings.Cut(text, " ")
	p := tauPrior(t, name, "")
	switch at := numbers(t, rest); p.Kind {
	case HalfNormal, HalfCauchy:
		p.Scale = at[0]
	case LogNormal:
		p.MeanLog, p.SDLog = at[0], at[1]
	}
	return p
}

// TestExtremesAgainstReference: log-normal priors, few studies, standard errors
// apart by a million, estimates 20,000 and a million standard errors off, a narrow
// prior against scattered data, digits behind an offset, two clusters.
func TestExtremesAgainstReference(t *testing.T) {
	for _, row := range reference(t, "reference.csv") {
		r, err := Integrate(numbers(t, row[1]), numbers(t, row[2]), number(t, row[3]), priorOf(t, row[4]))
		if err != nil {
			t.Errorf("%s: %v", row[0], err)
			continue
		}
		if got, want := r.Effect().Ln(), number(t, row[5]); !near(got, want, 1e-9) {
			t.Errorf("%s: ln ER for an effect %.15g, want %.15g (mpmath), off by %.1g", row[0], got, want, got-want)
		}
		if got, want := r.Heterogeneity().Ln(), number(t, row[6]); !near(got, want, 1e-9) {
			t.Errorf("%s: ln ER for heterogeneity %.15g, want %.15g (mpmath), off by %.1g", row[0], got, want, got-want)
		}
	}
}

func TestPosteriorAgainstReference(t *testing.T) {
	for _, row := range reference(t, "posterior.csv") {
		y, s := readStudies(t, row[0])
		p, err := PosteriorOf(y, s, priorOf(t, row[1]), 0.95)
		if err != nil {
			t.Fatal(err)
		}
		got := []float64{p.Tau.Low, p.Tau.Median, p.Tau.High, p.Effect.Low, p.Effect.Median, p.Effect.High, *p.Tau.Mean, *p.Effect.Mean}
		for i, g := range got {
			if want := number(t, row[2+i]); !(math.Abs(g-want) <= 1e-8*math.Abs(want)) {
				t.Errorf("%s, column %d: %.12g, want %.12g (mpmath)", row[0], 3+i, g, want)
			}
		}
	}
}
