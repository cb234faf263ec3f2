package main

import (
	"encoding/json"
	"os"
	"strings"
	"testing"

	"steelyard/meta/synthesis"
)

// accrualDocument runs an accrual command with JSON.
func accrualDocument(t *testing.T, args ...string) synthesis.OutcomeDocument {
	t.Helper()
	stdout, stderr, code := call(t, "", append(args, "--format", "json")...)
	if code != codeDone {
		t.Fatalf("%v: exit %d, %s", args, code, stderr)
	}
	var d synthesis.Document
	if err := json.Unmarshal([]byte(stdout), &d); err != nil {
		t.Fatal(err)
	}
	return d.Outcomes[0]
}

// TestCumulativeEndsInPool: the last entry is the full analysis, bit for bit, and
// every other command prints the same pooled result.
func TestCumulativeEndsInPool(t *testing.T) {
	bcg := data + "checks/bcg_counts.csv"
	full := pooled(t, bcg).Outcomes[0]
	o := accrualDocument(t, "cumulative", bcg)
	last := o.Cumulative[len(o.Cumulative)-1]
	if last.Estimate != full.Pooled.Estimate || last.Low != full.Pooled.Low || last.LnEvidence != full.Pooled.LnEvidence || last.K != 13 {
		t.Errorf("last entry %+v, pool %+v", last.RefitDocument, full.Pooled)
	}
	for _, command := range []string{"leave-one-out", "influence", "subsets"} {
		if got := accrualDocument(t, command, bcg).Pooled; got.Estimate != full.Pooled.Estimate || got.LnEvidence != full.Pooled.LnEvidence {
			t.Errorf("%s: pooled %+v, want %+v", command, got, full.Pooled)
		}
	}
}

// TestLeaveOneOutIsARefit: each omission equals pooling a sheet without its row,
// bit for bit.
func TestLeaveOneOutIsARefit(t *testing.T) {
	bcg := data + "checks/bcg_counts.csv"
	raw, err := os.ReadFile(bcg)
	if err != nil {
		t.Fatal(err)
	}
	lines := strings.SplitAfter(string(raw), "\n")
	for _, omission := range accrualDocument(t, "leave-one-out", bcg).LeaveOneOut {
		var rest []string
		for _, line := range lines {
			if !strings.HasPrefix(line, omission.Omitted+",") {
				rest = append(rest, line)
			}
		}
		if len(rest) != len(lines)-1 {
			t.Fatalf("%q stands in %d rows", omission.Omitted, len(lines)-len(rest))
		}
		stdout, _, code := call(t, strings.Join(rest, ""), "pool", "-", "--format", "json")
		var d synthesis.Document
		if err := json.Unmarshal([]byte(stdout), &d); err != nil || code != codeDone {
			t.Fatalf("exit %d, %v", code, err)
		}
		if want := d.Outcomes[0].Pooled; omission.Estimate != want.Estimate || omission.LnEvidence != want.LnEvidence {
			t.Errorf("without %s: %v, %v; want %v, %v", omission.Omitted, omission.Estimate, omission.LnEvidence, want.Estimate, want.LnEvidence)
		}
	}
}

// TestAccrualCalls: the accrual commands' own flags, and what they refuse.
func TestAccrualCalls(t *testing.T) {
	bcg := data + "checks/bcg_counts.csv"
	for _, c := range []struct {
		args []string
		code int
		says string
	}{
		{[]string{"cumulative", bcg, "--order", "altitude"}, codeData, "altitude"},
		{[]string{"cumulative", bcg, "--ties", "sideways"}, codeCall, "together, file"},
		{[]string{"leave-one-out", bcg, "--below", "NaN"}, codeCall, "steps"},
		{[]string{"subsets", bcg, "--study", "Trial 99"}, codeCall, "Trial 13"},
		{[]string{"subsets", bcg, "--sample", "3"}, codeCall, "100"},
		{[]string{"subsets", bcg, "--workers", "0"}, codeCall, "1 or more"},
		{[]string{"subsets", bcg, "--study", "trial 8"}, codeDone, "8,191 subsets"},
		{[]string{"pool", bcg, "--order", "latitude"}, codeCall, "no flag --order"},
	} {
		stdout, stderr, code := call(t, "", c.args...)
		if code != c.code || !strings.Contains(stdout+stderr, c.says) {
			t.Errorf("%v: exit %d, want %d; want %q in:\n%s%s", c.args, code, c.code, c.says, stdout, stderr)
		}
	}
	one, _, _ := call(t, "", "subsets", bcg, "--workers", "1")
	four, _, _ := call(t, "", "subsets", bcg, "--workers", "4")
	if one != four {
		t.Errorf("the number of workers changes the result:\n%s", firstDifference(one, four))
	}
}

// TestTable: cells align under their heads whatever the script of a name.
func TestTable(t *testing.T) {
	var p page
	p.table([]column{{head: "name"}, {head: "n", right: true}}, [][]string{{"Å", "1"}, {"李明", "23"}, {strings.Repeat("long ", 9), "4"}})
	want := "  name                           n\n  Å                              1\n  李明                          23\n  long long long long long lo…   4\n"
	if p.String() != want {
		t.Errorf("got\n%swant\n%s", p.String(), want)
	}
}
