package effect

import "testing"

// TestParseMeasure reads measures by name, by other words of the trade and by its
// abbreviations.
func TestParseMeasure(t *testing.T) {
	for text, want := range map[string]Measure{
		"odds ratio": OddsRatio, "OR": OddsRatio, "Relative risk": RiskRatio, "RR": RiskRatio, "RD": RiskDifference,
		"HR": HazardRatio, "IRR": RateRatio, "MD": MeanDifference, "WMD": MeanDifference, "weighted mean difference": MeanDifference,
		"mean diff": MeanDifference, "Mean diff.": MeanDifference, "smd": StandardisedMeanDifference, "rate ratio": RateRatio,
	} {
		if got, err := ParseMeasure(text); err != nil || got != want {
			t.Errorf("%q is read as %s, %v; want %s", text, got, err, want)
		}
	}
	for _, text := range []string{"", "ES", "log OR", "ratio"} {
		if got, err := ParseMeasure(text); err == nil {
			t.Errorf("%q is read as %s", text, got)
		}
	}
}
