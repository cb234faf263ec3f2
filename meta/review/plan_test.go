package review

import (
	"errors"
	"strings"
	"testing"

	"steelyard/meta"
	"steelyard/meta/choice"
	"steelyard/meta/effect"
)

func set(t *testing.T, p *Plan, from From, setting, outcome, text string) {
	t.Helper()
	if err := p.Set(setting, outcome, Value{Text: text, From: from, Place: Place{Sheet: "plan", Row: 2, Col: 2}}); err != nil {
		t.Fatal(err)
	}
}

// TestPrecedence: default < sheet < flag, and an outcome's own value before the
// one for all, but never before a flag (ARCHITECTURE: "Precedence").
func TestPrecedence(t *testing.T) {
	var p Plan
	check := func(outcome, want string, from From) {
		t.Helper()
		if v := p.Value(SettingTau, outcome); v.Text != want || v.From != from {
			t.Errorf("tau of %q = %q from %v, want %q from %v", outcome, v.Text, v.From, want, from)
		}
	}
	check("", "restricted-ml", FromDefault)
	set(t, &p, FromSheet, "tau", "", "paule-mandel")
	check("pain", "paule-mandel", FromSheet)
	set(t, &p, FromSheet, "Tau", "Pain", "hedges-olkin")
	check("pain", "hedges-olkin", FromSheet)
	check("harm", "paule-mandel", FromSheet)
	set(t, &p, FromFlag, "tau", "", "sidik-jonkman")
	check("pain", "sidik-jonkman", FromFlag)
}

func TestAnalysis(t *testing.T) {
	var p Plan
	a, err := p.Analysis("")
	if err != nil {
		t.Fatal(err)
	}
	if a.Model.Tau != meta.DefaultTau || a.Model.Interval != meta.DefaultInterval || a.Model.Level != 0.95 || a.MeasureSet || a.Null != nil || len(a.Weighing.Prior) != 4 {
		t.Errorf("all defaults: %+v", a)
	}
	for setting, text := range map[string]string{
		"measure": "relative risk", "effects": "fixed", "level": "90%", "null": "0.9", "important": "0.8; 1.2",
		"prior": "0.2", "better": "lower", "baseline": "low 0.05, very high 0.2", "correction": "reciprocal",
		"where": "year >= 2010", "seed": "7", "interval": "Hartung Knapp", "prediction": "bootstrap",
	} {
		set(t, &p, FromSheet, setting, "", text)
	}
	a, err = p.Analysis("any")
	if err != nil {
		t.Fatal(err)
	}
	if a.Measure != effect.RiskRatio || !a.MeasureSet || a.Model.Effects != meta.CommonEffect || a.Model.Level != 0.9 ||
		*a.Null != 0.9 || len(a.Important) != 2 || a.Important[1] != 1.2 || a.Weighing.Prior[0] != 0.2 || a.Better != BetterLower ||
		a.Panel.Baselines[1] != (Baseline{Name: "very high", Risk: 0.2}) || a.Correction != effect.TreatmentArm ||
		a.Model.Seed != 7 || a.Model.Interval != meta.HartungKnapp || a.Model.Prediction != meta.PredictionBootstrap {
		t.Errorf("from the sheet: %+v", a)
	}
}

// TestSetRefuses: what cannot be a value is refused with the remedy.
func TestSetRefuses(t *testing.T) {
	var p Plan
	for _, c := range []struct{ setting, text, says string }{
		{"tua", "x", "use one of: measure"},
		{"tau", "best", "paule-mandel"},
		{"level", "95", "for 95% write 0.95"},
		{"level", "0", "between 0 and 1"},
		{"level", "NaN", "not a number"},
		{"level", "0x1p-1", "not a number"},
		{"null", "", "not a number"},
		{"important", "1, 2, 3", "3 numbers"},
		{"prior", "1", "strictly between"},
		{"prior", "", "missing"},
		{"baseline", "low 5", "0.05"},
		{"baseline", "", "missing"},
		{"seed", "1.5", "whole number"},
		{"where", "nonsense", "COLUMN OPERATOR VALUE"},
		{"order", "", "missing"},
	} {
		err := p.Set(c.setting, "", Value{Text: c.text, From: FromSheet})
		if err == nil || !strings.Contains(err.Error(), c.says) {
			t.Errorf("%s = %q: %v, want it to say %q", c.setting, c.text, err, c.says)
		}
	}
	set(t, &p, FromSheet, "tau", "", "paule-mandel")
	if err := p.Set("tau", "", Value{Text: "hedges-olkin", From: FromSheet}); !errors.Is(err, ErrGivenTwice) {
		t.Errorf("a second value: %v, want ErrGivenTwice", err)
	}
	if err := p.Set("tau", "", Value{Text: "paule-mandel", From: FromSheet}); err != nil {
		t.Errorf("the same value again: %v", err)
	}
}

// TestSettings: every default is a valid value, every choice its own, and every
// setting can be found by its name.
func TestSettings(t *testing.T) {
	for _, s := range Settings() {
		if s.Default != "" {
			if err := s.Check(s.Default); err != nil {
				t.Errorf("%s: the default: %v", s.Name, err)
			}
		}
		for _, v := range s.Values {
			if err := s.Check(strings.ToUpper(strings.ReplaceAll(v, "-", "_"))); err != nil {
				t.Errorf("%s: %v", s.Name, err)
			}
		}
		found, err := FindSetting(strings.ToUpper(s.Name))
		if err != nil || found.Name != s.Name || s.Meaning == "" || (s.Values == nil && s.Unit == "") {
			t.Errorf("%s: found %q, %v; meaning %q, unit %q", s.Name, found.Name, err, s.Meaning, s.Unit)
		}
	}
}

func TestParseRun(t *testing.T) {
	run, err := ParseRun("low risk only: risk of bias is low")
	if err != nil || run.Name != "low risk only" || run.Changes["where"] != "risk of bias is low" {
		t.Errorf("%+v, %v", run, err)
	}
	run, err = ParseRun("other model: effects = common; tau = paule-mandel; year >= 2000")
	if err != nil || run.Changes["effects"] != "common" || run.Changes["tau"] != "paule-mandel" || run.Changes["where"] != "year >= 2000" {
		t.Errorf("%+v, %v", run, err)
	}
	for _, bad := range []string{"", "no colon", ": x is y", "name:", "name: effects = sideways", "name: what"} {
		if run, err := ParseRun(bad); err == nil {
			t.Errorf("%q is read as %+v", bad, run)
		}
	}
}

func TestPlanOutcomes(t *testing.T) {
	var p Plan
	set(t, &p, FromSheet, "tau", "", "paule-mandel")
	set(t, &p, FromSheet, "tau", "Serious  Harm", "paule-mandel")
	set(t, &p, FromSheet, "level", "pain", "0.9")
	names, places := p.Outcomes()
	if strings.Join(names, " ") != "pain serious-harm" || places["pain"].String() != "plan!B2" {
		t.Errorf("%v, %v", names, places)
	}
	if choice.Fold("Serious  Harm") != "serious-harm" {
		t.Error("names fold differently")
	}
}
