package main

import (
	"encoding/json"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"steelyard/meta/synthesis"
)

// bcgAllocated is the sheet of the BCG trials with how people were allotted (Colditz
// et al., JAMA 1994;271:698-702, from memory) and some blank cells; change edits the
// fields of a row.
func bcgAllocated(t *testing.T, change func(row int, fields []string)) string {
	t.Helper()
	content, err := os.ReadFile(bcgCounts)
	if err != nil {
		t.Fatal(err)
	}
	allocation := strings.Fields("random random random random alternate alternate random random random systematic systematic systematic systematic")
	lines := strings.Split(strings.TrimSpace(strings.ReplaceAll(string(content), "\r", "")), "\n")
	for i := range lines {
		fields := strings.Split(lines[i], ",")
		if i == 0 {
			lines[i] += ",allocation"
			continue
		}
		fields = append(fields, allocation[i-1])
		if change != nil {
			change(i, fields)
		}
		lines[i] = strings.Join(fields, ",")
	}
	path := filepath.Join(t.TempDir(), "bcg.csv")
	if err := os.WriteFile(path, []byte(strings.Join(lines, "\n")+"\n"), 0o644); err != nil {
		t.Fatal(err)
	}
	return path
}

// explained runs explain with JSON and returns its first outcome's part.
func explained(t *testing.T, want int, args ...string) (*synthesis.ExplainDocument, synthesis.OutcomeDocument) {
	t.Helper()
	stdout, stderr, code := call(t, "", append([]string{"explain", "--format", "json"}, args...)...)
	var d synthesis.Document
	if code != want {
		t.Fatalf("explain %v: exit %d, %s", args, code, stderr)
	}
	if err := json.Unmarshal([]byte(stdout), &d); err != nil {
		t.Fatal(err)
	}
	return d.Outcomes[0].Explain, d.Outcomes[0]
}

func nearly(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance*math.Abs(want)) {
		t.Errorf("%s: %.12g, want %.12g", what, got, want)
	}
}

// TestExplainBCG: the regression on latitude from the counts; the values are from
// 40-digit dense matrix algebra (mpmath) at the root of the restricted score.
func TestExplainBCG(t *testing.T) {
	e, _ := explained(t, codeDone, bcgCounts, "--measure", "odds ratio", "--on", "Latitude", "--interval", "hartung-knapp", "--planned", "--at", "latitude=40")
	r := e.Regression
	nearly(t, "intercept", r.Coefficients[0].Estimate, -0.7541244653560953, 1e-8)
	nearly(t, "slope", r.Coefficients[1].Estimate, -0.03153380345615264, 1e-8)
	nearly(t, "its se", r.Coefficients[1].SE, 0.007517037192266669, 1e-8)
	nearly(t, "F", r.Whole.F, 17.59783797551344, 1e-7)
	nearly(t, "τ²", r.Residual.Tau.Tau2, 0.05043307403124557, 1e-8)
	nearly(t, "centre", *r.Covariates[0].Centre, 435./13, 1e-12)
	nearly(t, "at 40", r.At.Estimate, -0.7541244653560953-0.03153380345615264*(40-435./13), 1e-8)
	if !e.Planned || r.Permutation.Count != 1000 || r.Permutation.Exact || *r.Terms[0].PermutedP > 0.02 || len(r.Fitted) != 13 {
		t.Errorf("planned %v, permutation %+v, p %v, %d fitted", e.Planned, r.Permutation, *r.Terms[0].PermutedP, len(r.Fitted))
	}
}

// TestExplainGroupsArePools: each group is what pool says of its rows alone, by any
// method, and the text names the groups.
func TestExplainGroupsArePools(t *testing.T) {
	sheet := bcgAllocated(t, nil)
	for _, settings := range [][]string{
		{"--measure", "odds ratio"},
		{"--measure", "risk ratio", "--effects", "common"},
		{"--method", "mantel-haenszel", "--measure", "odds ratio"},
		{"--measure", "odds ratio", "--interval", "profile-likelihood", "--where", "year > 1950"},
	} {
		e, _ := explained(t, codeDone, append([]string{sheet, "--subgroups", "Allocation"}, settings...)...)
		if len(e.Subgroups.Groups) != 3 {
			t.Fatalf("%d groups, want 3", len(e.Subgroups.Groups))
		}
		for _, g := range e.Subgroups.Groups {
			where := "allocation is " + g.Group
			alone := append([]string(nil), settings...)
			if i := len(alone) - 2; alone[i] == "--where" {
				where, alone = alone[i+1]+" and "+where, alone[:i]
			}
			own := pooled(t, append([]string{sheet, "--where", where}, alone...)...).Outcomes[0]
			nearly(t, g.Group, g.Estimate, own.Pooled.Estimate, 1e-9)
			nearly(t, g.Group+": limit", g.Low, own.Pooled.Low, 1e-9)
			nearly(t, g.Group+": evidence", g.LnEvidence, own.Pooled.LnEvidence, 1e-9)
		}
	}
}

