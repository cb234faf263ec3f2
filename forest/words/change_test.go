package words

import (
	"strings"
	"testing"

	"steelyard/meta/accrual"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// TestRepeatedLooks: how often, and by chance how much. Of 0 in 400 the rule of three
// (Hanley & Lippman-Hand 1983) gives 3/400, under 0.8%.
func TestRepeatedLooks(t *testing.T) {
	chance := synthesis.LookChance{Tau2: 0.25, AnyLook: accrual.Value{Value: 0.12, Error: 0.016}}
	for _, tt := range []struct {
		looks *synthesis.RepeatedLooks
		want  []string
	}{
		{nil, []string{""}},
		{&synthesis.RepeatedLooks{Times: 1, Looks: 1, Why: "no step is reached"}, []string{"The review has looked once.", "not simulated: no step is reached."}},
		{&synthesis.RepeatedLooks{Times: 2, Looks: 2, Why: "x"}, []string{"looked twice, at new studies each time."}},
		{&synthesis.RepeatedLooks{Times: 5, Looks: 3, Why: "x"}, []string{"looked 5 times, and 3 of the looks brought new studies."}},
		{&synthesis.RepeatedLooks{Times: 5, Looks: 5, Reached: 2, Sequences: 400, Chances: []synthesis.LookChance{chance}}, []string{
			"reach 14 : 1 (2 steps)", "12% with τ 0.50", "under 0.8% at the last look alone", "400 simulated sequences, standard error at most 1.6 percentage points",
		}},
	} {
		got := RepeatedLooks(tt.looks)
		for _, want := range tt.want {
			if !strings.Contains(got, want) {
				t.Errorf("%q lacks %q", got, want)
			}
		}
		if tt.looks == nil && got != "" {
			t.Errorf("nothing worked out: %q", got)
		}
	}
}

// TestChangeWithoutResults: an outcome that never had a result, or is gone, is worded
// without one.
func TestChangeWithoutResults(t *testing.T) {
	study := review.Study{Name: "A", Row: review.Place{File: "t.csv", Row: 2}}
	state := func(outcomes ...synthesis.Outcome) synthesis.State {
		return synthesis.State{
			Extraction: &review.Extraction{Studies: []review.Study{study}},
			Synthesis:  &synthesis.Synthesis{Plan: &review.Plan{}, Outcomes: outcomes},
		}
	}
	none := synthesis.Outcome{Problem: "none of its rows can be pooled"}
	text := Change(synthesis.Compare(state(none), state(none)))
	if text.Conclusion != "Nothing has changed: sheet, plan and results are as before." || len(text.Outcomes) != 1 || len(text.Outcomes[0].Results) != 0 {
		t.Errorf("no result: %+v", text)
	}
	if rows := strings.Join(text.Outcomes[0].Rows, " "); !strings.Contains(rows, "No result: none of its rows can be pooled") {
		t.Errorf("rows: %s", rows)
	}
	gone := Change(synthesis.Compare(state(none), state()))
	if rows := strings.Join(gone.Outcomes[0].Rows, " "); !strings.Contains(rows, "The outcome is gone from the sheet.") {
		t.Errorf("gone: %s", rows)
	}
	for _, trigger := range gone.Outcomes[0].Triggers {
		if trigger[1] == "met" || trigger[2] == "" {
			t.Errorf("gone: %q", trigger)
		}
	}
}
