package main

import (
	"path/filepath"
	"strings"
	"testing"
)

// TestChartInfluence holds the chart of the demo to numbers computed in Python
// with SciPy from the same counts: restricted maximum likelihood, Hartung–Knapp
// intervals, each study left out in turn.
func TestChartInfluence(t *testing.T) {
	svg := drawnSVG(t, "influence")
	holds(t, svg,
		"All 9 studies: pooled risk ratio 0.71 (0.58 to 0.86); evidence, effect against none, 29 : 1, firm, 2.6 steps.",
		"Marchetti-Ruiz 2015, pull +0.99 standard errors, residual +2.76, leverage 14.2%, carries −1.04 steps",
		"Lindqvist 2017, pull −0.56 standard errors, residual −1.37, leverage 14.8%, carries +0.71 steps",
		"Okwuosa 2012, pull −0.13 standard errors, residual −1.16, leverage 1.3%, carries +0.32 steps",
		">1 beyond ±2<")
	if first, second := strings.Index(svg, ">Marchetti-Ruiz 2015<"), strings.Index(svg, ">Lindqvist 2017<"); first < 0 || second < first {
		t.Errorf("rows do not stand by the size of their pull: places %d and %d", first, second)
	}
	holds(t, drawnSVG(t, "influence", "--width", "85", "--mono"), `width="85mm"`, ">leverage 14.2%<")
}

// TestChartSubsets holds the chart of the demo to brute force over its 511
// subsets in Python with SciPy: 0.8239, 0.3836, 0.0959, 0.0157 and 0 reach 0 to 4
// steps, 0.9980 lie below 1 and 0.9883 below 0.87.
func TestChartSubsets(t *testing.T) {
	svg := drawnSVG(t, "subsets", "--important", "0.87", "--study", "marchetti-ruiz 2015")
	holds(t, svg,
		"every one of the 511 that 9 studies have",
		"Of these 82% favour an effect, 38% reach fair, 10% reach firm, 2% reach heavy, 0% reach massive; 18% favour none.",
		"&gt; 99% below 1,", "99% below 0.87",
		"256 of the subsets hold Marchetti-Ruiz 2015.", ">with Marchetti-Ruiz 2015<", ">without it<")
	if strings.Contains(drawnSVG(t, "subsets"), ">without it<") {
		t.Error("without a chosen study there is an outline")
	}
}

func TestChartSubsetsRefuses(t *testing.T) {
	out := filepath.Join(t.TempDir(), "f.svg")
	for _, tt := range []struct {
		args []string
		code int
		says string
	}{
		{[]string{"subsets", data + "demo.xlsx", "--study", "Nobody"}, codeCall, "Halvorsen 2009"},
		{[]string{"subsets", data + "demo.xlsx", "--sample", "5"}, codeCall, "--sample 5"},
	} {
		if _, stderr, code := call(t, "", append(append([]string{"chart"}, tt.args...), "--out", out)...); code != tt.code || !strings.Contains(stderr, tt.says) {
			t.Errorf("%q: exit %d, %s", tt.args, code, stderr)
		}
	}
	if _, stderr, code := call(t, "study,estimate,se\nHalvorsen 2009,1,0.5\n", "chart", "influence", "-", "--out", out); code == codeDone || !strings.Contains(stderr, "no others") {
		t.Errorf("influence of one study: exit %d, %s", code, stderr)
	}
	if _, stderr, code := call(t, "", "chart"); code != codeCall || !strings.Contains(stderr, "leave-one-out, influence, subsets") {
		t.Errorf("no kind: exit %d, %s", code, stderr)
	}
}
