package main

import (
	"encoding/json"
	"math"
	"strings"
	"testing"

	"steelyard/meta/synthesis"
)

// repeatedSheet holds the invented estimates of meta/dependence: six studies, four of
// which give several.
const repeatedSheet = `study,estimate,se,cluster
Ahlgren pain,0.61,0.12,Ahlgren
Ahlgren sleep,0.02,0.20,Ahlgren
Becker pain,0.95,0.15,Becker
Becker sleep,0.18,0.18,Becker
Becker mood,0.61,0.25,Becker
Castro pain,-0.40,0.10,Castro
Castro sleep,0.15,0.14,Castro
Dubois pain,1.30,0.30,Dubois
Dubois sleep,0.52,0.22,Dubois
Dubois mood,0.83,0.26,Dubois
Eriksen,0.20,0.16,Eriksen
Fontana,0.35,0.11,Fontana
`

// TestPoolDependence wants the dense-matrix results (30 digits with mpmath, as in
// meta/dependence) by the column of clusters, by id and by name, and evidence that
// agrees with the interval.
func TestPoolDependence(t *testing.T) {
	byID := strings.Replace(repeatedSheet, "cluster", "id", 1)
	var byName strings.Builder
	for i, line := range strings.Split(strings.TrimSpace(repeatedSheet), "\n") {
		cells := strings.Split(line, ",")
		if i > 0 {
			cells[0] = cells[3]
		}
		byName.WriteString(strings.Join(cells[:3], ",") + "\n")
	}
	for _, sheet := range []string{repeatedSheet, byID, byName.String()} {
		for way, want := range map[string][3]float64{
			"three-level": {0.38508034507496415, 0.15289715380653056, 5},
			"robust":      {0.41265886075355325, 0.16521110689747101, 4.3564585355287903},
		} {
			stdout, stderr, code := call(t, sheet, "pool", "-", "--dependence", way, "--format", "json")
			var d synthesis.Document
			if err := json.Unmarshal([]byte(stdout), &d); err != nil || code != codeDone {
				t.Fatalf("%s: exit %d, %v, %s", way, code, err, stderr)
			}
			p := d.Outcomes[0].Pooled
			for i, got := range []float64{p.Estimate, p.SE, *p.DF} {
				if math.Abs(got-want[i]) > 1e-7 {
					t.Errorf("%s: %v, want %v", way, got, want[i])
				}
			}
			if p.Dependence == nil || p.Dependence.Studies != 6 || p.Dependence.Largest != 3 || p.Dependence.Way != way {
				t.Errorf("%s: %+v", way, p.Dependence)
			}
			for _, f := range d.Findings {
				if f.Rule == "D5" {
					t.Errorf("%s: %s", way, f.Message)
				}
			}
		}
	}
}

// TestDependenceFound wants the finding where repeats are pooled as independent, and
// none where a column of clusters only says which trials randomised clusters.
func TestDependenceFound(t *testing.T) {
	stdout, _, _ := call(t, repeatedSheet, "pool", "-")
	if flat := strings.Join(strings.Fields(stdout), " "); !strings.Contains(flat, "warning D5") || !strings.Contains(flat, "10 of the 12 estimates are from 4 studies") {
		t.Errorf("no finding in\n%s", stdout)
	}
	stdout, _, _ = call(t, "study,estimate,se,cluster\nA,1,0.5,no\nB,2,0.4,no\nC,1.5,0.3,no\n", "pool", "-")
	if strings.Contains(stdout, "D5") {
		t.Errorf("a finding in\n%s", stdout)
	}
}

// TestDependenceRefused: settings that do not go together, and analyses that take each
// estimate for a study, are refused by name; where nothing repeats it is said.
func TestDependenceRefused(t *testing.T) {
	single := "study,estimate,se\nA,1,0.5\nB,2,0.4\nC,1.5,0.3\n"
	for _, c := range []struct {
		stdin, args string
		code        int
		want        string
	}{
		{repeatedSheet, "pool - --dependence twofold", codeCall, "three-level"},
		{repeatedSheet, "pool - --dependence three-level --effects common", codeData, "random effects"},
		{repeatedSheet, "pool - --dependence three-level --tau paule-mandel", codeData, "restricted-ml"},
		{repeatedSheet, "pool - --dependence robust --interval profile-likelihood", codeData, "Student's t"},
		{"", "pool " + bcgCounts + " --dependence robust --method peto", codeData, "inverse-variance"},
		{repeatedSheet, "cumulative - --dependence robust", codeData, "several are from one study"},
		{repeatedSheet, "leave-one-out - --dependence three-level", codeData, "several are from one study"},
		{repeatedSheet, "small-study - --dependence three-level", codeDone, "several are from one study"},
		{single, "pool - --dependence robust", codeDone, "no pooled study gives more than one estimate"},
		{"study,estimate,se,cluster\nA,1,0.5,x\nB,2,0.4,x\nC,1.5,0.3,x\n", "pool - --dependence robust", codeData, "all estimates are from one study"},
	} {
		stdout, stderr, code := call(t, c.stdin, strings.Fields(c.args)...)
		if said := strings.Join(strings.Fields(stdout+stderr), " "); code != c.code || !strings.Contains(said, c.want) {
			t.Errorf("%s: exit %d, want %d and %q:\n%s%s", c.args, code, c.code, c.want, stdout, stderr)
		}
	}
}

// TestDependenceText pins what the text says of the model.
func TestDependenceText(t *testing.T) {
	for way, want := range map[string][]string{
		"three-level": {"12 estimates from 6 studies", "(three levels)", "between studies", "within"},
		"robust":      {"bias-reduced robust variance", "Satterthwaite's df", "on 4.36 df"},
	} {
		stdout, _, _ := call(t, repeatedSheet, "pool", "-", "--dependence", way)
		flat := strings.Join(strings.Fields(stdout), " ")
		for _, text := range want {
			if !strings.Contains(flat, text) {
				t.Errorf("%s: no %q in\n%s", way, text, stdout)
			}
		}
	}
}
