package synthesis

import (
	"context"
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"steelyard/meta"
	"steelyard/meta/accrual"
	"steelyard/meta/review"
)

// plain are the settings under which k studies of one standard error s pool to the
// mean of their estimates with standard error s/√k, by the formula of the inverse
// variances, and each weighs 1/k.
var plain = []string{review.SettingMeasure, "mean-difference", review.SettingEffects, "common", review.SettingInterval, "wald"}

func stateOf(t *testing.T, s *sheet, settings ...string) State {
	t.Helper()
	got, err := Run(context.Background(), &s.Extraction, planOf(t, settings...), Want{})
	if err != nil {
		t.Fatal(err)
	}
	return State{Extraction: &s.Extraction, Synthesis: got}
}

// grown is a sheet of studies named A, B, … with these estimates and one standard
// error.
func grown(se float64, estimates ...float64) *sheet {
	var s sheet
	for i, y := range estimates {
		s.row(string(rune('A'+i)), "", estimate(y, se))
	}
	return &s
}

// verdicts lists the triggers of an outcome that are met, and those not judged in
// brackets.
func verdicts(o *OutcomeChange) string {
	var all []string
	for _, t := range o.Triggers {
		switch t.Verdict {
		case TriggerMet:
			all = append(all, t.ID.String())
		case TriggerNotJudged:
			all = append(all, "("+t.ID.String()+")")
		}
	}
	return strings.Join(all, " ")
}

// TestTriggers: expected by hand from the means and standard errors of plain.
func TestTriggers(t *testing.T) {
	important := slices.Concat(plain, []string{review.SettingImportant, "0.9"})
	for _, tt := range []struct {
		name          string
		before, now   *sheet
		settings      []string
		met, measured string // measured: shares of T2 and T6
	}{
		{"nothing", grown(1, 1, 1), grown(1, 1, 1), plain, "(T3) (T8)", "0 0"},
		{"interval ±1.39 to ±0.98 about 1", grown(1, 1, 1), grown(1, 1, 1, 1, 1), plain, "T1 (T3) T4 T6 (T8)", "0 0.5"},
		{"from 1 to 1.5, all in both intervals", grown(1, 1, 1), grown(1, 1, 1, 2, 2), plain, "T1 T2 (T3) T4 T6 (T8)", "0.5 0.5"},
		{"from 1 to 1.49", grown(.1, 1, 1), grown(.1, 1, 1, 1.98, 1.98), plain, "(T3) T6 (T8)", "0.49 0.5"},
		{"a sixth of the weight, below a fifth", grown(.1, 1, 1, 1, 1, 1), grown(.1, 1, 1, 1, 1, 1, 1), plain, "(T3) (T8)", "0 0.16666666666666666"},
		{"a fifth of the weight", grown(.1, 1, 1, 1, 1), grown(.1, 1, 1, 1, 1, 1), plain, "(T3) T6 (T8)", "0 0.2"},
		{"other thresholds", grown(.1, 1, 1, 1, 1), grown(.1, 1, 1, 1, 1, 1.5), slices.Concat(plain, []string{review.SettingTriggerInformation, "0.21", review.SettingTriggerEffect, "0.1"}), "T2 (T3) (T8)", "0.1 0.2"},
		{"from 1 to 0.8, past 0.9", grown(.01, 1, 1), grown(.01, 1, 1, .6, .6), important, "T3 T6 (T8)", "0.2 0.5"},
		{"from 1 to 0.95, short of 0.9", grown(.01, 1, 1), grown(.01, 1, 1, .9, .9), important, "T6 (T8)", "0.05 0.5"},
		{"a row removed", grown(.1, 1, 1, 1), grown(.1, 1, 1), plain, "(T3) T7 (T8)", "0 0"},
		{"ten studies", grown(.1, slices.Repeat([]float64{1}, 9)...), grown(.1, slices.Repeat([]float64{1}, 10)...), plain, "(T3) T4 (T8)", "0 0.1"},
	} {
		c := Compare(stateOf(t, tt.before, tt.settings...), stateOf(t, tt.now, tt.settings...))
		if len(c.Outcomes) != 1 {
			t.Fatalf("%s: %d outcomes", tt.name, len(c.Outcomes))
		}
		o := &c.Outcomes[0]
		if got := verdicts(o); got != tt.met {
			t.Errorf("%s: %q, want %q", tt.name, got, tt.met)
		}
		var want [2]float64
		if _, err := fmt.Sscan(tt.measured, &want[0], &want[1]); err != nil {
			t.Fatal(err)
		}
		for i, id := range []TriggerID{EffectTrigger, InformationTrigger} {
			if got := *o.Triggers[id-1].After; !(math.Abs(got-want[i]) < 1e-12) {
				t.Errorf("%s: %s measures %v, want %v", tt.name, id, got, want[i])
			}
		}
		if material := strings.Contains(" "+tt.met, " T"); c.Material() != material || c.Nothing() != (tt.name == "nothing") {
			t.Errorf("%s: material %v, nothing %v", tt.name, c.Material(), c.Nothing())
		}
	}
}

