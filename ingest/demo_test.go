package ingest

import (
	"bytes"
	"context"
	"os"
	"strings"
	"testing"

	"steelyard/meta/review"
	"steelyard/testdata/demo/workbook"
)

const demoFile = "../testdata/demo.xlsx"

// TestDemoIsMadeByItsProgram holds the committed workbook to the program that
// writes it.
func TestDemoIsMadeByItsProgram(t *testing.T) {
	want, err := workbook.Bytes()
	if err != nil {
		t.Fatal(err)
	}
	got, err := os.ReadFile(demoFile)
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(got, want) {
		t.Error("testdata/demo.xlsx is not what its program writes; run: go run ./testdata/demo")
	}
}

// TestDemo reads the demo workbook: nine trials, three outcomes, a plan. The
// numbers are those of its program's table of invented trials.
func TestDemo(t *testing.T) {
	x, plan, err := Open(context.Background(), demoFile, Options{})
	if err != nil {
		t.Fatal(err)
	}
	for _, f := range x.Findings {
		if f.Severity != review.Note {
			t.Errorf("%s %s at %s: %s", f.Severity, f.Rule, f.Place, f.Message)
		}
	}
	if got := x.Outcomes(); len(got) != 3 || got[0] != "flare within 24 weeks" {
		t.Errorf("outcomes %q", got)
	}
	rows, names := map[string]int{}, map[string]bool{}
	for i := range x.Studies {
		s := &x.Studies[i]
		rows[s.Outcome]++
		names[s.Name] = true
		if s.Date.Year < 2009 || s.Date.Year > 2024 || s.Date.Month == 0 {
			t.Errorf("%s: date %s", s.Name, s.Date)
		}
	}
	if len(names) != 9 || rows["flare within 24 weeks"] != 9 || rows["symptom score at 24 weeks"] != 7 || rows["serious harm"] != 9 {
		t.Errorf("%d trials, rows %v; want 9 trials with 9, 7 and 9 rows", len(names), rows)
	}
	dvorak := &x.Studies[7]
	for field, want := range map[review.Field]float64{review.Estimate: 0.71, review.LimitLow: 0.49, review.LimitHigh: 1.02,
		review.LimitLevel: 0.95, review.TotalTreated: 131, review.TotalControl: 128} {
		if n, ok := dvorak.Number(field); !ok || n.Value != want {
			t.Errorf("%s: %s = %v, want %v", dvorak.Name, field, n.Value, want)
		}
	}
	if dvorak.Measure.String() != "risk ratio" {
		t.Errorf("%s: measure %s, want that of its header", dvorak.Name, dvorak.Measure)
	}
	if v := plan.Value(review.SettingPrior, "flare within 24 weeks"); v.Text != "0.2" || v.Place.Cell() != "B8" || v.Reason == "" {
		t.Errorf("prior %+v, want 0.2 from plan!B8 with its reason", v)
	}
	if len(plan.Runs) != 3 {
		t.Errorf("%d planned runs, want 3", len(plan.Runs))
	}
}

// TestDemoJudgements: the invented panel rated start, five domains and certainty of each
// outcome, with reasons, under invented names, after its thresholds were agreed. The
// dates are those of the program's table.
func TestDemoJudgements(t *testing.T) {
	x, plan, err := Open(context.Background(), demoFile, Options{})
	if err != nil {
		t.Fatal(err)
	}
	rated := map[string]int{}
	for _, j := range x.Judgements {
		rated[j.Outcome]++
		if j.Reason == "" || !strings.Contains(j.By, "invented") || j.Date.Year != 2024 || j.Date.Month != 10 {
			t.Errorf("%+v", j)
		}
	}
	for _, outcome := range x.Outcomes() {
		if rated[outcome] != 7 {
			t.Errorf("%s: %d ratings, want 7", outcome, rated[outcome])
		}
		if v := plan.Value(review.SettingImportant, outcome); v.Text != "" && v.Date.String() != "2024-09-16" {
			t.Errorf("%s: threshold of %s", outcome, v.Date)
		}
	}
}
