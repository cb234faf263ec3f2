package synthesis

import (
	"math"
	"testing"

	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// TestVouchedCounts: counts that are no whole numbers are pooled where the
// reviewers have accepted rule C2, as effective counts, and refused elsewhere. The
// expected log risk ratio ln(30.5/100 ÷ 20/100) and its standard error
// √(1/30.5 − 1/100 + 1/20 − 1/100) are the closed forms of the Cochrane Handbook
// 6.4.1, worked out apart from the program (Python: 0.4219944, 0.2505731).
func TestVouchedCounts(t *testing.T) {
	derive := func(accept string, more numbers) (Study, error) {
		row := new(sheet).row("A", "", with(counts(30.5, 100, 20, 100), more))
		d := &derivation{row: remarked(row, review.Accept, accept), measure: effect.RiskRatio}
		return d.study()
	}
	got, err := derive("C2 corrected for clusters", nil)
	if err != nil || math.Abs(got.Estimate.Y-0.4219944) > 1e-7 || math.Abs(got.Estimate.SE-0.2505731) > 1e-7 || !got.Converted() {
		t.Errorf("accepted: %+v, %v", got.Estimate, err)
	}
	for _, accept := range []string{"", "C2", "C1 corrected"} {
		if _, err := derive(accept, nil); err == nil {
			t.Errorf("%q lets a broken count pass", accept)
		}
	}
	if _, err := derive("C2 corrected for clusters", numbers{review.DesignEffect: 1.5}); err == nil {
		t.Error("corrected counts are divided by a design effect again")
	}
}
