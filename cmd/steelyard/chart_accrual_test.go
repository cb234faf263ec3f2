package main

import (
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// drawnSVG draws a chart of the demo's first outcome and returns it as text.
func drawnSVG(t *testing.T, args ...string) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), "f.svg")
	args = append([]string{"chart", args[0], data + "demo.xlsx", "--outcome", "flare within 24 weeks", "--out", path}, args[1:]...)
	if stdout, stderr, code := call(t, "", args...); code != codeDone || stdout != path+"\n" || stderr != "" {
		t.Fatalf("%q: exit %d, stdout %q, stderr %q", args, code, stdout, stderr)
	}
	content, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	return string(content)
}

func holds(t *testing.T, svg string, wanted ...string) {
	t.Helper()
	for _, want := range wanted {
		if !strings.Contains(svg, want) {
			t.Errorf("the chart does not say %q", want)
		}
	}
}

// TestChartCumulative holds the chart of the demo to the numbers of the design
// drawing of the same data (design/mock/cumulative.svg, computed with SciPy).
func TestChartCumulative(t *testing.T) {
	svg := drawnSVG(t, "cumulative", "--prior", "0.2,0.5")
	holds(t, svg,
		"Halvorsen 2009, 2009-03: 2.4 : 1, 0.7 steps, risk ratio 0.56 (0.31 to 1.03)",
		"Zielińska 2011, 2011-01: 1 : 1.3, −0.2 steps", "risk ratio 0.66 (0.058 to 7.54)",
		"Marchetti-Ruiz 2015, 2015-09: 1.1 : 1", "Dvořák 2021, 2021-04: 10 : 1",
		"Obradović 2024, 2024-08: 29 : 1, 2.6 steps", "risk ratio 0.71 (0.58 to 0.86)",
		">20% prior<", ">88%<", "the stated prior, 20%", // the first of two priors
		"restricted maximum likelihood, Hartung–Knapp interval, evidence matched to it")
	if strings.Contains(svg, "50% prior") {
		t.Error("the second prior has a scale")
	}
	narrow := drawnSVG(t, "cumulative", "--width", "85", "--mono", "--no-title")
	holds(t, narrow, `width="85mm"`, "1 Halvorsen 2009; 2 Zielińska 2011", "#6B6B6B")
	if strings.Contains(narrow, "#D55E00") || strings.Contains(narrow, ">Evidence as the studies arrived</text>") {
		t.Error("a grey chart has a colour, or one without a title has a title")
	}
}

// TestChartCumulativeOrder: a column orders the points and labels the axis; all
// studies together are the same last point.
func TestChartCumulativeOrder(t *testing.T) {
	svg := drawnSVG(t, "cumulative", "--order", "risk of bias")
	holds(t, svg, ">by risk of bias<", ">high<", ">low<", ">some concerns<", ">and 3 more<", ">29 : 1, firm<", "Those of one value enter together.")
	single := drawnSVG(t, "cumulative", "--order", "risk of bias", "--ties", "file")
	holds(t, single, ">29 : 1, firm<", ">Abernethy<")
	if strings.Contains(single, "enter together") {
		t.Error("studies of one value enter together though they were asked for in the order of the file")
	}
}

// TestChartLeaveOneOut holds the chart of the demo to the numbers of the design
// drawing of the same data (design/mock/leave-one-out.svg, computed with SciPy).
func TestChartLeaveOneOut(t *testing.T) {
	svg := drawnSVG(t, "leave-one-out")
	holds(t, svg,
		"0.71 (0.58 to 0.86), evidence 29 : 1",
		"Without Obradović 2024: 0.71 (0.56 to 0.91), evidence 10 : 1, τ 0.17, carries +0.81 steps.",
		"Without Lindqvist 2017: 0.74 (0.61 to 0.91), evidence 11 : 1, τ 0.10, carries +0.71 steps.",
		"Without Marchetti-Ruiz 2015: 0.66 (0.55 to 0.79), evidence 113 : 1, τ 0.00, carries −1.04 steps.",
		"leaving out any one of Obradović, Lindqvist, Dvořák or Abernethy brings the evidence below 2 steps (14 : 1).")
}

// TestChartAccrualRefuses: what cannot be drawn is refused in words.
func TestChartAccrualRefuses(t *testing.T) {
	folder := t.TempDir()
	sheet := filepath.Join(folder, "one.csv")
	if err := os.WriteFile(sheet, []byte("study,estimate,se\nHalvorsen 2009,1,0.5\n"), 0o644); err != nil {
		t.Fatal(err)
	}
	out := filepath.Join(folder, "f.svg")
	if _, stderr, code := call(t, "", "chart", "leave-one-out", sheet, "--out", out); code == codeDone || !strings.Contains(stderr, "nothing is left") {
		t.Errorf("one study: exit %d, %s", code, stderr)
	}
	if _, stderr, code := call(t, "", "chart", "cumulative", data+"demo.xlsx", "--order", "moon phase", "--out", out); code == codeDone || !strings.Contains(stderr, "moon phase") {
		t.Errorf("unknown column: exit %d, %s", code, stderr)
	}
	if _, stderr, code := call(t, "", "chart", "cumulative", sheet, "--out", out); code != codeDone {
		t.Errorf("a single study has a first point: exit %d, %s", code, stderr)
	}
	if _, stderr, code := call(t, "", "chart"); code != codeCall || !strings.Contains(stderr, "forest, cumulative, leave-one-out") {
		t.Errorf("no kind: exit %d, %s", code, stderr)
	}
}
