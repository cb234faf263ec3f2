package main

import (
	"encoding/json"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"

	"steelyard/meta/synthesis"
)

// judged writes a sheet of invented counts with a plan and judgements beside it and
// returns its path.
func judged(t *testing.T, plan, judgements string) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), "trials.csv")
	sheet := "trial,outcome,events treated,total treated,events control,total control,better\n" +
		"A,flare,10,100,20,100,lower\nB,flare,15,120,25,118,lower\nC,flare,30,150,41,151,lower\n" +
		"A,response,40,100,30,100,higher\nB,response,50,120,41,118,higher\nC,response,71,150,58,151,higher\n"
	for name, text := range map[string]string{path: sheet, strings.TrimSuffix(path, ".csv") + ".plan.csv": plan, strings.TrimSuffix(path, ".csv") + ".judgement.csv": judgements} {
		if text == "" {
			continue
		}
		if err := os.WriteFile(name, []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
	}
	return path
}

const judgementHead = "outcome,domain,rating,reason,by,date\n"

// panelOf returns the panel's part of the first outcome.
func panelOf(t *testing.T, args ...string) (synthesis.OutcomeDocument, *synthesis.PanelDocument) {
	t.Helper()
	stdout, stderr, code := call(t, "", append([]string{"panel", "--format", "json"}, args...)...)
	var d synthesis.Document
	if err := json.Unmarshal([]byte(stdout), &d); err != nil || code != codeDone || d.Outcomes[0].Panel == nil {
		t.Fatalf("panel %v: exit %d, %v, %s", args, code, err, stderr)
	}
	return d.Outcomes[0], d.Outcomes[0].Panel
}

// TestGoldenPanel holds the cards of the demo and of a judged sheet to texts that were
// read.
func TestGoldenPanel(t *testing.T) {
	stdout, _, _ := call(t, "", "panel", data+"demo.xlsx", "--outcome", "flare within 24 weeks")
	golden(t, "panel-demo.txt", stdout)
	path := judged(t, "setting,value,outcome,reason,date\nbaseline,\"low 0.1, high 0.3\",,registers,\nimportant-per-1000,\"-20, 30\",flare,agreed,2024-01-10\n",
		judgementHead+"flare,risk of bias,down one,unblinded | *half* <b>,A. Lee,2024-02-01\nflare,certainty,moderate,one step,panel,2024-02-02\n")
	stdout, _, _ = call(t, "", "panel", path, "--format", "markdown")
	golden(t, "panel-judged.md", stdout)
}

