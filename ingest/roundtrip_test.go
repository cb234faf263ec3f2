package ingest_test

import (
	"context"
	"encoding/json"
	"path/filepath"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"

	"steelyard/ingest"
	"steelyard/ingest/rules"
	"steelyard/meta/review"
)

// sheets returns every sheet of the project's test data that can be read.
func sheets(t *testing.T) map[string]*review.Extraction {
	t.Helper()
	all := map[string]*review.Extraction{}
	for _, pattern := range []string{"checks/*.csv", "findings/*.csv", "demo.xlsx", "published/*.csv"} {
		paths, err := filepath.Glob(filepath.Join("..", "testdata", pattern))
		if err != nil {
			t.Fatal(err)
		}
		for _, path := range paths {
			x, plan, err := ingest.Open(context.Background(), path, ingest.Options{})
			if err != nil {
				continue // one that is not a sheet of studies, such as expected values
			}
			rules.Apply(x, plan)
			all[path] = x
		}
	}
	if len(all) < 100 {
		t.Fatalf("only %d sheets", len(all))
	}
	return all
}

// TestExtractionRoundTrip wants every extraction to be the same after JSON.
func TestExtractionRoundTrip(t *testing.T) {
	for path, x := range sheets(t) {
		data, err := json.Marshal(x)
		if err != nil {
			t.Fatalf("%s: %v", path, err)
		}
		var back review.Extraction
		if err := json.Unmarshal(data, &back); err != nil {
			t.Fatalf("%s: %v", path, err)
		}
		if diff := cmp.Diff(*x, back, cmpopts.EquateEmpty()); diff != "" {
			t.Errorf("%s: %s", path, diff)
		}
	}
}

// TestPlanRoundTrip wants settings, their origins and the planned runs to survive JSON.
func TestPlanRoundTrip(t *testing.T) {
	_, plan, err := ingest.Open(context.Background(), filepath.Join("..", "testdata", "demo.xlsx"), ingest.Options{})
	if err != nil {
		t.Fatal(err)
	}
	if err := plan.Set("tau", "", review.Value{Text: "paule-mandel", From: review.FromFlag}); err != nil {
		t.Fatal(err)
	}
	data, err := json.Marshal(plan)
	if err != nil {
		t.Fatal(err)
	}
	var back review.Plan
	if err := json.Unmarshal(data, &back); err != nil {
		t.Fatal(err)
	}
	for from := review.FromDefault; from <= review.FromFlag; from++ {
		if diff := cmp.Diff(plan.Given(from), back.Given(from)); diff != "" {
			t.Error(diff)
		}
	}
	if len(plan.Given(review.FromSheet)) == 0 || len(plan.Given(review.FromFlag)) != 1 {
		t.Errorf("given: %v", plan.Given(review.FromSheet))
	}
	if diff := cmp.Diff(plan.Runs, back.Runs); diff != "" {
		t.Error(diff)
	}
	if err := json.Unmarshal([]byte(`{"given":[{"setting":"tau","value":"nonsense","from":"sheet"}]}`), &back); err == nil {
		t.Error("a value that is none was taken")
	}
}