// TestPredictionTrigger: with τ² from widely different estimates the prediction
// interval includes no effect; with five alike it excludes it.
func TestPredictionTrigger(t *testing.T) {
	settings := []string{review.SettingMeasure, "mean-difference"}
	c := Compare(stateOf(t, grown(.1, 1, 5, -3), settings...), stateOf(t, grown(.1, 1, 1, 1, 1, 1), settings...))
	if trigger := c.Outcomes[0].Triggers[PredictionTrigger-1]; trigger.Verdict != TriggerMet {
		t.Errorf("T8 is %v (%s)", trigger.Verdict, trigger.Why)
	}
	c = Compare(stateOf(t, grown(.1, 1, 1, 1, 1), settings...), stateOf(t, grown(.1, 1, 1, 1, 1, 1), settings...))
	if trigger := c.Outcomes[0].Triggers[PredictionTrigger-1]; trigger.Verdict != TriggerNotMet {
		t.Errorf("T8 is %v (%s)", trigger.Verdict, trigger.Why)
	}
}

// TestRowsOfChange: rows are known by id, else by name, else by their numbers, and
// compared cell by cell.
func TestRowsOfChange(t *testing.T) {
	var before, now sheet
	before.row("Adams 1999", "", counts(1, 20, 3, 20)).ID = "7"
	before.row("Bell", "", counts(2, 30, 4, 30))
	before.row("Cole", "", counts(5, 40, 6, 41))
	before.row("Dunn", "", counts(7, 50, 8, 51))
	remarked(before.row("Eve", "", counts(9, 60, 9, 61)), review.NoteField, "abstract only")
	before.row("Fox", "", counts(3, 70, 4, 71)).ID = "f"
	before.row("Gray", "", counts(3, 80, 4, 81))

	now.row("Adams 2001", "", counts(1, 20, 3, 20)).ID = "7" // the same id
	now.row("BELL", "", counts(2, 31, 4, 30))                // the same name, one number changed
	now.row("Coleman", "", counts(5, 40, 6, 41))             // the same numbers
	remarked(now.row("Eve", "", counts(9, 60, 9, 61)), review.NoteField, "Retracted 2026")
	now.row("Fox", "", counts(3, 70, 4, 71)).ID = "g" // another id: another study
	now.row("Hall", "", counts(5, 90, 6, 91))
	now.row("Gray", "", counts(3, 80, 4, 81))

	c := Compare(stateOf(t, &before), stateOf(t, &now))
	r := &c.Outcomes[0].Rows
	var texts []string
	for _, s := range r.New {
		texts = append(texts, "new "+s.Name)
	}
	for _, s := range r.Removed {
		texts = append(texts, "removed "+s.Name)
	}
	for _, row := range r.Renamed {
		texts = append(texts, fmt.Sprintf("%s was %s, by id %v", row.Study.Name, row.Before, row.ByID))
	}
	for _, row := range r.Changed {
		for _, cell := range row.Cells {
			texts = append(texts, fmt.Sprintf("%s: %s %q to %q, number %v", row.Study.Name, cell.Header, cell.Before, cell.After, cell.Number))
		}
	}
	want := []string{
		"new Fox", "new Hall", "removed Dunn", "removed Fox",
		"Adams 2001 was Adams 1999, by id true", "Coleman was Cole, by id false",
		`Adams 2001: study "Adams 1999" to "Adams 2001", number false`,
		`BELL: study "Bell" to "BELL", number false`,
		`BELL: total treated "30" to "31", number true`,
		`Coleman: study "Cole" to "Coleman", number false`,
		`Eve: note "abstract only" to "Retracted 2026", number false`,
	}
	if !slices.Equal(texts, want) {
		t.Errorf("rows:\n%s\nwant:\n%s", strings.Join(texts, "\n"), strings.Join(want, "\n"))
	}
	correction := c.Outcomes[0].Triggers[CorrectionTrigger-1]
	if named := []string{"BELL (total treated)", "Eve (note)", "Dunn (removed)", "Fox (removed)"}; correction.Verdict != TriggerMet || !slices.Equal(correction.Named, named) {
		t.Errorf("T7 is %v by %q, want %q", correction.Verdict, correction.Named, named)
	}
	weights := map[string]WeightChange{}
	for _, w := range c.Outcomes[0].Weights {
		weights[w.Study] = w
	}
	if w := weights["Dunn"]; len(weights) != 8 || w.After >= 0 || !(w.Before > 0) || weights["Hall"].Before >= 0 || !(weights["Coleman"].Before > 0) {
		t.Errorf("weights %v", c.Outcomes[0].Weights)
	}
}

