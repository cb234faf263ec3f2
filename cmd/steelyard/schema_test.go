package main

import (
	"bytes"
	"encoding/json"
	"os"
	"strings"
	"testing"

	"github.com/santhosh-tekuri/jsonschema/v6"

	"steelyard/meta/synthesis"
)

// schemaFiles are the schemas that stand beside the code.
var schemaFiles = map[string]any{
	"../../meta/synthesis/steelyard-1.schema.json":       synthesis.Document{},
	"../../meta/synthesis/steelyard-check-1.schema.json": synthesis.CheckDocument{},
	"../../meta/synthesis/steelyard-weigh-1.schema.json": synthesis.WeighingDocument{},

	"../../meta/synthesis/steelyard-change-1.schema.json":  synthesis.ChangeDocument{},
	"../../meta/synthesis/steelyard-history-1.schema.json": synthesis.HistoryDocument{},
	"../../meta/synthesis/steelyard-state-1.schema.json":   synthesis.StateReport{},
	"../../meta/synthesis/steelyard-verify-1.schema.json":  synthesis.VerifyDocument{},
}

// TestGoldenSchemas: the schema files are those of the types; -update rewrites
// them.
func TestGoldenSchemas(t *testing.T) {
	for path, document := range schemaFiles {
		want, err := indented(synthesis.Schema(document))
		if err != nil {
			t.Fatal(err)
		}
		if *update {
			if err := writeWhole(path, want, true); err != nil {
				t.Fatal(err)
			}
			continue
		}
		got, err := os.ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		if !bytes.Equal(got, want) {
			t.Errorf("%s is not the types' schema; run: make golden", path)
		}
	}
}

// TestSchema validates real output against the schema files with a
// general-purpose validator, and checks that they can refuse.
func TestSchema(t *testing.T) {
	compiler := jsonschema.NewCompiler()
	pool, err := compiler.Compile("../../meta/synthesis/steelyard-1.schema.json")
	if err != nil {
		t.Fatal(err)
	}
	weigh, err := compiler.Compile("../../meta/synthesis/steelyard-weigh-1.schema.json")
	if err != nil {
		t.Fatal(err)
	}
	check, err := compiler.Compile("../../meta/synthesis/steelyard-check-1.schema.json")
	if err != nil {
		t.Fatal(err)
	}
	header := "study,estimate,se\n"
	for _, c := range []struct {
		schema *jsonschema.Schema
		stdin  string
		args   string
	}{
		{pool, "", "pool " + data + "demo.xlsx"},
		{pool, "", "pool " + data + "demo.xlsx --beliefs"},
		{pool, "", "pool " + data + "checks/bcg_counts.csv --effects common"},
		{pool, "", "pool " + data + "checks/bcg_lor.csv --interval henmi-copas"},
		{pool, "", "pool " + data + "checks/eight_schools.csv --important 5 --prediction bootstrap"},
		{pool, "", "pool " + bcgCounts + " --method binomial-normal --all-methods"},
		{pool, "", "influence " + bcgCounts + " --method conditional-exact"},
		{pool, zeroCells, "pool - --all-methods"},
		{pool, "study,events treated,total treated,events control,total control\nA,90000,90000,0,5\n", "pool - --method peto --all-methods"},
		{pool, header + "A,1,0.5\n", "pool -"},
		{pool, header + "A,1,0.5\nB,x,1\n", "pool -"},
		{pool, header + "A,700,0.5\nB,-700,1\n", "pool - --measure hazard_ratio"},
		{pool, header, "pool -"},
		{pool, "study,events,total\nA,3,50\nB,6,60\n", "pool -"},
		{pool, "study,p,direction,n,estimate,se\nA,0.03,higher,50,,\nB,,,,1,0.5\n", "pool -"},
		{pool, "study,p,direction,n\nA,0.03,higher,50\n", "pool -"},
		{pool, "study;md;se\nA;1,234;1\nB;2,234;1\n", "pool -"},
		{pool, "study,OR,p,n treated,n control\nA,0.5,0.03,50,50\n", "pool - --measure standardised-mean-difference"},
		{check, "", "check " + data + "demo.xlsx"},
		{check, "", "check " + data + "findings/M1.csv"},
		{check, "", "check " + data + "findings/C3.csv"},
		{pool, "", "cumulative " + data + "checks/bcg_counts.csv --looks 100"},
		{pool, "", "next-trial " + data + "checks/bcg_counts.csv --size 100 --control-risk 0.1 --important 0.8"},
		{pool, "", "next-trial " + data + "checks/bcg_counts.csv --se 0.1"},
		{pool, "", "small-study " + data + "checks/bcg_counts.csv"},
		{pool, "", "panel " + data + "demo.xlsx"},
		{pool, "", "panel " + bcgCounts + " --baseline 0.001 --important-per-1000 40"},
		{pool, repeatedSheet, "pool - --dependence three-level"},
		{pool, repeatedSheet, "pool - --dependence robust"},
		{pool, "", "small-study " + data + "checks/aspirin_lor.csv"},
		{pool, "", "small-study " + data + "checks/aspirin_lor.csv --allow-few --measure proportion"},
		{pool, "", "explain " + bcgCounts + " --on latitude*year --at latitude=30 --subgroups year --permutations 100"},
		{pool, "", "explain " + bcgCounts + " --on latitude --effects common --subgroups year --shared-tau"},
		{pool, "", "explain " + data + "demo.xlsx --on setting --subgroups setting"},
		{weigh, "", "weigh --z 20000"},
		{weigh, "", "weigh --ratio --estimate 0.7 --se 0.1 --important 0.8 --df 5"},
		{weigh, "", "weigh --p 0.03"},
	} {
		stdout, stderr, code := call(t, c.stdin, strings.Fields(c.args+" --format json")...)
		if stdout == "" && code == codeData {
			continue // refused as a whole: there is no document
		}
		value, err := jsonschema.UnmarshalJSON(strings.NewReader(stdout))
		if err != nil {
			t.Errorf("%s: %v, %s", c.args, err, stderr)
			continue
		}
		if err := c.schema.Validate(value); err != nil {
			t.Errorf("%s: %v", c.args, err)
		}
	}
	if err := pool.Validate(map[string]any{"format": "steelyard/1", "unknown": json.Number("1")}); err == nil {
		t.Error("the schema takes a document with an unknown field and without the needed ones")
	}
}
