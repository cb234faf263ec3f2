package main

import (
	"fmt"
	"strings"
	"testing"
)

// TestGoldenSmallStudy pins the form of the answer; the numbers are tested in
// meta/missing.
func TestGoldenSmallStudy(t *testing.T) {
	stdout, stderr, code := call(t, "", "small-study", bcgCounts, "--measure", "odds-ratio")
	if code != codeDone {
		t.Fatalf("exit %d: %s", code, stderr)
	}
	golden(t, "small-study.txt", stdout)
	for _, line := range strings.Split(stdout, "\n") {
		if width(line) > 100 {
			t.Errorf("line of %d columns: %s", width(line), line)
		}
	}
}

// TestSmallStudyPrints the published and reference numbers: Egger's t −1.507 and p
// 0.160 for the log odds ratios of BCG (check files), Peters' p 0.200 and Harbord's
// 0.235 (40 digits with mpmath, as in meta/missing), exp of PET's −0.157 (0.85).
func TestSmallStudyPrints(t *testing.T) {
	stdout, _, _ := call(t, "", "small-study", bcgCounts, "--measure", "odds-ratio")
	for _, want := range []string{"t = −1.51 on 11 df  0.160", "t = −1.36 on 11 df  0.200", "t = −1.26 on 11 df  0.235", "PET–PEESE: PET                       0.85"} {
		if !strings.Contains(stdout, want) {
			t.Errorf("%q is not in\n%s", want, stdout)
		}
	}
}

// TestSmallStudyRefuses: too few studies, studies alike in precision, and calls that
// cannot be meant, in plain words and with what to do.
func TestSmallStudyRefuses(t *testing.T) {
	few := "study,estimate,se\nA,1,0.5\nB,2,0.2\nC,0.5,0.9\n"
	alike := "study,estimate,se\n"
	for i, name := range strings.Fields("Ahlgren Becker Castro Dubois Eriksen Fontana Gruber Hansen Ivanov Jansen") {
		alike += fmt.Sprintf("%s,1.%d,0.5%d\n", name, i, 9-i)
	}
	for _, c := range []struct {
		stdin string
		args  string
		code  int
		want  []string
	}{
		{few, "small-study -", codeDone, []string{"Not run: there are 3 studies", "--allow-few", "Asymmetry is not publication bias"}},
		{few, "small-study - --allow-few", codeDone, []string{"Run on request with 3 studies", "Egger's regression"}},
		{"study,estimate,se\nA,1,0.5\nB,2,0.2\n", "small-study - --allow-few", codeDone, []string{"Not run: there are 2 studies", "fewer than 3"}},
		{"study,estimate,se\nA,1,0.5\n", "small-study - --allow-few", codeDone, []string{"Not run: there is 1 study"}},
		{alike, "small-study -", codeDone, []string{"Not run: the studies are nearly alike in precision"}},
		{few, "small-study - --step 0.7", codeCall, []string{"--step 0.7", "0.025"}},
		{few, "small-study - --step x", codeCall, []string{"is not a number"}},
		{few, "small-study", codeCall, []string{"which file?"}},
		{"study,estimate,se\nA,1,\n", "small-study -", codeData, nil},
		{"study,estimate,se\nA,10000,1\nB,20000,1.8\nC,30000,0.9\n", "small-study - --allow-few", codeDone, []string{"all studies lie on one side of the step"}},
		{"study,estimate,se\nA,1,0.5\nB,2,1\nC,3,1.5\nD,4,2\n", "small-study - --allow-few", codeDone, []string{"the studies lie exactly on one line"}},
	} {
		stdout, stderr, code := call(t, c.stdin, strings.Fields(c.args)...)
		if code != c.code {
			t.Errorf("%s: exit %d, want %d: %s%s", c.args, code, c.code, stdout, stderr)
		}
		said := strings.Join(strings.Fields(stdout+stderr), " ")
		for _, want := range c.want {
			if !strings.Contains(said, want) {
				t.Errorf("%s: no %q in\n%s%s", c.args, want, stdout, stderr)
			}
		}
		if strings.Contains(stdout, "NaN") || strings.Contains(stdout, "Inf") {
			t.Errorf("%s: %s", c.args, stdout)
		}
	}
}
