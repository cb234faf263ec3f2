package review

import "fmt"

// Names of the settings of a living review: the thresholds of its triggers for a full
// update.
const (
	SettingTriggerEffect      = "trigger-effect"
	SettingTriggerInformation = "trigger-information"
	SettingTriggerPeople      = "trigger-people"
	SettingTriggerScatter     = "trigger-scatter"
	SettingTriggerRisk        = "trigger-risk"
)

// Living is the command whose settings these are.
const Living = "living"

// triggerSettings are their rows of the table of settings. Sources of the defaults:
// trigger-effect Shojania et al. (2007), Ann Intern Med 147:224-233; trigger-people
// Murad et al. (2017), Evid Based Med 22:85-87; trigger-scatter the Cochrane Handbook
// 10.10.2; the others are this program's own.
var triggerSettings = []Setting{
	freeSetting(SettingTriggerEffect, "0.5", "T2: change of the effect, as a share of its distance from no effect on the analysis scale", "a number above 0", checkTrigger).of(Living),
	freeSetting(SettingTriggerInformation, "0.2", "T6: share of the pooled weight that new studies carry", "a number above 0", checkTrigger).of(Living),
	freeSetting(SettingTriggerPeople, "400", "T4: participants beyond which their number alone is no reason for imprecision", "people", checkTrigger).of(Living),
	freeSetting(SettingTriggerScatter, "0.5", "T4: I² from which the studies are taken for inconsistent", "a fraction", checkTrigger).of(Living),
	freeSetting(SettingTriggerRisk, "0.5", "T4: share of the weight at high risk of bias", "a fraction", checkTrigger).of(Living),
}

// TriggerNumber reads the threshold of a trigger: a number above 0.
func TriggerNumber(text string) (float64, error) {
	x, err := parseNumber(text)
	if err == nil && !(x > 0) {
		err = fmt.Errorf("%q is no threshold; it is a number above 0", text)
	}
	return x, err
}

func checkTrigger(text string) error { _, err := TriggerNumber(text); return err }
