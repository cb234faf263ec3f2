package ingest

import "testing"

// TestNamesTotal tells rows of totals from studies.
func TestNamesTotal(t *testing.T) {
	for _, name := range []string{"Total", "TOTAL", "Total (95% CI)", "Subtotal:", "Sub-total", "Overall", "Overall effect", "Pooled estimate", "Random effects, pooled", "All studies, total",
		"Grand total", "Sum", "Total events: 45", "All", "ALL", "All studies", "all trials (n = 12)", "Gesamt", "Σ", "Meta-analysis", "Metaanalysis", "Random effects model",
		"Random-effects model (95% CI)", "Fixed effect", "Common effect model", "Toutes les études", "Summary (fixed effect model)"} {
		if !namesTotal(name) {
			t.Errorf("%q is taken for a study", name)
		}
	}
	for _, name := range []string{"", "Trial 1", "Total Care 2010", "Sumner 2004", "Overalls 2011", "Halvorsen 2009", "All 2001", "Fixed dose study 2003", "Meta 1999", "TOTAL-HF 2015", "12", "Allen 2001", "All-Star 2004", "RE-LY 2009", "RE 2009", "Random 2001", "Model 2010", "Fe 1999", "Common Cold Trial", "Metaanalysis 2004"} {
		if namesTotal(name) {
			t.Errorf("%q is taken for a total", name)
		}
	}
}
