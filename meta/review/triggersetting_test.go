package review

import "testing"

// TestTriggerSettings: the thresholds of a living review are settings like others, with
// the defaults of their sources (Shojania 2007; Murad 2017; Cochrane Handbook 10.10.2).
func TestTriggerSettings(t *testing.T) {
	var plan Plan
	for setting, want := range map[string]string{
		SettingTriggerEffect: "0.5", SettingTriggerPeople: "400", SettingTriggerScatter: "0.5",
	} {
		if got := plan.Value(setting, ""); got.Text != want || got.From != FromDefault {
			t.Errorf("%s is %q by %s, want %q", setting, got.Text, got.From, want)
		}
	}
	for _, s := range triggerSettings {
		for _, bad := range []string{"0", "-1", "x", "", "NaN", "Inf", "50%"} {
			if plan.Set(s.Name, "", Value{Text: bad}) == nil {
				t.Errorf("%s takes %q", s.Name, bad)
			}
		}
		if err := plan.Set(s.Name, "", Value{Text: "0.3", From: FromSheet}); err != nil || s.Needs != Living {
			t.Errorf("%s: %v, needs %q", s.Name, err, s.Needs)
		}
	}
}
