package main

import (
	"encoding/json"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"steelyard/meta/synthesis"
)

// runsSheet writes trials with a plan of sensitivity runs beside them.
func runsSheet(t *testing.T, plan string) string {
	t.Helper()
	folder := t.TempDir()
	sheet := "trial,year,risk of bias,setting,estimate,se\nA,2001,low,tube,0.5,0.2\nB,2002,high,tube,0.9,0.25\nC,2003,low,mask,0.2,0.3\n" +
		"D,2004,unclear,tube,0.7,0.15\nE,2005,low,mask,-0.1,0.4\n"
	for name, content := range map[string]string{"runs.csv": sheet, "runs.plan.csv": "setting,value\n" + plan} {
		if err := os.WriteFile(filepath.Join(folder, name), []byte(content), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	return filepath.Join(folder, "runs.csv")
}

// TestPlannedRuns: each planned run gives what pool gives when called with the run's
// filter and settings.
func TestPlannedRuns(t *testing.T) {
	const plan = "measure,mean difference\nwhere,year >= 2002\nrun,tube: setting is tube or setting is none\n" +
		"run,common effect: effects = common\nrun,paule: tau = paule-mandel; risk of bias is not high\nrun,nothing: year > 3000\n"
	sheet := runsSheet(t, plan)
	d := pooled(t, sheet, "--runs")
	runs := d.Outcomes[0].Runs
	calls := [][]string{
		{"--where", "year >= 2002 and setting is tube"},
		{"--effects", "common"},
		{"--where", "year >= 2002 and risk of bias is not high", "--tau", "paule-mandel"},
	}
	if len(runs) != 4 {
		t.Fatalf("%d runs, want 4", len(runs))
	}
	for i, args := range calls {
		want := pooled(t, append([]string{sheet}, args...)...).Outcomes[0]
		if got := runs[i]; got.SubsetDocument == nil || got.Estimate != want.Pooled.Estimate || got.Low != want.Pooled.Low || got.K != want.K || got.LnEvidence != want.Pooled.LnEvidence {
			t.Errorf("run %q: %+v, want %v as by %v", got.Name, got.SubsetDocument, want.Pooled.MeanDocument, args)
		}
	}
	if d.Outcomes[0].Pooled.Estimate == runs[0].Estimate || d.Outcomes[0].K != 4 {
		t.Error("the result as planned is not that of the plan's own filter")
	}
	if runs[3].SubsetDocument != nil || runs[3].Problem == "" {
		t.Errorf("a run without rows gives %+v", runs[3])
	}
	text, _, _ := call(t, "", "pool", sheet, "--runs")
	for _, want := range []string{"Planned sensitivity runs", "(as planned)", "common effect: effects common", "nothing: only where year > 3000; no result:"} {
		if !strings.Contains(text, want) {
			t.Errorf("the text lacks %q:\n%s", want, text)
		}
	}
}

// TestPlannedRunsOfOutcome: a run of one outcome is none of another's, one of an
// unknown outcome is a finding, and without --runs nothing is run.
func TestPlannedRunsOfOutcome(t *testing.T) {
	d := pooled(t, data+"demo.xlsx", "--runs")
	var names []string
	for _, o := range d.Outcomes {
		for _, r := range o.Runs {
			names = append(names, o.Outcome+": "+r.Name)
		}
	}
	want := "flare within 24 weeks: low risk of bias|flare within 24 weeks: no high risk of bias|flare within 24 weeks: common effect|" +
		"symptom score at 24 weeks: common effect|serious harm: common effect"
	if got := strings.Join(names, "|"); got != want {
		t.Errorf("the runs are %s, want %s", got, want)
	}
	stdout, _, _ := call(t, "", "pool", data+"demo.xlsx", "--format", "json")
	var plain synthesis.Document
	if err := json.Unmarshal([]byte(stdout), &plain); err != nil {
		t.Fatal(err)
	}
	if plain.Outcomes[0].Runs != nil {
		t.Error("runs without --runs")
	}
	folder := t.TempDir()
	for name, content := range map[string]string{"s.csv": "study,outcome,estimate,se\nA,pain,1,0.5\nB,pain,2,0.5\n", "s.plan.csv": "setting,value,outcome\nrun,c: effects = common,sleep\n"} {
		if err := os.WriteFile(filepath.Join(folder, name), []byte(content), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	if text, _, _ := call(t, "", "pool", filepath.Join(folder, "s.csv")); !strings.Contains(strings.Join(strings.Fields(text), " "), `outcome "sleep" that no row of the sheet has`) {
		t.Errorf("a run of an unknown outcome is not named:\n%s", text)
	}
}
