package ingest

import (
	"bytes"
	"context"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"

	"steelyard/meta/effect"
	"steelyard/meta/review"
)

var judgementTable = table{
	{"The panel's ratings"},
	{"Outcome", "Domain", "Rating", "Reason", "By", "Date"},
	{"Death", "risk of bias", "down one", "half the weight is at high risk", "B. Kone", "2024-03-04"},
	{"pain", "Missing results", "suspected, but not rated down", "two registered trials", "", "2024"},
	{"death", "certainty", "moderate", "one step down", "panel", ""},
	{"death", "imprecision", "", "not yet"},
}

// TestJudgements: the ratings of a workbook and of the file beside a text file are
// kept in the panel's own words.
func TestJudgements(t *testing.T) {
	studies := table{{"study", "outcome", "y", "se"}, {"A", "death", 1, 1}, {"B", "pain", 1, 1}}
	dir := t.TempDir()
	for name, data := range map[string][]byte{
		"one.xlsx":          book(t, []string{"trials", "Judgement"}, map[string]table{"trials": studies, "Judgement": judgementTable}),
		"two.csv":           studies.csv(t),
		"two.judgement.csv": judgementTable.csv(t),
	} {
		if err := os.WriteFile(filepath.Join(dir, name), data, 0o600); err != nil {
			t.Fatal(err)
		}
	}
	for _, name := range []string{"one.xlsx", "two.csv"} {
		x, _, err := Open(context.Background(), filepath.Join(dir, name), Options{})
		if err != nil {
			t.Fatal(err)
		}
		if len(x.Findings) != 0 || len(x.Judgements) != 3 {
			t.Fatalf("%s: %d judgements, findings %v", name, len(x.Judgements), x.Findings)
		}
		first := x.Judgements[0]
		if first.Outcome != "death" || first.Domain != review.DomainRiskOfBias || first.Rating != "down one" || first.By != "B. Kone" ||
			first.Date != (review.Date{Year: 2024, Month: 3, Day: 4}) || first.Place.Cell() != "C3" || first.Reason != "half the weight is at high risk" {
			t.Errorf("%s: %+v", name, first)
		}
		if second := x.Judgements[1]; second.Domain != review.DomainPublicationBias || second.Rating != "suspected, but not rated down" || second.Date.String() != "2024" {
			t.Errorf("%s: %+v", name, second)
		}
		if third := x.Judgements[2]; third.Domain != review.DomainCertainty || third.Rating != "moderate" || third.Date.Year != 0 {
			t.Errorf("%s: %+v", name, third)
		}
	}
}

// TestJudgementsRefused: what cannot be a judgement is refused at its cell, and the
// pooled result does not depend on it.
func TestJudgementsRefused(t *testing.T) {
	rows := table{
		{"outcome", "domain", "rating", "reason", "by", "date"},
		{"deth", "imprecision", "down one", "wide"},
		{"death", "precision", "down one", "wide"},
		{"death", "imprecision", "down one", "wide"},
		{"death", "imprecision", "no change", "after all"},
		{"", "imprecision", "down one", "wide"},
		{"pain", "imprecision", "down one", ""},
		{"pain", "start", "high", "randomised", "", "4 March"},
	}
	want := []struct{ cell, says string }{
		{"A2", `"deth" is not a known outcome of the sheet; use one of: death, pain`},
		{"B3", `"precision" is not a known domain; use one of: start, risk of bias`},
		{"C5", "imprecision is rated in judgement!C4 already"},
		{"A6", "names no outcome, and the sheet has several: death, pain"},
		{"C7", "has no reason and does not count"},
		{"F8", "not read as the date of the judgement"},
	}
	studies := table{{"study", "outcome", "y", "se"}, {"A", "death", 1, 1}, {"B", "pain", 1, 1}}
	x := mustRead(t, book(t, []string{"trials", "judgement"}, map[string]table{"trials": studies, "judgement": rows}), "a.xlsx", Options{})
	if len(x.Judgements) != 1 || len(x.Findings) != len(want) {
		t.Fatalf("%d judgements, findings %+v", len(x.Judgements), x.Findings)
	}
	for i, f := range x.Findings {
		if f.Severity != review.Warning || f.Rule != review.RuleJudgement || f.Place.Sheet != "judgement" || f.Place.Cell() != want[i].cell || !strings.Contains(f.Message, want[i].says) {
			t.Errorf("%s: %+v", want[i].cell, f)
		}
	}
}

