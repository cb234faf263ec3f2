package main

import (
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// TestChartFunnel holds the chart of the demo to the odds of the mock drawing, which
// Python computed from the same counts, and of BCG to the published check of Egger's
// test (t −1.507, p 0.160).
func TestChartFunnel(t *testing.T) {
	svg := drawnSVG(t, "funnel")
	holds(t, svg, "Halvorsen 2009 0.56, standard error 0.31, 2.4 : 1", "Lindqvist 2017 0.55, standard error 0.17, 142 : 1", "not tested: 9 studies, the test needs 10", ">194 : 1<")
	holds(t, drawnSVG(t, "funnel", "--contours", "p", "--width", "85", "--mono"), `width="85mm"`, "p = 0.05")
	out := filepath.Join(t.TempDir(), "f.svg")
	if _, stderr, code := call(t, "", "chart", "funnel", bcgCounts, "--measure", "odds-ratio", "--out", out); code != codeDone {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	drawing, err := os.ReadFile(out)
	if err != nil {
		t.Fatal(err)
	}
	holds(t, string(drawing), "Egger’s regression, t = −1.51 on 11 df, p = 0.160")
}

// TestChartRadialAndContribution holds both to closed forms of the demo's counts:
// Lindqvist 2017, 36 of 158 against 66 of 160, has se √(1/36 − 1/158 + 1/66 − 1/160) =
// 1/5.74 and z = ln 0.5524/se = −3.41; the contributions sum to the Q that pool prints,
// and the pull is that of the chart of influence (Python with SciPy).
func TestChartRadialAndContribution(t *testing.T) {
	holds(t, drawnSVG(t, "radial"), "Lindqvist 2017 0.55, 1/standard error 5.74, −3.41 standard errors from none", "Pooled 0.71 (0.58 to 0.86).")
	svg := drawnSVG(t, "contribution")
	q := pooled(t, data+"demo.xlsx").Outcomes[0].Heterogeneity.Q
	holds(t, svg, "Marchetti-Ruiz 2015 ", "pull +0.99 standard errors", fmt.Sprintf("Q is %.2f.", q))
	holds(t, drawnSVG(t, "contribution", "--width", "85", "--mono"), `width="85mm"`)
}

func TestChartSmallStudyRefuses(t *testing.T) {
	out := filepath.Join(t.TempDir(), "f.svg")
	for _, c := range []struct {
		stdin, args string
		code        int
		says        string
	}{
		{"", "funnel " + bcgCounts + " --contours steps", codeCall, "evidence"},
		{"study,events,total\nA,3,50\nB,6,60\n", "funnel - --null 0.1", codeData, "funnel chart needs estimates"},
		{"study,events,total\nA,3,50\nB,6,60\n", "radial -", codeData, "null"},
		{"", "contribution " + bcgCounts + " --method peto", codeData, "inverse-variance"},
		{"study,estimate,se\nA,1,0.5\n", "contribution -", codeData, "fewer than two"},
		{"study,estimate,se\nA,1,0.5\n", "radial -", codeDone, ""},
		{"study,estimate,se\nA,1,0.5\n", "funnel -", codeDone, ""},
	} {
		_, stderr, code := call(t, c.stdin, append(append([]string{"chart"}, strings.Fields(c.args)...), "--out", out, "--overwrite")...)
		if code != c.code || !strings.Contains(stderr, c.says) {
			t.Errorf("%s: exit %d, want %d and %q: %s", c.args, code, c.code, c.says, stderr)
		}
	}
}
