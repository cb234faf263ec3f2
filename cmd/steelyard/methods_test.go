package main

import (
	"encoding/json"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"steelyard/meta/synthesis"
)

const (
	bcgCounts = data + "checks/bcg_counts.csv"
	magnesium = data + "published/magnesium.csv"
)

// countMethods are the methods for counts.
var countMethods = []string{"mantel-haenszel", "peto", "conditional-exact", "binomial-normal"}

// compared checks a number against a source.
func compared(t *testing.T, what string, got, want, within float64) {
	t.Helper()
	if !(math.Abs(got-want) <= within) {
		t.Errorf("%s: %v, want %v within %g", what, got, want, within)
	}
}

// Source: a general statistics environment, testdata/checks/README.md: its test
// prints the Mantel–Haenszel odds ratio with its interval, its mixed-model library
// fits the binomial model by 21-point adaptive quadrature, to four digits at least.
func TestMethodsBCG(t *testing.T) {
	or := pooled(t, bcgCounts, "--method", "mantel-haenszel").Outcomes[0]
	compared(t, "odds ratio", *or.Pooled.Display.Estimate, 0.622874024574, 1e-11)
	compared(t, "low", *or.Pooled.Display.Low, 0.574770322480, 1e-11)
	compared(t, "high", *or.Pooled.Display.High, 0.675003623733, 1e-11)
	if or.Measure != "odds ratio" || or.Pooled.Effects != "common" || or.Pooled.Method != "mantel-haenszel" || or.Tau != nil {
		t.Errorf("%s, %+v, %+v", or.Measure, or.Pooled, or.Tau)
	}
	mixed := pooled(t, bcgCounts, "--method", "binomial-normal").Outcomes[0]
	compared(t, "log odds ratio", mixed.Pooled.Estimate, -0.7450017, 5e-5)
	compared(t, "se", mixed.Pooled.SE, 0.1755564, 5e-5)
	compared(t, "τ²", mixed.ResultDocument.Tau.Tau2, 0.2948871, 5e-5)
	limits := mixed.ResultDocument.Tau
	if mixed.Pooled.Effects != "random" || mixed.Pooled.Interval != "profile-likelihood" || !(0 < limits.Low && limits.Low < limits.Tau2 && limits.Tau2 < *limits.High) {
		t.Errorf("%+v, limits %+v", mixed.Pooled, limits)
	}
	total := 0.0
	for _, study := range mixed.Studies {
		total += study.Weight
	}
	compared(t, "sum of the weights", total, 1, 1e-12)
}

// TestExactOfLargeArms: arms of 88,391 people are no obstacle.
func TestExactOfLargeArms(t *testing.T) {
	o := pooled(t, bcgCounts, "--method", "conditional-exact").Outcomes[0]
	if o.Pooled.Interval != "exact" || o.Heterogeneity.Statistic != "likelihood-ratio" {
		t.Errorf("%+v, %+v", o.Pooled, o.Heterogeneity)
	}
}

// Source: testdata/checks/PUBLISHED.md §4: Egger & Davey Smith, BMJ
// 1995;310:752-754, in whose cumulative analysis seven trials sufficed for
// P < 0.001 [seen]; odds ratios and limits recalculated there, with O − E and V.
func TestMagnesiumCumulative(t *testing.T) {
	o := accrualDocument(t, "cumulative", magnesium, "--method", "peto", "--order", "order")
	want := [][3]float64{
		{0.4515, 0.0454, 4.4901}, {0.3787, 0.1878, 0.7638}, {0.3654, 0.1967, 0.6789}, {0.3823, 0.2088, 0.7000},
		{0.5373, 0.3225, 0.8951}, {0.4586, 0.2853, 0.7372}, {0.4496, 0.2832, 0.7138}, {0.6468, 0.5076, 0.8243},
	}
	difference := []float64{-0.5789, -7.0000, -2.5000, -0.0213, 0.9396, -4.1304, -1.0833, -14.0898}
	variance := []float64{0.7280, 7.0781, 2.2049, 0.4944, 4.2422, 2.3011, 0.9345, 47.3503}
	for i, study := range o.Studies {
		compared(t, study.Study, study.Estimate, difference[i]/variance[i], 2e-4)
		compared(t, study.Study+" weight", study.Weight, variance[i]/65.3336, 1e-5)
	}
	if len(o.Cumulative) != len(want) {
		t.Fatalf("%d entries", len(o.Cumulative))
	}
	for i, entry := range o.Cumulative {
		compared(t, fmt.Sprintf("odds ratio %d", i+1), math.Exp(entry.Estimate), want[i][0], 5.01e-5)
		compared(t, fmt.Sprintf("low %d", i+1), math.Exp(entry.Low), want[i][1], 5.01e-5)
		compared(t, fmt.Sprintf("high %d", i+1), math.Exp(entry.High), want[i][2], 5.01e-5)
		p := math.Erfc(math.Abs(entry.Estimate/entry.SE) / math.Sqrt2)
		if (p < 0.001) != (i >= 6) {
			t.Errorf("after %d trials p = %.5f", i+1, p)
		}
	}
}