// TestExplainBlanks: studies without an entry are left out of that comparison alone,
// and named with their cells.
func TestExplainBlanks(t *testing.T) {
	sheet := bcgAllocated(t, func(row int, fields []string) {
		if row == 3 {
			fields[6] = ""
		}
		if row == 8 {
			fields[7] = " "
		}
	})
	e, o := explained(t, codeDone, sheet, "--measure", "odds ratio", "--on", "latitude", "--subgroups", "allocation", "--shared-tau", "--permutations", "0")
	if o.K != 13 || e.Regression.K != 12 || e.Regression.Permutation != nil {
		t.Errorf("%d pooled, %d regressed", o.K, e.Regression.K)
	}
	if m := e.Regression.Omitted; len(m) != 1 || m[0].Study != "Trial 3" || m[0].Cells[0] != "latitude, bcg.csv!G4" {
		t.Errorf("omitted %+v", m)
	}
	if m := e.Subgroups.Omitted; len(m) != 1 || m[0].Study != "Trial 8" || !e.Subgroups.SharedTau {
		t.Errorf("omitted %+v", m)
	}
	studies := 0
	for _, g := range e.Subgroups.Groups {
		studies += g.K
		for _, name := range g.Studies {
			if name == "Trial 8" {
				t.Error("a study without an entry is in a group")
			}
		}
	}
	if studies != 12 {
		t.Errorf("%d studies in groups, want 12", studies)
	}
}

// TestExplainRefusals: what the cells do not allow is told beside the pooled outcome,
// with the column and the cells; what the call names wrongly, at once.
func TestExplainRefusals(t *testing.T) {
	sheet := bcgAllocated(t, func(row int, fields []string) {
		fields[6] = strings.ReplaceAll(fields[6], "27", "c. 27")
	})
	for _, c := range []struct {
		args string
		code int
		says []string
	}{
		{"--on latitude", codeData, []string{"number in 12 of 13 cells", "Trial 9", "G10", `"c. 27"`}},
		{"--on study", codeData, []string{"13 different texts in 13 studies"}},
		{"--subgroups study", codeData, []string{"13 different entries", "--on"}},
		{"--on converted", codeData, []string{"in all 13 studies"}},
		{"--on allocation --reference allocation=quasi", codeData, []string{"quasi", "systematic"}},
		{"--on year,allocation --effects common --where", codeCall, []string{"--where"}},
		{"--on latitud", codeCall, []string{"no column of this sheet", "did you mean latitude?"}},
		{"--subgroups alocation", codeCall, []string{"did you mean allocation?"}},
		{"--on year --reference allocation=random", codeCall, []string{"no column of this regression", "year"}},
		{"--on year --at latitude=3", codeCall, []string{"no covariate of this regression"}},
		{"--on year --at year=soon", codeCall, []string{"soon", "not a number"}},
		{"--on year --at year", codeCall, []string{"COLUMN=VALUE"}},
		{"--on year --reference year", codeCall, []string{"COLUMN=CATEGORY"}},
		{"--on year*year", codeCall, []string{"itself"}},
		{"--on year --permutations 3", codeCall, []string{"100 to"}},
		{"--on year --shared-tau", codeCall, []string{"--subgroups"}},
		{"--subgroups allocation --at year=3", codeCall, []string{"--on"}},
		{"", codeCall, []string{"--subgroups", "--on"}},
	} {
		stdout, stderr, code := call(t, "", append([]string{"explain", sheet}, strings.Fields(c.args)...)...)
		if code != c.code {
			t.Errorf("%s: exit %d, want %d (%s)", c.args, code, c.code, stderr)
		}
		text := strings.Join(strings.Fields(stdout+stderr), " ")
		for _, part := range c.says {
			if !strings.Contains(text, part) {
				t.Errorf("%s: %q lacks %q", c.args, text, part)
			}
		}
	}
}

