package main

import (
	"encoding/json"
	"math"
	"slices"
	"strings"
	"testing"

	"steelyard/meta/synthesis"
)

// zeroCells is a sheet with tables of every kind, arms of 5 to 1 among them.
const zeroCells = "study,events treated,total treated,events control,total control\n" +
	"A,1,400,4,80\nB,0,520,3,100\nC,2,610,5,120\nNobody,0,50,0,10\nD,3,300,2,60\n"

// TestAllMethods: each row of the comparison is what pool gives by that method,
// effects model and correction, bit for bit. MH and the binomial–normal mean:
// a general statistics environment, testdata/checks/README.md.
func TestAllMethods(t *testing.T) {
	for _, c := range []struct{ name, stdin, file string }{{"bcg", "", bcgCounts}, {"zero cells", zeroCells, "-"}} {
		run := func(args ...string) synthesis.OutcomeDocument {
			if c.file == "-" {
				return pooledText(t, c.stdin, args...).Outcomes[0]
			}
			return pooled(t, append([]string{c.file}, args...)...).Outcomes[0]
		}
		m := run("--measure", "odds-ratio", "--all-methods").Methods
		want := 7
		if c.stdin != "" {
			want = 11
		}
		if len(m.Rows) != want {
			t.Fatalf("%s: %d rows, want %d: %+v", c.name, len(m.Rows), want, m.Rows)
		}
		for _, row := range m.Rows {
			args := []string{"--measure", "odds-ratio", "--method", row.Method, "--effects", row.Effects}
			if row.Correction != "" {
				args = append(args, "--correction", row.Correction)
			}
			o := run(args...)
			switch {
			case row.MethodResultDocument == nil:
				t.Errorf("%s: %+v has no result", c.name, row)
			case row.K != o.K || row.Estimate != o.Pooled.Estimate || row.Low != o.Pooled.Low || row.High != o.Pooled.High || row.LnEvidence != o.Pooled.LnEvidence ||
				row.Scattered.Q != o.Heterogeneity.Q || row.Scattered.P != o.Heterogeneity.P:
				t.Errorf("%s: %v: %+v, want %+v", c.name, args, *row.MethodResultDocument, o.Pooled)
			}
		}
		if c.name == "bcg" {
			compared(t, "Mantel–Haenszel", math.Exp(m.Rows[2].Estimate), 0.622874024574, 1e-11)
			compared(t, "binomial–normal", m.Rows[5].Estimate, -0.7450017, 5e-5)
		}
	}
}

// TestAdvice: the facts are those of the counts, by hand: BCG 2,575 events among
// 357,347 people, which is rare, with scatter; in the sheet of zero cells 1 of 5
// tables has a zero cell and information, 1 of 5 is silent, arms are 5 to 1, where
// Peto's odds ratio is biased (BMJ 2020;368:l7078).
func TestAdvice(t *testing.T) {
	fact := func(m *synthesis.MethodsDocument, name string) synthesis.FactDocument {
		i := slices.IndexFunc(m.Facts, func(f synthesis.FactDocument) bool { return f.Fact == name })
		if i < 0 {
			t.Fatalf("no fact %s: %+v", name, m.Facts)
		}
		return m.Facts[i]
	}
	verdict := func(m *synthesis.MethodsDocument, method string) string {
		for _, v := range m.Verdicts {
			if v.Method == method {
				return v.Apt + " " + strings.Join(v.Because, " ")
			}
		}
		return ""
	}
	m := pooled(t, bcgCounts, "--all-methods").Outcomes[0].Methods
	compared(t, "event rate", *fact(m, "event-rate").Value, 2575.0/357347, 1e-15)
	if got := verdict(m, "mantel-haenszel"); got != "with-care scatter-p" {
		t.Errorf("mantel-haenszel on BCG: %s", got)
	}
	m = pooledText(t, zeroCells, "--all-methods").Outcomes[0].Methods
	compared(t, "zero cells", *fact(m, "zero-cells").Value, 0.2, 1e-15)
	compared(t, "silent tables", *fact(m, "silent-tables").Value, 0.2, 1e-15)
	compared(t, "arm ratio", *fact(m, "arm-ratio").Value, 5, 0.2)
	if got := verdict(m, "peto"); !strings.HasPrefix(got, "inapt arm-ratio") {
		t.Errorf("peto with arms of 5 to 1: %s", got)
	}
}

// TestAllMethodsText: the comparison says what it compares, and is there where the
// outcome's own method has no result.
func TestAllMethodsText(t *testing.T) {
	const boundary = "study,events treated,total treated,events control,total control\nA,0,10,5,10\n"
	const endless = "study,events treated,total treated,events control,total control\nA,90000,90000,0,5\n"
	const estimates = "study,estimate,se\nA,0.5,0.2\nB,0.3,0.2\n"
	for _, c := range []struct {
		stdin, args string
		code        int
		says        []string
	}{
		{zeroCells, "", codeDone, []string{"risk ratio", "Peto * ", "An odds ratio, which is all that this method gives", "Tables with a zero cell: 1.",
			"inverse variance, random, half", "inverse variance, common, dropped", "peto not apt: see", "BMJ 2020;368:l7078", "Bradburn et al. 2007"}},
		{zeroCells, "--measure odds-ratio", codeDone, []string{"Peto ", "binomial–normal, random"}},
		{zeroCells + "E,x,1,1,1\n", "", codeData, []string{"side by side"}},
		{boundary, "--method conditional-exact", codeData, []string{"No result", "side by side", "Peto "}},
		{endless, "--method peto", codeDone, []string{"The common odds ratio, or 1 over it, is above 10000"}},
		{estimates, "", codeDone, []string{"No methods to compare: no pooled study gives events and totals"}},
		{strings.Replace(zeroCells, "control\n", "control,estimate,se\n", 1) + "E,,,,,0.5,0.2\n", "--measure odds-ratio", codeDone,
			[]string{"1 study without events and totals of both arms as counted"}},
	} {
		stdout, stderr, code := call(t, c.stdin, append([]string{"pool", "-", "--all-methods"}, strings.Fields(c.args)...)...)
		document, _, status := call(t, c.stdin, append([]string{"pool", "-", "--all-methods", "--format", "json"}, strings.Fields(c.args)...)...)
		if status != c.code || !json.Valid([]byte(document)) {
			t.Errorf("%q as JSON: exit %d, want %d: %s", c.args, status, c.code, document)
		}
		text := strings.Join(strings.Fields(stdout+stderr), " ")
		for _, want := range c.says {
			if code != c.code || !strings.Contains(text, want) {
				t.Errorf("%q: exit %d, want %d; want %q in\n%s%s", c.args, code, c.code, want, stdout, stderr)
			}
		}
		for _, line := range strings.Split(stdout, "\n") {
			if width(line) > answerWidth && c.stdin != endless {
				t.Errorf("%d columns: %s", width(line), line)
			}
		}
	}
}