// Source: ISIS-2, Lancet 1988;ii:349-360, reductions of the odds of death printed
// with their SD, the reduction over z [memory]: streptokinase 25 % (4), aspirin
// 23 % (4), both 42 % (5), each 2p < 0.00001.
func TestISIS2(t *testing.T) {
	want := map[string][2]float64{"streptokinase": {25, 4}, "aspirin": {23, 4}, "both": {42, 5}}
	outcomes := pooled(t, data+"published/isis2.csv", "--method", "peto").Outcomes
	if len(outcomes) != len(want) {
		t.Fatalf("%d outcomes", len(outcomes))
	}
	for _, o := range outcomes {
		reduction := 100 * (1 - *o.Pooled.Display.Estimate)
		compared(t, o.Outcome, reduction, want[o.Outcome][0], 0.5)
		compared(t, o.Outcome+" SD", reduction/-o.Pooled.Statistic, want[o.Outcome][1], 0.5)
		if !(o.Pooled.LnP < math.Log(1e-5)) {
			t.Errorf("%s: p = %g", o.Outcome, o.Pooled.P)
		}
	}
}

// TestSilentTables: studies in which nobody, or everybody, had the event are
// listed and counted, are no error, and change no digit of a ratio.
func TestSilentTables(t *testing.T) {
	const header = "study,events treated,total treated,events control,total control\n"
	const informing = "A,1,40,4,38\nB,0,52,3,50\nC,2,61,5,66\n"
	const silent = "Nobody,0,30,0,32\nEverybody,7,7,9,9\n"
	for _, method := range countMethods {
		args := []string{"pool", "-", "--method", method, "--format", "json"}
		stdout, stderr, code := call(t, header+silent+informing, args...)
		var with, without synthesis.Document
		if err := json.Unmarshal([]byte(stdout), &with); err != nil || code != codeDone {
			t.Fatalf("%s: exit %d, %v, %s", method, code, err, stderr)
		}
		stdout, _, _ = call(t, header+informing, args...)
		if err := json.Unmarshal([]byte(stdout), &without); err != nil {
			t.Fatal(err)
		}
		o, alone := with.Outcomes[0], without.Outcomes[0]
		if o.Pooled.Estimate != alone.Pooled.Estimate || o.Pooled.Low != alone.Pooled.Low || o.Pooled.LnEvidence != alone.Pooled.LnEvidence {
			t.Errorf("%s: %v with silent tables, %v without", method, o.Pooled.MeanDocument, alone.Pooled.MeanDocument)
		}
		if o.K != 3 || o.Rows != 5 || len(o.Excluded) != 2 || o.Silent == nil || *o.Silent != (synthesis.SilentDocument{Studies: 2, Participants: 78}) {
			t.Errorf("%s: k %d of %d rows, excluded %+v, silent %+v", method, o.K, o.Rows, o.Excluded, o.Silent)
		}
		text, _, code := call(t, header+silent+informing, "pool", "-", "--method", method)
		zero := "Tables with a zero cell: 1."
		if method == "peto" { // its own estimates need no correction either
			zero = ""
		}
		for _, want := range []string{"3 of 5 rows pooled", "Nobody (", "Everybody (", "2 studies with no event in either arm", "participants: 78", zero} {
			if !strings.Contains(strings.Join(strings.Fields(text), " "), want) || code != codeDone {
				t.Errorf("%s: exit %d, no %q in\n%s", method, code, want, text)
			}
		}
		if strings.Contains(text, "correction \"half\"") || strings.Contains(text, "Unconverted") {
			t.Errorf("%s: a correction is said to be in the result:\n%s", method, text)
		}
	}
	difference := pooledText(t, header+silent+informing, "--method", "mantel-haenszel", "--measure", "risk difference").Outcomes[0]
	if difference.K != 5 || difference.Silent != nil {
		t.Errorf("risk difference: k %d, silent %+v", difference.K, difference.Silent)
	}
	// Σ(a n₂ − c n₁)/N / Σ n₁n₂/N over the five tables, in exact fractions.
	compared(t, "risk difference", difference.Pooled.Estimate, -0.04636566766530856, 1e-15)
}