// TestExplainIsTheSameForAnyWorkers: and for a seed.
func TestExplainIsTheSameForAnyWorkers(t *testing.T) {
	sheet := bcgAllocated(t, nil)
	run := func(more ...string) string {
		stdout, stderr, code := call(t, "", append([]string{"explain", sheet, "--measure", "odds ratio", "--on", "latitude*allocation", "--permutations", "300"}, more...)...)
		if code != codeDone {
			t.Fatalf("exit %d: %s", code, stderr)
		}
		return stdout
	}
	if one := run("--workers", "1"); one != run("--workers", "3") || one == run("--seed", "2") {
		t.Error("the permutations depend on the workers, or not on the seed")
	}
}

// TestGoldenExplain pins the form of the answer; the numbers are tested in
// meta/explain.
func TestGoldenExplain(t *testing.T) {
	stdout, stderr, code := call(t, "", "explain", bcgAllocated(t, nil), "--measure", "odds ratio", "--on", "latitude*year, allocation", "--subgroups", "allocation", "--at", "latitude=60", "--reference", "allocation=systematic")
	if code != codeDone {
		t.Fatalf("exit %d: %s", code, stderr)
	}
	golden(t, "explain-bcg.txt", stdout)
	for _, line := range strings.Split(stdout, "\n") {
		if width(line) > 100 {
			t.Errorf("%d columns: %s", width(line), line)
		}
	}
}

// TestSubgroupsChart draws blocks at both widths, and refuses what has none.
func TestSubgroupsChart(t *testing.T) {
	sheet := bcgAllocated(t, func(row int, fields []string) {
		if row == 8 {
			fields[7] = ""
		}
	})
	folder := t.TempDir()
	for _, width := range []string{"180", "85"} {
		path := filepath.Join(folder, width+".svg")
		if _, stderr, code := call(t, "", "chart", "subgroups", sheet, "--subgroups", "allocation", "--measure", "odds ratio", "--width", width, "--out", path); code != codeDone {
			t.Fatalf("exit %d: %s", code, stderr)
		}
		content, err := os.ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		for _, part := range []string{">systematic<", ">Pooled, 4 studies<", ">No entry in allocation<", ">All 13 studies<", "Between groups:"} {
			if !strings.Contains(string(content), part) {
				t.Errorf("%s mm: the chart lacks %q", width, part)
			}
		}
	}
	for args, says := range map[string]string{"--subgroups study": "13 different entries", "": "--subgroups COLUMN", "--subgroups where": "no column"} {
		_, stderr, code := call(t, "", append([]string{"chart", "subgroups", sheet, "--out", filepath.Join(folder, "x.svg")}, strings.Fields(args)...)...)
		if code == codeDone || !strings.Contains(stderr, says) {
			t.Errorf("%s: exit %d, %s", args, code, stderr)
		}
	}
}

// TestRegressionChart draws the line at both widths, and refuses categories alone.
func TestRegressionChart(t *testing.T) {
	sheet, folder := bcgAllocated(t, nil), t.TempDir()
	for _, width := range []string{"180", "85"} {
		path := filepath.Join(folder, width+".svg")
		if _, stderr, code := call(t, "", "chart", "regression", sheet, "--on", "allocation, latitude", "--measure", "odds ratio", "--width", width, "--out", path); code != codeDone {
			t.Fatalf("exit %d: %s", code, stderr)
		}
		content, err := os.ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		for _, part := range []string{">latitude<", "Trial 12", "not adjusted", "Odds ratio"} {
			if !strings.Contains(strings.Join(strings.Fields(string(content)), " "), part) {
				t.Errorf("%s mm: the chart lacks %q", width, part)
			}
		}
	}
	for args, says := range map[string]string{"--on allocation": "chart subgroups", "": "--on COLUMN", "--on latitudes": "did you mean latitude", "--on study": "13 different texts"} {
		_, stderr, code := call(t, "", append([]string{"chart", "regression", sheet, "--out", filepath.Join(folder, "x.svg")}, strings.Fields(args)...)...)
		if code == codeDone || !strings.Contains(stderr, says) {
			t.Errorf("%s: exit %d, %s", args, code, stderr)
		}
	}
}

