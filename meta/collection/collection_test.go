package collection

import (
	"errors"
	"math"
	"math/rand/v2"
	"testing"

	"pgregory.net/rapid"
)

// TestAdjustedPublished: the fifteen p-values of the thrombolysis example of Benjamini
// & Hochberg (1995), table 1, of which their procedure rejects the first four at 0.05;
// adjusted values by their definition, p·15/rank or the least of those after it.
func TestAdjustedPublished(t *testing.T) {
	p := []float64{0.0001, 0.0004, 0.0019, 0.0095, 0.0201, 0.0278, 0.0298, 0.0344, 0.0459, 0.3240, 0.4262, 0.5719, 0.6528, 0.7590, 1.0000}
	want := []float64{0.0015, 0.003, 0.0095, 0.035625, 0.0603, 0.0645, 0.0645, 0.0645, 0.0765, 0.486, 15 * 0.4262 / 11, 15 * 0.5719 / 12, 15 * 0.6528 / 13, 15 * 0.7590 / 14, 1}
	want[5], want[6] = 15*0.0298/7, 15*0.0298/7
	lnP := make([]float64, len(p))
	for i := range p {
		lnP[(i*7)%15] = math.Log(p[i]) // in another order
	}
	rejected := 0
	for i, ln := range Adjusted(lnP) {
		rank := (i * 13) % 15 // 7·13 = 91 = 1 modulo 15
		if got := math.Exp(ln); math.Abs(got-want[rank]) > 1e-12 {
			t.Errorf("p = %v: %v, want %v", p[rank], got, want[rank])
		}
		if math.Exp(ln) <= 0.05 {
			rejected++
		}
	}
	if rejected != 4 {
		t.Errorf("%d rejected at 0.05, the paper rejects 4", rejected)
	}
}

// TestAdjustedProperties: never below p nor above 1, and in the order of p, for logs
// far below the range of a float64 too.
func TestAdjustedProperties(t *testing.T) {
	rapid.Check(t, func(r *rapid.T) {
		lnP := rapid.SliceOfN(rapid.Float64Range(-1e5, 0), 1, 50).Draw(r, "ln p")
		adjusted := Adjusted(lnP)
		for i := range lnP {
			if adjusted[i] < lnP[i] || adjusted[i] > 0 {
				r.Fatalf("ln p %v, adjusted %v", lnP[i], adjusted[i])
			}
			for j := range lnP {
				if lnP[i] < lnP[j] && adjusted[i] > adjusted[j] {
					r.Fatalf("%v < %v but %v > %v", lnP[i], lnP[j], adjusted[i], adjusted[j])
				}
			}
		}
	})
}

// mixed draws n statistics of which a share is centred on shift.
func mixed(n int, share, shift float64) []float64 {
	random := rand.New(rand.NewPCG(10, 20))
	z := make([]float64, n)
	for i := range z {
		z[i] = random.NormFloat64()
		if random.Float64() < share {
			z[i] += shift
		}
	}
	return z
}

// TestTwoGroupsFindsTheMixture: of 200,000 statistics a tenth is N(3, 1), the others
// N(0, 1). The true local rate is 0.9φ(z)/(0.9φ(z) + 0.1φ(z−3)), and the true evidence
// φ(z−3)/φ(z) = exp(3z − 4.5). π₀ by the inner half is 0.9 + 0.1·2·P(|N(3,1)| < 0.674).
func TestTwoGroupsFindsTheMixture(t *testing.T) {
	g, err := NewTwoGroups(mixed(200_000, 0.1, 3))
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(g.None-0.902) > 0.01 {
		t.Errorf("π₀ = %v, want about 0.902", g.None)
	}
	for _, z := range []float64{1.5, 2, 2.5, 3, 3.5, 4} {
		want := 0.9 / (0.9 + 0.1*math.Exp(3*z-4.5))
		if got := g.LocalRate(z); math.Abs(got-want) > 0.06 {
			t.Errorf("local rate at %v: %v, want %v", z, got, want)
		}
		if z < 2.5 {
			continue
		}
		if ratio, ok := g.Evidence(z); !ok || math.Abs(ratio.Ln()-(3*z-4.5)) > 0.35 {
			t.Errorf("evidence at %v: %v, want %v", z, ratio.Ln(), 3*z-4.5)
		}
	}
	if rate := g.LocalRate(0); rate < 0.95 {
		t.Errorf("local rate at 0: %v, want near 1", rate)
	}
	if far, further := g.LocalRate(9), g.LocalRate(400); far != further || far > 0.01 {
		t.Errorf("local rates far out: %v and %v", far, further)
	}
}

// TestTwoGroupsOfNothing: with no effect anywhere the collection shows next to none.
func TestTwoGroupsOfNothing(t *testing.T) {
	g, err := NewTwoGroups(mixed(50_000, 0, 0))
	if err != nil {
		t.Fatal(err)
	}
	if g.None < 0.98 {
		t.Errorf("π₀ = %v, want about 1", g.None)
	}
	for z := -2.5; z <= 2.5; z += 0.5 {
		if rate := g.LocalRate(z); rate < 0.8 {
			t.Errorf("local rate at %v: %v, want near 1", z, rate)
		}
	}
}

// TestTwoGroupsRefuses: too few statistics, and statistics without any scatter.
func TestTwoGroupsRefuses(t *testing.T) {
	var few *TooFewError
	if _, err := NewTwoGroups(make([]float64, Fewest-1)); !errors.As(err, &few) || few.Sets != Fewest-1 {
		t.Errorf("%v", err)
	}
	if _, err := NewTwoGroups(make([]float64, 1000)); err == nil {
		t.Error("a thousand zeros are taken")
	}
}

// TestTwoGroupsNeverFails: a result is finite or an error for any statistics.
func TestTwoGroupsNeverFails(t *testing.T) {
	rapid.Check(t, func(r *rapid.T) {
		some := rapid.SliceOfN(rapid.Float64Range(-50, 50), 3, 60).Draw(r, "z")
		var z []float64
		for len(z) < Fewest {
			z = append(z, some...)
		}
		g, err := NewTwoGroups(z)
		if err != nil {
			return
		}
		for _, x := range some {
			rate := g.LocalRate(x)
			ratio, _ := g.Evidence(x)
			if !(rate >= 0 && rate <= 1) || math.IsNaN(ratio.Ln()) || math.IsInf(ratio.Ln(), 0) {
				r.Fatalf("at %v: rate %v, evidence %v", x, rate, ratio.Ln())
			}
		}
	})
}
