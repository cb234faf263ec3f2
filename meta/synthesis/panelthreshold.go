package synthesis

import (
	"encoding/json"
	"fmt"

	"steelyard/meta/choice"
	"steelyard/meta/review"
)

// Threshold is an important difference as it was set, with what is known of when. The
// program has no clock: it holds the dates of the plan and of the judgements, and an
// earlier result, against one another.
type Threshold struct {
	Setting  string // review.SettingImportant or review.SettingPer1000
	Value    review.Value
	Replaced *review.Value // the setting important, where the one per 1000 goes before it
	Flags    []ThresholdFlag
}

// ThresholdFlag is a reason to ask whether a threshold was agreed before the results.
type ThresholdFlag struct {
	Kind  FlagKind
	Place review.Place // of the judgement
	Date  review.Date  // of the judgement
	File  string       // of the earlier result
	Was   string       // its value of the threshold; blank if it had none
}

// FlagKind is what a ThresholdFlag says.
type FlagKind int

// The flags. Called: it was given with the call. Undated: the plan has no date for it.
// AfterJudgement: its date is after that of a judgement of the outcome. Changed: an
// earlier result had another, or none. Kept is no reproach: the earlier result had it.
const (
	FlagCalled FlagKind = iota
	FlagUndated
	FlagAfterJudgement
	FlagChanged
	FlagKept
)

var flagNames = choice.Of[FlagKind]("flag of a threshold", "given with the call", "undated", "after a judgement", "changed after results", "in an earlier result")

// String returns the flag in words.
func (k FlagKind) String() string { return flagNames.String(k) }

// Late reports whether the flag shows that the threshold came after results.
func (k FlagKind) Late() bool { return k == FlagAfterJudgement || k == FlagChanged }

// threshold returns the important difference of an outcome with its flags; nil without
// one.
func (o *Outcome) threshold(plan *review.Plan, x *review.Extraction, w PanelWanted) *Threshold {
	important, per1000 := plan.Value(review.SettingImportant, o.Name), plan.Value(review.SettingPer1000, o.Name)
	t := &Threshold{Setting: review.SettingImportant, Value: important}
	switch {
	case per1000.Text != "" && o.hasAbsolute():
		t.Setting, t.Value = review.SettingPer1000, per1000
		if important.Text != "" {
			t.Replaced = &important
		}
	case important.Text == "":
		return nil
	}
	date := t.Value.Date
	switch {
	case t.Value.From == review.FromFlag:
		t.Flags = append(t.Flags, ThresholdFlag{Kind: FlagCalled})
	case date.Year == 0:
		t.Flags = append(t.Flags, ThresholdFlag{Kind: FlagUndated})
	}
	for _, j := range x.Judgements {
		if j.Outcome == o.Name && date.Year != 0 && j.Date.Year != 0 && after(date, j.Date) {
			t.Flags = append(t.Flags, ThresholdFlag{Kind: FlagAfterJudgement, Place: j.Place, Date: j.Date})
			break
		}
	}
	if w.Earlier != nil {
		was, had := w.Earlier.value(t.Setting, o.Name)
		flag := ThresholdFlag{Kind: FlagChanged, File: w.Earlier.File, Was: was}
		if had && was == t.Value.Text {
			flag.Kind = FlagKept
		}
		t.Flags = append(t.Flags, flag)
	}
	return t
}

// after reports whether one date is surely after another: a part that either leaves
// unknown decides nothing.
func after(a, b review.Date) bool {
	for _, part := range [][2]int{{a.Year, b.Year}, {a.Month, b.Month}, {a.Day, b.Day}} {
		if part[0] == 0 || part[1] == 0 {
			return false
		}
		if part[0] != part[1] {
			return part[0] > part[1]
		}
	}
	return false
}

// Earlier is the plan of an earlier result.
type Earlier struct {
	File     string // base name
	plan     map[string]PlanDocument
	outcomes map[string]map[string]PlanDocument
}

// ReadEarlier reads the plan of a result that was written as JSON; file is its base
// name. The error says what is wrong with the file.
func ReadEarlier(data []byte, file string) (*Earlier, error) {
	var d struct {
		Format   string                  `json:"format"`
		Plan     map[string]PlanDocument `json:"plan"`
		Outcomes []struct {
			Outcome string                  `json:"outcome"`
			Plan    map[string]PlanDocument `json:"plan"`
		} `json:"outcomes"`
	}
	if err := json.Unmarshal(data, &d); err != nil {
		return nil, fmt.Errorf("%s is no result in JSON (%w); name a file that --format json wrote", file, err)
	}
	if d.Format != Format {
		return nil, fmt.Errorf("%s has the format %q, not %q; name a file that --format json wrote", file, d.Format, Format)
	}
	e := &Earlier{File: file, plan: d.Plan, outcomes: map[string]map[string]PlanDocument{}}
	for _, o := range d.Outcomes {
		if o.Plan == nil {
			o.Plan = d.Plan
		}
		e.outcomes[choice.Fold(o.Outcome)] = o.Plan
	}
	return e, nil
}

// value returns the earlier value of a setting for an outcome.
func (e *Earlier) value(setting, outcome string) (text string, had bool) {
	plan, known := e.outcomes[choice.Fold(outcome)]
	if !known {
		plan = e.plan
	}
	v, had := plan[setting]
	return v.Value, had
}
