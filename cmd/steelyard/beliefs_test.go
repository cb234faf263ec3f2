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

// poolBeliefs returns what "pool --beliefs" writes as JSON of each outcome.
func poolBeliefs(t *testing.T, stdin string, args ...string) []*synthesis.BeliefsDocument {
	t.Helper()
	stdout, stderr, code := call(t, stdin, append(append([]string{"pool"}, args...), "--beliefs", "--format", "json")...)
	if stdout == "" {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	var d synthesis.Document
	if err := json.Unmarshal([]byte(stdout), &d); err != nil {
		t.Fatal(err)
	}
	var all []*synthesis.BeliefsDocument
	for _, o := range d.Outcomes {
		all = append(all, o.Beliefs)
	}
	return all
}

// TestBeliefsOfTheDemo compares the first outcome with Python and SciPy from the
// same counts: restricted maximum likelihood, Hartung–Knapp, z of the same p.
func TestBeliefsOfTheDemo(t *testing.T) {
	b := poolBeliefs(t, "", data+"demo.xlsx")[0]
	same := func(what string, got, want float64) {
		t.Helper()
		if !near(got, want, 1e-6) {
			t.Errorf("%s: %.9g, want %.9g", what, got, want)
		}
	}
	want := [][2]float64{
		{0.01, 0.22561202371589203}, {0.05, 0.6028668336188474}, {0.1, 0.7621746373347107}, {0.25, 0.9057874577611952},
		{0.5, 0.9664911855207314}, {0.75, 0.9885751735809547}, {0.9, 0.9961624959821271}, {0.95, 0.9981785560976951},
	}
	if len(b.Posterior) != len(want) || len(b.Doubters) != 2 {
		t.Fatalf("%d beliefs and %d doubters", len(b.Posterior), len(b.Doubters))
	}
	for i, w := range want {
		same("prior", b.Posterior[i].Prior, w[0])
		same(fmt.Sprintf("posterior from %v", w[0]), b.Posterior[i].Posterior, w[1])
	}
	same("doubter at 95%", b.Doubters[0].Prior, 0.3971331663811526)
	same("doubter at 99%", b.Doubters[1].Prior, 0.774387976284108)
	if b.Scepticism == nil {
		t.Fatal("no scepticism limit, though the interval excludes 1")
	}
	same("scepticism limit", *b.Scepticism, 0.13560900025209657)
	same("bound", b.Bound.LnEvidence, 4.208437245882048)
	factors := [][3]float64{ // scale, ln of the normal and of the Cauchy factor
		{0.05, 0.557588793258638, 1.555685703962003}, {0.1, 1.4876857136655495, 1.976504237612958}, {0.2, 2.4443642306484934, 2.2502653012400327},
		{0.5, 2.515634038562574, 2.1603600228220516}, {1, 2.007069129640275, 1.7278418416349943}, {2, 1.3623380222596553, 1.1210124915361175},
		{5, 0.4597753444046577, 0.23138239475418576}, {10, -0.23140447573709366, -0.45785058360768094}, {20, -0.9240595727994227, -1.150014888668406},
		{50, -1.8402125038383828, -2.0660301029180514},
	}
	if len(b.Factors) != len(factors) {
		t.Fatalf("%d scales, want %d", len(b.Factors), len(factors))
	}
	for i, w := range factors {
		same("scale", b.Factors[i].Scale, w[0])
		same(fmt.Sprintf("normal of scale %v", w[0]), b.Factors[i].Normal, w[1])
		same(fmt.Sprintf("Cauchy of scale %v", w[0]), b.Factors[i].Cauchy, w[2])
	}
}

// TestBeliefsOfTheCheckFile pools a single estimate, which is normal, and compares
// with testdata/checks/evidence_extra.csv.
func TestBeliefsOfTheCheckFile(t *testing.T) {
	file, err := os.Open(data + "checks/evidence_extra.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	reader := csv.NewReader(file)
	reader.FieldsPerRecord = -1
	rows, err := reader.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	compared := map[string]int{}
	for _, row := range rows {
		kind := row[0]
		if kind != "scepticism_limit" && kind != "prior_normal_ln_evidence_ratio" && kind != "prior_cauchy_ln_evidence_ratio" {
			continue
		}
		var v [5]float64
		for i := range v {
			v[i], _ = strconv.ParseFloat(row[i+1], 64)
		}
		if kind == "scepticism_limit" {
			z := 1.959963984540054 // of 95%
			b := poolBeliefs(t, fmt.Sprintf("study,estimate,se\nA,%.17g,%.17g\n", (v[0]+v[1])/2, (v[1]-v[0])/2/z), "-")[0]
			if b.Scepticism == nil || !near(*b.Scepticism, v[4], 1e-9) {
				t.Errorf("%v: %v", row, b.Scepticism)
			}
			compared[kind]++
			continue
		}
		if v[2] != 0 { // priors here are centred on no effect
			continue
		}
		b := poolBeliefs(t, fmt.Sprintf("study,estimate,se\nA,%v,%v\n", v[0], v[1]), "-")[0]
		for _, f := range b.Factors {
			if f.Scale != v[3] {
				continue
			}
			got := f.Normal
			if kind == "prior_cauchy_ln_evidence_ratio" {
				got = f.Cauchy
			}
			if !near(got, v[4], 1e-8) {
				t.Errorf("%v: %v", row, got)
			}
			compared[kind]++
		}
	}
	if compared["scepticism_limit"] < 2 || compared["prior_normal_ln_evidence_ratio"] < 3 || compared["prior_cauchy_ln_evidence_ratio"] < 1 {
		t.Errorf("compared only %v", compared)
	}
}

// TestBeliefsText: the block stands in the answer when asked for, and only then;
// an interval that includes no effect has no scepticism limit, and in the Student-t
// form the bound is that of Student’s t, (1 + t²/2)^(3/2) on 2 df.
func TestBeliefsText(t *testing.T) {
	demo, _, _ := call(t, "", "pool", data+"demo.xlsx", "--beliefs")
	holds(t, demo, "For the sceptic", "23%     60%     76%     91%     97%     98.9%   99.6%   99.8%", "a doubter who starts below 77% stays below 99%",
		"effects beyond 0.87 to 1.15 plausible", "no prior for the effect can pass 67 : 1", "0.82 to 1.22  4.4 : 1  7.2 : 1", "matched to the interval",
		"no limit: the 95% interval includes 1.00")
	plain, _, _ := call(t, "", "pool", data+"demo.xlsx")
	if strings.Contains(plain, "For the sceptic") {
		t.Error("the block stands unasked")
	}
	// Three estimates 2, 3, 4 with one standard error: mean 3, Hartung–Knapp se
	// 1/√3, so t = 3√3 on 2 df.
	sheet := "study,estimate,se\nA,2,0.1\nB,3,0.1\nC,4,0.1\n"
	b := poolBeliefs(t, sheet, "-", "--evidence", "student-t", "--interval", "hartung-knapp")[0]
	if want := 1.5 * math.Log1p(27.0/2); !near(b.Bound.LnEvidence, want, 1e-9) {
		t.Errorf("Student-t bound %v, want %v", b.Bound.LnEvidence, want)
	}
	for _, f := range b.Factors {
		if f.Normal > b.Bound.LnEvidence || f.Cauchy > b.Bound.LnEvidence {
			t.Errorf("scale %v passes the bound", f.Scale)
		}
	}
}

// TestBeliefsEverywhere: extreme sheets get finite numbers or none.
func TestBeliefsEverywhere(t *testing.T) {
	for _, sheet := range []string{"A,0,1", "A,1e-12,1e-9", "A,1e9,1", "A,5,1e-6", "A,1e100,1e98", "A,-3,1e12"} {
		for _, b := range poolBeliefs(t, "study,estimate,se\n"+sheet+"\n", "-") {
			if b == nil {
				continue
			}
			for i, f := range b.Factors {
				if math.IsNaN(f.Normal+f.Cauchy) || math.IsInf(f.Normal+f.Cauchy, 0) || i > 0 && f.Scale <= b.Factors[i-1].Scale {
					t.Errorf("%s: %+v", sheet, f)
				}
			}
		}
	}
	if b := poolBeliefs(t, "study,events,total\nA,3,50\nB,6,60\n", "-"); b[0] != nil {
		t.Error("beliefs without a null")
	}
}

// TestChartPriorSensitivity holds the chart of the demo to the numbers in Python
// with SciPy: 28.8, bound 67.3, normal at most 14.05 at 0.32 and below even from
// 7.9; 7.44 and 5.63 at a scale of 1.
func TestChartPriorSensitivity(t *testing.T) {
	svg := drawnSVG(t, "prior-sensitivity")
	holds(t, svg, "29 : 1, firm, 2.6 steps, whatever", "Normal prior: at most 14 : 1, at scale 0.32; below 1 : 1 for scales above 7.9",
		"No prior can pass 67 : 1, 3.2 steps", "1 (0.14 to 7.10), normal 7.4 : 1, Cauchy 5.6 : 1",
		">no prior can pass 67 : 1<", ">normal prior<", ">Cauchy prior<", "All at the z matched to the interval", "Flare within 24 weeks")
	holds(t, drawnSVG(t, "prior-sensitivity", "--width", "85", "--mono"), `width="85mm"`, ">0.82 to 1.22<")
}
