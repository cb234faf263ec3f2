package main

import (
	"encoding/csv"
	"encoding/json"
	"math"
	"os"
	"strconv"
	"testing"

	"steelyard/meta/synthesis"
)

// weighed runs weigh with JSON and returns its document.
func weighed(t *testing.T, args ...string) synthesis.WeighingDocument {
	t.Helper()
	stdout, stderr, code := call(t, "", append([]string{"weigh", "--format", "json"}, args...)...)
	if code != codeDone {
		t.Fatalf("weigh %v: exit %d, %s", args, code, stderr)
	}
	var d synthesis.WeighingDocument
	if err := json.Unmarshal([]byte(stdout), &d); err != nil {
		t.Fatalf("weigh %v: %v", args, err)
	}
	return d
}

// TestWeighReference weighs every row of the 40-digit evidence values whose form
// the command has.
func TestWeighReference(t *testing.T) {
	file, err := os.Open(data + "checks/evidence.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	rows, err := csv.NewReader(file).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	tried := map[string]int{}
	for _, row := range rows[1:] {
		var args []string
		switch form := row[0]; form {
		case "normal":
			args = []string{"--z", row[1]}
		case "one_sided":
			args = []string{"--one-sided", "--z", row[1]}
		case "chi_square":
			args = []string{"--chi2", row[1], "--df", row[2]}
		case "t":
			args = []string{"--evidence", "student-t", "--t", row[1], "--df", row[2]}
		case "t_matched":
			args = []string{"--t", row[1], "--df", row[2]}
		case "f":
			args = []string{"--evidence", "student-t", "--f", row[1], "--df", row[2], "--df2", row[3]}
		case "p_value":
			args = []string{"--p", row[1]}
		default:
			continue // the regions are tested where they are computed
		}
		tried[row[0]]++
		want, err := strconv.ParseFloat(row[4], 64)
		if err != nil {
			t.Fatal(err)
		}
		if got := weighed(t, args...).LnEvidence; !near(got, want, 1e-9) {
			t.Errorf("weigh %v = %v, want %v", args, got, want)
		}
	}
	for _, form := range []string{"normal", "one_sided", "chi_square", "t", "t_matched", "f", "p_value"} {
		if tried[form] == 0 {
			t.Errorf("the check values have no row of form %s", form)
		}
	}
}

// TestWeighEstimate checks an estimate against its statistic: the same evidence
// comes from z, from estimate and standard error, and from estimate and limits.
func TestWeighEstimate(t *testing.T) {
	const z975 = 1.959963984540054 // standard normal, 97.5%
	want := weighed(t, "--z", "-2.5").LnEvidence
	se := 0.2
	low := strconv.FormatFloat(math.Exp(-0.5-z975*se), 'g', -1, 64)
	high := strconv.FormatFloat(math.Exp(-0.5+z975*se), 'g', -1, 64)
	ratio := strconv.FormatFloat(math.Exp(-0.5), 'g', -1, 64)
	for _, args := range [][]string{
		{"--estimate", "-0.5", "--se", "0.2"},
		{"--estimate", "0.5", "--null", "1", "--se", "0.2"},
		{"--ratio", "--estimate", ratio, "--se", "0.2"},
		{"--ratio", "--estimate", ratio, "--ci-low", low, "--ci-high", high},
		{"--ci-high", high, "--estimate", ratio, "--ratio", "--ci-low", low},
	} {
		d := weighed(t, args...)
		if !near(d.LnEvidence, want, 1e-9) || d.Favours != "effect" || d.Form != "normal" {
			t.Errorf("weigh %v = %v (%s, %s), want %v", args, d.LnEvidence, d.Favours, d.Form, want)
		}
	}
}

// TestWeighRegions: the region forms at |z| from 40-digit check values
// (evidence_extra.csv, region_ln_evidence_ratio): an estimate of 0 with se 1 and
// an important difference of 1 is trivial by ln 1.2393692646939191.
func TestWeighRegions(t *testing.T) {
	d := weighed(t, "--estimate", "0", "--se", "1", "--important", "1")
	if len(d.Regions) != 3 || d.Regions[1].Name != "trivial" {
		t.Fatalf("regions %+v", d.Regions)
	}
	if got := d.Regions[1].LnEvidence; !near(got, 1.2393692646939191, 1e-8) {
		t.Errorf("trivial = %v", got)
	}
	if sum := d.Regions[0].Posterior + d.Regions[1].Posterior + d.Regions[2].Posterior; !near(sum, 1, 1e-12) {
		t.Errorf("the regions' shares sum to %v", sum)
	}
}

// TestWeighExtreme: z = 20,000 stays finite in logs (evidence.csv) and says so.
func TestWeighExtreme(t *testing.T) {
	d := weighed(t, "--z", "20000")
	if d.Ratio != nil || d.Word != "massive" || !near(d.LnEvidence, 199999999.15342641, 1e-12) {
		t.Errorf("z = 20000: ratio %v, %s, ln %v", d.Ratio, d.Word, d.LnEvidence)
	}
}
