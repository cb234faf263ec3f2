package main

import (
	"context"
	"fmt"
	"math"
	"os"
	"strings"
	"testing"

	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/accrual"
	"steelyard/meta/synthesis"
)

// nextDocument asks what another study could change, of a sheet given as text or of a
// file.
func nextDocument(t *testing.T, sheet string, args ...string) (synthesis.OutcomeDocument, *synthesis.NextDocument) {
	t.Helper()
	if strings.Contains(sheet, "\n") {
		path := t.TempDir() + "/sheet.csv"
		if err := os.WriteFile(path, []byte(sheet), 0o644); err != nil {
			t.Fatal(err)
		}
		sheet = path
	}
	o := accrualDocument(t, append([]string{"next-trial", sheet}, args...)...)
	if o.AccrualDocument == nil || o.Next == nil {
		t.Fatalf("%v: nothing about the next study", args)
	}
	return o, o.Next
}

// meansSheet has two studies whose common effect is easily pooled by hand.
const meansSheet = "study,mean difference,se\nA,1,0.5\nB,0.2,0.4\n"

// commonReach is the closed form of the chance that |z| reaches a bound when a common
// effect is updated with a study of weight w, which is drawn around the pooled mean m
// of weight W: the updated mean is normal around m with variance w/(W(W+w)).
func commonReach(m, weight, w, bound float64) float64 {
	tail := func(z float64) float64 { return 0.5 * math.Erfc(z/math.Sqrt2) }
	limit, sd := bound/math.Sqrt(weight+w), math.Sqrt(w/(weight*(weight+w)))
	return tail((limit-m)/sd) + tail((limit+m)/sd)
}

// stepsBound is the |z| at which the normal form reaches a number of steps.
func stepsBound(steps float64) float64 { return math.Sqrt(1 + math.Log(2) + 2*steps*lnStep) }

// TestNextClosedForm: for a common effect with the normal interval every chance is a
// normal tail, from the standard error and from the size with a standard deviation
// (sd·√(1/n₁+1/n₂)); the smallest size suffices, and one person fewer does not.
func TestNextClosedForm(t *testing.T) {
	weight := 1/0.25 + 1/0.16
	m := (1/0.25 + 0.2/0.16) / weight
	settings := []string{"--effects", "common", "--interval", "wald"}
	check := func(what string, got, want float64) {
		if math.Abs(got-want) > 1e-7 {
			t.Errorf("%s: %v, want %v", what, got, want)
		}
	}
	verify := func(o synthesis.OutlookDocument, w float64) {
		for _, c := range o.Passing {
			want := commonReach(m, weight, w, stepsBound(c.Steps))
			if c.Steps < 0 {
				want = 1 - want
			}
			check("passing", c.Chance, want)
		}
		check("excludes null", o.ExcludesNull, commonReach(m, weight, w, 1.959963984540054))
	}
	_, n := nextDocument(t, meansSheet, append(settings, "--se", "0.3")...)
	verify(n.Outlook, 1/0.09)
	if n.Curve != nil || n.Smallest != nil {
		t.Error("a size curve without a size")
	}
	people := func(treated, control float64) float64 { return 1 / (4 * (1/treated + 1/control)) } // weight with sd 2
	_, n = nextDocument(t, meansSheet, append(settings, "--arms", "60,30", "--sd", "2", "--toward", "2", "--chance", "0.6")...)
	check("se", n.Outlook.SE, 2*math.Sqrt(1/60.+1/30.))
	verify(n.Outlook, people(60, 30))
	for _, point := range n.Curve {
		verify(point.OutlookDocument, people(point.Size*2/3, point.Size/3))
	}
	size := n.Smallest.Size
	reach := func(size float64) float64 {
		return commonReach(m, weight, people(size*2/3, size/3), stepsBound(2))
	}
	if !n.Smallest.Found || reach(size) < 0.6 || reach(size-1) >= 0.6 {
		t.Errorf("smallest size %v: chance %v, one fewer %v; want about 0.6", size, reach(size), reach(size-1))
	}
}

