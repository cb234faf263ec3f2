package numeric

import (
	"fmt"
	"math"
	"testing"
)

var sink float64

func BenchmarkLogNormalTail(b *testing.B) {
	for _, z := range []float64{2, 8, 1000} {
		b.Run(fmt.Sprintf("z=%g", z), func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				sink = LogNormalTail(z)
			}
		})
	}
}

func BenchmarkLogStudentTail(b *testing.B) {
	for _, df := range []float64{3, 30, 300, 1e9} {
		b.Run(fmt.Sprintf("df=%g", df), func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				sink = LogStudentTail(2.5, df)
			}
		})
	}
}

func BenchmarkStudentCritical(b *testing.B) {
	for _, df := range []float64{3, 30, 300, math.Inf(1)} {
		b.Run(fmt.Sprintf("df=%g", df), func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				sink = StudentCritical(0.05, df)
			}
		})
	}
}

func BenchmarkLogChiSquareTail(b *testing.B) {
	for _, x := range []float64{20, 2000} {
		b.Run(fmt.Sprintf("x=%g", x), func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				sink = LogChiSquareTail(x, 12)
			}
		})
	}
}

func BenchmarkChiSquareQuantile(b *testing.B) {
	b.Run("df=12", func(b *testing.B) {
		b.ReportAllocs()
		for b.Loop() {
			sink = ChiSquareQuantile(0.025, 12)
		}
	})
}

func BenchmarkLogFTail(b *testing.B) {
	for _, d2 := range []float64{9, 1e4, 1e7} {
		b.Run(fmt.Sprintf("d2=%g", d2), func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				sink = LogFTail(3, 4, d2)
			}
		})
	}
}

func BenchmarkIntegrate(b *testing.B) {
	b.Run("range=whole", func(b *testing.B) {
		b.ReportAllocs()
		for b.Loop() {
			sink, _, _ = Integrate(func(x float64) float64 { return math.Exp(-x * x / 2) }, math.Inf(-1), math.Inf(1), 1e-10)
		}
	})
}

func BenchmarkHermite(b *testing.B) {
	for _, n := range []int{40, 100} {
		b.Run(fmt.Sprintf("n=%d", n), func(b *testing.B) {
			for b.Loop() {
				sink = newHermiteRule(n).nodes[0]
			}
		})
	}
}
