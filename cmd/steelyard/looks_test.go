package main

import (
	"bytes"
	"context"
	"math"
	"os"
	"strings"
	"testing"
	"time"

	"steelyard/meta/synthesis"
)

// lnStep is ln(2 + √3), the logarithm of a step.
var lnStep = math.Log(2 + math.Sqrt(3))

// TestOneLookIsATail: with all studies entering at one look, a common effect and
// the normal form, the evidence passes s steps where z² ≥ 1 + ln 2 + 2·s·lnStep; the
// simulated chance is that two-sided normal tail, shifted under an effect, within
// four Monte-Carlo errors. The tail is the closed form by math.Erfc; the form is
// testdata/checks/README.md's.
func TestOneLookIsATail(t *testing.T) {
	sheet := "study,date,mean difference,se\nA,2001,1,0.5\nB,2001,0.2,0.4\nC,2001,0.6,0.9\n"
	o := looksDocument(t, sheet, "--effects", "common", "--interval", "wald", "--effect", "0.5", "--looks", "40000")
	se := 1 / math.Sqrt(1/0.25+1/0.16+1/0.81)
	tail := func(z float64) float64 { return 0.5 * math.Erfc(z/math.Sqrt2) }
	if o.Looks != 1 || len(o.Scenarios) != 2 {
		t.Fatalf("%d looks, %d scenarios; want 1 and 2, a common effect having one truth without effect", o.Looks, len(o.Scenarios))
	}
	for _, scenario := range o.Scenarios {
		shift := scenario.Mean / se
		for i, c := range scenario.AnyLook {
			bound := math.Sqrt(1 + math.Log(2) + 2*c.Steps*lnStep)
			want := tail(bound-shift) + tail(bound+shift)
			margin := 4 * math.Sqrt(want*(1-want)/float64(o.Sequences))
			if math.Abs(c.Chance-want) > margin {
				t.Errorf("%s: %v steps passed with chance %v; want %v within %v", scenario.Truth, c.Steps, c.Chance, want, margin)
			}
			if c != scenario.Last[i] {
				t.Errorf("%s: the only look is not the last: %+v, %+v", scenario.Truth, c, scenario.Last[i])
			}
		}
	}
	if o.Scenarios[1].Mean != 0.5 || o.Scenarios[1].Truth != "effect" {
		t.Errorf("the stated effect is %+v; want 0.5", o.Scenarios[1])
	}
}

// looksDocument simulates repeated looks at a sheet given as text.
func looksDocument(t *testing.T, sheet string, args ...string) *synthesis.LooksDocument {
	t.Helper()
	path := t.TempDir() + "/sheet.csv"
	if err := os.WriteFile(path, []byte(sheet), 0o644); err != nil {
		t.Fatal(err)
	}
	o := accrualDocument(t, append([]string{"cumulative", path}, args...)...)
	if o.AccrualDocument == nil || o.Looks == nil {
		t.Fatalf("%v: no repeated looks", args)
	}
	return o.Looks
}

// TestLooks: ties are one look, the first study's own effect is none, the truths
// are the estimated τ², 0, and the pooled estimate; the text is the same for any
// number of workers and differs for another seed.
func TestLooks(t *testing.T) {
	bcg := data + "checks/bcg_counts.csv"
	o := accrualDocument(t, "cumulative", bcg, "--looks", "300")
	if o.Looks.Looks != len(o.Cumulative)-1 {
		t.Errorf("%d looks at %d steps of the sequence; want all but the first", o.Looks.Looks, len(o.Cumulative))
	}
	if s := o.Looks.Scenarios; len(s) != 3 || s[0].Tau2 != o.Tau.Tau2 || s[0].Mean != 0 || s[1].Tau2 != 0 || s[1].Mean != 0 ||
		s[2].Mean != o.Pooled.Estimate || s[2].Tau2 != o.Tau.Tau2 {
		t.Errorf("scenarios %+v", s)
	}
	text := func(args ...string) string {
		stdout, stderr, code := call(t, "", append([]string{"cumulative", bcg, "--looks", "700"}, args...)...)
		if code != codeDone || stderr != "" {
			t.Fatalf("%v: exit %d, %s", args, code, stderr)
		}
		return stdout
	}
	one := text("--workers", "1")
	if five := text("--workers", "5"); one != five {
		t.Errorf("the number of workers changes the result:\n%s", firstDifference(one, five))
	}
	if one == text("--seed", "2") {
		t.Error("another seed gives the same result")
	}
	for _, says := range []string{"700 sequences", "11 looks, from two studies on", "does not exist", "looks that never end", "risk ratio 0.49"} {
		if !strings.Contains(one, says) {
			t.Errorf("the text does not say %q:\n%s", says, one)
		}
	}
}

