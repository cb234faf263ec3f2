package layout

import (
	"fmt"
	"io"
	"math"
	"testing"
)

func BenchmarkForest(b *testing.B) {
	for _, k := range []int{13, 120} {
		b.Run(fmt.Sprintf("rows=%d", k), func(b *testing.B) {
			in := manyTrials(k)
			b.ReportAllocs()
			for b.Loop() {
				if _, err := Forest(in, ForestStyle{}); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}

func BenchmarkWriteSVG(b *testing.B) {
	page := mustForest(b, manyTrials(13), ForestStyle{}).Pages[0]
	b.ReportAllocs()
	for b.Loop() {
		if err := WriteSVG(io.Discard, page, Light); err != nil {
			b.Fatal(err)
		}
	}
}

// FuzzForest lays out charts of any numbers: an error, or pages on which
// everything has its place.
func FuzzForest(f *testing.F) {
	f.Add(0.5, 0.2, -0.3, 3.0, 0.0, true, uint8(9), "Name")
	f.Add(-13.0, 50.0, 13.0, 1e11, 5.0, true, uint8(2), "")
	f.Add(1e11, 1e-9, -1e11, -1e11, 1e11, false, uint8(3), "Ñandú 中文 <b>")
	f.Add(0.0, 0.0, 0.0, 0.0, 0.0, false, uint8(1), "\x00")
	f.Add(math.NaN(), 1.0, math.Inf(1), 1.0, 1.0, true, uint8(5), "x")
	f.Fuzz(func(t *testing.T, estimate, se, pooled, ln, null float64, ratio bool, k uint8, name string) {
		if k == 0 || k > 60 || len(name) > 300 {
			return
		}
		in := ForestInput{Title: name, Level: 0.95, Scale: EffectScale{Measure: name, Ratio: ratio, Null: null, Decimals: int(k) % 4}}
		for i := range int(k) {
			y := estimate * (1 + float64(i)/7)
			in.Rows = append(in.Rows, ForestRow{Name: name, Year: "2001", Estimate: y, Low: y - 2*math.Abs(se), High: y + 2*math.Abs(se),
				Weight: 1 / float64(k), LnEvidence: ln / float64(i+1)})
		}
		in.Pooled = &ForestPooled{Estimate: pooled, Low: pooled - math.Abs(se), High: pooled + math.Abs(se), LnEvidence: ln, K: int(k)}
		in.Prediction = &ForestPrediction{Low: pooled - 3*math.Abs(se), High: pooled + 5*math.Abs(se)}
		for _, width := range []float64{WideWidth, NarrowWidth} {
			doc, err := Forest(in, ForestStyle{Width: width})
			if err != nil {
				continue
			}
			for _, page := range doc.Pages {
				checkPage(t, fmt.Sprint(width), page)
			}
		}
	})
}
