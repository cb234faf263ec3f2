package bayes

import (
	"math"
	"testing"
)

// TestBetaBlockers: the posterior of Gelman et al., Bayesian Data Analysis, table 5.4 and
// section 5.6 (from memory, as testdata/checks/PUBLISHED.md §3 has it), from the same
// normal likelihood under a uniform prior for τ. It was drawn on a grid of τ and is
// printed with two decimals: 0.02 for both.
func TestBetaBlockers(t *testing.T) {
	y, s := readStudies(t, "betablocker_lor")
	p, err := PosteriorOf(y, s, TauPrior{}, 0.95)
	if err != nil {
		t.Fatal(err)
	}
	printed(t, "mean effect", p.Effect, [3]float64{-0.37, -0.25, -0.11}, 0.02)
	printed(t, "τ", p.Tau, [3]float64{0.02, 0.13, 0.31}, 0.02)
	printed(t, "new setting", p.New, [3]float64{-0.58, -0.25, 0.11}, 0.02)
}

func printed(t *testing.T, what string, q Quantiles, want [3]float64, tolerance float64) {
	t.Helper()
	for i, got := range []float64{q.Low, q.Median, q.High} {
		if !(math.Abs(got-want[i]) <= tolerance) {
			t.Errorf("%s: %v, printed %v ± %v", what, got, want[i], tolerance)
		}
	}
}

// reweighted returns the posterior of mean effect and τ under any prior density, from
// the nodes of a half-Cauchy one.
func reweighted(t *testing.T, y, s []float64, density func(tau float64) float64) (effect Quantiles, tau float64, setting Quantiles) {
	t.Helper()
	d, err := newStudies(y, s, 0, TauPrior{Kind: HalfCauchy, Scale: 1})
	if err != nil {
		t.Fatal(err)
	}
	f := d.integrand(1, true)
	m, err := survey(f, d.lo, d.hi)
	if err != nil {
		t.Fatal(err)
	}
	ln, err := m.lnIntegral(f, nil)
	if err != nil {
		t.Fatal(err)
	}
	nodes, err := (&marginal{d: d, f: f, mass: m, total: math.Exp(ln - m.height)}).nodes()
	if err != nil {
		t.Fatal(err)
	}
	total := 0.0
	for i := range nodes {
		x := nodes[i].tau * d.unit
		nodes[i].weight *= density(x) * (1 + x*x)
		total += nodes[i].weight
	}
	for i := range nodes {
		nodes[i].weight /= total
		tau += nodes[i].weight * nodes[i].tau * d.unit
	}
	mean, err := mixed(nodes, func(n node) (mean, variance float64) { return n.mean, n.variance }).quantiles(0.95)
	if err != nil {
		t.Fatal(err)
	}
	next, err := mixed(nodes, func(n node) (mean, variance float64) { return n.mean, n.variance + n.tau*n.tau }).quantiles(0.95)
	if err != nil {
		t.Fatal(err)
	}
	return d.placed(mean), tau, d.placed(next)
}

// TestBetaBlockersCounts: BUGS Examples Volume I, "Blocker", as PUBLISHED.md §3 has it,
// under a gamma(0.001, 0.001) prior for 1/τ². Its likelihood is binomial with free
// control risks, ours normal, and its draws are autocorrelated: 0.03.
func TestBetaBlockersCounts(t *testing.T) {
	y, s := readStudies(t, "betablocker_lor")
	effect, tau, setting := reweighted(t, y, s, vagueGamma)
	printed(t, "mean effect", effect, [3]float64{-0.3692, -0.2502, -0.1276}, 0.03)
	printed(t, "new setting", setting, [3]float64{-0.5473, -0.2501, 0.0589}, 0.03)
	if math.Abs(tau-0.1134) > 0.03 {
		t.Errorf("mean of τ: %v, printed 0.1134", tau)
	}
}

// vagueGamma is the density of τ when 1/τ² is gamma with shape and rate 0.001.
func vagueGamma(tau float64) float64 {
	return math.Pow(tau, -1.002) * math.Exp(-0.001/(tau*tau))
}

