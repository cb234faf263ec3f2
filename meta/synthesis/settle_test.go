package synthesis

import (
	"strings"
	"testing"

	"steelyard/meta/effect"
)

// TestSettledNames wants a refused value of the plan to be called what it is: the
// conversion from the reader's unit speaks of an estimate.
func TestSettledNames(t *testing.T) {
	_, err := settled(effect.RiskRatio, "the difference", 0)
	if err == nil || !strings.HasPrefix(err.Error(), "the difference is not above 0 (0)") {
		t.Errorf("error %v", err)
	}
	if y, err := settled(effect.RiskRatio, "the difference", 1); y != 0 || err != nil {
		t.Errorf("a ratio of 1 is %v, %v on the analysis scale; want 0", y, err)
	}
}