// TestPanelCard: ratings are the panel's own and no level is computed; the sentence has
// estimate, threshold and certainty.
func TestPanelCard(t *testing.T) {
	plan := "setting,value,outcome,reason,date\nbaseline,\"low 0.1, high 0.3\",,,\nimportant-per-1000,20,flare,,2024-01-10\nimportant-per-1000,25,response,,2024-03-01\n"
	path := judged(t, plan, judgementHead+"flare,certainty,rather sure,the panel's words,A. Lee,2024-02-02\nresponse,start,high,randomised,,2024-02-02\n")
	stdout, stderr, code := call(t, "", "panel", path)
	text := strings.Join(strings.Fields(stdout), " ")
	if code != codeDone {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	for _, want := range []string{
		"threshold 20 fewer; certainty: rather sure (the panel's rating).", "threshold 25 more; certainty: not yet rated.",
		"certainty panel: rather sure; the panel's words (A. Lee, 2024-02-02)", "start panel: high; randomised (2024-02-02)",
		"CAUTION: the threshold was agreed after the judgement of 2024-02-02 (trials.judgement.csv!C3)",
		"Certainty levels were entered by the people named beside them; the program computes none.", "for one more", "for one fewer",
	} {
		if !strings.Contains(text, want) {
			t.Errorf("%q is missing from:\n%s", want, stdout)
		}
	}
	stdout, _, _ = call(t, "", "panel", judged(t, plan, ""))
	if n := strings.Count(stdout, "not yet rated"); n < 16 || strings.Contains(stdout, "panel: ") {
		t.Errorf("without judgements a rating is printed, or %d of the places for one:\n%s", n, stdout)
	}
}

// TestPanelNumbers: the difference is the closed form of the pooled ratio, and the
// settings are told apart by origin.
func TestPanelNumbers(t *testing.T) {
	o, p := panelOf(t, data+"checks/bcg_counts.csv", "--measure", "risk-ratio", "--baseline", "low 0.01, high 0.02", "--important", "0.9", "--better", "lower")
	if p.BaselineFrom != "flag" || len(p.Rows) != 2 || p.Threshold.From != "flag" || p.Threshold.Flags[0].Flag != "given with the call" {
		t.Fatalf("%+v", p)
	}
	for i, baseline := range []float64{0.01, 0.02} {
		r := p.Rows[i]
		want := 1000 * baseline * (*o.Pooled.Display.Estimate - 1)
		if !near(r.Absolute.Difference.Value, want, 1e-9) || !near(*r.Zone.LowPer1000, -100*baseline, 1e-9) {
			t.Errorf("row %d: %+v, want %v", i, r.Absolute, want)
		}
		if !near(*r.Needed.Value, 1000/-want, 1e-9) {
			t.Errorf("row %d needs %v, want %v", i, *r.Needed.Value, 1000/-want)
		}
	}
}

// TestPanelEarlier: a threshold that an earlier result did not have is flagged.
func TestPanelEarlier(t *testing.T) {
	bcg := data + "checks/bcg_counts.csv"
	old := filepath.Join(t.TempDir(), "old.json")
	if _, stderr, code := call(t, "", "pool", bcg, "--important", "0.8", "--format", "json", "--out", old); code != codeDone {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	for important, says := range map[string]string{"0.8": "stood already in the earlier result old.json", "0.9": "entered after results existed: old.json had 0.8"} {
		stdout, _, _ := call(t, "", "panel", bcg, "--important", important, "--earlier", old)
		if !strings.Contains(strings.Join(strings.Fields(stdout), " "), says) {
			t.Errorf("%s: %q is missing", important, says)
		}
	}
}

// TestPanelCalls: what is refused, and where.
func TestPanelCalls(t *testing.T) {
	bcg := data + "checks/bcg_counts.csv"
	smd := "study,estimate,se,measure\nA,-0.4,0.2,standardised mean difference\nB,-0.5,0.2,standardised mean difference\n"
	for _, c := range []struct {
		stdin, args string
		code        int
		says        string
	}{
		{"", "panel BCG --baseline 20", codeCall, "50 per 1000 is written 0.05"},
		{"", "panel BCG --baseline low=0,high=1", codeCall, "--baseline"},
		{"", "panel BCG --important 0.8,0.9", codeData, "both sides of the null"},
		{"", "panel BCG --important-per-1000 20,40", codeCall, "one side of no difference"},
		{"", "panel BCG --important-per-1000 0", codeCall, "no difference per 1000"},
		{"", "panel BCG --baseline 0.2 --important-per-1000 20 --null 0.5", codeData, "lie on one side of the null"},
		{"", "panel BCG --power 80", codeCall, "80% is written 0.8"},
		{"", "panel BCG --standard-deviation 0", codeCall, "not above 0"},
		{"", "panel BCG --standard-deviation 2", codeDone, "is not used: a risk ratio needs none"},
		{"", "panel BCG --out x.xlsx --format json", codeCall, "is a workbook"},
		{"", "panel BCG --out x.md", codeCall, "--format markdown"},
		{"", "panel BCG --out x.pdf", codeCall, "CSV or a workbook (.xlsx)"},
		{"", "panel BCG --earlier nowhere.json", codeFile, "nowhere.json"},
		{"", "panel BCG --earlier BCG", codeFile, "is no result in JSON"},
		{smd, "panel - --baseline 0.2", codeCall, "it counts standard deviations"},
		{smd, "panel -", codeDone, "with --standard-deviation or in the plan"},
		{smd, "panel - --standard-deviation 5", codeDone, "In its unit −2.2"},
		{"study,r,n\nA,0.3,50\nB,0.4,60\n", "panel -", codeDone, "a correlation compares no groups"},
		{"study,events,total\nA,3,50\nB,9,80\n", "panel -", codeDone, "it describes one group"},
		{"study,HR,se\nA,0.7,0.2\nB,0.8,0.2\n", "panel -", codeDone, "give one, such as --baseline"},
		{"study,HR,se\nA,0.7,0.2\nB,0.8,0.2\n", "panel - --baseline 0.2", codeDone, "for survival it must be turned round first"},
		{"study,estimate,se\nA,-0.9,0.2\nB,-0.8,0.2\n", "panel - --measure risk-difference --baseline 0.2", codeDone, "beyond 0 or 1; the table stops there"},
		{"study,estimate,se\nA,700,0.5\nB,-700,1\n", "panel - --measure rate-ratio --baseline 0.2", codeData, ""},
		{"study,estimate,se\nA,1,0.5\n", "panel -", codeDone, "one study"},
		{"study,estimate,se\nA,1,0.5\nB,1.1,0.4\n", "panel - --measure mean-difference --important 0.2", codeDone, "neither side is called benefit or harm"},
		{repeatedSheet, "panel - --dependence robust --measure mean-difference --standard-deviation 1 --important 0.1", codeDone, "not by the dependence of the plan (robust)"},
	} {
		args := strings.Fields(strings.ReplaceAll(c.args, "BCG", bcg))
		stdout, stderr, code := call(t, c.stdin, args...)
		if code != c.code || !strings.Contains(strings.Join(strings.Fields(stdout+stderr), " "), c.says) {
			t.Errorf("%s: exit %d, want %d; want %q in:\n%s%s", c.args, code, c.code, c.says, stdout, stderr)
		}
	}
}

// TestPanelJudgementsRefused: no judgement is dropped in silence; each is named by its
// cell, and pooling goes on without them.
func TestPanelJudgementsRefused(t *testing.T) {
	path := judged(t, "", judgementHead+"flares,certainty,low,r,,\nflare,precision,down one,r,,\nflare,certainty,low,r,,\nflare,certainty,high,r,,\n")
	stdout, stderr, code := call(t, "", "panel", path)
	if code != codeData || stdout != "" {
		t.Errorf("exit %d, %s", code, stdout)
	}
	for _, want := range []string{"trials.judgement.csv!A2: \"flares\"", "trials.judgement.csv!B3: \"precision\" is not a known domain", "trials.judgement.csv!C5: certainty is rated in trials.judgement.csv!C4 already"} {
		if !strings.Contains(stderr, want) {
			t.Errorf("%q is missing from %s", want, stderr)
		}
	}
	if stdout, _, code := call(t, "", "pool", path); code != codeDone || !strings.Contains(stdout, "judgement") {
		t.Errorf("pool: exit %d\n%s", code, stdout)
	}
}

// TestPanelWorkbook: --out CARDS.xlsx writes a workbook once, and again only when told.
func TestPanelWorkbook(t *testing.T) {
	out := filepath.Join(t.TempDir(), "cards.xlsx")
	for i, c := range []struct {
		more []string
		code int
	}{{nil, codeDone}, {nil, codeCall}, {[]string{"--overwrite"}, codeDone}} {
		args := append([]string{"panel", data + "checks/bcg_counts.csv", "--baseline", "0.02", "--out", out}, c.more...)
		if _, stderr, code := call(t, "", args...); code != c.code {
			t.Errorf("call %d: exit %d, want %d, %s", i, code, c.code, stderr)
		}
	}
	f, err := excelize.OpenFile(out)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	if sheets := strings.Join(f.GetSheetList(), " "); sheets != "panel numbers" {
		t.Errorf("sheets %q", sheets)
	}
}

// TestChartPanel: the chart says what the card says, and asks for an important
// difference.
func TestChartPanel(t *testing.T) {
	args := []string{"panel", "--important-per-1000", "40"}
	holds(t, drawnSVG(t, args...), "44 fewer", "21 to 62 fewer", "58% of settings", "Important benefit : trivial", "CAUTION: the threshold was given with this call")
	holds(t, drawnSVG(t, append(args, "--width", "85", "--mono")...), "87 fewer (41 to 125 fewer)", `width="85mm"`)
	_, stderr, code := call(t, "", "chart", "panel", data+"checks/bcg_counts.csv", "--out", t.TempDir()+"/f.svg")
	if code != codeData || !strings.Contains(stderr, "set one with --important or --important-per-1000") {
		t.Errorf("without an important difference: exit %d, %s", code, stderr)
	}
}

// TestPanelMarkdownLevels: the parts of a card stand one level under its outcome.
func TestPanelMarkdownLevels(t *testing.T) {
	stdout, _, _ := call(t, "", "panel", data+"demo.xlsx", "--format", "markdown")
	var heads []string
	for line := range strings.Lines(stdout) {
		if strings.HasPrefix(line, "#") {
			heads = append(heads, strings.TrimSpace(line))
		}
	}
	want := []string{"## flare within 24 weeks", "### Large enough to matter?", "### Domains of certainty", "## symptom score at 24 weeks", "### Large enough to matter?",
		"### Domains of certainty", "## serious harm", "### Domains of certainty", "## Findings", "## Cautions"}
	if !slices.EqualFunc(heads, want, strings.HasPrefix) {
		t.Errorf("%q, want %q", heads, want)
	}
}

// TestPanelHarmfulEstimate: the sentence names the threshold for harm too where the
// estimate lies on that side.
func TestPanelHarmfulEstimate(t *testing.T) {
	for better, want := range map[string]string{
		"lower": "thresholds 5 fewer and 10 more; certainty", "higher": "threshold 10 more; certainty",
	} {
		stdout, stderr, code := call(t, "", "panel", data+"demo.xlsx", "--outcome", "serious harm", "--better", better, "--important-per-1000", "-5, 10")
		if text := strings.Join(strings.Fields(stdout), " "); code != codeDone || !strings.Contains(text, "7 more (5 fewer to 32 more) per 1000; "+want) {
			t.Errorf("%s: exit %d, want %q in\n%s%s", better, code, want, stdout, stderr)
		}
	}
}
