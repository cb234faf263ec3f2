package words

import (
	"math"
	"strings"
	"testing"

	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

func TestEvidence(t *testing.T) {
	for _, c := range []struct {
		odds           float64
		evidence, word string
	}{
		{29, "29 : 1 for an effect", "firm, 2.6 steps"},
		{1 / 1.5, "1.5 : 1 for none", "faint, 0.3 steps"},
		{1.04, "1 : 1, for neither", "even"},
		{3.70, "3.7 : 1 for an effect", "faint, just under 1 step"},
		{13.9, "14 : 1 for an effect", "fair, just under 2 steps"},
		{math.Exp(2000), "over 10,000 : 1 for an effect", "massive, over 1,000 steps"},
		{3.733, "3.7 : 1 for an effect", "fair, 1.0 step"},
		{1e9, "over 10,000 : 1 for an effect", "massive, 15.7 steps"},
		{1 / 2.33, "2.3 : 1 for none", "faint, 0.6 steps"},
	} {
		r := evidence.FromLn(min(2000, math.Log(c.odds)))
		if got := Evidence(r); got != c.evidence {
			t.Errorf("odds %v: %q, want %q", c.odds, got, c.evidence)
		}
		if got := Strength(r); got != c.word {
			t.Errorf("odds %v: %q, want %q", c.odds, got, c.word)
		}
	}
}

// TestScatter: the chi-square form is worded as a comparison of unrelated effects
// with a common one, never as agreement.
func TestScatter(t *testing.T) {
	fit := func(q float64, df int, ln float64) *meta.Fit {
		return &meta.Fit{Heterogeneity: meta.Heterogeneity{Q: q, DF: df, LnP: math.Log(0.2), Evidence: evidence.FromLn(ln)}}
	}
	for _, c := range []struct {
		fit  *meta.Fit
		want string
	}{
		{fit(152.23, 12, 66), "Q = 152.23 on 12 df, p = 0.200; 13 unrelated effects against one common effect: over 10,000 : 1"},
		{fit(10.92, 8, -1.31), "Q = 10.92 on 8 df, p = 0.200; one common effect against 9 unrelated ones: 3.7 : 1 (no proof that the effects are alike)"},
		{fit(13.5, 8, 0.01), "Q = 13.50 on 8 df, p = 0.200; 9 unrelated effects and one common effect fit alike"},
	} {
		if got := Scatter(c.fit); got != c.want {
			t.Errorf("%q, want %q", got, c.want)
		}
		if strings.Contains(Scatter(c.fit), "homogene") {
			t.Error("the chi-square form is worded as homogeneity")
		}
	}
}

func TestTestAndLevel(t *testing.T) {
	// Henmi–Copas: p belongs to the interval, not to z (z = −1.52 has p = 0.129).
	if got, want := Test(meta.Mean{Statistic: -1.52, DF: math.Inf(1), LnP: math.Log(0.193)}), "p = 0.193, by inverting the interval"; got != want {
		t.Errorf("%q, want %q", got, want)
	}
	if got, want := Test(meta.Mean{Statistic: -4.0435, DF: 8, LnP: math.Log(0.0037)}), "t = −4.04 on 8 df, p = 0.004"; got != want {
		t.Errorf("%q, want %q", got, want)
	}
	if got, want := Test(meta.Mean{Statistic: 20000, DF: math.Inf(1), LnP: math.Ln2 + numeric.LogNormalTail(20000)}), "z = 20,000.00, p < 0.001"; got != want {
		t.Errorf("%q, want %q", got, want)
	}
	for level, want := range map[float64]string{0.95: "95%", 0.9: "90%", 0.995: "99.5%"} {
		if got := Level(level); got != want {
			t.Errorf("level %v: %q, want %q", level, got, want)
		}
	}
}

func TestOutcomeWords(t *testing.T) {
	o := &synthesis.Outcome{Analysis: synthesis.Analysis{Measure: effect.RiskRatio, Better: review.BetterLower}}
	if got := Reader(o, math.Log(0.71), meta.Limits{Low: math.Log(0.584), High: math.Log(0.8631)}); got != "0.71 (0.58 to 0.86)" {
		t.Errorf("reader's estimate %q", got)
	}
	if got := Wanted(o); got != "below 1 is better" {
		t.Errorf("wanted %q", got)
	}
	regions := []synthesis.Region{
		{Low: math.Inf(-1), High: math.Log(0.8)},
		{Low: math.Log(0.8), High: math.Log(1.25), Evidence: evidence.FromLn(math.Log(1 / 16.))},
		{Low: math.Log(1.25), High: math.Inf(1), Evidence: evidence.FromLn(math.Log(19))},
	}
	for i, want := range []string{"0.80 or less, 1 : 1, neither for nor against", "between 0.80 and 1.25, 16 : 1 against it", "1.25 or more, 19 : 1 for it"} {
		if got := RegionRange(o, regions[i]) + ", " + RegionEvidence(regions[i]); got != want {
			t.Errorf("%q, want %q", got, want)
		}
	}
	if BiasRemark(o) != "" {
		t.Error("bias is remarked on without a study at high risk")
	}
	for text, want := range map[string]int{"High": 1, "low": 0, "serious": 1, "some concerns": 0, "critical risk": 1} {
		study := &review.Study{Remarks: []review.Remark{{Header: "risk of bias", Text: text}}}
		o.Studies = []synthesis.Study{{Source: study}}
		if got := HighRisk(o); got != want || (BiasRemark(o) != "") != (want == 1) {
			t.Errorf("risk %q counts %d, want %d", text, got, want)
		}
	}
}

// TestMethodNames: every method has a name in words.
func TestMethodNames(t *testing.T) {
	for _, name := range meta.TauNames() {
		method, err := meta.ParseTau(name)
		if err != nil || TauMethod(method) == "" {
			t.Errorf("%s: %q, %v", name, TauMethod(method), err)
		}
	}
	for _, name := range meta.IntervalNames() {
		method, err := meta.ParseInterval(name)
		if err != nil || IntervalMethod(method) == "" {
			t.Errorf("%s: %q, %v", name, IntervalMethod(method), err)
		}
	}
}
