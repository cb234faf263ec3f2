package words

import (
	"math"
	"strings"
	"testing"

	"steelyard/meta"
	"steelyard/meta/review"
	"steelyard/meta/sparse"
)

// TestModelNamesMethods: every method for counts is named in full, with its
// interval and whether it has a common effect.
func TestModelNamesMethods(t *testing.T) {
	for method, says := range map[sparse.Method][]string{
		sparse.MantelHaenszel:   {"common effect by Mantel–Haenszel", "Wald interval"},
		sparse.Peto:             {"common effect by Peto's observed minus expected events", "Wald interval"},
		sparse.ConditionalExact: {"common effect by exact conditional likelihood", "exact interval"},
		sparse.BinomialNormal:   {"common effect by the binomial model with an intercept for each study", "profile-likelihood interval"},
	} {
		fit := &meta.Fit{Method: method.String(), Model: meta.Model{Effects: meta.CommonEffect}, Mean: meta.Mean{K: 3}}
		for _, want := range says {
			if got := Model(fit); !strings.Contains(got, want) {
				t.Errorf("%s: %q does not say %q", method, got, want)
			}
		}
		fit.Mean.K = 1
		if got, want := Model(fit), "its own result by "+method.String()+": there is nothing to pool"; got != want {
			t.Errorf("%q, want %q", got, want)
		}
	}
	random := &meta.Fit{Method: "binomial-normal", Mean: meta.Mean{K: 3}}
	if got := Model(random); !strings.HasPrefix(got, "random effects by the binomial–normal model") {
		t.Error(got)
	}
}

// TestMethod: each value of the setting has a name for tables.
func TestMethod(t *testing.T) {
	want := []string{"inverse variance, random", "Mantel–Haenszel", "Peto", "conditional exact", "binomial–normal, random"}
	names := review.MethodNames()
	if len(names) != len(want) {
		t.Fatalf("%d methods, %d names", len(names), len(want))
	}
	for i, name := range names {
		m, err := review.ParseMethod(name)
		if got := Method(m, meta.RandomEffects); err != nil || got != want[i] {
			t.Errorf("%s: %q, %v, want %q", name, got, err, want[i])
		}
	}
}

// TestTableScatter: the statistic is named, and nothing is said of one table's.
func TestTableScatter(t *testing.T) {
	fit := &meta.Fit{Method: "conditional-exact", Heterogeneity: meta.HeterogeneityOf(0, 0, 0.95)}
	if got := Scatter(fit); !strings.HasPrefix(got, "not measured: ") {
		t.Error(got)
	}
	// Q = 2 ln 10 on 2 df: p = 0.1 in closed form.
	fit.Heterogeneity = meta.HeterogeneityOf(2*math.Ln10, 2, 0.95)
	if got := Scatter(fit); !strings.HasPrefix(got, "likelihood ratio χ² = 4.61 on 2 df, p = 0.100;") {
		t.Error(got)
	}
	fit.Method = "peto"
	if got := Scatter(fit); !strings.HasPrefix(got, "Q = 4.61 on 2 df") {
		t.Error(got)
	}
	// I² = (Q − df)/Q = 1 − 2/4.605 = 57%.
	fit.Method, fit.Mean.Tau2, fit.Tau2 = "binomial-normal", 0.25, meta.Limits{Low: 0.01, High: math.Inf(1)}
	if got := Spread(fit); got != "τ 0.50; no upper limit; I² 57% by the heterogeneity beside a common effect" {
		t.Error(got)
	}
	fit.Tau2.High = 4
	if got := Spread(fit); got != "τ 0.50 (0.10 to 2.00); I² 57% by the heterogeneity beside a common effect" {
		t.Error(got)
	}
}
