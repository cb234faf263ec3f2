package rules_test

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"pgregory.net/rapid"

	"steelyard/ingest"
	"steelyard/ingest/rules"
	"steelyard/meta/effect"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// TestOneMessagePerCause wants M1 alone in a row whose SDs are standard errors, though
// its difference is implausible and its SDs unlike the others' too.
func TestOneMessagePerCause(t *testing.T) {
	var got []string
	for _, f := range found(t, sheets+"M1.csv") {
		if f.Place.Row == 3 && f.Severity != review.Note {
			got = append(got, f.Rule)
		}
	}
	if len(got) != 1 || got[0] != "M1" {
		t.Errorf("row 3 has %q, want M1 alone", got)
	}
}

// TestBetterThanReader wants a finding of the reader to give way to one that explains
// it: two doses of one study are a shared control, not just a name that stands twice.
func TestBetterThanReader(t *testing.T) {
	for file, gone := range map[string]string{"D4": "D5", "D6": "D5", "C3": "C2", "F2": "C1"} {
		for _, f := range found(t, sheets+file+".csv") {
			if f.Rule == gone && f.Place.Row > 0 && f.Severity != review.Note && !(file == "D6" && f.Place.Row != 4) {
				t.Errorf("%s: the reader's %s at %s stands beside: %s", file, f.Rule, f.Place, f.Message)
			}
		}
	}
}

