package main

import (
	"encoding/csv"
	"encoding/json"
	"fmt"
	"math"
	"os"
	"strconv"
	"strings"
	"testing"

	"steelyard/meta/synthesis"
)

// integratedRows reads a file of testdata/checks with evidence integrated over τ.
func integratedRows(t *testing.T, name string) [][]string {
	t.Helper()
	file, err := os.Open(data + "checks/" + name + ".integrated.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	all, err := csv.NewReader(file).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	return all[1:]
}

// TestEvidenceOverTau: the pooled evidence, the beliefs after it and the last step of
// the cumulative analysis are those of testdata/checks/*.integrated.csv.
func TestEvidenceOverTau(t *testing.T) {
	for _, name := range []string{"aspirin_lor", "bcg_lor", "eight_schools"} {
		for _, row := range integratedRows(t, name) {
			for form, column := range map[string]int{"integrated": 2, "averaged": 9} {
				want, err := strconv.ParseFloat(row[column], 64)
				if err != nil {
					t.Fatal(err)
				}
				args := []string{data + "checks/" + name + ".csv", "--evidence", form, "--tau-prior", row[0]}
				if row[1] != "" {
					args = append(args, "--tau-scale", row[1])
				}
				o := pooled(t, args...).Outcomes[0]
				if got := o.Pooled.LnEvidence; !near(got, want, 1e-6) || o.Pooled.Evidence != form || o.Pooled.Priors == nil || o.Pooled.Priors.Empirical == nil {
					t.Errorf("%v: ln evidence %v in the form %q with priors %+v, want %v", args, got, o.Pooled.Evidence, o.Pooled.Priors, want)
				}
				for _, b := range o.Posterior { // odds after = ratio × odds before
					odds := math.Exp(want) * b.Prior / (1 - b.Prior)
					if !near(b.Posterior, odds/(1+odds), 1e-6) {
						t.Errorf("%v: from %v to %v, want %v", args, b.Prior, b.Posterior, odds/(1+odds))
					}
				}
				if row[0] != "half_normal" {
					continue
				}
				steps := answered(t, append([]string{"cumulative"}, args...)...).Outcomes[0].Cumulative
				if last := steps[len(steps)-1]; last.RefitDocument == nil || !near(last.LnEvidence, want, 1e-6) {
					t.Errorf("%v: last step %+v, want ln evidence %v", args, last.RefitDocument, want)
				}
			}
		}
	}
}

// answered runs a command with JSON and returns its document.
func answered(t *testing.T, args ...string) synthesis.Document {
	t.Helper()
	stdout, stderr, code := call(t, "", append(args, "--format", "json")...)
	if code != codeDone {
		t.Fatalf("%v: exit %d, %s", args, code, stderr)
	}
	var d synthesis.Document
	if err := json.Unmarshal([]byte(stdout), &d); err != nil {
		t.Fatalf("%v: %v", args, err)
	}
	return d
}

// normalFactor is ln of N(z·se | m, se² + g²) over N(z·se | 0, se²), the closed form.
func normalFactor(z, se, m, g float64) float64 {
	y, total := z*se, se*se+g*g
	return 0.5*math.Log(se*se/total) - 0.5*(y-m)*(y-m)/total + 0.5*z*z
}

// TestEvidenceUnderPrior: by Wald intervals and by methods for counts, whose statistic
// is normal, the evidence under a normal prior is the closed form at the estimate; so
// it is in weigh, and without each study.
func TestEvidenceUnderPrior(t *testing.T) {
	prior := []string{"--evidence", "normal-prior", "--effect-scale", "0.4", "--effect-mean", "0.8"}
	centre := math.Log(0.8)
	for _, method := range []string{"--interval wald", "--method mantel-haenszel", "--method peto", "--effects common"} {
		args := append(append([]string{data + "checks/bcg_counts.csv"}, strings.Fields(method)...), prior...)
		if method == "--interval wald" || method == "--effects common" {
			args = append(args, "--measure", "risk ratio")
		}
		m := pooled(t, args...).Outcomes[0].Pooled
		if want := normalFactor(m.Estimate/m.SE, m.SE, centre, 0.4); !near(m.LnEvidence, want, 1e-9) {
			t.Errorf("%s: ln evidence %v, want %v", method, m.LnEvidence, want)
		}
	}
	args := append([]string{"leave-one-out", data + "checks/bcg_counts.csv", "--interval", "wald"}, prior...)
	for _, left := range answered(t, args...).Outcomes[0].LeaveOneOut {
		if want := normalFactor(left.Estimate/left.SE, left.SE, centre, 0.4); !near(left.LnEvidence, want, 1e-9) {
			t.Errorf("without %s: ln evidence %v, want %v", left.Omitted, left.LnEvidence, want)
		}
	}
	stdout, stderr, _ := call(t, "", append([]string{"weigh", "--ratio", "--estimate", "0.7", "--se", "0.1", "--format", "json"}, prior...)...)
	var w synthesis.WeighingDocument
	if err := json.Unmarshal([]byte(stdout), &w); err != nil {
		t.Fatalf("%v: %s", err, stderr)
	}
	if want := normalFactor(math.Log(0.7)/0.1, 0.1, centre, 0.4); !near(w.LnEvidence, want, 1e-9) || w.Form != "normal-prior" {
		t.Errorf("weigh: %s, ln evidence %v, want %v", w.Form, w.LnEvidence, want)
	}
	stdout, _, _ = call(t, "", "weigh", "--z", "2.5", "--evidence", "normal-prior", "--effect-scale", "1", "--format", "json")
	if err := json.Unmarshal([]byte(stdout), &w); err != nil {
		t.Fatal(err)
	}
	if want := normalFactor(2.5, 1, 0, 1); !near(w.LnEvidence, want, 1e-9) {
		t.Errorf("weigh --z: ln evidence %v, want %v", w.LnEvidence, want)
	}
}

// TestNextUnderPrior: next-trial foresees the evidence of its form: under a common
// effect, Wald, with a next study of weight w, passing a step is a bound on the
// updated estimate from the closed form, found here by bisection.
func TestNextUnderPrior(t *testing.T) {
	sheet := "study,estimate,se\nA,0.4,0.25\nB,0.7,0.3\nC,0.1,0.2\n"
	args := []string{"--measure", "mean difference", "--effects", "common", "--evidence", "normal-prior", "--effect-scale", "0.5", "--se", "0.2"}
	o, n := nextDocument(t, sheet, args...)
	weight, m := 1/(o.Pooled.SE*o.Pooled.SE), o.Pooled.Estimate
	total := weight + 25
	spread := math.Sqrt(25 / weight / total) // of the updated mean: (1/W)·w/(W + w)
	for _, c := range n.Outlook.Passing {
		low, high := 0.0, 1e3 // z at which the factor reaches the step
		for range 200 {
			z := (low + high) / 2
			if normalFactor(z, 1/math.Sqrt(total), 0, 0.5) < c.Steps*math.Log(2+math.Sqrt(3)) {
				low = z
			} else {
				high = z
			}
		}
		bound := high / math.Sqrt(total)
		want := 0.5*math.Erfc((bound-m)/spread/math.Sqrt2) + 0.5*math.Erfc((bound+m)/spread/math.Sqrt2)
		if c.Steps < 0 {
			want = 1 - want
		}
		if math.Abs(c.Chance-want) > 1e-6 {
			t.Errorf("chance of %v steps: %v, want %v", c.Steps, c.Chance, want)
		}
	}
}

// TestEvidenceCalls: what the forms say of themselves, and what is refused by name.
func TestEvidenceCalls(t *testing.T) {
	bcg, schools := data+"checks/bcg_counts.csv", data+"checks/eight_schools.csv"
	many := "study,estimate,se\n"
	for i := range 20 {
		many += strconv.Itoa(i) + "," + strconv.Itoa(i%5) + ",1\n"
	}
	crowd := "study,estimate,se\n"
	for i := range 51 {
		crowd += fmt.Sprintf("study %d,%d.%d,1.%d\n", i, i%7, i%9, i)
	}
	two := "study,estimate,se\nA,1,0.2\nB,1,0.3\n"
	for _, c := range []struct {
		stdin, args string
		code        int
		says        string
	}{
		{"", "pool BCG --evidence integrated", codeDone, "posterior Bayes factor, τ integrated over a half-normal prior of scale 0.5"},
		{"", "pool BCG --evidence integrated", codeDone, "in the empirical form: 53 : 1 for an effect"},
		{"", "pool BCG --evidence integrated --tau-prior log-normal --tau-scale=-1.3,0.8", codeDone, "log-normal prior, ln τ with mean −1.3 and standard deviation 0.8"},
		{"", "pool BCG --evidence averaged", codeDone, "averaged over τ = 0 and τ > 0, equally probable before"},
		{"", "pool BCG --evidence normal-prior --effect-scale 0.5", codeDone, "95% of it from 0.38 to 2.66"},
		{"", "pool BCG --evidence cauchy-prior --effect-scale 0.5 --effect-side below", codeDone, "cut to effects below no effect"},
		{"", "pool BCG --evidence normal-prior --effect-scale 0.5 --important 0.8", codeDone, "These ranges are weighed in the empirical form"},
		{"", "pool BCG --evidence student-t", codeDone, "7.7 : 1 against no effect with two studies"},
		{"", "pool BCG --evidence normal-prior --effect-scale 0.5", codeDone, "a wide one favours no effect whatever the data"},
		{"", "pool BCG --effect-scale 0.5", codeDone, "The setting effect-scale (0.5) is not used"},
		{"", "pool BCG --evidence normal-prior", codeData, "state it with --effect-scale"},
		{"", "pool BCG --evidence cauchy-prior --effect-scale 1 --effect-mean 0.8", codeData, "a Cauchy prior is centred on no effect"},
		{"", "pool BCG --evidence integrated --effects common", codeData, "a common effect has none"},
		{"", "pool BCG --evidence averaged --method mantel-haenszel", codeData, "mantel-haenszel pools counts without them"},
		{"", "pool BCG --evidence integrated --tau-prior log-normal", codeData, "needs two numbers"},
		{"", "pool BCG --evidence integrated --tau-prior uniform --tau-scale 1", codeData, "a uniform prior for τ has no scale"},
		{"", "pool SCHOOLS --evidence integrated --tau-prior half-cauchy", codeData, "needs its scale"},
		{"", "pool SCHOOLS --evidence integrated", codeDone, "τ integrated over a uniform prior"},
		{"", "pool BCG --tau-scale 0", codeCall, "is above 0"},
		{"", "pool BCG --effect-scale -1", codeCall, "is not above 0"},
		{"", "pool BCG --tau-prior gamma", codeCall, "half-normal"},
		{two, "pool - --evidence integrated", codeData, "a uniform prior for τ needs at least 3 studies"},
		{two, "pool - --evidence integrated --tau-prior half-normal --tau-scale 1", codeDone, "for an effect"},
		{"study,estimate,se\nA,1,0.2\n", "pool - --evidence integrated --tau-prior half-normal --tau-scale 1", codeDone, "for an effect"},
		{many, "subsets - --evidence integrated", codeCall, "subsets: evidence integrated is too slow for 1048575 subsets"},
		{"", "subsets SCHOOLS --evidence integrated", codeDone, "evidence integrated over τ"},
		{"", "cumulative BCG --evidence integrated --looks 1000", codeCall, "looks: repeated looks are simulated in the forms of evidence empirical and student-t"},
		{crowd, "next-trial - --evidence integrated --arms 200,200 --sd 2 --measure mean-difference --tau-prior uniform", codeCall, "next-trial: evidence integrated is too slow"},
		{two, "next-trial - --evidence integrated --arms 20,20 --sd 2 --measure mean-difference --tau-prior half-normal --tau-scale 1", codeDone, "10,000"},
		{"", "next-trial BCG --evidence integrated --se 0.2", codeDone, "Evidence: posterior Bayes factor"},
		{"", "next-trial BCG --evidence student-t --se 0.2", codeDone, "For none the evidence can reach 1 : 2.5 at most"}, // 13 df by the closed form of METHODS' Student-t evidence: 2.52
		{"", "weigh --z 2 --evidence integrated", codeCall, "numbers alone have no studies"},
		{"", "weigh --p 0.01 --evidence normal-prior --effect-scale 1", codeCall, "is for --z, --t or --estimate"},
		{"", "weigh --z 2 --evidence normal-prior", codeCall, "--effect-scale"},
		{"", "weigh --z 2 --one-sided --evidence normal-prior --effect-scale 1", codeCall, "--effect-side above"},
		{"", "weigh --z 2 --effect-scale 1", codeCall, "--effect-scale means nothing"},
		{"", "weigh --z 2 --evidence cauchy-prior --effect-scale 1", codeDone, "Cauchy of scale 1 standard errors"},
	} {
		args := strings.Fields(strings.NewReplacer("BCG", bcg, "SCHOOLS", schools).Replace(c.args))
		stdout, stderr, code := call(t, c.stdin, args...)
		if code != c.code || !strings.Contains(strings.Join(strings.Fields(stdout+stderr), " "), c.says) {
			t.Errorf("%s: exit %d, want %d; want %q in:\n%s%s", c.args, code, c.code, c.says, stdout, stderr)
		}
		if c.code == codeDone && strings.Contains(c.args, "-prior --effect") && strings.Contains(stdout, "2.33 : 1") {
			t.Errorf("%s: the limit of the empirical form is named:\n%s", c.args, stdout)
		}
	}
}