// TestScopeOfChange: outcomes and subgroups that are new, outcomes and results that
// are gone, another measure.
func TestScopeOfChange(t *testing.T) {
	var before, now sheet
	before.row("A", "pain", estimate(1, 1))
	before.row("A", "gone", estimate(1, 1))
	before.row("A", "lost", estimate(1, 1))
	remarked(now.row("A", "Pain", estimate(1, 1)), review.Subgroup, "men")
	remarked(now.row("B", "Pain", estimate(1, 1)), review.Subgroup, "women")
	now.row("A", "harm", estimate(1, 1))
	now.row("A", "lost", estimate(1, -1))
	c := Compare(stateOf(t, &before, plain...), stateOf(t, &now, plain...))
	var got []string
	for i := range c.Outcomes {
		o := &c.Outcomes[i]
		got = append(got, fmt.Sprintf("%s: %s, %q, gained %v, lost %v", o.Name, verdicts(o), o.Triggers[ScopeTrigger-1].Named, o.Gained(), o.Lost()))
	}
	want := []string{
		`Pain: (T3) T5 T6 (T8), ["subgroup men" "subgroup women"], gained false, lost false`,
		`harm: (T1) (T2) (T3) (T4) T5 (T6) (T8), ["a new outcome"], gained true, lost false`,
		`lost: (T1) (T2) (T3) (T4) (T6) T7 (T8), [], gained false, lost true`,
		`gone: (T1) (T2) (T3) (T4) (T5) (T6) T7 (T8), [], gained false, lost true`,
	}
	if !slices.Equal(got, want) {
		t.Errorf("outcomes:\n%s\nwant:\n%s", strings.Join(got, "\n"), strings.Join(want, "\n"))
	}
	a, b := stateOf(t, grown(1, 1, 1), plain...), stateOf(t, grown(1, 1, 1), review.SettingMeasure, "standardised-mean-difference", review.SettingEffects, "common", review.SettingInterval, "wald", review.SettingNull, "0.5")
	c = Compare(a, b)
	if len(c.Settings) != 2 || c.Settings[0].Setting != review.SettingMeasure || c.Settings[1].After.Text != "0.5" || c.Outcomes[0].Comparable() || c.Nothing() {
		t.Errorf("settings %v, comparable %v", c.Settings, c.Outcomes[0].Comparable())
	}
}

