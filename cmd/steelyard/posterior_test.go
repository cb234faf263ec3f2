package main

import (
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"strings"
	"testing"

	"steelyard/meta/synthesis"
)

// posteriorOf returns the posterior that "pool --posterior" writes of its one outcome.
func posteriorOf(t *testing.T, args ...string) *synthesis.PosteriorDistributionDocument {
	t.Helper()
	return pooled(t, append(args, "--posterior")...).Outcomes[0].Distribution
}

// TestPosteriorOfTheReference: limits and medians are those of the 40-digit reference
// in meta/bayes/testdata/posterior.csv (its README), by way of the settings.
func TestPosteriorOfTheReference(t *testing.T) {
	file, err := os.Open("../../meta/bayes/testdata/posterior.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	all, err := csv.NewReader(file).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	for _, row := range all[1:] {
		prior := strings.Fields(row[1])
		args := []string{data + "checks/" + row[0] + ".csv", "--tau-prior", prior[0]}
		if len(prior) > 1 {
			args = append(args, "--tau-scale="+strings.Join(prior[1:], ","))
		}
		p := posteriorOf(t, args...)
		got := []float64{p.Spread.Low, p.Spread.Median, p.Spread.High, p.Effect.Low, p.Effect.Median, p.Effect.High, *p.Spread.Mean, *p.Effect.Mean}
		for i, g := range got {
			want, err := strconv.ParseFloat(row[2+i], 64)
			if err != nil {
				t.Fatal(err)
			}
			if !(math.Abs(g-want) <= 1e-8*math.Abs(want)) {
				t.Errorf("%s, %s, column %d: %v, want %v", row[0], row[1], 3+i, g, want)
			}
		}
		if p.Tau.Prior != prior[0] {
			t.Errorf("%s: the prior is called %q", row[1], p.Tau.Prior)
		}
	}
}

// TestPosteriorThresholds: the probability beyond a limit of the posterior is the tail
// outside it, when that limit is stated as the null or as important.
func TestPosteriorThresholds(t *testing.T) {
	schools := data + "checks/eight_schools.csv"
	at := func(x float64) string { return strconv.FormatFloat(x, 'g', -1, 64) }
	p := posteriorOf(t, schools, "--measure", "mean difference")
	stated := posteriorOf(t, schools, "--measure", "mean difference", "--null", at(p.Effect.Median), "--important", at(p.New.Low)+","+at(p.Effect.High))
	if len(stated.Thresholds) != 3 || len(stated.Studies) != 8 {
		t.Fatalf("%d thresholds, %d studies", len(stated.Thresholds), len(stated.Studies))
	}
	for i, want := range []float64{0.5, math.NaN(), 0.975} {
		if got := stated.Thresholds[i]; !math.IsNaN(want) && (!near(got.Below, want, 1e-7) || !near(got.Above, 1-want, 1e-7)) {
			t.Errorf("%s at %v: %+v, want %v below", got.Name, got.Value, got, want)
		}
	}
	if got := stated.Thresholds[1].SettingBelow; !near(got, 0.025, 1e-7) {
		t.Errorf("below the predictive limit: %v", got)
	}
}

// TestPosteriorCalls: what is said, and where there is none.
func TestPosteriorCalls(t *testing.T) {
	bcg := data + "checks/bcg_counts.csv"
	for _, c := range []struct {
		stdin, args string
		code        int
		says        string
	}{
		{"", "pool BCG --posterior", codeDone, "Posterior: flat prior for the mean effect, half-normal prior of scale 0.5 for τ"},
		{"", "pool BCG --posterior --important 0.8", codeDone, "below 0.80 (the important difference): mean effect"},
		{"", "pool BCG --posterior --effects common", codeDone, "a common effect has no spread"},
		{"", "pool BCG --posterior --method binomial-normal", codeDone, "not of the counts that binomial-normal pools"},
		{"study,estimate,se\nA,1,1\nB,2,1\n", "pool - --posterior", codeDone, "No posterior is computed: a uniform prior for τ needs at least 3 studies"},
		{"study,estimate,se\nA,1,1\n", "pool - --posterior --tau-prior half-normal --tau-scale 1", codeDone, "flat prior for the mean effect"},
		{"study,estimate,se\nA,1,1\nB,1,1\nC,1,1\nD,1,1\n", "pool - --posterior", codeDone, "uniform prior for τ"},
		{"", "pool BCG --posterior --tau-prior half-normal --tau-scale 0.05", codeDone, "which the estimate of τ exceeds twice: doubt it"},
	} {
		args := strings.Fields(strings.ReplaceAll(c.args, "BCG", bcg))
		stdout, stderr, code := call(t, c.stdin, args...)
		if code != c.code || !strings.Contains(strings.Join(strings.Fields(stdout+stderr), " "), c.says) {
			t.Errorf("%s: exit %d, want %d; want %q in:\n%s%s", c.args, code, c.code, c.says, stdout, stderr)
		}
		for _, line := range strings.Split(stdout, "\n") {
			if width(line) > 100 {
				t.Errorf("%s: a line of %d characters: %s", c.args, width(line), line)
			}
		}
	}
	stdout, _, _ := call(t, "", "pool", bcg, "--posterior", "--important", "0.8")
	golden(t, "posterior.txt", stdout)
}
