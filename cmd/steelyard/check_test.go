package main

import (
	"encoding/json"
	"strings"
	"testing"

	"steelyard/ingest/rules"
	"steelyard/meta/synthesis"
)

// checked runs check on a text and returns its JSON.
func checked(t *testing.T, stdin string, wantCode int, args ...string) synthesis.CheckDocument {
	t.Helper()
	stdout, stderr, code := call(t, stdin, append([]string{"check", "--format", "json"}, args...)...)
	if code != wantCode {
		t.Fatalf("%v: exit %d, want %d; stderr %q", args, code, wantCode, stderr)
	}
	var d synthesis.CheckDocument
	if err := json.Unmarshal([]byte(stdout), &d); err != nil {
		t.Fatal(err)
	}
	return d
}

// swappedErrors is an invented sheet whose second row has standard errors in place of
// SDs, as its limits show: 0.85·√61 and 0.78·√63 are near 6.4, the SD that limits of
// ±2.28 around −1.90 imply for 61 and 63 people.
const swappedErrors = "study,year,mean treated,sd treated,total treated,mean control,sd control,total control,mean difference,ci low,ci high,accept\n" +
	"Ahlgren 2001,2001,14.2,6.1,52,16.9,6.4,50,-2.7,-5.16,-0.24,\n" +
	"Becker 2004,2004,13.8,0.85,61,15.7,0.78,63,-1.9,-4.18,0.38,ACCEPT\n" +
	"Castro 2007,2007,15.1,5.9,48,17.2,6.8,47,-2.1,-4.7,0.5,\n"

// TestCheckExit wants exit code 1 for an error, and 0 once it is accepted with a
// reason, which is printed with every answer.
func TestCheckExit(t *testing.T) {
	open := strings.Replace(swappedErrors, "ACCEPT", "", 1)
	d := checked(t, open, codeData, "-")
	if d.Counts.Errors != 1 || d.Findings[0].Rule != "M1" || d.Findings[0].Cell != "D3" || len(d.Findings[0].Readings) != 2 {
		t.Errorf("counts %+v, findings %+v", d.Counts, d.Findings)
	}
	if d.Rows != 3 || d.Numbers != 27 {
		t.Errorf("%d rows, %d numbers; want 3 and 27", d.Rows, d.Numbers)
	}
	accepted := strings.Replace(swappedErrors, "ACCEPT", "M1 the authors confirmed the SDs", 1)
	d = checked(t, accepted, codeDone, "-")
	if d.Counts.Errors != 0 || d.Counts.Accepted != 1 || d.Findings[0].Accepted != "the authors confirmed the SDs" {
		t.Errorf("accepted: counts %+v, findings %+v", d.Counts, d.Findings)
	}
	for _, command := range []string{"check", "pool"} {
		stdout, stderr, code := call(t, accepted, command, "-")
		if code != codeDone || !strings.Contains(strings.Join(strings.Fields(stdout), " "), "Accepted: the authors confirmed the SDs") {
			t.Errorf("%s: exit %d, stderr %q: the reason is not printed:\n%s", command, code, stderr, stdout)
		}
	}
}

// TestPoolLeavesErrorsOut wants a row with an error of the catalogue to be left out of
// the pooled result, and named.
func TestPoolLeavesErrorsOut(t *testing.T) {
	stdout, _, code := call(t, strings.Replace(swappedErrors, "ACCEPT", "", 1), "pool", "-")
	if code != codeData || !strings.Contains(stdout, "2 of 3 rows pooled") || !strings.Contains(stdout, "Becker 2004") {
		t.Errorf("exit %d:\n%s", code, stdout)
	}
}

// TestCheckNotChecked wants rules without their columns to be listed, and no others.
func TestCheckNotChecked(t *testing.T) {
	d := checked(t, "study,estimate,se\nAhlgren,0.1,0.2\nBecker,0.2,0.2\n", codeDone, "-")
	missing := map[string][]string{}
	for _, r := range d.NotChecked {
		missing[r.Rule] = r.Missing
	}
	if got := missing["I7"]; len(got) != 1 || got[0] != "p" {
		t.Errorf("I7 lacks %q, want p alone", got)
	}
	for _, rule := range []string{"F1", "D1", "I14", "M6"} {
		if missing[rule] != nil {
			t.Errorf("%s is said to lack %q", rule, missing[rule])
		}
	}
}

// TestCheckRules wants the whole catalogue with thresholds and sources.
func TestCheckRules(t *testing.T) {
	stdout, stderr, code := call(t, "", "check", "--rules")
	if code != codeDone || stderr != "" {
		t.Fatalf("exit %d, stderr %q", code, stderr)
	}
	flat := strings.Join(strings.Fields(stdout), " ")
	for _, r := range rules.Catalogue() {
		if !strings.Contains(flat, strings.Join(strings.Fields(r.ID+" "+r.Title+" ("+r.Severity+"): "+r.Threshold+". Source: "+r.Source), " ")) {
			t.Errorf("%s is not listed in full", r.ID)
		}
	}
	if _, _, code := call(t, "", "check", "--rules", "trials.csv"); code != codeCall {
		t.Errorf("with a file too: exit %d, want %d", code, codeCall)
	}
}

func TestGoldenCheck(t *testing.T) {
	for name, args := range map[string][]string{
		"check-demo.txt":  {"check", data + "demo.xlsx"},
		"check-bcg.txt":   {"check", data + "checks/bcg_counts.csv"},
		"check-rules.txt": {"check", "--rules"},
		"help-check.txt":  {"check", "--help"},
	} {
		stdout, stderr, code := call(t, "", args...)
		if code != codeDone || stderr != "" {
			t.Errorf("%v: exit %d, stderr %q", args, code, stderr)
		}
		golden(t, name, stdout)
	}
	stdout, _, _ := call(t, "", "check", data+"findings/M1.csv")
	golden(t, "check-errors.txt", stdout)
}
