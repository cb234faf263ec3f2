package bayes

import (
	"math"
	"math/rand/v2"
	"testing"

	"steelyard/meta/numeric"
)

// sampled is one draw of a posterior: the mean effect, τ, the effect in a new setting and
// each study's own.
type sampled struct {
	effect, tau, setting float64
	own                  []float64
}

// shares compares the posterior's limits and medians with draws: the share of draws
// below each must be its chance, within four standard errors of means of batches.
func shares(t *testing.T, what string, p *Posterior, draws []sampled, weight []float64) {
	t.Helper()
	const batches = 100
	check := func(name string, q Quantiles, of func(d sampled) float64) {
		for _, at := range []struct{ x, chance float64 }{{q.Low, 0.025}, {q.Median, 0.5}, {q.High, 0.975}} {
			var below, total [batches]float64
			for i, d := range draws {
				w := 1.0
				if weight != nil {
					w = weight[i]
				}
				batch := i * batches / len(draws)
				total[batch] += w
				if of(d) < at.x {
					below[batch] += w
				}
			}
			sum, all := 0.0, 0.0
			for i := range below {
				sum, all = sum+below[i], all+total[i]
			}
			share, squares := sum/all, 0.0
			for i := range below { // of a ratio of two sums
				e := (below[i] - share*total[i]) * batches / all
				squares += e * e
			}
			if se := math.Sqrt(squares / (batches - 1) / batches); math.Abs(share-at.chance) > 4*se+1e-4 {
				t.Errorf("%s, %s: %.5f of the draws below %v, want %v (± %.5f)", what, name, share, at.x, at.chance, se)
			}
		}
	}
	check("mean effect", p.Effect, func(d sampled) float64 { return d.effect })
	check("τ", p.Tau, func(d sampled) float64 { return d.tau })
	check("new setting", p.New, func(d sampled) float64 { return d.setting })
	for i, study := range p.Studies {
		check("study", study.Quantiles, func(d sampled) float64 { return d.own[i] })
	}
}

// TestPosteriorIsGibbs: eight schools under the uniform prior for τ, drawn by the
// Gibbs sampler: given the effects of the studies, τ² is inverse-gamma with shape
// (k − 1)/2 and scale Σ(θ − μ)²/2, and the rest is normal (Gelman et al., Bayesian Data
// Analysis, section 5.4).
func TestPosteriorIsGibbs(t *testing.T) {
	y, s := readStudies(t, "eight_schools")
	p, err := PosteriorOf(y, s, TauPrior{}, 0.95)
	if err != nil {
		t.Fatal(err)
	}
	random := rand.New(rand.NewPCG(5, 11))
	k := len(y)
	own := append([]float64{}, y...)
	mu, tau := 8.0, 5.0
	var draws []sampled
	for i := range 600_000 {
		squares, total := 0.0, 0.0
		for j := range own {
			squares += (own[j] - mu) * (own[j] - mu)
		}
		chi := 0.0 // chi-square on k − 1 degrees of freedom
		for range k - 1 {
			z := random.NormFloat64()
			chi += z * z
		}
		tau = math.Sqrt(squares / chi)
		for j := range own {
			v, w := s[j]*s[j], tau*tau
			own[j] = (y[j]*w+mu*v)/(v+w) + math.Sqrt(v*w/(v+w))*random.NormFloat64()
			total += own[j]
		}
		mu = total/float64(k) + tau/math.Sqrt(float64(k))*random.NormFloat64()
		if i >= 2000 && i%3 == 0 {
			draws = append(draws, sampled{effect: mu, tau: tau, setting: mu + tau*random.NormFloat64(), own: append([]float64{}, own...)})
		}
	}
	shares(t, "eight schools", p, draws, nil)
}

