package bayes

import (
	"context"
	"errors"
	"math"
	"testing"

	"github.com/google/go-cmp/cmp"
	"pgregory.net/rapid"

	"steelyard/meta"
	"steelyard/meta/evidence"
)

var restricted = meta.Model{Tau: meta.RestrictedML, Interval: meta.HartungKnappFloor, Level: 0.95}

// reweighed returns the refit of studies whose means carry the evidence of w against 0.
func reweighed(t testing.TB, w Weighing, y, s []float64) *Weighed {
	t.Helper()
	pairs, err := meta.NewPairs(restricted, y, s)
	if err != nil {
		t.Fatal(err)
	}
	r, err := NewWeighed(pairs, w, 0, y, s)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

func every(k int) []int {
	rows := make([]int, k)
	for i := range rows {
		rows[i] = i
	}
	return rows
}

// TestWeighedCarriesTheCheckFiles: the means carry the values of
// testdata/checks/*.integrated.csv, and are otherwise those of the pairs.
func TestWeighedCarriesTheCheckFiles(t *testing.T) {
	for _, name := range []string{"aspirin_lor", "bcg_lor", "eight_schools"} {
		y, s := readStudies(t, name)
		plain, err := restricted.Fit(y, s)
		if err != nil {
			t.Fatal(err)
		}
		for _, row := range rows(t, name+".integrated.csv") {
			for form, column := range map[evidence.Form]int{evidence.IntegratedForm: 2, evidence.AveragedForm: 9} {
				r := reweighed(t, Weighing{Form: form, Tau: tauPrior(t, row[0], row[1])}, y, s).Clone()
				mean, err := r.Mean(every(len(y)))
				if err != nil {
					t.Fatal(err)
				}
				if want := number(t, row[column]); !near(mean.Evidence.Ln(), want, 1e-6) {
					t.Errorf("%s, %s prior, %v: ln ER %v, want %v", name, row[0], form, mean.Evidence.Ln(), want)
				}
				if mean.Estimate != plain.Mean.Estimate || mean.Low != plain.Mean.Low || mean.LnP != plain.Mean.LnP {
					t.Errorf("%s: %+v, pairs give %+v", name, mean, plain.Mean)
				}
			}
		}
	}
}

// TestWeighedNormalPrior: under N(m, g²) the factor is the ratio of the densities
// N(m, g² + se²) and N(0, se²) at the estimate, a closed form (Wald interval).
func TestWeighedNormalPrior(t *testing.T) {
	y, s := readStudies(t, "bcg_lor")
	model := restricted
	model.Interval = meta.Wald
	mean, err := (&meta.Pooler{}).Pool(model, y, s)
	if err != nil {
		t.Fatal(err)
	}
	for _, p := range []struct{ m, g float64 }{{0, 0.5}, {-0.7, 0.2}, {1, 3}} {
		w := Weighing{Form: evidence.NormalPriorForm, Effect: EffectPrior{Kind: NormalPrior, Mean: p.m, Scale: p.g}}
		got, err := w.Evidence(mean, 0, nil, nil)
		if err != nil {
			t.Fatal(err)
		}
		v := mean.SE * mean.SE
		total := v + p.g*p.g
		want := 0.5*math.Log(v/total) - 0.5*(mean.Estimate-p.m)*(mean.Estimate-p.m)/total + 0.5*mean.Estimate*mean.Estimate/v
		if !near(got.Ln(), want, 1e-12) {
			t.Errorf("prior N(%v, %v²): ln ER %v, want %v", p.m, p.g, got.Ln(), want)
		}
	}
}

// TestWeighedParts: over any rows the evidence is that of those studies alone, and the
// details of an influence analysis are those of the pairs.
func TestWeighedParts(t *testing.T) {
	y, s := readStudies(t, "bcg_lor")
	prior := TauPrior{Kind: HalfNormal, Scale: 0.5}
	r := reweighed(t, Weighing{Form: evidence.IntegratedForm, Tau: prior}, y, s)
	list, err := meta.Influences(context.Background(), r, meta.Work{})
	if err != nil {
		t.Fatal(err)
	}
	plain, err := meta.Influences(context.Background(), r.Pooling(), meta.Work{})
	if err != nil {
		t.Fatal(err)
	}
	for i := range list {
		if d := cmp.Diff(plain[i].Detail, list[i].Detail); d != "" {
			t.Errorf("without study %d (-pairs +weighed):\n%s", i, d)
		}
		restY, restS := append(append([]float64{}, y[:i]...), y[i+1:]...), append(append([]float64{}, s[:i]...), s[i+1:]...)
		alone, err := Integrate(restY, restS, 0, prior)
		if err != nil {
			t.Fatal(err)
		}
		if got := list[i].Mean.Evidence; got != alone.Effect() {
			t.Errorf("without study %d: %v, these alone %v", i, got.Ln(), alone.Effect().Ln())
		}
	}
	if p := r.Prediction(); p == nil {
		t.Error("no prediction interval of 12 studies")
	}
}

// TestWeighingRefuses: priors that are not there, a family that is not the form's, and
// a uniform prior with two studies.
func TestWeighingRefuses(t *testing.T) {
	pairs, err := meta.NewPairs(restricted, []float64{1, 2}, []float64{1, 1})
	if err != nil {
		t.Fatal(err)
	}
	for _, w := range []Weighing{
		{Form: evidence.IntegratedForm, Tau: TauPrior{Kind: HalfNormal}},
		{Form: evidence.NormalPriorForm},
		{Form: evidence.NormalPriorForm, Effect: EffectPrior{Kind: CauchyPrior, Scale: 1}},
		{Form: evidence.CauchyPriorForm, Effect: EffectPrior{Kind: NormalPrior, Scale: 1}},
	} {
		var prior *PriorError
		if _, err := NewWeighed(pairs, w, 0, nil, nil); !errors.As(err, &prior) {
			t.Errorf("%+v: %v", w, err)
		}
	}
	r := reweighed(t, Weighing{Form: evidence.AveragedForm}, []float64{1, 2}, []float64{1, 1})
	if _, err := r.Mean(every(2)); !errors.Is(err, ErrUniformNeedsThree) {
		t.Errorf("two studies under a uniform prior: %v", err)
	}
	if got, err := (Weighing{Form: evidence.StudentForm}).Evidence(meta.Mean{Evidence: evidence.FromLn(3)}, 0, nil, nil); err != nil || got.Ln() != 3 {
		t.Errorf("an own form: %v, %v; want the mean's", got.Ln(), err)
	}
}

// TestPriorsStayBelowTheBound: no prior for the effect passes exp(z²/2) at the z matched
// to the interval (Edwards, Lindman & Savage 1963), whatever the studies.
func TestPriorsStayBelowTheBound(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		k := rapid.IntRange(1, 6).Draw(t, "k")
		y, s := make([]float64, k), make([]float64, k)
		for i := range y {
			y[i], s[i] = rapid.Float64Range(-3, 3).Draw(t, "y"), rapid.Float64Range(0.05, 2).Draw(t, "s")
		}
		mean, err := (&meta.Pooler{}).Pool(restricted, y, s)
		if err != nil {
			t.Fatal(err)
		}
		at, err := Matched(mean.Location(), 0)
		if err != nil {
			t.Fatal(err)
		}
		p := EffectPrior{Mean: 0, Scale: math.Exp(rapid.Float64Range(-4, 4).Draw(t, "ln scale")), Side: Side(rapid.IntRange(0, 2).Draw(t, "side"))}
		form := evidence.NormalPriorForm
		if rapid.Bool().Draw(t, "cauchy") {
			form, p.Kind = evidence.CauchyPriorForm, CauchyPrior
		}
		got, err := Weighing{Form: form, Effect: p}.Evidence(mean, 0, nil, nil)
		if err != nil {
			t.Fatal(err)
		}
		if bound := evidence.Bound(at.Z()).Ln(); got.Ln() > bound+1e-9 {
			t.Fatalf("ln ER %v, bound %v", got.Ln(), bound)
		}
	})
}
