package bayes

import (
	"errors"
	"math"
	"math/rand/v2"
	"testing"

	"steelyard/meta"
	"steelyard/meta/evidence"
)

// drawn returns k studies that scatter more than their standard errors imply.
func drawn(k int) (y, s []float64) {
	random := rand.New(rand.NewPCG(11, uint64(k)))
	for range k {
		s = append(s, math.Exp(0.7*random.NormFloat64()))
		y = append(y, 0.5+0.8*random.NormFloat64()+s[len(s)-1]*random.NormFloat64())
	}
	return y, s
}

// everyTauPrior has each family.
var everyTauPrior = []TauPrior{{}, {Kind: HalfNormal, Scale: 0.5}, {Kind: HalfCauchy, Scale: 0.5}, {Kind: LogNormal, MeanLog: -1, SDLog: 0.8}}

func mustIntegrate(t testing.TB, y, s []float64, null float64, p TauPrior) *Integrated {
	t.Helper()
	r, err := Integrate(y, s, null, p)
	if err != nil {
		t.Fatalf("%+v: %v", p, err)
	}
	return r
}

// scaled returns the prior for estimates b times as large.
func (p TauPrior) scaled(b float64) TauPrior { return p.in(1 / math.Abs(b)) }

func TestUnitAndOriginDoNotMatter(t *testing.T) {
	for _, p := range everyTauPrior {
		for _, k := range []int{3, 8, 40} {
			y, s := drawn(k)
			want := mustIntegrate(t, y, s, 0.2, p)
			for _, move := range [][2]float64{{0, 1e-3}, {5, 1}, {-2e6, -40}, {0, 1e80}} {
				a, b := move[0], move[1]
				y2, s2 := make([]float64, k), make([]float64, k)
				for i := range y {
					at := (i + 1) % k // the order does not matter either
					y2[i], s2[i] = a+b*y[at], math.Abs(b)*s[at]
				}
				got := mustIntegrate(t, y2, s2, a+0.2*b, p.scaled(b))
				for name, pair := range map[string][2]float64{
					"effect":        {got.Effect().Ln(), want.Effect().Ln()},
					"averaged":      {got.EffectAveraged().Ln(), want.EffectAveraged().Ln()},
					"heterogeneity": {got.HeterogeneityAveraged().Ln(), want.HeterogeneityAveraged().Ln()},
				} {
					if !near(pair[0], pair[1], 1e-9) {
						t.Errorf("%+v, k = %d, y → %v + %v y: %s %.12g, before %.12g", p, k, a, b, name, pair[0], pair[1])
					}
				}
			}
		}
	}
}

// TestNarrowPriorIsCommonEffect: as the scale of the prior falls τ is 0, so that
// the integrated form tends to the normal form of the common effect, and τ > 0
// loses only the correction of its parameter.
func TestNarrowPriorIsCommonEffect(t *testing.T) {
	for _, k := range []int{1, 2, 5, 30} {
		y, s := drawn(k)
		for _, kind := range []TauPriorKind{HalfNormal, HalfCauchy} {
			r := mustIntegrate(t, y, s, 0, TauPrior{Kind: kind, Scale: 1e-9})
			if got, want := r.Effect().Ln(), r.EffectGivenCommon().Ln(); !near(got, want, 1e-6) {
				t.Errorf("%v, k = %d: %.9g, common effect %.9g", kind, k, got, want)
			}
			if got := r.Heterogeneity().Ln(); !near(got, -0.5, 1e-6) {
				t.Errorf("%v, k = %d: ln ER for heterogeneity %.9g, want −½", kind, k, got)
			}
		}
	}
}

// TestNarrowLogNormalFixesTau: with ln τ all but known the integrated form is the
// normal form at that τ, by hand for equal standard errors.
func TestNarrowLogNormalFixesTau(t *testing.T) {
	y, s := []float64{0.1, 0.9, 0.5, 1.3}, []float64{0.3, 0.3, 0.3, 0.3}
	r := mustIntegrate(t, y, s, 0, TauPrior{Kind: LogNormal, MeanLog: math.Log(0.4), SDLog: 1e-6})
	z := 0.7 / (0.5 / 2) // mean 0.7, each estimate with variance 0.3² + 0.4²
	if got, want := r.Effect().Ln(), evidence.Normal(z).Ln(); !near(got, want, 1e-6) {
		t.Errorf("ln ER %.9g, want %.9g", got, want)
	}
}

// TestUniformIsWideHalfNormal: a half-normal of a huge scale is flat where the
// data are.
func TestUniformIsWideHalfNormal(t *testing.T) {
	y, s := drawn(8)
	flat, wide := mustIntegrate(t, y, s, 0, TauPrior{}), mustIntegrate(t, y, s, 0, TauPrior{Kind: HalfNormal, Scale: 1e7})
	if got, want := wide.Effect().Ln(), flat.Effect().Ln(); !near(got, want, 1e-8) {
		t.Errorf("wide half-normal %.12g, uniform %.12g", got, want)
	}
}

func TestProbabilitiesAndAverages(t *testing.T) {
	for _, p := range everyTauPrior {
		y, s := drawn(6)
		r := mustIntegrate(t, y, s, 0, p)
		q := r.Probabilities()
		if sum := q[0] + q[1] + q[2] + q[3]; !near(sum, 1, 1e-14) {
			t.Errorf("%+v: probabilities sum to %v", p, sum)
		}
		if got, want := r.EffectAveraged().Ln(), math.Log((q[EffectCommon]+q[EffectRandom])/(q[NoEffectCommon]+q[NoEffectRandom])); !near(got, want, 1e-12) {
			t.Errorf("%+v: averaged effect %v, from the probabilities %v", p, got, want)
		}
		if got, want := r.HeterogeneityAveraged().Ln(), math.Log((q[NoEffectRandom]+q[EffectRandom])/(q[NoEffectCommon]+q[EffectCommon])); !near(got, want, 1e-12) {
			t.Errorf("%+v: averaged heterogeneity %v, from the probabilities %v", p, got, want)
		}
	}
}

