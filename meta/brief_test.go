package meta

import (
	"math"
	"math/rand/v2"
	"testing"
)

// TestBrief wants the numbers and errors of Pool to the last bit, for sets of every kind.
func TestBrief(t *testing.T) {
	random := rand.New(rand.NewPCG(13, 1))
	odd := []float64{0, 1, -1, 1e-300, 1e-120, 5e-324, 1e39, 1e41, 1e99, 1e101, 1e140, 1e149, 1e200, math.Inf(1), math.NaN()}
	models := []Model{
		{Level: 0.95, Tau: DerSimonianLaird, Interval: Wald}, {Level: 0.9, Effects: CommonEffect, Null: 0.3},
		{Level: 0.95, Tau: DerSimonianLaird, Interval: Wald, Null: -1e99}, {Level: 0.99}, {Level: 0.95, Tau: DerSimonianLaird},
		{Level: 0.95, Tau: DerSimonianLaird, Interval: HartungKnapp}, {Level: 2}, {Level: 0.95, Interval: Wald, Null: math.NaN()},
	}
	var quick, slow Pooler
	taken, errors := 0, 0
	for round := range 40_000 {
		m := models[random.IntN(len(models))]
		k := 1 + random.IntN(14)
		if round%400 == 0 {
			k = 100 + random.IntN(60)
		}
		scale := math.Exp(20 * random.NormFloat64())
		y, s := make([]float64, k), make([]float64, k)
		offset := float64(random.IntN(2)) * 1e6 * scale
		for i := range y {
			s[i] = scale * math.Exp(random.NormFloat64())
			y[i] = offset + scale*random.NormFloat64()
			if random.IntN(8) == 0 {
				y[i] = offset
			}
		}
		if random.IntN(3) == 0 {
			y[random.IntN(k)] = odd[random.IntN(len(odd))]
			s[random.IntN(k)] *= 1 + math.Abs(odd[random.IntN(len(odd))])
		}
		if random.IntN(10) == 0 {
			s[random.IntN(k)] = odd[random.IntN(len(odd))]
		}
		b, err := quick.Brief(m, y, s)
		mean, wanted := slow.Pool(m, y, s)
		if (err == nil) != (wanted == nil) || (err != nil && err.Error() != wanted.Error()) {
			t.Fatalf("%+v, y %v, s %v: error %v, want %v", m, y, s, err, wanted)
		}
		if err != nil {
			errors++
			continue
		}
		if want := (Brief{mean.Estimate, mean.SE, mean.Low, mean.High, mean.Tau2, mean.Evidence}); b != want {
			t.Fatalf("%+v\ny %v\ns %v:\n got %v\nwant %v", m, y, s, b, want)
		}
		if quick.quick(&b, &m, y, s) {
			taken++
		}
	}
	if taken < 5000 || errors < 1000 {
		t.Errorf("%d sets were pooled the quick way and %d refused: the test checks too little", taken, errors)
	}
}

// TestBriefAllocatesNothing wants no allocation once a set has been seen.
func TestBriefAllocatesNothing(t *testing.T) {
	y, s := manySets(1, 10)
	var p Pooler
	for _, m := range []Model{with(DerSimonianLaird, Wald), with(RestrictedML, HartungKnapp)} {
		if n := testing.AllocsPerRun(100, func() {
			if _, err := p.Brief(m, y, s); err != nil {
				t.Fatal(err)
			}
		}); n != 0 {
			t.Errorf("%v: %v allocations", m.Tau, n)
		}
	}
}
