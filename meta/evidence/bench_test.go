package evidence

import (
	"fmt"
	"math"
	"testing"
)

var sink Ratio

func BenchmarkNormal(b *testing.B) {
	b.Run("z=2", func(b *testing.B) {
		b.ReportAllocs()
		for b.Loop() {
			sink = Normal(2)
		}
	})
}

func BenchmarkMatched(b *testing.B) {
	for _, df := range []float64{3, 12, 300} {
		b.Run(fmt.Sprintf("df=%g", df), func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				sink = Matched(2.5, df)
			}
		})
	}
}

func BenchmarkRegion(b *testing.B) {
	inside := Region{{Low: -1, High: 1}}
	outside := inside.Complement()
	for _, l := range []Location{at(2, math.Inf(1), Empirical), at(2, 5, Empirical), at(2, 5, StudentForm)} {
		for name, r := range map[string][2]Region{"direction": {over, below}, "importance": {inside, outside}} {
			b.Run(fmt.Sprintf("df=%g/form=%v/regions=%s", l.DF, l.Form, name), func(b *testing.B) {
				b.ReportAllocs()
				for b.Loop() {
					sink, _ = l.Region(r[0], r[1])
				}
			})
		}
	}
}
