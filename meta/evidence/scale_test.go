package evidence

import (
	"encoding/json"
	"math"
	"testing"
)

// TestScale: a step is a factor 2+√3, whose logarithm is arcosh 2.
func TestScale(t *testing.T) {
	if want := 2 + math.Sqrt(3); StepBase != want {
		t.Errorf("StepBase = %.17g, want 2+√3 = %.17g", StepBase, want)
	}
	if want := math.Acosh(2); !near(LnStep, want, 1e-15) {
		t.Errorf("LnStep = %.17g, want arcosh 2 = %.17g", LnStep, want)
	}
	// The logistic curve's slope has its steepest change where the odds are 2+√3:
	// p(1-p)(1-6p(1-p)), its third derivative, is 0 there.
	p := StepBase / (1 + StepBase)
	if got := p * (1 - p) * (1 - 6*p*(1-p)); math.Abs(got) > 1e-16 {
		t.Errorf("third derivative of the logistic curve at a step = %g, want 0", got)
	}
	if got := FromLn(-2 * LnStep).Steps(); got != -2 {
		t.Errorf("steps of (2+√3)⁻² = %g, want -2", got)
	}
	if got := FromLn(math.Log(20)).Odds(); !near(got, 20, 1e-14) {
		t.Errorf("odds of ln 20 = %g, want 20", got)
	}
	if got := Normal(20000).Odds(); !math.IsInf(got, 1) {
		t.Errorf("odds at z = 20,000 = %g, want +Inf", got)
	}
	if got := FromLn(3).Inverse().Ln(); got != -3 {
		t.Errorf("inverse of ln 3 = %g, want -3", got)
	}
}

// TestWords: the limits are METHODS' 3.7, 13.9, 52 and 194, powers of 2+√3.
func TestWords(t *testing.T) {
	for _, tt := range []struct {
		odds float64
		want Word
	}{
		{1, Faint}, {3.73, Faint}, {3.74, Fair}, {13.9, Fair}, {13.93, Firm},
		{51.9, Firm}, {52, Heavy}, {193.9, Heavy}, {194.1, Massive}, {math.Inf(1), Massive},
	} {
		if got := FromLn(math.Log(tt.odds)).Word(); got != tt.want {
			t.Errorf("%g : 1 is %v, want %v", tt.odds, got, tt.want)
		}
		if got := FromLn(-math.Log(tt.odds)).Word(); got != tt.want {
			t.Errorf("1 : %g is %v, want %v", tt.odds, got, tt.want)
		}
	}
	for steps, want := range []Word{Faint, Fair, Firm, Heavy, Massive, Massive} {
		if got := FromLn(float64(steps) * LnStep).Word(); got != want {
			t.Errorf("exactly %d steps are %v, want %v", steps, got, want)
		}
	}
}

func TestFavours(t *testing.T) {
	for ln, want := range map[float64]Hypothesis{1e-300: Effect, 5: Effect, -1e-300: NoEffect, -5: NoEffect, 0: NoEffect} {
		if got := FromLn(ln).Favours(); got != want {
			t.Errorf("ln ER %g favours %v, want %v", ln, got, want)
		}
	}
}

// TestNames: every enumeration is written and read by its names, also in JSON.
func TestNames(t *testing.T) {
	type all struct {
		Word       Word
		Hypothesis Hypothesis
		Form       Form
	}
	text, err := json.Marshal(all{Heavy, Effect, StudentForm})
	if want := `{"Word":"heavy","Hypothesis":"effect","Form":"student-t"}`; err != nil || string(text) != want {
		t.Errorf("JSON = %s, %v, want %s", text, err, want)
	}
	var back all
	if err := json.Unmarshal(text, &back); err != nil || back != (all{Heavy, Effect, StudentForm}) {
		t.Errorf("read back %+v, %v", back, err)
	}
	if err := json.Unmarshal([]byte(`{"Form":"strongest"}`), &back); err == nil {
		t.Error("an unknown form is read without an error")
	}
	for i, name := range WordNames() {
		if got, err := ParseWord(name); err != nil || got != Word(i) {
			t.Errorf("ParseWord(%q) = %v, %v", name, got, err)
		}
	}
	for i, name := range HypothesisNames() {
		if got, err := ParseHypothesis(name); err != nil || got != Hypothesis(i) {
			t.Errorf("ParseHypothesis(%q) = %v, %v", name, got, err)
		}
	}
	for i, name := range FormNames() {
		if got, err := ParseForm(name); err != nil || got != Form(i) {
			t.Errorf("ParseForm(%q) = %v, %v", name, got, err)
		}
	}
}

// TestCategories: limits of Jeffreys at 10^½, 10, 10^1.5, 100 and of Kass and
// Raftery at 3, 20, 150, both from memory of the cited sources.
func TestCategories(t *testing.T) {
	const bare = "not worth more than a bare mention"
	for _, tt := range []struct {
		odds           float64
		jeffreys, kass string
	}{
		{1, bare, bare}, {2.99, bare, bare}, {3.01, bare, "positive"}, {3.17, "substantial", "positive"},
		{9.99, "substantial", "positive"}, {10.01, "strong", "positive"}, {19.9, "strong", "positive"},
		{20.1, "strong", "strong"}, {31.6, "strong", "strong"}, {31.7, "very strong", "strong"},
		{99.9, "very strong", "strong"}, {100.1, "decisive", "strong"}, {149, "decisive", "strong"},
		{151, "decisive", "very strong"}, {math.Inf(1), "decisive", "very strong"},
	} {
		for _, r := range []Ratio{FromLn(math.Log(tt.odds)), FromLn(-math.Log(tt.odds))} {
			if got := Jeffreys(r); got != tt.jeffreys {
				t.Errorf("Jeffreys, ln %g: %q, want %q", r.Ln(), got, tt.jeffreys)
			}
			if got := KassRaftery(r); got != tt.kass {
				t.Errorf("Kass and Raftery, ln %g: %q, want %q", r.Ln(), got, tt.kass)
			}
		}
	}
	if got := Jeffreys(invalid()) + KassRaftery(invalid()); got != "" {
		t.Errorf("a ratio that holds NaN has the category %q", got)
	}
}
