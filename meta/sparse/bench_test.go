package sparse

import (
	"fmt"
	"testing"

	"steelyard/meta/effect"
)

// BenchmarkFit pools the BCG trials, whose largest arms hold 88,391 people, and
// repeats of them up to 100 studies.
func BenchmarkFit(b *testing.B) {
	trials := bcg(b)
	for _, k := range []int{13, 100} {
		tables := make([]effect.Table, k)
		for i := range tables {
			tables[i] = trials[i%len(trials)]
		}
		for _, m := range everyModel {
			b.Run(fmt.Sprintf("method=%v/effects=%v/k=%d", m.Method, m.Effects, k), func(b *testing.B) {
				b.ReportAllocs()
				for b.Loop() {
					if _, err := m.Fit(tables); err != nil {
						b.Fatal(err)
					}
				}
			})
		}
	}
}

// BenchmarkExactLarge pools thirteen tables of 200,000 people an arm, half of
// them with the event: the widest laws in use.
func BenchmarkExactLarge(b *testing.B) {
	tables := make([]effect.Table, 13)
	for i := range tables {
		tables[i] = effect.Table{Events1: 100000 + 50*float64(i), Total1: 200000, Events2: 99500, Total2: 200000}
	}
	for b.Loop() {
		if _, err := (Model{Method: ConditionalExact, Level: 0.95}).Fit(tables); err != nil {
			b.Fatal(err)
		}
	}
}
