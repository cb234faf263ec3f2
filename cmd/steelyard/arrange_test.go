package main

import (
	"strings"
	"testing"
)

// TestFlagsAnywhere: flags before, after and around the file give one answer.
func TestFlagsAnywhere(t *testing.T) {
	bcg := data + "checks/bcg_counts.csv"
	want, _, code := call(t, "", "pool", "--measure", "odds ratio", "--level=0.9", bcg)
	if code != codeDone || !strings.Contains(want, "odds ratio, 90% interval") {
		t.Fatalf("exit %d:\n%s", code, want)
	}
	for _, args := range [][]string{
		{"pool", bcg, "--measure", "odds ratio", "--level", "0.9"},
		{"pool", "--measure", "odds ratio", bcg, "--level", "0.9"},
		{"pool", "--measure", "odds_ratio", "--level", "90%", "--", bcg},
	} {
		got, stderr, code := call(t, "", args...)
		if code != codeDone || got != want {
			t.Errorf("%v: exit %d, %s\n%s", args, code, stderr, firstDifference(want, got))
		}
	}
}

// TestStandardInput: "-" reads text, and says where it came from.
func TestStandardInput(t *testing.T) {
	stdout, stderr, code := call(t, "study,estimate,se\nA,1,0.5\nB,2,0.5\n", "pool", "-", "--format", "json")
	if code != codeDone || !strings.Contains(stdout, `"file": "standard input"`) {
		t.Errorf("exit %d, %s\n%s", code, stderr, stdout)
	}
}

// TestNearest: slips are recognised, nonsense is not. Distances by hand.
func TestNearest(t *testing.T) {
	names := []string{"tau", "level", "interval", "overwrite"}
	for text, want := range map[string]string{
		"taus": "tau", "levl": "level", "intreval": "interval", "overwrit": "overwrite",
		"xyzzy": "", "o": "", "": "",
	} {
		if got := nearest(text, names); got != want {
			t.Errorf("nearest(%q) = %q, want %q", text, got, want)
		}
	}
	if got := edits("kitten", "sitting"); got != 3 { // two letters changed, one added
		t.Errorf("edits(kitten, sitting) = %d, want 3", got)
	}
}

// TestDeterminism: the same call gives the same bytes. The bootstrap's draws, which take
// long, are seen with all their digits in JSON.
func TestDeterminism(t *testing.T) {
	for _, settings := range []string{"--format text", "--format json --prediction bootstrap"} {
		args := append([]string{"pool", data + "demo.xlsx"}, strings.Fields(settings)...)
		first, _, _ := call(t, "", args...)
		for range 2 {
			if again, _, _ := call(t, "", args...); first != again {
				t.Fatalf("%s differs between two runs:\n%s", settings, firstDifference(first, again))
			}
		}
	}
}