// TestNextIsSimulation: the chances of the command, by quadrature, agree with drawing
// next studies from the printed estimates, within four Monte-Carlo errors.
func TestNextIsSimulation(t *testing.T) {
	o, n := nextDocument(t, data+"checks/bcg_counts.csv", "--size", "2000", "--control-risk", "0.02", "--important", "0.8")
	trial := accrual.Trial{
		Model:     meta.Model{Effects: meta.RandomEffects, Tau: meta.RestrictedML, Interval: meta.HartungKnappFloor, Level: 0.95},
		Important: &meta.Limits{Low: math.Log(0.8), High: -math.Log(0.8)}, Steps: []float64{1, 2, 3, 4, -0.5},
	}
	for _, study := range o.Studies {
		trial.Y, trial.SE = append(trial.Y, study.Estimate), append(trial.SE, study.SE)
	}
	drawn, err := trial.Simulate(context.Background(), n.Outlook.SE, accrual.Draws{N: 20000, Seed: 3})
	if err != nil {
		t.Fatal(err)
	}
	agree := func(what string, computed float64, simulated accrual.Value) {
		if margin := 4*simulated.Error + 1e-3; math.Abs(computed-simulated.Value) > margin {
			t.Errorf("%s: %v, simulated %v within %v", what, computed, simulated.Value, margin)
		}
	}
	for i, c := range n.Outlook.Passing[:5] {
		agree("passing", c.Chance, drawn.Passing[i].Value)
	}
	agree("excludes null", n.Outlook.ExcludesNull, drawn.ExcludesNull)
	agree("outside the zone", n.Outlook.Zone.Outside, drawn.Zone.Outside)
	agree("expected steps", n.Outlook.ExpectedSteps, drawn.Expected)
	if n.Toward != 4 || n.Smallest.Found {
		t.Errorf("from 3.0 steps the next whole one is %v, found %v; τ is too large for any size", n.Toward, n.Smallest.Found)
	}
}

// TestNextToOneStudy: one study of z = 10 and one more as large are pooled with t on 1
// degree of freedom, as two studies are, where the first step needs |t| > 17 (the matched form):
// an updated mean over 17/√2, which the next study brings in fewer than 1 of 100 cases.
func TestNextToOneStudy(t *testing.T) {
	_, n := nextDocument(t, "study,estimate,se\nA,10,1\n", "--measure", "mean difference", "--se", "1")
	if c := n.Outlook.Passing[0]; c.Chance > 0.01 {
		t.Errorf("chance of the first step: %v", c.Chance)
	}
}

