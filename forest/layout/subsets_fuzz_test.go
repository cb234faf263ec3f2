package layout

import (
	"fmt"
	"math"
	"testing"
)

// FuzzInfluence lays out charts of any numbers: an error, or pages on which
// everything has its place.
func FuzzInfluence(f *testing.F) {
	f.Add(0.5, 0.1, -1.0, 0.3, 3.0, uint8(9), "Name")
	f.Add(-1e11, 1.0, 1e11, -1e11, -40.0, uint8(60), "Ñandú 中文 <b>")
	f.Add(1460.0, 0.1, -24.0, 1460.0, 3.0, uint8(3), "Name") // numbers wider than their gauges in rows of two lines
	f.Add(0.0, 0.0, 0.0, 0.0, 0.0, uint8(2), "")
	f.Add(math.NaN(), 2.0, math.Inf(1), 1.0, 1.0, uint8(5), "\x00")
	f.Fuzz(func(t *testing.T, pull, leverage, residual, carried, ln float64, k uint8, name string) {
		if k > 60 || len(name) > 300 {
			return
		}
		in := InfluenceInput{Title: name, Level: 0.95, Scale: EffectScale{Measure: name, Decimals: int(k) % 4}, Sides: Sides{Lower: name},
			Pooled: ForestPooled{Estimate: pull, Low: pull - 1, High: pull + 1, LnEvidence: ln, K: int(k)}, ByPull: k%2 == 0}
		for i := range int(k) {
			share := 1 / float64(i+1)
			row := InfluenceRow{Name: name, Year: "2001", Pull: pull * share, Carried: carried * share, Weights: &InfluenceWeight{residual * share, leverage * share}}
			if i == 7 {
				row.Problem = "x"
			}
			in.Rows = append(in.Rows, row)
		}
		for _, width := range []float64{WideWidth, 330, NarrowWidth} {
			doc, err := Influence(in, Style{Width: width})
			if err != nil {
				continue
			}
			for _, page := range doc.Pages {
				checkPage(t, fmt.Sprint(width), page)
			}
		}
	})
}

// FuzzSubsets does the same for charts of subsets.
func FuzzSubsets(f *testing.F) {
	f.Add(-0.5, 0.2, -0.9, 3.0, 0.0, true, uint16(511), "Name")
	f.Add(-13.0, 13.0, -1e8, 1e8, 5.0, true, uint16(2), "")
	f.Add(1e11, 2e11, 900.0, 901.0, -1e11, false, uint16(60000), "Ñandú 中文 <b>")
	f.Add(0.0, 1e-300, 0.0, 1e-300, 0.0, false, uint16(1), "\x00")
	f.Add(math.NaN(), 1.0, math.Inf(-1), 1.0, 1.0, true, uint16(5), "x")
	f.Fuzz(func(t *testing.T, low, high, from, to, null float64, ratio bool, n uint16, name string) {
		if len(name) > 300 {
			return
		}
		in := SubsetsInput{Title: name, Scale: EffectScale{Measure: name, Ratio: ratio, Null: null, Decimals: int(n) % 4}, Sides: Sides{Higher: name},
			Grid:      SubsetsGrid{Estimate: GridAxis{low, high, 7}, Steps: GridAxis{from, to, 5}, Counts: make([]int, 35)},
			Full:      SubsetsFull{Estimate: high, LnEvidence: from * lnStep, K: 9},
			Chosen:    &SubsetsChosen{Name: name, With: make([]int, 35)},
			Important: &EffectZone{null - 0.1, null + 0.1},
		}
		for i := range in.Grid.Counts {
			in.Grid.Counts[i] = int(n) * (i * i % 11) / 10
			in.Chosen.With[i] = in.Grid.Counts[i] * (i % 3) / 2
		}
		for _, width := range []float64{WideWidth, 339, NarrowWidth} {
			doc, err := Subsets(in, Style{Width: width})
			if err != nil {
				continue
			}
			for _, page := range doc.Pages {
				checkPage(t, fmt.Sprint(width), page)
			}
		}
	})
}