// TestAbsoluteOfChange: a risk ratio of 0.5, then 0.8, at a baseline of 100 per 1000
// makes 50, then 20 fewer (100·RR − 100, by hand).
func TestAbsoluteOfChange(t *testing.T) {
	settings := []string{review.SettingMeasure, "risk-ratio", review.SettingBaseline, "low 0.1", review.SettingPer1000, "30"}
	a, b := stateOf(t, grown(.01, .5, .5), settings...), stateOf(t, grown(.01, .8, .8), settings...)
	o := Compare(a, b).Outcomes[0]
	if len(o.Absolute) != 1 || math.Abs(1000*o.Absolute[0].Before.Difference.Value+50) > 1e-9 || math.Abs(1000*o.Absolute[0].After.Difference.Value+20) > 1e-9 {
		t.Fatalf("absolute %+v", o.Absolute)
	}
	if trigger := o.Triggers[AbsoluteTrigger-1]; trigger.Verdict != TriggerMet || !strings.Contains(fmt.Sprint(trigger.Named), "30 fewer per 1000") {
		t.Errorf("T3 is %v by %q", trigger.Verdict, trigger.Named)
	}
	settings[5] = "15"
	o = Compare(stateOf(t, grown(.01, .5, .5), settings...), stateOf(t, grown(.01, .8, .8), settings...)).Outcomes[0]
	if trigger := o.Triggers[AbsoluteTrigger-1]; trigger.Verdict != TriggerNotMet {
		t.Errorf("short of 15 fewer: T3 is %v by %q", trigger.Verdict, trigger.Named)
	}
}

// TestSecondReports: a new row of the rule on overlapping reports is taken for a second
// report of a study; an old one, or an accepted one, is not.
func TestSecondReports(t *testing.T) {
	find := func(row int, accepted string) review.Finding {
		return review.Finding{Severity: review.Warning, Rule: "D3", Study: "C", Accepted: accepted, Place: review.Place{File: "t.csv", Row: row}, Message: "an overlapping report"}
	}
	for _, tt := range []struct {
		row      int
		accepted string
		want     int
	}{{4, "", 1}, {4, "another cohort", 0}, {2, "", 0}} {
		now := grown(1, 1, 1, 1)
		now.Findings = []review.Finding{find(tt.row, tt.accepted)}
		o := Compare(stateOf(t, grown(1, 1, 1), plain...), stateOf(t, now, plain...)).Outcomes[0]
		if got := len(o.Rows.SecondReports); got != tt.want {
			t.Errorf("finding in row %d, accepted %q: %d second reports, want %d", tt.row, tt.accepted, got, tt.want)
		}
	}
}

// updatesOf are updates at which the first of the studies A, B, … were known.
func updatesOf(known ...int) []Update {
	var all []Update
	for i, n := range known {
		u := NewUpdate(i+1, fmt.Sprintf("2026-0%d-01", i+1))
		for j := range n {
			u.Knows("", string(rune('a'+j)), "", 0, 0)
		}
		all = append(all, u)
	}
	return all
}

// TestLookAgain: under a common effect with known standard errors the statistic z at
// the last look is standard normal, and its evidence exp((z²−1)/2)/√2 (the
// corrected form for one parameter), so that the chance of n steps there is
// erfc(z/√2) with z² = 2(n ln(2+√3) + ln(2)/2) + 1.
func TestLookAgain(t *testing.T) {
	s := grown(1, 2, 2, 2, 2)
	_, o := runOne(t, s, plain...)
	r, err := o.LookAgain(context.Background(), updatesOf(2, 2, 3, 4), accrual.Draws{N: 20000, Seed: 3})
	if err != nil {
		t.Fatal(err)
	}
	if r.Times != 4 || r.Looks != 3 || r.Reached < 3 || len(r.Chances) != 1 {
		t.Fatalf("looks %+v", r)
	}
	step := math.Log(2 + math.Sqrt(3))
	z := math.Sqrt(2*(float64(r.Reached)*step+math.Log(2)/2) + 1)
	want := math.Erfc(z / math.Sqrt2)
	last, anyLook := r.Chances[0].LastLook, r.Chances[0].AnyLook
	if math.Abs(last.Value-want) > 5*math.Sqrt(want/20000) {
		t.Errorf("at the last look %v, want %v", last.Value, want)
	}
	if !(anyLook.Value > last.Value) || anyLook.Value > 3*want+5*anyLook.Error {
		t.Errorf("at any of three looks %v, at the last %v", anyLook.Value, last.Value)
	}
	for name, tt := range map[string]struct {
		s        *sheet
		updates  []Update
		settings []string
		why      string
	}{
		"no step":   {grown(1, .1, .1), updatesOf(1, 2), plain, "no step"},
		"one study": {grown(1, 5), updatesOf(1, 1), plain, "fewer than two"},
		"no null":   {grown(.1, .5, .5), updatesOf(1, 2), []string{review.SettingMeasure, "proportion"}, "no value of no effect"},
	} {
		_, o := runOne(t, tt.s, tt.settings...)
		if o.Result == nil {
			t.Fatalf("%s: %s", name, o.Problem)
		}
		r, err := o.LookAgain(context.Background(), tt.updates, accrual.Draws{N: 100, Seed: 1})
		if err != nil || !strings.Contains(r.Why, tt.why) || len(r.Chances) != 0 {
			t.Errorf("%s: %+v, %v", name, r, err)
		}
	}
}

