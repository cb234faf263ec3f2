package bayes

import (
	"math"
	"testing"
)

// studiesFrom reads studies from bytes, each number as two bytes of mantissa and
// one of exponent.
func studiesFrom(data []byte) (y, s []float64) {
	numberAt := func(b []byte) float64 {
		return math.Ldexp(float64(int16(uint16(b[0])|uint16(b[1])<<8)), 4*int(int8(b[2])))
	}
	for ; len(data) >= 6; data = data[6:] {
		y, s = append(y, numberAt(data)), append(s, math.Abs(numberAt(data[3:])))
	}
	return y, s
}

func finite(numbers ...float64) bool {
	for _, x := range numbers {
		if math.IsNaN(x) || math.IsInf(x, 0) {
			return false
		}
	}
	return true
}

// FuzzIntegrate: no panic, no NaN, no value beside an error, and probabilities
// that sum to 1, for any numbers.
func FuzzIntegrate(f *testing.F) {
	f.Add([]byte{1, 2, 0, 3, 4, 0, 5, 6, 0, 7, 8, 0, 3, 0, 1, 9, 9, 0}, uint8(0), 0.5, 1.0, 0.0)
	f.Add([]byte{0, 0, 0, 0, 9, 200, 0, 0, 0, 0, 9, 3}, uint8(1), 1e-9, 1.0, 1e9)
	f.Add([]byte{255, 255, 127, 1, 1, 129, 0, 1, 0, 1, 1, 0}, uint8(2), 1e30, 1.0, -1.0)
	f.Add([]byte{1, 1, 0, 1, 1, 0, 1, 1, 0, 1, 1, 0}, uint8(3), 3.0, 1e-8, 0.0)
	f.Add([]byte("00\x0000\xd500\x0e00\b"), uint8('L'), 2.5, 1.0, 0.0) // numbers too far apart for the effect in a new setting
	f.Fuzz(func(t *testing.T, data []byte, kind uint8, a, b, null float64) {
		if len(data) > 6*12 {
			return // slow without being different
		}
		y, s := studiesFrom(data)
		p := TauPrior{Kind: TauPriorKind(kind % 5), Scale: a, MeanLog: a, SDLog: b}
		r, err := Integrate(y, s, null, p)
		if (r == nil) == (err == nil) {
			t.Fatalf("%v with error %v", r, err)
		}
		if err != nil {
			return
		}
		q := r.Probabilities()
		if !finite(r.Effect().Ln(), r.EffectGivenCommon().Ln(), r.Heterogeneity().Ln(), r.EffectAveraged().Ln(), r.HeterogeneityAveraged().Ln(), r.Tau) ||
			!near(q[0]+q[1]+q[2]+q[3], 1, 1e-12) {
			t.Errorf("%+v of %v, %v against %v: %+v", p, y, s, null, *r)
		}
		post, err := PosteriorOf(y, s, p, 0.9)
		if (post == nil) == (err == nil) {
			t.Fatalf("%v with error %v", post, err)
		}
		if err != nil {
			return
		}
		for _, z := range []Quantiles{post.Tau, post.Effect} {
			if !(z.Low <= z.Median && z.Median <= z.High) || !finite(z.Low, z.High) || z.Mean != nil && !finite(*z.Mean) {
				t.Errorf("%+v of %v, %v: %+v", p, y, s, *post)
			}
		}
	})
}

// FuzzWeigh: a number, below the bound that no prior exceeds, or an error.
func FuzzWeigh(f *testing.F) {
	f.Add(0.35, 0.12, 0.0, 0.2, 0.5, uint8(0))
	f.Add(-1e6, 1.0, 0.0, 0.0, 1e-9, uint8(1))
	f.Add(3.0, 1e-8, 3.0, 0.0, 1e9, uint8(4))
	f.Fuzz(func(t *testing.T, estimate, se, null, mean, scale float64, choice uint8) {
		o := Observation{Estimate: estimate, SE: se, Null: null}
		p := EffectPrior{Kind: EffectPriorKind(choice % 2), Mean: mean, Scale: scale, Side: Side(choice / 2 % 3)}
		if p.Kind == CauchyPrior {
			p.Mean = 0
		}
		r, err := o.Weigh(p)
		if err != nil {
			return
		}
		bound := 0.5 * o.Z() * o.Z()
		if !finite(r.Ln()) || !(r.Ln() <= bound*(1+1e-9)+1e-9) {
			t.Errorf("%+v under %+v: ln ER %v, bound %v", o, p, r.Ln(), bound)
		}
	})
}
