package words

import (
	"math"
	"testing"

	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/synthesis"
)

// TestPriorScale: two significant digits, by hand.
func TestPriorScale(t *testing.T) {
	for x, want := range map[float64]string{
		0.05: "0.05", 0.1: "0.1", 0.3333: "0.33", 1: "1", 2.04: "2", 7.94: "7.9", 20: "20", 0.002: "0.002", 500: "500", 1000: "1,000", 1e-9: "1e-09",
		0: Missing, math.Inf(1): Missing, math.NaN(): Missing,
	} {
		if got := PriorScale(x); got != want {
			t.Errorf("scale %v is %q, want %q", x, got, want)
		}
	}
}

// TestPriorRange: exp(±1.96 × 0.5) is 0.375 to 2.664; ±1.96 × 200 is 391.99, on a
// linear scale no finer than whole numbers.
func TestPriorRange(t *testing.T) {
	o := &synthesis.Outcome{Result: &synthesis.Result{Fit: &meta.Fit{}}}
	o.Analysis.Measure = effect.RiskRatio
	if got := PriorRange(o, 0.5); got != "0.38 to 2.66" {
		t.Errorf("range of ratios %q", got)
	}
	if got := PriorUnit(o); got != "log risk ratio" {
		t.Errorf("unit of ratios %q", got)
	}
	o.Analysis.Measure = effect.MeanDifference
	o.Studies = []synthesis.Study{{Estimate: effect.Estimate{SE: 0.3}}}
	if got := PriorRange(o, 200); got != "−392 to 392" {
		t.Errorf("wide range of differences %q", got)
	}
	if got := PriorRange(o, 0.2); got != "−0.39 to 0.39" {
		t.Errorf("narrow range of differences %q", got)
	}
	o.Analysis.Measure = effect.Correlation
	if got := PriorUnit(o); got != "transformed correlation" {
		t.Errorf("unit of correlations %q", got)
	}
}
