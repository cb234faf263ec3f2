package meta

import (
	"math"
	"testing"

	"steelyard/meta/numeric"
)

// TestSearchDividesToTheMaximum: aspirin_lor has maxima at τ² = 0 and 0.00751638
// (30-digit values of the likelihood, see extra_test.go). Between two points on
// whose both sides the likelihood falls, the second is found; where it only falls,
// none is.
func TestSearchDividesToTheMaximum(t *testing.T) {
	d := readStudies(t, "aspirin_lor")
	p := prepared(t, with(MaximumLikelihood, Wald), d.y, d.s)
	l := likelihood{data: &p.data, kind: fullLikelihood}
	square := p.data.unit * p.data.unit
	for _, tt := range []struct {
		from, to float64
		want     []float64
	}{{0.0005, 0.03, []float64{0.00751638}}, {0.008, 0.03, nil}, {0.0005, 0.001, nil}} {
		found, err := l.search(nil, l.point(tt.from/square), l.point(tt.to/square))
		if err != nil || len(found) != len(tt.want) {
			t.Fatalf("%v to %v: %v, %v", tt.from, tt.to, found, err)
		}
		for i, want := range tt.want {
			if got := found[i].tau2 * square; !near(got, want, 1e-6) {
				t.Errorf("maximum at %v, want %v", got, want)
			}
		}
	}
}

// TestSearchWhereBothEndsRise: six precise studies put a maximum near τ² = 0.05,
// two that lie far out make the likelihood rise again.
func TestSearchWhereBothEndsRise(t *testing.T) {
	y := []float64{-0.3, 0.2, 0.1, -0.1, 0.3, -0.2, 60, -60}
	s := []float64{0.1, 0.1, 0.1, 0.1, 0.1, 0.1, 8, 8}
	p := prepared(t, with(MaximumLikelihood, Wald), y, s)
	l := likelihood{data: &p.data, kind: fullLikelihood}
	square := p.data.unit * p.data.unit
	from, to := l.point(1e-4/square), l.point(100/square)
	if from.slope <= 0 || to.slope <= 0 {
		t.Fatalf("slopes %v and %v, want both above 0", from.slope, to.slope)
	}
	best, logL := 0.0, math.Inf(-1) // on a fine grid of the plain likelihood
	for tau2 := 1e-4; tau2 < 1; tau2 *= 1.001 {
		if l := plainLogL(y, s, tau2, false); l > logL {
			best, logL = tau2, l
		}
	}
	found, err := l.search(nil, from, to)
	if err != nil || len(found) != 1 || !near(found[0].tau2*square, best, 0.002) {
		t.Errorf("%v, %v; want one maximum at %v", found, err, best)
	}
}

// TestScatterAndWeightFall: the search rests on it, for every kind of likelihood.
func TestScatterAndWeightFall(t *testing.T) {
	for _, name := range checkNames {
		d := readStudies(t, name)
		p := prepared(t, with(RestrictedML, Wald), d.y, d.s)
		for kind := fullLikelihood; kind <= fixedMeanLikelihood; kind++ {
			l := likelihood{data: &p.data, kind: kind, mean: 0.3}
			before := l.point(0)
			for tau2 := 1e-3; tau2 < 1e6; tau2 *= 1.1 {
				now := l.point(tau2)
				if !(now.scatter < before.scatter && now.weight < before.weight) {
					t.Fatalf("%s, kind %d, τ² %v: %+v after %+v", name, kind, tau2, now, before)
				}
				before = now
			}
		}
	}
}

// TestPlusIsAdd: the two ways to add give the same bits.
func TestPlusIsAdd(t *testing.T) {
	y, s := drawn(500)
	var added, plus numeric.Sum
	for i := range y {
		x := y[i] * math.Pow(10, 12*s[i]-10)
		added.Add(x)
		plus = plus.Plus(x)
		if added != plus {
			t.Fatalf("after %d terms: %v, want %v", i+1, plus, added)
		}
	}
}