// TestPosteriorIsWeightedDraws: under proper priors, draws of τ from the prior weighted
// by the likelihood with the mean integrated out, and the rest drawn given τ.
func TestPosteriorIsWeightedDraws(t *testing.T) {
	for _, study := range []struct {
		name  string
		prior TauPrior
	}{
		{"bcg_lor", TauPrior{Kind: HalfNormal, Scale: 0.5}},
		{"bcg_lor", TauPrior{Kind: LogNormal, MeanLog: -1, SDLog: 0.8}},
		{"aspirin_lor", TauPrior{Kind: HalfCauchy, Scale: 0.5}},
	} {
		y, s := readStudies(t, study.name)
		p, err := PosteriorOf(y, s, study.prior, 0.95)
		if err != nil {
			t.Fatal(err)
		}
		random := rand.New(rand.NewPCG(7, 3))
		var draws []sampled
		var logs, weight []float64
		top := math.Inf(-1)
		for range 300_000 {
			tau := study.prior.draw(random)
			w, wy, ln := 0.0, 0.0, 0.0
			for i := range y {
				v := s[i]*s[i] + tau*tau
				w, wy = w+1/v, wy+y[i]/v
				ln -= 0.5 * math.Log(v)
			}
			for i := range y {
				ln -= 0.5 * (y[i] - wy/w) * (y[i] - wy/w) / (s[i]*s[i] + tau*tau)
			}
			ln -= 0.5 * math.Log(w)
			d := sampled{effect: wy/w + random.NormFloat64()/math.Sqrt(w), tau: tau}
			d.setting = d.effect + tau*random.NormFloat64()
			for i := range y {
				v, b := s[i]*s[i], tau*tau
				d.own = append(d.own, (y[i]*b+d.effect*v)/(v+b)+math.Sqrt(v*b/(v+b))*random.NormFloat64())
			}
			draws, logs, top = append(draws, d), append(logs, ln), max(top, ln)
		}
		for _, ln := range logs {
			weight = append(weight, math.Exp(ln-top))
		}
		shares(t, study.name+", "+study.prior.Kind.String(), p, draws, weight)
	}
}

// TestMixtureIsTheQuadrature: the rule of equal steps gives the limits that the
// adaptive quadrature gives, and the chances at them; above and below add up to 1.
func TestMixtureIsTheQuadrature(t *testing.T) {
	for _, name := range []string{"aspirin_lor", "bcg_lor", "betablocker_lor", "eight_schools"} {
		y, s := readStudies(t, name)
		for _, prior := range []TauPrior{{}, {Kind: HalfNormal, Scale: 0.5}, {Kind: HalfCauchy, Scale: 0.1}, {Kind: LogNormal, MeanLog: -4, SDLog: 3}} {
			p, err := PosteriorOf(y, s, prior, 0.9)
			if err != nil {
				t.Errorf("%s, %v: %v", name, prior, err)
				continue
			}
			for _, at := range []struct{ x, chance float64 }{{p.Effect.Low, 0.05}, {p.Effect.Median, 0.5}, {p.Effect.High, 0.95}} {
				if c := p.Mean(at.x); !near(c.Below, at.chance, 1e-7) || !near(c.Below+c.Above, 1, 1e-12) {
					t.Errorf("%s, %v: chance %+v below %v, want %v", name, prior, c, at.x, at.chance)
				}
			}
			if c := p.Setting(p.New.High); !near(c.Above, 0.05, 1e-7) {
				t.Errorf("%s, %v: chance %+v above the predictive limit", name, prior, c)
			}
		}
	}
}

// TestPosteriorOfOneTau: as the prior narrows round one τ the posterior of each study
// tends to the best linear unbiased prediction at that τ, a closed form.
func TestPosteriorOfOneTau(t *testing.T) {
	const tau = 0.6
	y, s := []float64{0.2, 1.4, -0.5, 0.9}, []float64{0.3, 0.5, 0.2, 0.8}
	p, err := PosteriorOf(y, s, TauPrior{Kind: LogNormal, MeanLog: math.Log(tau), SDLog: 1e-5}, 0.95)
	if err != nil {
		t.Fatal(err)
	}
	w, wy := 0.0, 0.0
	for i := range y {
		v := s[i]*s[i] + tau*tau
		w, wy = w+1/v, wy+y[i]/v
	}
	z := numeric.NormalCritical(0.05)
	same := func(what string, got, want float64) {
		if !near(got, want, 1e-6) {
			t.Errorf("%s: %v, want %v", what, got, want)
		}
	}
	same("predictive limit", p.New.High, wy/w+z*math.Sqrt(1/w+tau*tau))
	for i := range y {
		v := s[i] * s[i]
		toward := v / (v + tau*tau)
		sd := math.Sqrt((1-toward)*v + toward*toward/w)
		same("study", p.Studies[i].Median, (1-toward)*y[i]+toward*wy/w)
		same("study's limit", p.Studies[i].Low, (1-toward)*y[i]+toward*wy/w-z*sd)
		same("toward", p.Studies[i].Toward, toward)
	}
}