// TestMagnesiumUnderPriors: BUGS Examples, "Magnesium", the interval of the odds ratio and
// the mean of τ under six priors, as PUBLISHED.md §4 has them. Its likelihood is
// binomial with free control risks. Five of the eight trials have one or two deaths in an
// arm, where the normal likelihood pulls large odds ratios in: its τ is smaller by up to
// 0.19 and the limits of the log odds ratio are higher by up to 0.41. The forms of the
// priors of DuMouchel, of uniform shrinkage and of the half-normal for τ² (with the
// harmonic mean s² of the variances: s/(s + τ), s²/(s² + τ²), and 0.7734/s² as precision)
// are from memory.
func TestMagnesiumUnderPriors(t *testing.T) {
	var y, s []float64
	inverse := 0.0
	for _, n := range [][4]float64{
		{1, 40, 2, 36}, {9, 135, 23, 135}, {2, 200, 7, 200}, {1, 48, 1, 46}, {10, 150, 8, 148}, {1, 59, 9, 56}, {1, 25, 3, 23}, {90, 1159, 118, 1157},
	} {
		a, b, c, d := n[0], n[1]-n[0], n[2], n[3]-n[2]
		v := 1/a + 1/b + 1/c + 1/d
		y, s, inverse = append(y, math.Log(a*d/(b*c))), append(s, math.Sqrt(v)), inverse+1/v
	}
	s2 := float64(len(y)) / inverse
	within := func(density func(x float64) float64, most float64) func(x float64) float64 {
		return func(x float64) float64 {
			if x > most {
				return 0
			}
			return density(x)
		}
	}
	taus := map[string]float64{}
	for _, prior := range []struct {
		name           string
		density        func(x float64) float64
		low, high, tau float64
	}{
		{"gamma", vagueGamma, 0.1967, 0.7840, 0.5413},
		{"uniform for τ²", within(func(x float64) float64 { return x }, math.Sqrt(50)), 0.1120, 0.9556, 1.122},
		{"uniform for τ", within(func(float64) float64 { return 1 }, 50), 0.1450, 0.8413, 0.8217},
		{"uniform shrinkage", func(x float64) float64 { return x / math.Pow(s2+x*x, 2) }, 0.2169, 0.7662, 0.4940},
		{"DuMouchel", func(x float64) float64 { return 1 / math.Pow(math.Sqrt(s2)+x, 2) }, 0.2053, 0.7784, 0.5074},
		{"half-normal for τ²", func(x float64) float64 { return x * math.Exp(-0.5*math.Pow(x, 4)*0.7734/s2) }, 0.2158, 0.7561, 0.5589},
	} {
		effect, tau, _ := reweighted(t, y, s, prior.density)
		taus[prior.name] = tau
		low, high := effect.Low-math.Log(prior.low), effect.High-math.Log(prior.high)
		if !(0 <= low && low <= 0.41 && 0 <= high && high <= 0.25) {
			t.Errorf("%s: odds ratio %v to %v, printed %v to %v", prior.name, math.Exp(effect.Low), math.Exp(effect.High), prior.low, prior.high)
		}
		if !(tau <= prior.tau && prior.tau-tau <= 0.19) {
			t.Errorf("%s: mean of τ %v, printed %v", prior.name, tau, prior.tau)
		}
		if prior.name == "uniform for τ" { // the family of this package: its cut at 50 cuts nothing off
			p, err := PosteriorOf(y, s, TauPrior{}, 0.95)
			if err != nil || !near(p.Effect.Low, effect.Low, 1e-5) || !near(*p.Tau.Mean, tau, 1e-5) {
				t.Errorf("uniform family: %+v, %v; reweighted %+v, %v", p, err, effect, tau)
			}
		}
	}
	if !(taus["uniform for τ²"] > taus["uniform for τ"] && taus["uniform for τ"] > taus["half-normal for τ²"] &&
		taus["half-normal for τ²"] > max(taus["gamma"], taus["uniform shrinkage"], taus["DuMouchel"])) {
		t.Errorf("means of τ are not in the printed order: %v", taus)
	}
}