// TestNextCalls: what is said, and what is refused.
func TestNextCalls(t *testing.T) {
	bcg := data + "checks/bcg_counts.csv"
	odds := "study,date,OR,se\nA,2001,0.7,0.2\nB,2002,0.8,0.2\n"
	zeros := "study,events treated,total treated,events control,total control\nA,3,50,0,50\nB,2,40,0,40\nC,1,60,4,60\n"
	rates := "study,date,HR,se\nA,2001,0.7,0.2\nB,2002,0.8,0.2\n"
	for _, c := range []struct {
		stdin, args string
		code        int
		says        string
	}{
		{"", "next-trial BCG", codeCall, "give one of --size, --arms and --se"},
		{"", "next-trial BCG --size 100 --se 0.2", codeCall, "2 are given"},
		{"", "next-trial BCG --size 100", codeDone, "control risk 1.6%, the median of 13 studies' control arms"},
		{"study,events treated,total treated,events control,total control\nA,4,123,11,139\n", "next-trial - --size 100", codeDone, "control risk 7.9%, that of the only control arm (--control-risk"},
		{odds, "next-trial - --size 100", codeCall, "give it with --control-risk"},
		{zeros, "next-trial - --size 100", codeCall, "the median risk of the studies' 3 control arms is 0"},
		{"", "next-trial BCG --size 100 --control-risk 1", codeCall, "--control-risk 1"},
		{"", "next-trial BCG --size 100 --control-risk 0.1 --sd 2", codeCall, "leave --sd away"},
		{"", "next-trial BCG --size NaN --control-risk 0.1", codeCall, "--size NaN"},
		{"", "next-trial BCG --arms 100 --control-risk 0.1", codeCall, "two numbers"},
		{"", "next-trial BCG --arms 100,x --control-risk 0.1", codeCall, `"x"`},
		{"", "next-trial BCG --se 0", codeCall, "--se 0"},
		{"", "next-trial BCG --se 0.2 --chance 0.9", codeCall, "beside --se"},
		{"", "next-trial BCG --se 0.2 --toward -1", codeCall, "0.64 steps at most"},
		{"", "next-trial BCG --size 100 --control-risk 0.1 --chance 1", codeCall, "--chance 1"},
		{rates, "next-trial - --size 100", codeCall, "give it with --se"},
		{rates, "next-trial - --se 0.2", codeDone, "that the 95% interval excludes no effect"},
		{meansSheet, "next-trial - --size 100 --measure mean-difference", codeCall, "--sd"},
		{meansSheet, "next-trial - --size 100 --measure mean-difference --control-risk 0.2", codeCall, "leave --control-risk away"},
		{"study,events,total\nA,3,50\nB,9,80\n", "next-trial - --se 0.2", codeDone, "state one with --null"},
		{"study,estimate,se\nA,1,1\n", "next-trial - --se 0.2", codeDone, "steps expected"},
		{"", "next-trial BCG --size 500 --control-risk 0.02", codeDone, "no size reaches 194 : 1 with a chance of 80%: the variance between studies (τ 0.56)"},
		{"", "next-trial BCG --size 500 --control-risk 0.02 --toward 2 --chance 0.9", codeDone, "14 : 1 with a chance of 90% is reached from 10 people"},
		{"", "next-trial BCG --se 0.2 --method mantel-haenszel --effects common", codeDone, "What is foreseen is not pooling by mantel-haenszel"},
	} {
		args := strings.Fields(strings.ReplaceAll(c.args, "BCG", bcg))
		stdout, stderr, code := call(t, c.stdin, args...)
		if code != c.code || !strings.Contains(strings.Join(strings.Fields(stdout+stderr), " "), c.says) {
			t.Errorf("%s: exit %d, want %d; want %q in:\n%s%s", c.args, code, c.code, c.says, stdout, stderr)
		}
	}
}

// TestChartNextTrial: the chart says what the command says, and refuses what has no
// size.
func TestChartNextTrial(t *testing.T) {
	args := []string{"--size", "400", "--control-risk", "0.4"}
	_, n := nextDocument(t, data+"demo.xlsx", append([]string{"--outcome", "flare within 24 weeks"}, args...)...)
	svg := drawnSVG(t, append([]string{"next-trial"}, args...)...)
	holds(t, svg, "people in each arm", "194 : 1", "Dashed upright: 200 people in each arm",
		fmt.Sprintf("52 : 1 with a chance of 80%% is reached from %s people in all", words.People(n.Smallest.Size)))
	holds(t, drawnSVG(t, "next-trial", "--arms", "300,100", "--control-risk", "0.4", "--width", "85", "--mono"), "people in all", `width="85mm"`)
	out := t.TempDir() + "/f.svg"
	_, stderr, code := call(t, "", "chart", "next-trial", data+"checks/bcg_counts.csv", "--se", "0.2", "--out", out)
	if code != codeData || !strings.Contains(stderr, "--size or --arms in place of --se") {
		t.Errorf("a standard error alone: exit %d, %s", code, stderr)
	}
}

// TestNextRecordsOfSE: without sizes the CSV holds the outlook, the numbers of the JSON,
// and not the outcome's name alone.
func TestNextRecordsOfSE(t *testing.T) {
	sheet := data + "checks/bcg_counts.csv"
	_, n := nextDocument(t, sheet, "--se", "0.3")
	stdout, _, _ := call(t, "", "next-trial", sheet, "--se", "0.3", "--format", "csv")
	want := fmt.Sprintf("se,expected_steps,excludes_null\n0.3,%v,%v\n", n.Outlook.ExpectedSteps, n.Outlook.ExcludesNull)
	if stdout != want {
		t.Errorf("got %q, want %q", stdout, want)
	}
}