func TestExceededAtTwiceTheScale(t *testing.T) {
	y, s := readStudies(t, "bcg_lor") // restricted-likelihood τ² 0.337772: PUBLISHED.md, recalculated
	tau := math.Sqrt(0.337772)
	for scale, want := range map[float64]bool{0.49 * tau: true, 0.51 * tau: false} {
		for _, kind := range []TauPriorKind{HalfNormal, HalfCauchy} {
			r := mustIntegrate(t, y, s, 0, TauPrior{Kind: kind, Scale: scale})
			if r.Exceeded != want || !near(r.Tau, tau, 1e-5) {
				t.Errorf("%v of scale %v: τ = %v, exceeded %v", kind, scale, r.Tau, r.Exceeded)
			}
		}
	}
	if (TauPrior{}).Exceeded(1e9) {
		t.Error("a uniform prior was exceeded")
	}
	p := TauPrior{Kind: LogNormal, MeanLog: 0, SDLog: 1}
	if p.Exceeded(7.3) || !p.Exceeded(7.5) { // e² = 7.39
		t.Error("the log-normal prior is exceeded elsewhere than at e²")
	}
}

func TestRefusals(t *testing.T) {
	two := []float64{1, 2}
	if _, err := Integrate(two, two, 0, TauPrior{}); !errors.Is(err, ErrUniformNeedsThree) {
		t.Errorf("uniform with two studies: %v", err)
	}
	if _, err := Integrate(nil, nil, 0, TauPrior{}); !errors.Is(err, meta.ErrNoStudies) {
		t.Errorf("no studies: %v", err)
	}
	var input *meta.InputError
	if _, err := Integrate(two, []float64{1, 0}, 0, everyTauPrior[1]); !errors.As(err, &input) || input.Index != 1 {
		t.Errorf("standard error 0: %v", err)
	}
	if _, err := Integrate([]float64{0, 1e120}, []float64{1, 1}, 0, everyTauPrior[1]); !errors.Is(err, ErrOutOfRange) {
		t.Errorf("estimates apart by 1e120: %v", err)
	}
	var model *meta.ModelError
	if _, err := Integrate(two, two, math.NaN(), everyTauPrior[1]); !errors.As(err, &model) {
		t.Errorf("null not a number: %v", err)
	}
	for _, p := range []TauPrior{{Kind: HalfNormal}, {Kind: HalfCauchy, Scale: math.Inf(1)}, {Kind: LogNormal}, {Kind: LogNormal, SDLog: 11},
		{Kind: LogNormal, MeanLog: math.NaN(), SDLog: 1}, {Kind: 9}} {
		var fault *PriorError
		if _, err := Integrate(two, two, 0, p); !errors.As(err, &fault) {
			t.Errorf("%+v: %v", p, err)
		}
	}
}

// TestPosteriorOfNarrowPrior: with τ all but 0 the posterior of the effect is the
// common effect's normal law; τ itself has the half-normal's quantiles.
func TestPosteriorOfNarrowPrior(t *testing.T) {
	y, s := []float64{0.2, 0.5, 0.8}, []float64{0.3, 0.3, 0.3}
	p, err := PosteriorOf(y, s, TauPrior{Kind: HalfNormal, Scale: 1e-7}, 0.95)
	if err != nil {
		t.Fatal(err)
	}
	const z, se = 1.9599639845400545, 0.3 / 1.7320508075688772
	for name, pair := range map[string][2]float64{
		"low": {p.Effect.Low, 0.5 - z*se}, "median": {p.Effect.Median, 0.5}, "high": {p.Effect.High, 0.5 + z*se}, "mean": {*p.Effect.Mean, 0.5},
		// P(|Z| < 0.67449) = ½, E|Z| = √(2/π).
		"τ median": {1e7 * p.Tau.Median, 0.6744897501960817}, "τ mean": {1e7 * *p.Tau.Mean, math.Sqrt(2 / math.Pi)},
	} {
		if !near(pair[0], pair[1], 1e-7) {
			t.Errorf("%s: %.12g, want %.12g", name, pair[0], pair[1])
		}
	}
}

// TestPosteriorMeansExist: with three studies under the uniform prior the tail of
// τ falls as τ⁻², which has no mean.
func TestPosteriorMeansExist(t *testing.T) {
	y, s := drawn(4)
	for k, want := range map[int]bool{3: false, 4: true} {
		p, err := PosteriorOf(y[:k], s[:k], TauPrior{}, 0.9)
		if err != nil {
			t.Fatal(err)
		}
		if (p.Tau.Mean != nil) != want || (p.Effect.Mean != nil) != want {
			t.Errorf("k = %d: means of τ %v and of the effect %v", k, p.Tau.Mean, p.Effect.Mean)
		}
	}
	if _, err := PosteriorOf(y, s, TauPrior{}, 1); err == nil {
		t.Error("a level of 1 was taken")
	}
	if _, err := PosteriorOf(nil, nil, TauPrior{Kind: HalfNormal, Scale: 1}, 0.9); !errors.Is(err, meta.ErrNoStudies) {
		t.Errorf("no studies: %v", err)
	}
}
