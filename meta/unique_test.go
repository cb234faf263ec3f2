package meta

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

// everyKind returns the three likelihoods of a sample.
func everyKind(d *sample, mean float64) []likelihood {
	return []likelihood{
		{data: d, kind: fullLikelihood},
		{data: d, kind: restrictedLikelihood},
		{data: d, kind: fixedMeanLikelihood, mean: mean},
	}
}

// agreesWithScan checks that a proof of one maximum names the one that the scan of
// all of them finds, and returns whether there was a proof.
func agreesWithScan(t *testing.T, l likelihood) bool {
	t.Helper()
	zero := l.point(0)
	tau2, proven := l.onlyMaximum(zero)
	if !proven {
		return false
	}
	all, err := l.scan(nil, zero)
	if err != nil {
		t.Fatal(err)
	}
	if len(all) != 1 || !within(tau2, all[0].tau2, 1e-10*(all[0].tau2+1e-3*l.data.v[l.data.best])) {
		t.Errorf("kind %d of %v, v %v: %v proven to be the only maximum; the scan finds %v", l.kind, l.data.y, l.data.v, tau2, all)
	}
	return true
}

// TestProofAgreesWithScan: wherever a few points prove that the likelihood has one
// maximum, looking for all of them finds that one, on studies of all degrees of
// scatter and of unequal precision.
func TestProofAgreesWithScan(t *testing.T) {
	random := rand.New(rand.NewPCG(13, 1))
	for _, unequal := range []float64{0, 0.3, 0.7, 1.5, 3} {
		proven, total := 0, 0
		for i := range 600 {
			k := 2 + random.IntN(12)
			y, s := make([]float64, k), make([]float64, k)
			for j := range y {
				s[j] = math.Exp(unequal * random.NormFloat64())
				y[j] = s[j]*random.NormFloat64() + float64(i%5)*random.NormFloat64()
			}
			var d sample
			if err := d.load(y, s); err != nil {
				t.Fatal(err)
			}
			for _, l := range everyKind(&d, 0.5*d.y[k-1]) {
				total++
				if agreesWithScan(t, l) {
					proven++
				}
			}
		}
		if share := float64(proven) / float64(total); share < 0.8 {
			t.Errorf("ln s scattered by %v: %.3f of the likelihoods proven to have one maximum, want 0.8 at least", unequal, share)
		}
	}
}

// nothingProven checks that no proof steps over a minimum between two maxima.
func nothingProven(t *testing.T, l likelihood, all []mode) {
	t.Helper()
	zero := l.point(0)
	for i, m := range all {
		p := l.point(m.tau2)
		if i < len(all)-1 && l.fallsFrom(p) {
			t.Errorf("kind %d of %v, v %v: proven to fall from maximum %d of %v", l.kind, l.data.y, l.data.v, i+1, all)
		}
		if i > 0 && l.risesBetween(zero, p, 3) {
			t.Errorf("kind %d of %v, v %v: proven to rise up to maximum %d of %v", l.kind, l.data.y, l.data.v, i+1, all)
		}
	}
}

// TestNoProofOfOneMaximumAmongSeveral: studies made to have several maxima, most
// of them precise and near one another, a few imprecise and far out.
func TestNoProofOfOneMaximumAmongSeveral(t *testing.T) {
	random := rand.New(rand.NewPCG(13, 2))
	several := 0
	for range 1500 {
		var y, s []float64
		for range 2 + random.IntN(6) {
			y, s = append(y, 0.2*random.NormFloat64()), append(s, 0.1)
		}
		for range 1 + random.IntN(3) {
			far := math.Exp(3 + random.NormFloat64())
			s = append(s, far*math.Exp(-2*random.Float64()))
			y = append(y, math.Copysign(far, random.NormFloat64())*(1+random.Float64()))
		}
		var d sample
		if err := d.load(y, s); err != nil {
			t.Fatal(err)
		}
		for _, l := range everyKind(&d, 0) {
			if !agreesWithScan(t, l) {
				all, err := l.scan(nil, l.point(0))
				if err != nil {
					t.Fatal(err)
				}
				if len(all) > 1 {
					several++
					nothingProven(t, l, all)
				}
			}
		}
	}
	if several < 200 {
		t.Errorf("%d likelihoods with several maxima, want 200 at least", several)
	}
}

// TestProofOnNastyData: magnitudes that differ by hundreds of orders, equal
// estimates, one study that has all the weight, duplicates.
func TestProofOnNastyData(t *testing.T) {
	for _, studies := range [][2][]float64{
		{{0, 0}, {1, 1}},
		{{1, 1, 1}, {1, 1e100, 1e140}},
		{{0, 1e140, -1e140}, {1, 1, 1}},
		{{0, 1, 2, 3}, {1e-10, 1, 1, 1e10}},
		{{5, -5, 1e9}, {1, 1, 1e-9}},
		{{0, 3, -2, 1e60}, {1, 1e3, 1e30, 1e60}},
		{slices.Repeat([]float64{0, 2}, 40), slices.Repeat([]float64{1, 1}, 40)},
		{slices.Repeat([]float64{0, 2, 50}, 400), slices.Repeat([]float64{1, 1, 30}, 400)},
	} {
		var d sample
		if err := d.load(studies[0], studies[1]); err != nil {
			t.Fatal(err)
		}
		for _, l := range everyKind(&d, 1) {
			agreesWithScan(t, l)
		}
	}
}

// TestRatesAreDerivatives: the rates are −½ d ln scatter/dτ² and −d ln weight/dτ²
// by central differences.
func TestRatesAreDerivatives(t *testing.T) {
	for _, name := range checkNames {
		studies := readStudies(t, name)
		var d sample
		if err := d.load(studies.y, studies.s); err != nil {
			t.Fatal(err)
		}
		for _, l := range everyKind(&d, 0.3) {
			for tau2 := 1e-2; tau2 < 1e4; tau2 *= 10 {
				h := 1e-5 * (tau2 + 1)
				low, high, p := l.point(tau2-h), l.point(tau2+h), l.point(tau2)
				c := checker{t, 1e-6}
				c.near(name+" scatter", p.scatterRate, -0.5*math.Log(high.scatter/low.scatter)/(2*h))
				c.near(name+" weight", p.weightRate, -math.Log(high.weight/low.weight)/(2*h))
			}
		}
	}
}