// TestMethodAccrual: every accrual command works by every method; the last
// cumulative entry is the pooled result and an omission that of a sheet without
// the row, bit for bit. What rests on pairs is absent.
func TestMethodAccrual(t *testing.T) {
	raw, err := os.ReadFile(bcgCounts)
	if err != nil {
		t.Fatal(err)
	}
	lines := strings.SplitAfter(string(raw), "\n")
	few := filepath.Join(t.TempDir(), "few.csv")
	if err := os.WriteFile(few, []byte(strings.Join(lines[:6], "")), 0o600); err != nil {
		t.Fatal(err)
	}
	for _, method := range countMethods {
		full := pooled(t, bcgCounts, "--method", method).Outcomes[0].Pooled
		same := func(what string, got *synthesis.RefitDocument, want synthesis.PooledDocument) {
			t.Helper()
			if got.Estimate != want.Estimate || got.Low != want.Low || got.High != want.High || got.LnEvidence != want.LnEvidence {
				t.Errorf("%s, %s: %+v, want %+v", method, what, *got, want.MeanDocument)
			}
		}
		steps := accrualDocument(t, "cumulative", bcgCounts, "--method", method).Cumulative
		same("last entry", steps[len(steps)-1].RefitDocument, full)
		omissions := accrualDocument(t, "leave-one-out", bcgCounts, "--method", method).LeaveOneOut
		for i, omission := range omissions {
			rest := slices.Delete(slices.Clone(lines), i+1, i+2)
			same("without "+omission.Omitted, omission.RefitDocument, pooledText(t, strings.Join(rest, ""), "--method", method).Outcomes[0].Pooled)
		}
		for i, influence := range accrualDocument(t, "influence", bcgCounts, "--method", method).Influence {
			same("influence of "+influence.Omitted, influence.RefitDocument, synthesis.PooledDocument{
				MeanDocument:         synthesis.MeanDocument{Estimate: omissions[i].Estimate, Low: omissions[i].Low, High: omissions[i].High},
				EvidenceFormDocument: &synthesis.EvidenceFormDocument{EvidenceDocument: *omissions[i].EvidenceDocument},
			})
			if influence.DetailDocument != nil {
				t.Errorf("%s: %+v rests on pairs", method, *influence.DetailDocument)
			}
		}
		if sub := accrualDocument(t, "subsets", few, "--method", method).Subsets; sub.Count != 31 || sub.Failed != 0 {
			t.Errorf("%s: %d subsets, %d failed", method, sub.Count, sub.Failed)
		}
	}
}

