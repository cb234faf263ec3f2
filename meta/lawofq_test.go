package meta

import (
	"math"
	"testing"

	"steelyard/meta/numeric"
)

func prepared(t testing.TB, m Model, y, s []float64) *Pooler {
	t.Helper()
	p := new(Pooler)
	if err := p.prepare(m, y, s); err != nil {
		t.Fatal(err)
	}
	return p
}

// TestLawOfQEqualPrecisions: with equal v, Q/(1 + τ²/v) is chi-square on k − 1
// degrees of freedom.
func TestLawOfQEqualPrecisions(t *testing.T) {
	for _, k := range []int{3, 4, 7, 20, 60} {
		y, s := make([]float64, k), make([]float64, k)
		for i := range s {
			s[i] = 0.5
		}
		p := prepared(t, with(DerSimonianLaird, Wald), y, s)
		law := newLawOfQ(&p.data)
		v := p.data.v[0]
		for _, tau2 := range []float64{0, 0.1 * v, v, 30 * v} {
			for _, q := range []float64{0.01, 0.5, 3, 20, 60, 200} {
				want := 1 - numeric.ChiSquareTail(q/(1+tau2/v), float64(k-1))
				if got := law.below(q, tau2); !within(got, want, 1e-9) {
					t.Errorf("k = %d, τ² = %v: P(Q ≤ %v) = %v, want %v", k, tau2, q, got, want)
				}
			}
		}
	}
}

// TestLawOfQThreeStudies: for k = 3, Q is λ₁Z₁² + λ₂Z₂², and in polar coordinates
//
//	P(Q > q) = (1/2π) ∫ exp(−q/(2(λ₁cos² + λ₂sin²))) over the circle,
//
// with λ₁ + λ₂ and λ₁² + λ₂² the trace of the form and of its square.
func TestLawOfQThreeStudies(t *testing.T) {
	s := []float64{0.001, 1, 3}
	p := prepared(t, with(DerSimonianLaird, Wald), []float64{0, 1, 2}, s)
	law := newLawOfQ(&p.data)
	for _, tau2 := range []float64{0, 0.3, 5, 400} {
		tau2 /= p.data.unit * p.data.unit
		first, second := traces(p.data.v, tau2)
		gap := math.Sqrt(max(0, 2*second-first*first))
		high, low := (first+gap)/2, (first-gap)/2
		for _, q := range []float64{0.05, 1, 4, 30} {
			upper, _, err := numeric.Integrate(func(a float64) float64 {
				c := math.Cos(a)
				return math.Exp(-q / (2 * (high*c*c + low*(1-c*c))))
			}, 0, math.Pi/2, 1e-12)
			if err != nil {
				t.Fatal(err)
			}
			want := 1 - upper*2/math.Pi
			if got := law.below(q, tau2); !within(got, want, 1e-9) {
				t.Errorf("τ² = %v: P(Q ≤ %v) = %v, want %v", tau2, q, got, want)
			}
		}
	}
}

// traces returns tr(AV) and tr(AVAV) of Q = y'Ay, A = diag(w) − ww'/Σw,
// V = diag(v + τ²), entry by entry.
func traces(v []float64, tau2 float64) (first, second float64) {
	total := 0.0
	for _, x := range v {
		total += 1 / x
	}
	entry := func(i, j int) float64 {
		a := -1 / (v[i] * v[j] * total)
		if i == j {
			a += 1 / v[i]
		}
		return a * (v[j] + tau2)
	}
	for i := range v {
		first += entry(i, i)
		for j := range v {
			second += entry(i, j) * entry(j, i)
		}
	}
	return first, second
}

// TestTau2Confidence: the drawn τ² is where P(Q ≤ observed | τ²) is 1 − u.
func TestTau2Confidence(t *testing.T) {
	for _, name := range checkNames {
		d := readStudies(t, name)
		p := prepared(t, at95, d.y, d.s)
		law, table := newLawOfQ(&p.data), newTau2Confidence(&p.data, p.zero)
		atZero := 1 - law.below(p.zero.q, 0)
		for _, u := range []float64{0.001, 0.02, 0.2, 0.5, 0.9, 0.975, 0.999, 0.9999} {
			tau2 := table.quantile(u)
			if u <= atZero {
				if tau2 != 0 {
					t.Errorf("%s: τ² = %v at %v, want 0", name, tau2, u)
				}
				continue
			}
			if got := 1 - law.below(p.zero.q, tau2); !within(got, u, 0.01*min(u, 1-u)) {
				t.Errorf("%s: confidence %v at the τ² drawn for %v", name, got, u)
			}
		}
	}
}
