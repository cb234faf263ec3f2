package ingest

import (
	"context"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"steelyard/meta/review"
)

var planTable = table{
	{"The plan of this review"},
	{},
	{"Setting", "Value", "Outcome", "Reason", "Who"},
	{"measure", "odds ratio", "", "as in the protocol"},
	{"level", 0.9, "", "", "BK"},
	{"important", "0.8, 1.2", "death", "smallest that matters"},
	{"important", 0.5, "pain"},
	{"tau", ""},
	{"# a remark", "that is no setting"},
	{"run", "low risk: risk of bias is low", "death"},
	{"run", "one effect: effects = common; level = 0.99"},
}

// TestPlan reads the plan of a workbook and the one beside a text file alike.
func TestPlan(t *testing.T) {
	studies := table{{"study", "outcome", "y", "se"}, {"A", "death", 1, 1}, {"B", "pain", 1, 1}}
	dir := t.TempDir()
	files := map[string][]byte{
		"one.xlsx":     book(t, []string{"trials", "Plan"}, map[string]table{"trials": studies, "Plan": planTable}),
		"two.csv":      studies.csv(t),
		"two.plan.csv": planTable.csv(t),
	}
	for name, data := range files {
		if err := os.WriteFile(filepath.Join(dir, name), data, 0o600); err != nil {
			t.Fatal(err)
		}
	}
	for name, where := range map[string]review.Place{
		"one.xlsx": {File: "one.xlsx", Sheet: "Plan", Row: 6, Col: 2, Text: "0.8, 1.2"},
		"two.csv":  {File: "two.plan.csv", Row: 6, Col: 2, Text: "0.8, 1.2"},
	} {
		x, plan, err := Open(context.Background(), filepath.Join(dir, name), Options{})
		if err != nil {
			t.Fatal(err)
		}
		if len(x.Findings) != 0 {
			t.Errorf("%s: findings %v", name, x.Findings)
		}
		v := plan.Value(review.SettingImportant, "death")
		if v.Text != "0.8, 1.2" || v.From != review.FromSheet || v.Reason != "smallest that matters" || v.Place != where {
			t.Errorf("%s: important %+v", name, v)
		}
		for setting, want := range map[string]string{review.SettingMeasure: "odds ratio", review.SettingLevel: "0.9", review.SettingTau: "restricted-ml"} {
			if got := plan.Value(setting, "pain").Text; got != want {
				t.Errorf("%s: %s = %q, want %q", name, setting, got, want)
			}
		}
		if got := plan.Value(review.SettingImportant, "pain").Text; got != "0.5" {
			t.Errorf("%s: important of pain = %q", name, got)
		}
		if len(plan.Runs) != 2 || plan.Runs[0].Outcome != "death" || plan.Runs[0].Changes["where"] != "risk of bias is low" ||
			plan.Runs[1].Changes["effects"] != "common" || plan.Runs[1].Changes["level"] != "0.99" || plan.Runs[1].Place.Row != 11 {
			t.Errorf("%s: runs %+v", name, plan.Runs)
		}
	}
}

// TestPlanFindings reports each fault of a plan at its cell, for its outcome.
func TestPlanFindings(t *testing.T) {
	studies := table{{"study", "y", "se"}, {"A", 1, 1}}
	plan := table{{"setting", "value", "outcome"},
		{"measure", "odd ratio", "death"}, {"mesure", "odds ratio"}, {"level", 95}, {"level", 0.9}, {"level", 0.8}, {"", "0.2"}, {"run", "nameless"}, {"column", "nonsense=x"}}
	x := mustRead(t, book(t, []string{"trials", "plan"}, map[string]table{"trials": studies, "plan": plan}), "a.xlsx", Options{})
	want := []struct{ cell, outcome, word string }{
		{"B2", "death", "odds ratio, risk ratio"}, {"A3", "", "measure, effects"}, {"B4", "", "95"}, {"B6", "", "two different"},
		{"A7", "", "names no setting"}, {"B8", "", "NAME: FILTER"}, {"B9", "", "events treated"},
	}
	if len(x.Findings) != len(want) {
		t.Fatalf("%d findings, want %d: %v", len(x.Findings), len(want), x.Findings)
	}
	for i, w := range want {
		f := x.Findings[i]
		if f.Rule != review.RulePlan || f.Severity != review.Error || f.Place.Sheet != "plan" || f.Place.Cell() != w.cell || f.Outcome != w.outcome || !strings.Contains(f.Message, w.word) {
			t.Errorf("finding %d: %+v, want it at %s with %q", i, f, w.cell, w.word)
		}
	}
	x = mustRead(t, book(t, []string{"trials", "plan"}, map[string]table{"trials": studies, "plan": {{"what", "how"}, {"level", 0.9}}}), "a.xlsx", Options{})
	if got := said(x); !slices.Equal(got, []string{"error plan "}) {
		t.Errorf("a plan without header: %q", got)
	}
}

// TestPlanMapsColumns lets the plan say which column is which; the call wins.
func TestPlanMapsColumns(t *testing.T) {
	studies := table{{"Autor", "Wert", "Fehler", "Fehler 2"}, {"A", 1, 0.5, 0.25}}
	plan := table{{"setting", "value"}, {"column", "study=Autor"}, {"column", "analysis estimate=Wert"}, {"column", "se=Fehler"}}
	data := book(t, []string{"trials", "plan"}, map[string]table{"trials": studies, "plan": plan})
	if got := lines(mustRead(t, data, "a.xlsx", Options{})); !slices.Equal(got, []string{"A||||unspecified||analysis estimate=1|se=0.5|Fehler 2: 0.25"}) {
		t.Errorf("by the plan: %q", got)
	}
	if got := lines(mustRead(t, data, "a.xlsx", Options{Columns: map[string]string{"se": "Fehler 2"}})); !slices.Equal(got, []string{"A||||unspecified||analysis estimate=1|se=0.25|Fehler: 0.5"}) {
		t.Errorf("by the call: %q", got)
	}
}

// TestOpenFails keeps the fault of a plan file from being taken for no plan.
func TestOpenFails(t *testing.T) {
	dir := t.TempDir()
	if _, _, err := Open(context.Background(), filepath.Join(dir, "none.csv"), Options{}); err == nil {
		t.Error("a missing file is read")
	}
	if err := os.WriteFile(filepath.Join(dir, "a.csv"), []byte("study,y,se\nA,1,1\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	if err := os.Mkdir(filepath.Join(dir, "a.plan.csv"), 0o700); err != nil {
		t.Fatal(err)
	}
	if _, _, err := Open(context.Background(), filepath.Join(dir, "a.csv"), Options{}); err == nil || !strings.Contains(err.Error(), "a.plan.csv") {
		t.Errorf("a folder in place of the plan: %v", err)
	}
}

// TestEmptyPlanFile says what belongs into the plan, not into the sheet.
func TestEmptyPlanFile(t *testing.T) {
	path := filepath.Join(t.TempDir(), "trials.csv")
	for name, text := range map[string]string{path: "study,y,se\nA,1,1\n", planPath(path): ""} {
		if err := os.WriteFile(name, []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
	}
	_, _, err := Open(context.Background(), path, Options{})
	if err == nil || err.Error() != "trials.plan.csv: the plan beside the sheet is empty; write setting and value above its rows, or delete the file to go without a plan" {
		t.Errorf("error %v", err)
	}
}