// TestMethodCharts: every chart is drawn by every method, and names it.
func TestMethodCharts(t *testing.T) {
	names := map[string]string{
		"mantel-haenszel": "Mantel–Haenszel", "peto": "Peto", "conditional-exact": "exact conditional", "binomial-normal": "binomial–normal",
	}
	for _, method := range countMethods {
		for _, chart := range []string{"forest", "cumulative", "leave-one-out", "influence", "subsets"} {
			if chart == "subsets" && method == "binomial-normal" {
				continue // its refits are slow; the other three draw the same chart
			}
			path := filepath.Join(t.TempDir(), chart+".svg")
			if _, stderr, code := call(t, "", "chart", chart, magnesium, "--method", method, "--out", path); code != codeDone {
				t.Errorf("%s by %s: exit %d, %s", chart, method, code, stderr)
				continue
			}
			drawn, err := os.ReadFile(path)
			if err != nil {
				t.Fatal(err)
			}
			if !strings.Contains(string(drawn), names[method]) {
				t.Errorf("%s by %s does not name the method", chart, method)
			}
		}
	}
}

// TestMethodCalls: what the methods refuse, leave out and say.
func TestMethodCalls(t *testing.T) {
	const counts = "study,events treated,total treated,events control,total control,estimate,se\nA,1,40,4,38,,\nB,2,52,3,50,,\n"
	const boundary = "study,events treated,total treated,events control,total control\nA,0,10,5,10\n"
	const ratios = "study,measure,events treated,total treated,events control,total control\nA,risk ratio,1,40,4,38\nB,risk ratio,2,52,3,50\n"
	for _, c := range []struct {
		sheet, args string
		code        int
		says        []string
	}{
		{counts, "--method peto", codeDone, []string{"pooled as an odds ratio, which peto gives", "By peto the result is a common effect", "common effect by Peto's observed minus expected events"}},
		{counts, "--method peto --effects common", codeDone, []string{"common effect by Peto's"}},
		{counts, "--method peto --effects random", codeData, []string{"effects: peto estimates one common effect", "binomial-normal or inverse-variance"}},
		{counts, "--method binomial-normal --effects random", codeDone, []string{"random effects by the binomial–normal model", "τ "}},
		{counts, "--method binomial-normal --effects common", codeDone, []string{"binomial model with an intercept for each study"}},
		{counts, "--method peto --measure risk-ratio", codeData, []string{"method: peto pools a measure of counts: odds ratio", "choose one of these with --measure"}},
		{counts, "--method mantel-haenszel --measure risk-ratio", codeDone, []string{"risk ratio, 95% interval", "Mantel–Haenszel"}},
		{counts, "--method mantel-haenszel --measure mean-difference", codeData, []string{"odds ratio, risk ratio, risk difference"}},
		{ratios, "--method conditional-exact", codeData, []string{"and this outcome's is risk ratio"}},
		{counts, "--method conditional-exact --tau paule-mandel --interval wald --prediction k-minus-1", codeDone,
			[]string{"The setting tau (paule-mandel) is not used: a common effect has no τ²", "interval (wald) is not used: conditional-exact has an interval of its own", "prediction (k-minus-1) is not used"}},
		{counts, "--method binomial-normal --tau paule-mandel", codeDone, []string{"binomial-normal estimates τ² by maximum likelihood"}},
		{counts, "--method sideways", codeCall, []string{"inverse-variance, mantel-haenszel, peto, conditional-exact, binomial-normal"}},
		{counts + "C,,,,,0.5,0.2\n", "--method peto --measure odds-ratio", codeDone, []string{"2 of 3 rows pooled", "C (", "no events and totals of two separate arms, which peto pools (its numbers: estimate with se)"}},
		// The upper limit solves P(0 events | ψ) = 0.025 in the non-central
		// hypergeometric law of the table: ψ = 0.836522, p = 0.032508 (30 digits by hand
		// of a multiple-precision library).
		{boundary, "--method conditional-exact", codeData, []string{"estimated as 0 by conditional-exact", "at most 0.8365", "p = 0.033"}},
		{boundary, "--method mantel-haenszel", codeData, []string{"estimated as 0 by mantel-haenszel", "--method conditional-exact"}},
	} {
		stdout, stderr, code := call(t, c.sheet, append([]string{"pool", "-"}, strings.Fields(c.args)...)...)
		text := strings.Join(strings.Fields(stdout+stderr), " ")
		for _, want := range c.says {
			if code != c.code || !strings.Contains(text, want) {
				t.Errorf("%s: exit %d, want %d; want %q in\n%s%s", c.args, code, c.code, want, stdout, stderr)
			}
		}
	}
}