// TestRuleOfLooks: rule A8 fires at the second look with new studies and an interval
// of 95%; not at the first, nor with one of 99%, nor where nothing new was seen.
func TestRuleOfLooks(t *testing.T) {
	for _, tt := range []struct {
		name    string
		level   string
		updates []Update
		want    int
	}{
		{"second look", "0.95", updatesOf(2, 3), 1},
		{"first look", "0.95", updatesOf(3), 0},
		{"99%", "0.99", updatesOf(2, 3), 0},
		{"nothing new", "0.95", updatesOf(3, 3), 0},
	} {
		s, _ := runOne(t, grown(1, 1, 1, 1), slices.Concat(plain, []string{review.SettingLevel, tt.level})...)
		s.FindLooks(tt.updates)
		n := 0
		for _, f := range s.Findings {
			if f.Rule == RuleLooks && f.Severity == review.Warning {
				n++
			}
		}
		if n != tt.want {
			t.Errorf("%s: %d findings, want %d", tt.name, n, tt.want)
		}
	}
}

// TestRenamedIsNoLook: a study of another name with the numbers of one that is gone was
// looked at before; one with the numbers of a study that is still there is new.
func TestRenamedIsNoLook(t *testing.T) {
	_, o := runOne(t, grown(1, 1, 2, 2), plain...) // A, B, C
	u := NewUpdate(1, "2026-01-01")
	u.Knows("", "A", "", 1, 1)
	u.Knows("", "Old", "", 2, 1)
	if groups, _ := o.entering([]Update{u, NewUpdate(2, "2026-02-01")}); len(groups) != 1 {
		t.Errorf("renamed: %v enter apart", groups)
	}
	u = NewUpdate(1, "2026-01-01")
	u.Knows("", "A", "", 1, 1)
	u.Knows("", "B", "", 2, 1)
	if groups, _ := o.entering([]Update{u, NewUpdate(2, "2026-02-01")}); len(groups) != 2 || len(groups[1]) != 1 {
		t.Errorf("a new study with the numbers of another: %v enter", groups)
	}
}

// TestAccrueByUpdate: studies enter with the update that brought them, and the last
// point is the pooled result.
func TestAccrueByUpdate(t *testing.T) {
	_, o := runOne(t, grown(1, 1, 2, 3, 6), plain...)
	if err := o.AccrueByUpdate(context.Background(), updatesOf(2, 2, 3, 4), meta.Work{}); err != nil {
		t.Fatal(err)
	}
	a := o.Accrual
	want := []float64{1.5, 2, 3} // means of 1 2, 1 2 3, 1 2 3 6
	if len(a.Cumulative) != 3 || a.Order.By != OrderByUpdate || a.Cumulative[1].At != "2026-03-01" {
		t.Fatalf("cumulative %+v", a)
	}
	for i, entry := range a.Cumulative {
		if math.Abs(entry.Mean.Estimate-want[i]) > 1e-12 {
			t.Errorf("point %d is %v, want %v", i+1, entry.Mean.Estimate, want[i])
		}
	}
	if a.Cumulative[2].Mean.Estimate != o.Result.Fit.Mean.Estimate {
		t.Error("the last point is not the pooled result")
	}
}
