package meta

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// drawn returns k studies that scatter more than their standard errors imply.
func drawn(k int) (y, s []float64) {
	random := rand.New(rand.NewPCG(5, uint64(k)))
	for range k {
		s = append(s, math.Exp(0.7*random.NormFloat64()))
		y = append(y, 0.5+0.8*random.NormFloat64()+s[len(s)-1]*random.NormFloat64())
	}
	return y, s
}

// everyModel returns a model for each estimator, and for each interval.
func everyModel() map[string]Model {
	models := map[string]Model{"common": {Level: 0.95, Effects: CommonEffect}}
	for tau := DerSimonianLaird; tau <= RestrictedML; tau++ {
		models[tau.String()] = with(tau, Wald)
	}
	for interval := HartungKnapp; interval <= HenmiCopas; interval++ {
		models[interval.String()] = with(DefaultTau, interval)
	}
	return models
}

func TestPoolDoesNotAllocate(t *testing.T) {
	y, s := drawn(13)
	for name, m := range everyModel() {
		var p Pooler
		allocations := testing.AllocsPerRun(20, func() {
			if _, err := p.Pool(m, y, s); err != nil {
				t.Fatal(err)
			}
		})
		if allocations != 0 {
			t.Errorf("%s: %v allocations per call", name, allocations)
		}
	}
}

func BenchmarkPool(b *testing.B) {
	for name, m := range everyModel() {
		for _, k := range []int{5, 13, 100} {
			b.Run(fmt.Sprintf("method=%s/k=%d", name, k), func(b *testing.B) {
				y, s := drawn(k)
				var p Pooler
				b.ReportAllocs()
				for b.Loop() {
					if _, err := p.Pool(m, y, s); err != nil {
						b.Fatal(err)
					}
				}
			})
		}
	}
}

func BenchmarkFit(b *testing.B) {
	for prediction := PredictionTwoLess; prediction <= PredictionBootstrap; prediction++ {
		b.Run(fmt.Sprintf("prediction=%v/k=13", prediction), func(b *testing.B) {
			y, s := drawn(13)
			m := Model{Level: 0.95, Prediction: prediction}
			b.ReportAllocs()
			for b.Loop() {
				if _, err := m.Fit(y, s); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}

// FuzzModelFit: no panic, no NaN, no value beside an error, for any numbers and
// settings. data holds pairs of an estimate and a standard error, each as two
// bytes of mantissa and one of exponent.
func FuzzModelFit(f *testing.F) {
	f.Add([]byte{1, 2, 0, 3, 4, 0, 5, 6, 0, 7, 8, 0}, uint32(0), 0.95, 0.0)
	f.Add([]byte{0, 0, 0, 0, 9, 200, 0, 0, 0, 0, 9, 3}, uint32(0x12345), 0.5, 1e9)
	f.Add([]byte{255, 255, 127, 1, 1, 129, 0, 1, 0, 1, 1, 0}, uint32(0x3f7), 0.999, -1.0)
	f.Fuzz(func(t *testing.T, data []byte, settings uint32, level, null float64) {
		if len(data) > 6*40 {
			return // slow without being different
		}
		y, s := studiesFrom(data)
		m := modelFrom(settings)
		m.Level, m.Null = level, null
		fit, err := m.Fit(y, s)
		if (fit == nil) == (err == nil) {
			t.Fatalf("fit %v with error %v", fit, err)
		}
		if err != nil {
			return
		}
		if !fit.Mean.finite() || !fit.finite() {
			t.Errorf("%+v of %v, %v: %+v", m, y, s, *fit)
		}
		if !(fit.Mean.Low <= fit.Mean.Estimate && fit.Mean.Estimate <= fit.Mean.High) || fit.Mean.Tau2 < 0 || fit.Mean.LnP > 0 {
			t.Errorf("%+v of %v, %v: %+v", m, y, s, fit.Mean)
		}
		if fit.Tau2.Low > fit.Tau2.High || len(fit.Weights) != len(y) || len(fit.Predictors) != len(y) {
			t.Errorf("%+v of %v, %v: %+v", m, y, s, *fit)
		}
	})
}

// studiesFrom reads studies from bytes; exponents reach beyond what is accepted.
func studiesFrom(data []byte) (y, s []float64) {
	numberAt := func(b []byte) float64 {
		return math.Ldexp(float64(int16(uint16(b[0])|uint16(b[1])<<8)), 4*int(int8(b[2])))
	}
	for ; len(data) >= 6; data = data[6:] {
		y, s = append(y, numberAt(data)), append(s, math.Abs(numberAt(data[3:])))
	}
	return y, s
}

// modelFrom reads settings from bits, some of them invalid.
func modelFrom(bits uint32) Model {
	return Model{
		Effects:     Effects(bits & 1),
		Tau:         TauMethod(bits >> 1 & 15),
		Interval:    IntervalMethod(bits >> 5 & 7),
		Prediction:  PredictionMethod(bits >> 8 & 1),
		TauInterval: TauIntervalMethod(bits >> 9 & 1),
	}
}
