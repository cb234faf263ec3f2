package rules_test

import (
	"context"
	"encoding/csv"
	"os"
	"slices"
	"strings"
	"testing"

	"steelyard/ingest"
	"steelyard/ingest/rules"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

var catalogue = rules.Catalogue

const sheets = "../../testdata/findings/"

// found reads a sheet and returns all that is found in it: by the reader, by the
// catalogue and by the analysis.
func found(t testing.TB, file string) []review.Finding {
	t.Helper()
	x, plan, err := ingest.Open(context.Background(), file, ingest.Options{})
	if err != nil {
		t.Fatal(err)
	}
	rules.Apply(x, plan)
	s, err := synthesis.Run(context.Background(), x, plan, synthesis.Want{})
	if err != nil {
		t.Fatal(err)
	}
	return s.Findings
}

// expectation is a line of the table of expected findings.
type expectation struct{ file, rule, severity, cell string }

func expectations(t *testing.T) []expectation {
	t.Helper()
	f, err := os.Open(sheets + "expected.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	lines, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var all []expectation
	for _, line := range lines[1:] {
		all = append(all, expectation{line[0], line[1], line[2], line[3]})
	}
	return all
}

// TestSheets wants of every small sheet just the findings of its rule that the
// table names, with severity and cell, and no error of any other rule. The sheets
// are invented; what they plant is said in the table.
func TestSheets(t *testing.T) {
	byFile := map[string][]string{}
	ruleOf := map[string]string{}
	for _, e := range expectations(t) {
		ruleOf[e.file] = e.rule
		if e.severity != "none" {
			byFile[e.file] = append(byFile[e.file], strings.TrimSpace(e.severity+" "+e.cell))
		}
	}
	for file, rule := range ruleOf {
		t.Run(strings.TrimSuffix(file, ".csv"), func(t *testing.T) {
			var got []string
			for _, f := range found(t, sheets+file) {
				switch {
				case f.Rule == rule:
					got = append(got, strings.TrimSpace(f.Severity.String()+" "+f.Place.Cell()))
					if f.Message == "" || strings.Contains(f.Message, "NaN") || strings.Contains(f.Message, "Inf") {
						t.Errorf("message %q", f.Message)
					}
				case f.Severity == review.Error && !explainedBeside(rule, f.Rule):
					t.Errorf("besides, error %s %s: %s", f.Rule, f.Place.Cell(), f.Message)
				case f.Severity == review.Warning:
					t.Logf("besides, warning %s %s: %s", f.Rule, f.Place.Cell(), f.Message)
				}
			}
			slices.Sort(got)
			want := byFile[file]
			slices.Sort(want)
			if !slices.Equal(got, want) {
				t.Errorf("%s: found %q, want %q", rule, got, want)
			}
		})
	}
}

// explainedBeside reports whether an error of another rule belongs beside the one
// that a sheet is about: broken counts where they are no percentages, and a negative
// ratio outside its limits.
func explainedBeside(rule, other string) bool {
	return rule == "C3" && other == "C2" || rule == "I4" && other == "I1"
}

// TestCatalogueTested wants every rule of the catalogue that has a threshold of its
// own to have a sheet that fires it and a near miss.
func TestCatalogueTested(t *testing.T) {
	fires, misses := map[string]bool{}, map[string]bool{}
	for _, e := range expectations(t) {
		if strings.Contains(e.file, "-near") {
			misses[e.rule] = true
		} else {
			fires[e.rule] = true
		}
	}
	for _, r := range rules.Catalogue() {
		if remark := strings.Contains(r.Severity, "remark"); !remark && !elsewhere[r.ID] && (!fires[r.ID] || !misses[r.ID]) {
			t.Errorf("%s (%s): fires %v, near miss %v", r.ID, r.Title, fires[r.ID], misses[r.ID])
		}
	}
}

// elsewhere are rules that need a setting, a second sheet or an earlier look, which a sheet alone does
// not have; they are tested where these are.
var elsewhere = map[string]bool{"A2": true, "A3": true, "A8": true, "A9": true}
