package meta

import (
	"fmt"
	"testing"
)

func BenchmarkAllSubsets(b *testing.B) {
	for name, m := range map[string]Model{
		"dersimonian-laird-floor": with(DerSimonianLaird, HartungKnappFloor),
		"dersimonian-laird-wald":  with(DerSimonianLaird, Wald),
		"common-wald":             {Level: 0.95, Effects: CommonEffect},
	} {
		for _, k := range []int{10, 20} {
			b.Run(fmt.Sprintf("method=%s/k=%d", name, k), func(b *testing.B) {
				y, s := drawn(k)
				r, err := NewPairs(m, y, s)
				if err != nil {
					b.Fatal(err)
				}
				for b.Loop() {
					if _, err := AllSubsets(background, r, SubsetOptions{}); err != nil {
						b.Fatal(err)
					}
				}
			})
		}
	}
}