// TestExplainDependence: estimates of one study in two groups are told, and what needs
// independent ones is refused beside a model of dependence.
func TestExplainDependence(t *testing.T) {
	path := filepath.Join(t.TempDir(), "dependent.csv")
	sheet := "study,estimate,se,dose,arm\nA,0.5,0.2,1,x\nA,0.6,0.25,2,y\nB,0.1,0.2,1,x\nB,0.3,0.2,2,y\nC,0.2,0.3,1,x\nD,0.9,0.3,3,y\nE,0.8,0.3,3,y\n"
	if err := os.WriteFile(path, []byte(sheet), 0o644); err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		args string
		code int
		says []string
	}{
		{"--subgroups arm", codeDone, []string{"A has estimates in several groups"}},
		{"--subgroups arm --dependence three-level", codeDone, []string{"A has estimates in several groups", "Between groups"}},
		{"--subgroups arm --shared-tau --dependence robust", codeData, []string{"No comparison by arm", "a study of its own"}},
		{"--on dose --dependence three-level", codeData, []string{"No regression", "a study of its own"}},
		{"--on dose", codeDone, []string{"all 5,040 permutations"}},
	} {
		stdout, stderr, code := call(t, "", append([]string{"explain", path, "--measure", "mean difference"}, strings.Fields(c.args)...)...)
		text := strings.Join(strings.Fields(stdout), " ")
		for _, part := range c.says {
			if code != c.code || !strings.Contains(text, part) {
				t.Errorf("%s: exit %d, %q lacks %q (%s)", c.args, code, text, part, stderr)
			}
		}
	}
}

// TestExplainSeveral: evidence against d differences at once reaches at most
// (2e)^(d/2) : 1, the chi-square form at 0: 5.4 : 1 for two, 13 : 1 for three.
func TestExplainSeveral(t *testing.T) {
	demo := []string{"explain", data + "demo.xlsx", "--outcome", "flare within 24 weeks"}
	for _, c := range []struct {
		args []string
		says string
	}{
		{[]string{"--subgroups", "risk of bias"}, "5.4 : 1 for the 2 weighed here together"},
		{[]string{"--on", "year, risk of bias"}, "13 : 1 for the 3 weighed here together"},
		{[]string{"--subgroups", "setting"}, ""},
		{[]string{"--subgroups", "risk of bias", "--evidence", "student-t"}, ""},
	} {
		stdout, stderr, code := call(t, "", append(demo, c.args...)...)
		text := strings.Join(strings.Fields(stdout), " ")
		if code != codeDone || !strings.Contains(text, c.says) || c.says == "" && strings.Contains(text, "weighed here together") {
			t.Errorf("%v: exit %d, want %q in\n%s%s", c.args, code, c.says, stdout, stderr)
		}
	}
}

// TestExplainLongCategories: the table of fitted values is no wider than an answer,
// however long a category's name; Markdown has the name whole.
func TestExplainLongCategories(t *testing.T) {
	long := "hospital wards in three countries of the north, with long names"
	sheet := "study,estimate,se,year,setting\n"
	for i, setting := range []string{long, "home", "home", long, "home", long} {
		sheet += fmt.Sprintf("%s,%v,0.2,%d,\"%s\"\n", strings.Repeat("S", i+1), 0.1*float64(i), 2001+i, setting)
	}
	for _, on := range []string{"setting", "year, setting", "year, setting, setting*year"} {
		args := []string{"explain", "-", "--measure", "mean difference", "--permutations", "0", "--on", on}
		stdout, stderr, code := call(t, sheet, args...)
		if code != codeDone {
			t.Fatalf("exit %d, %s", code, stderr)
		}
		for line := range strings.Lines(stdout) {
			if n := len([]rune(strings.TrimRight(line, "\n"))); n > 100 {
				t.Errorf("%s: %d columns: %s", on, n, line)
			}
		}
		if whole, _, _ := call(t, sheet, append(args, "--format", "markdown")...); !strings.Contains(whole, "| "+long+" |") {
			t.Errorf("%s: the name is cut in\n%s", on, whole)
		}
	}
}
