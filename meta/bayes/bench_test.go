package bayes

import (
	"context"
	"fmt"
	"testing"
)

func BenchmarkIntegrate(b *testing.B) {
	for _, p := range everyTauPrior {
		for _, k := range []int{3, 13, 100} {
			b.Run(fmt.Sprintf("prior=%v/k=%d", p.Kind, k), func(b *testing.B) {
				y, s := drawn(k)
				b.ReportAllocs()
				for b.Loop() {
					mustIntegrate(b, y, s, 0, p)
				}
			})
		}
	}
}

func BenchmarkSimulatedCorrections(b *testing.B) {
	y, s := drawn(13)
	b.Run("pairs=10000/k=13", func(b *testing.B) {
		for b.Loop() {
			if _, err := IntegrateSimulated(context.Background(), y, s, 0, TauPrior{Kind: HalfNormal, Scale: 0.5}, 10_000, 1); err != nil {
				b.Fatal(err)
			}
		}
	})
}

func BenchmarkPosterior(b *testing.B) {
	y, s := drawn(13)
	b.Run("k=13", func(b *testing.B) {
		for b.Loop() {
			if _, err := PosteriorOf(y, s, TauPrior{Kind: HalfNormal, Scale: 0.5}, 0.95); err != nil {
				b.Fatal(err)
			}
		}
	})
}

func BenchmarkWeigh(b *testing.B) {
	o := Observation{Estimate: 0.35, SE: 0.12}
	for _, kind := range []EffectPriorKind{NormalPrior, CauchyPrior} {
		b.Run("prior="+kind.String(), func(b *testing.B) {
			for b.Loop() {
				mustWeigh(b, o, EffectPrior{Kind: kind, Scale: 0.7})
			}
		})
	}
}