// run reads, checks and pools one of the small sheets.
func run(t *testing.T, name string) *synthesis.Synthesis {
	t.Helper()
	x, plan, err := ingest.Open(context.Background(), sheets+name, ingest.Options{})
	if err != nil {
		t.Fatal(err)
	}
	rules.Apply(x, plan)
	s, err := synthesis.Run(context.Background(), x, plan, synthesis.Want{})
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// TestReadings wants both readings of SDs that may be standard errors, with their
// answers. The second is that of the sheet without the error, M1-near.csv: its SDs of
// 6.6 and 6.2 divided by √61 and √63 are 0.845 and 0.781, which the sheet rounds to
// 0.85 and 0.78; so the answers agree within that rounding.
func TestReadings(t *testing.T) {
	wrong, right := run(t, "M1.csv"), run(t, "M1-near.csv")
	if len(wrong.Readings) != 2 {
		t.Fatalf("%d readings, want 2", len(wrong.Readings))
	}
	as := wrong.Readings[1].Outcome.Result
	want := right.Outcomes[0].Result.Fit.Mean
	if as == nil || as.Fit.Mean.K != want.K || !within(as.Fit.Mean.Estimate, want.Estimate, 0.01) || !within(as.Fit.Mean.SE, want.SE, 0.01) {
		t.Errorf("read as standard errors: %+v, want %+v", as, want)
	}
	if k := wrong.Outcomes[0].Result.Fit.Mean.K; k != want.K-1 {
		t.Errorf("%d studies pooled as the sheet stands, want %d", k, want.K-1)
	}
	if first := wrong.Readings[0].Outcome.Result; first == nil || first.Fit.Mean.K != want.K || within(first.Fit.Mean.SE, want.SE, 0.2) {
		t.Errorf("as entered: %+v, want all %d studies and another standard error", first, want.K)
	}
}

// TestColumnReading wants the reading of a column of percentages to settle the error of
// the column: the answer is that of the same counts, which F9-near.csv holds (11.5% of
// 104 people are 12, and so on).
func TestColumnReading(t *testing.T) {
	wrong, right := run(t, "C3.csv"), run(t, "F9-near.csv")
	if wrong.Outcomes[0].Result != nil || len(wrong.Readings) != 1 {
		t.Fatalf("percentages are pooled, or have %d readings", len(wrong.Readings))
	}
	got, want := wrong.Readings[0].Outcome, right.Outcomes[0].Result.Fit.Mean
	if got.Result == nil || got.Result.Fit.Mean.Estimate != want.Estimate || got.Result.Fit.Mean.SE != want.SE {
		t.Errorf("read as percentages: %s %+v, want %+v", got.Problem, got.Result, want)
	}
}

func within(x, want, share float64) bool {
	return x-want <= share*want && want-x <= share*want || x-want <= -share*want && want-x <= -share*want
}

// TestCheckChangesNothing wants the catalogue to leave the sheet as it was read.
func TestCheckChangesNothing(t *testing.T) {
	rapid.Check(t, func(rt *rapid.T) {
		c := damaged(rt)
		x, plan, err := ingest.Read(context.Background(), c.csv(), "a.csv", ingest.Options{})
		if err != nil {
			return // the reader refuses it as a whole
		}
		before, _, err := ingest.Read(context.Background(), c.csv(), "a.csv", ingest.Options{})
		if err != nil {
			rt.Fatal(err)
		}
		findings := rules.Check(x, plan)
		if diff := cmp.Diff(before, x); diff != "" {
			rt.Fatalf("the sheet was changed:\n%s", diff)
		}
		for _, f := range findings {
			if strings.Contains(f.Message, "NaN") || strings.Contains(f.Message, "Inf") || f.Place.Row > len(c.rows)+1 || f.Place.Row == 1 {
				rt.Fatalf("%s at %s: %s", f.Rule, f.Place, f.Message)
			}
		}
		if again := rules.Check(x, plan); !cmp.Equal(findings, again) {
			rt.Fatalf("another call finds other things")
		}
	})
}

// damaged is a random review in which some cells hold other things.
func damaged(rt *rapid.T) *clean {
	seed := rapid.Uint64().Draw(rt, "seed")
	r := rand.New(rand.NewPCG(seed, 1))
	makers := []func(*rand.Rand) *clean{cleanCounts, cleanMeans, cleanRatios, logRatios, bareMeans}
	c := makers[rapid.IntRange(0, len(makers)-1).Draw(rt, "kind")](r)
	texts := []string{"", "0", "-1", "1", "0.0", "1e-300", "1e300", "999", "2004", "-0.5", "1,5", "NaN", "<0.05", "42615", "0.05", "1e-9", "x"}
	for range rapid.IntRange(0, 12).Draw(rt, "cells") {
		row, col := rapid.IntRange(0, len(c.rows)-1).Draw(rt, "row"), rapid.IntRange(0, len(c.header)-1).Draw(rt, "col")
		c.rows[row][col] = rapid.SampledFrom(texts).Draw(rt, "text")
	}
	for range rapid.IntRange(0, 3).Draw(rt, "copies") {
		c.duplicate(rapid.IntRange(0, len(c.rows)-1).Draw(rt, "copied"))
	}
	return c
}

// TestInterval wants A2 and A3 of settings that a sheet alone does not have. Four trials
// with nearly equal estimates scatter less than their standard errors imply, so that
// the Hartung–Knapp factor, Q/(k − 1) at τ² = 0, is below 1.
func TestInterval(t *testing.T) {
	for _, tt := range []struct {
		sheet, setting, value, rule string
		want                        bool
	}{
		{"study,mean difference,se\nA,1.0,0.5\nB,1.1,0.4\nC,0.9,0.5\nD,1.05,0.3\n", "interval", "hartung-knapp", "A2", true},
		{"study,mean difference,se\nA,1.0,0.5\nB,1.1,0.4\nC,0.9,0.5\nD,1.05,0.3\n", "interval", "hartung-knapp-floor", "A2", false},
		{"study,mean difference,se\nA,3.0,0.5\nB,-1.1,0.4\nC,0.9,0.5\nD,1.05,0.3\n", "interval", "hartung-knapp", "A2", false},
		// DerSimonian–Laird's τ² is above 0 since Q exceeds its degrees of freedom, while
		// the small trials that scatter weigh nothing in the likelihood; no interval comes
		// near no effect.
		{"study,mean difference,se\nA,10.9,0.1\nB,11.0,0.1\nC,11.05,0.1\nD,7.4,1.5\nE,14.2,1.4\n", "interval", "wald", "A3", true},
		{"study,mean difference,se\nA,3.0,0.5\nB,1.1,0.4\nC,2.0,0.5\nD,1.05,0.3\nE,2.5,0.3\n", "interval", "wald", "A3", false},
	} {
		x, plan, err := ingest.Read(context.Background(), []byte(tt.sheet), "a.csv", ingest.Options{})
		if err != nil {
			t.Fatal(err)
		}
		if err := plan.Set(tt.setting, "", review.Value{Text: tt.value, From: review.FromFlag}); err != nil {
			t.Fatal(err)
		}
		s, err := synthesis.Run(context.Background(), x, plan, synthesis.Want{})
		if err != nil {
			t.Fatal(err)
		}
		got := false
		for _, f := range s.Findings {
			got = got || f.Rule == tt.rule
		}
		if got != tt.want {
			t.Errorf("%s with %s: found %v, want %v: %v", tt.rule, tt.value, got, tt.want, s.Findings)
		}
	}
}

// large returns a sheet of many rows of a kind.
func large(rows int, maker func(*rand.Rand) *clean) []byte {
	r := rand.New(rand.NewPCG(1, 2))
	all := maker(r)
	for len(all.rows) < rows {
		all.rows = append(all.rows, maker(r).rows...)
	}
	all.rows = all.rows[:rows]
	return all.csv()
}

// BenchmarkCheck2000 looks through 2,000 rows of one outcome: 0.3 s is the aim.
func BenchmarkCheck2000(b *testing.B) {
	for name, maker := range map[string]func(*rand.Rand) *clean{"counts": cleanCounts, "means": cleanMeans, "ratios": cleanRatios} {
		x, plan, err := ingest.Read(context.Background(), large(2000, maker), "a.csv", ingest.Options{})
		if err != nil {
			b.Fatal(err)
		}
		b.Run(name, func(b *testing.B) {
			for b.Loop() {
				rules.Check(x, plan)
			}
		})
	}
}

func ExampleCheck() {
	x, plan, err := ingest.Read(context.Background(), []byte("study,odds ratio,ci low,ci high\nA,1.01,0.52,1.27\n"), "trials.csv", ingest.Options{})
	if err != nil {
		fmt.Println(err)
		return
	}
	for _, f := range rules.Check(x, plan) {
		fmt.Println(f.Severity, f.Rule, f.Place.Cell(), x.Studies[0].Measure == effect.OddsRatio)
	}
	// Output: error I2 B2 true
}

// TestReadingOfBothArms wants the reading of M3.csv to take the standard errors of both
// arms as SDs; one arm alone would leave the row almost no weight. The standard error of
// a difference of means is √(sd₁²/n₁ + sd₂²/n₂).
func TestReadingOfBothArms(t *testing.T) {
	wrong := run(t, "M3.csv")
	if len(wrong.Readings) != 2 {
		t.Fatalf("%d readings, want 2", len(wrong.Readings))
	}
	want := math.Sqrt(6.6*6.6/61 + 6.2*6.2/63)
	if got := wrong.Readings[1].Outcome.Studies[1].Estimate.SE; !within(got, want, 1e-12) {
		t.Errorf("the row's standard error with both taken as SDs: %v, want %v", got, want)
	}
}

// TestLevelHasNoReading: limits that another number of the row shows to be of another
// level are not what the row is pooled by, so no answer is offered for them.
func TestLevelHasNoReading(t *testing.T) {
	s := run(t, "I6.csv")
	for _, f := range s.Findings {
		if f.Rule == "I6" && len(f.Readings) == 0 && strings.Contains(f.Message, "pooled by its standard error") {
			return
		}
	}
	t.Errorf("no finding I6 that says what the row is pooled by: %v", s.Findings)
}