// TestJudgementsOfOneOutcome: a sheet with one outcome needs no name of it, with none
// it takes none.
func TestJudgementsOfOneOutcome(t *testing.T) {
	judged := func(outcome string) table {
		return table{{"outcome", "domain", "rating", "reason"}, {outcome, "start", "high", "randomised"}}
	}
	unnamed := table{{"study", "y", "se"}, {"A", 1, 1}}
	for _, c := range []struct {
		studies table
		outcome string
		says    string
	}{
		{unnamed, "", ""},
		{unnamed, "death", "leave the outcome blank"},
		{table{{"study", "outcome", "y", "se"}, {"A", "death", 1, 1}}, "", ""},
	} {
		x := mustRead(t, book(t, []string{"trials", "judgement"}, map[string]table{"trials": c.studies, "judgement": judged(c.outcome)}), "a.xlsx", Options{})
		switch {
		case c.says == "" && (len(x.Judgements) != 1 || len(x.Findings) != 0):
			t.Errorf("%q: %+v, %+v", c.outcome, x.Judgements, x.Findings)
		case c.says != "" && (len(x.Findings) != 1 || !strings.Contains(x.Findings[0].Message, c.says)):
			t.Errorf("%q: %+v", c.outcome, x.Findings)
		}
	}
}

// TestJudgementsWithoutHeader says what the header is; a file that is empty what
// belongs into it.
func TestJudgementsWithoutHeader(t *testing.T) {
	studies := table{{"study", "y", "se"}, {"A", 1, 1}}
	x := mustRead(t, book(t, []string{"trials", "judgement"}, map[string]table{"trials": studies, "judgement": {{"certainty", "high"}}}), "a.xlsx", Options{})
	if len(x.Findings) != 1 || !strings.Contains(x.Findings[0].Message, "no header; write outcome, domain, rating") {
		t.Errorf("%+v", x.Findings)
	}
	path := filepath.Join(t.TempDir(), "trials.csv")
	for name, text := range map[string]string{path: "study,y,se\nA,1,1\n", judgementPath(path): ""} {
		if err := os.WriteFile(name, []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
	}
	if _, _, err := Open(context.Background(), path, Options{}); err == nil || !strings.Contains(err.Error(), "trials.judgement.csv: the file of judgements beside the sheet is empty") {
		t.Errorf("error %v", err)
	}
}

// TestPlanDates: a plan may say when a setting was agreed; what is no date is refused.
func TestPlanDates(t *testing.T) {
	studies := table{{"study", "y", "se"}, {"A", 1, 1}}
	plan := table{{"setting", "value", "reason", "date"}, {"important", "0.8", "agreed", "2024-03-04"}, {"null", "1", "", "early on"}}
	data := book(t, []string{"trials", "plan"}, map[string]table{"trials": studies, "plan": plan})
	x, p, err := Read(context.Background(), data, "a.xlsx", Options{})
	if err != nil {
		t.Fatal(err)
	}
	if v := p.Value(review.SettingImportant, ""); v.Date.String() != "2024-03-04" {
		t.Errorf("%+v", v)
	}
	if len(x.Findings) != 1 || x.Findings[0].Place.Cell() != "D3" || !strings.Contains(x.Findings[0].Message, "not read as the date on which null was agreed") {
		t.Errorf("%+v", x.Findings)
	}
}

// TestTemplateJudgements: the template's sheet is read as it is filled in, each of its
// domains and every rating that it offers.
func TestTemplateJudgements(t *testing.T) {
	empty, err := Template(effect.RiskRatio)
	if err != nil {
		t.Fatal(err)
	}
	f, err := excelize.OpenReader(bytes.NewReader(empty))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	for i, cells := range [][]any{{"study", "events treated", "total treated", "events control", "total control"}, {"A", 3, 50, 6, 50}} {
		row := i + 1
		if err := f.SetSheetRow(studiesSheet, cellAt(1, row), &cells); err != nil {
			t.Fatal(err)
		}
	}
	ratings := review.RatingNames()
	for i, domain := range review.DomainNames() {
		if err := f.SetSheetRow(judgementSheet, cellAt(1, i+2), &[]any{"", domain, ratings[i%len(ratings)], "why", "A. Lee", "2024-05-02"}); err != nil {
			t.Fatal(err)
		}
	}
	x := mustRead(t, saved(t, f), "filled.xlsx", Options{})
	if len(x.Judgements) != len(review.DomainNames()) || len(x.Judgements) != 10 {
		t.Fatalf("%d judgements, findings %+v", len(x.Judgements), x.Findings)
	}
	for i, j := range x.Judgements {
		if j.Domain != review.Domain(i) || j.Rating != ratings[i] || j.By != "A. Lee" || j.Date.String() != "2024-05-02" {
			t.Errorf("row %d: %+v", i+2, j)
		}
	}
}
