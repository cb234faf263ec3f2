package meta

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// manySets returns n sets of k studies one after another, of the kind that
// testdata/peers pools too.
func manySets(n, k int) (y, s []float64) {
	random := rand.New(rand.NewPCG(20, 26))
	y, s = make([]float64, n*k), make([]float64, n*k)
	for set := range n {
		mean := 0.3 * random.NormFloat64()
		for i := set * k; i < (set+1)*k; i++ {
			s[i] = 0.1 + 0.4*random.Float64()
			y[i] = mean + 0.2*random.NormFloat64() + s[i]*random.NormFloat64()
		}
	}
	return y, s
}

// BenchmarkManySets pools set after set, as bulk work does; ns/study is the time
// per study.
func BenchmarkManySets(b *testing.B) {
	for _, m := range []struct {
		name  string
		model Model
	}{
		{"dersimonian-laird+wald", with(DerSimonianLaird, Wald)},
		{"restricted-ml+hartung-knapp", with(RestrictedML, HartungKnapp)},
	} {
		for _, k := range []int{10, 1000, 100_000} {
			b.Run(fmt.Sprintf("method=%s/k=%d", m.name, k), func(b *testing.B) {
				n := max(1, 100_000/k)
				y, s := manySets(n, k)
				var p Pooler
				b.ReportAllocs()
				b.ResetTimer()
				sum := 0.0
				for i := range b.N {
					from := i % n * k
					mean, err := p.Pool(m.model, y[from:from+k], s[from:from+k])
					if err != nil {
						b.Fatal(err)
					}
					sum += mean.Estimate
				}
				if math.IsNaN(sum) {
					b.Fatal("not a number")
				}
				b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N*k), "ns/study")
			})
		}
	}
}

// BenchmarkBrief pools set after set by moments, without p-values.
func BenchmarkBrief(b *testing.B) {
	for _, k := range []int{10, 100} {
		b.Run(fmt.Sprintf("k=%d", k), func(b *testing.B) {
			n := 100_000 / k
			y, s := manySets(n, k)
			m := with(DerSimonianLaird, Wald)
			var p Pooler
			b.ReportAllocs()
			sum, i := 0.0, 0
			for b.Loop() {
				from := i % n * k
				brief, err := p.Brief(m, y[from:from+k], s[from:from+k])
				if err != nil {
					b.Fatal(err)
				}
				sum += brief.Estimate
				i++
			}
			if math.IsNaN(sum) {
				b.Fatal("not a number")
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(i*k), "ns/study")
		})
	}
}
