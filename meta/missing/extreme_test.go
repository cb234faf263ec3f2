package missing

import (
	"math"
	"testing"

	"pgregory.net/rapid"

	"steelyard/meta"
	"steelyard/meta/effect"
)

// TestExtremesStayNumbers: whatever finite studies, with ties, offsets and standard
// errors a million times apart, each method gives numbers or an error.
func TestExtremesStayNumbers(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		k := rapid.IntRange(0, 8).Draw(t, "k")
		offset := rapid.SampledFrom([]float64{0, 6.674, -1e6, 1e12}).Draw(t, "offset")
		y, s := make([]float64, k), make([]float64, k)
		for i := range y {
			y[i] = offset + rapid.SampledFrom([]float64{0, 1, -1, 0.3, 1e-9, 1e5, -2.5}).Draw(t, "y")
			s[i] = rapid.SampledFrom([]float64{1, 1, 0.5, 1e-6, 1e3, 0.2}).Draw(t, "s")
		}
		m := meta.Model{Level: 0.95, Null: rapid.SampledFrom([]float64{0, offset}).Draw(t, "null")}
		means := map[string]meta.Mean{}
		for name, run := range map[string]func(meta.Model, []float64, []float64) (*Regression, error){"Egger": Egger, "mixed": EggerMixed} {
			if r, err := run(m, y, s); err == nil {
				means[name+" slope"], means[name+" limit"] = r.Slope, r.Limit
			}
		}
		if r, err := PETPEESE(m, y, s); err == nil {
			means["PET"], means["PEESE"] = r.PET, r.PEESE
		}
		for _, method := range []Method{TrimAndFillL, TrimAndFillR} {
			for _, side := range []Side{Lower, Higher} {
				if f, err := TrimAndFill(m, y, s, method, side); err == nil {
					means[method.String()] = f.Mean
				}
			}
		}
		if r, err := BeggMazumdar(y, s); err == nil && (math.IsNaN(r.Tau) || math.IsNaN(r.LnP) || math.IsNaN(r.Evidence.Ln()) || math.Abs(r.Tau) > 1+1e-12 || r.LnP > 0) {
			t.Errorf("rank test: %+v", r)
		}
		if rapid.IntRange(0, 3).Draw(t, "selection") == 0 {
			if r, err := OneStep(m, y, s, 0.025, Higher); err == nil {
				mean := r.Mean
				mean.Low, mean.High = math.Max(mean.Low, -1e300), math.Min(mean.High, 1e300) // a side may be open
				means["selection"] = mean
			}
		}
		for name, mean := range means {
			for _, x := range []float64{mean.Estimate, mean.SE, mean.Statistic, mean.LnP, mean.Low, mean.High, mean.Evidence.Ln()} {
				if math.IsNaN(x) || math.IsInf(x, 0) {
					t.Errorf("%s: %+v", name, mean)
				}
			}
			if mean.Low > mean.High || mean.LnP > 0 {
				t.Errorf("%s: %+v", name, mean)
			}
		}
	})
}

// TestExtremeTables: tables with empty arms, nothing but events, or one person each.
func TestExtremeTables(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		var tables []effect.Table
		for range rapid.IntRange(0, 8).Draw(t, "k") {
			n1, n2 := rapid.SampledFrom([]int{1, 2, 30, 500, 1e6}).Draw(t, "n1"), rapid.SampledFrom([]int{1, 2, 30, 500, 1e6}).Draw(t, "n2")
			tables = append(tables, effect.Table{Events1: float64(rapid.IntRange(0, n1).Draw(t, "e1")), Total1: float64(n1), Events2: float64(rapid.IntRange(0, n2).Draw(t, "e2")), Total2: float64(n2)})
		}
		for _, run := range []func(meta.Model, []effect.Table) (*Regression, error){Peters, Harbord} {
			r, err := run(plain, tables)
			if err == nil && (math.IsNaN(r.Slope.Evidence.Ln()) || math.IsNaN(r.Limit.Estimate) || !(r.Slope.SE > 0)) {
				t.Errorf("%+v", r)
			}
		}
	})
}
