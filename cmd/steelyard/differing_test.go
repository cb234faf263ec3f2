package main

import (
	"encoding/csv"
	"encoding/json"
	"os"
	"strconv"
	"testing"

	"steelyard/meta/synthesis"
)

// TestDifferingOfTheCheckFiles compares the evidence for effects that differ, with
// τ integrated over its usual prior, with testdata/checks/*.integrated.csv (40-digit
// arithmetic): uniform where the measure is not known, half-normal of scale 0.5 for
// log odds ratios.
func TestDifferingOfTheCheckFiles(t *testing.T) {
	for _, c := range []struct {
		name, prior string
		args        []string
	}{
		{"bcg_lor", "uniform", nil},
		{"eight_schools", "uniform", nil},
		{"aspirin_lor", "uniform", nil},
		{"bcg_lor", "half_normal", []string{"--measure", "odds-ratio"}},
		{"aspirin_lor", "half_normal", []string{"--measure", "odds-ratio"}},
		{"aspirin_lor", "half_normal", []string{"--measure", "odds-ratio", "--effects", "common"}},
	} {
		stdout, stderr, code := call(t, "", append([]string{"pool", data + "checks/" + c.name + ".csv", "--format", "json"}, c.args...)...)
		var d synthesis.Document
		if err := json.Unmarshal([]byte(stdout), &d); err != nil {
			t.Errorf("%s %v: exit %d, %s", c.name, c.args, code, stderr)
			continue
		}
		got := d.Outcomes[0].Heterogeneity.Integrated
		if want := integratedCheck(t, c.name, c.prior); got == nil || !near(got.LnEvidence, want, 1e-6) {
			t.Errorf("%s, %s: %+v, want %v", c.name, c.prior, got, want)
		}
	}
}

// integratedCheck reads the evidence for heterogeneity under a prior of a check
// file, scale 0.5 where it has one.
func integratedCheck(t *testing.T, name, prior string) float64 {
	t.Helper()
	file, err := os.Open(data + "checks/" + name + ".integrated.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	rows, err := csv.NewReader(file).ReadAll()
	if err != nil || rows[0][4] != "ln_er_heterogeneity_given_effect" {
		t.Fatalf("%v, heads %v", err, rows[0])
	}
	for _, row := range rows[1:] {
		if row[0] == prior && (row[1] == "" || row[1] == "0.5") {
			value, err := strconv.ParseFloat(row[4], 64)
			if err != nil {
				t.Fatal(err)
			}
			return value
		}
	}
	t.Fatalf("%s has no row of %s", name, prior)
	return 0
}

// TestDifferingText words the same numbers: exp(0.8608) is 2.4, exp(62) beyond all
// words.
func TestDifferingText(t *testing.T) {
	stdout, _, _ := call(t, "", "pool", data+"checks/aspirin_lor.csv", "--measure", "odds-ratio")
	holds(t, stdout, "2.4 : 1 for one common effect over effects that differ", "half-normal prior of scale 0.5")
	stdout, _, _ = call(t, "", "pool", data+"checks/bcg_lor.csv")
	holds(t, stdout, "over 10,000 : 1 for effects that differ over one common effect", "uniform prior")
}