// TestLooksCalls: calls that are refused, and outcomes that have no looks.
func TestLooksCalls(t *testing.T) {
	bcg := data + "checks/bcg_counts.csv"
	for _, c := range []struct {
		stdin string
		args  []string
		code  int
		says  string
	}{
		{"", []string{"cumulative", bcg, "--looks", "99"}, codeCall, "--looks 99: give 100"},
		{"", []string{"cumulative", bcg, "--effect", "0.8"}, codeCall, "add --looks"},
		{"", []string{"cumulative", bcg, "--looks", "100", "--effect", "NaN"}, codeCall, "--effect NaN"},
		{"", []string{"cumulative", bcg, "--looks", "100", "--effect", "-1"}, codeCall, "stated effect"},
		{"", []string{"leave-one-out", bcg, "--looks", "100"}, codeCall, "no flag --looks"},
		{"study,estimate,se\nA,1,1\n", []string{"cumulative", "-", "--looks", "100"}, codeDone, "repeated looks begin with two"},
		{"study,events,total\nA,3,50\nB,9,80\n", []string{"cumulative", "-", "--looks", "100"}, codeDone, "state one with --null"},
		{"", []string{"cumulative", bcg, "--looks", "100", "--method", "mantel-haenszel", "--effects", "common"}, codeDone, "not by the method for counts"},
	} {
		stdout, stderr, code := call(t, c.stdin, c.args...)
		if code != c.code || !strings.Contains(strings.Join(strings.Fields(stdout+stderr), " "), c.says) {
			t.Errorf("%v: exit %d, want %d; want %q in:\n%s%s", c.args, code, c.code, c.says, stdout, stderr)
		}
	}
}

// TestLooksInterrupted: an interrupt ends a long simulation at once, with exit 130
// and nothing written.
func TestLooksInterrupted(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	var out, errs bytes.Buffer
	done := make(chan int, 1)
	args := []string{"steelyard", "cumulative", data + "checks/bcg_counts.csv", "--looks", "10000000", "--workers", "2"}
	go func() { done <- run(ctx, args, streams{in: strings.NewReader(""), out: &out, err: &errs}) }()
	time.Sleep(300 * time.Millisecond)
	start := time.Now()
	cancel()
	code := <-done
	if took := time.Since(start); code != codeInterrupted || out.Len() > 0 || took > 10*time.Second { // uninterrupted it takes minutes
		t.Errorf("exit %d after %v, wrote %q", code, took, out.String())
	}
}

// TestChartLooks: the note on repeated looks has the simulated chances if they are
// asked for, and is a word of caution otherwise.
func TestChartLooks(t *testing.T) {
	plain := drawnSVG(t, "cumulative")
	simulated := drawnSVG(t, "cumulative", "--looks", "400")
	const caution = "the likelier that chance alone passes a line"
	holds(t, plain, "Repeated looks", caution)
	holds(t, simulated, "Repeated looks", "400 simulated sequences", "8 looks from two studies on")
	if strings.Contains(simulated, caution) || strings.Contains(plain, "simulated") {
		t.Error("both notes on repeated looks stand in one chart")
	}
}
