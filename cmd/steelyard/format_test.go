package main

import (
	"encoding/csv"
	"encoding/json"
	"os"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"
)

// tableCommands are the calls that write a table about a sheet.
var tableCommands = [][]string{
	{"pool"}, {"pool", "--all-methods"}, {"cumulative"}, {"leave-one-out"}, {"influence"}, {"subsets"}, {"next-trial", "--se", "0.2"}, {"check"},
}

// csvRows runs a call with --format csv and returns its rows by column.
func csvRows(t *testing.T, stdin string, args ...string) []map[string]string {
	t.Helper()
	stdout, stderr, code := call(t, stdin, append(args, "--format", "csv")...)
	if code != codeDone && code != codeData {
		t.Fatalf("%v: exit %d, %s", args, code, stderr)
	}
	all, err := csv.NewReader(strings.NewReader(stdout)).ReadAll()
	if err != nil {
		t.Fatalf("%v: %v", args, err)
	}
	var rows []map[string]string
	for _, cells := range all[1:] {
		row := map[string]string{}
		for i, name := range all[0] {
			row[name] = cells[i]
		}
		rows = append(rows, row)
	}
	return rows
}

// TestCSVHoldsTheDocumentsNumbers: the numbers of the CSV are those of the JSON, to the
// last digit.
func TestCSVHoldsTheDocumentsNumbers(t *testing.T) {
	d := pooled(t, data+"demo.xlsx")
	rows := csvRows(t, "", "pool", data+"demo.xlsx")
	if len(rows) != len(d.Outcomes) {
		t.Fatalf("%d rows for %d outcomes", len(rows), len(d.Outcomes))
	}
	for i, o := range d.Outcomes {
		for name, want := range map[string]float64{
			"pooled_estimate": o.Pooled.Estimate, "pooled_ci_low": o.Pooled.Low, "pooled_ln_evidence": o.Pooled.LnEvidence,
			"heterogeneity_q": o.Heterogeneity.Q, "k": float64(o.K),
		} {
			if got, err := strconv.ParseFloat(rows[i][name], 64); err != nil || got != want {
				t.Errorf("%s: %s is %q, want %v", o.Outcome, name, rows[i][name], want)
			}
		}
		if rows[i]["outcome"] != o.Outcome {
			t.Errorf("row %d is of %q, want %q", i, rows[i]["outcome"], o.Outcome)
		}
	}
	stdout, _, _ := call(t, "", "cumulative", data+"demo.xlsx", "--format", "json")
	if err := json.Unmarshal([]byte(stdout), &d); err != nil {
		t.Fatal(err)
	}
	steps := csvRows(t, "", "cumulative", data+"demo.xlsx")
	at := 0
	for _, o := range d.Outcomes {
		for _, e := range o.Cumulative {
			if got, _ := strconv.ParseFloat(steps[at]["estimate"], 64); got != e.Estimate || steps[at]["study"] != e.Study {
				t.Errorf("%s: %v of %s, want %v of %s", o.Outcome, got, steps[at]["study"], e.Estimate, e.Study)
			}
			at++
		}
	}
	if at != len(steps) {
		t.Errorf("%d rows, want %d", len(steps), at)
	}
}

// TestCSVKeepsOutcomesWithoutResult: an outcome that could not be pooled has a row that
// says why.
func TestCSVKeepsOutcomesWithoutResult(t *testing.T) {
	sheet := "study,outcome,estimate,se\nA,pain,1,0.5\nB,pain,2,0.5\nC,sleep,,\n"
	for _, command := range []string{"pool", "cumulative", "leave-one-out", "influence"} {
		rows := csvRows(t, sheet, command, "-")
		last := rows[len(rows)-1]
		if last["outcome"] != "sleep" || last["problem"] == "" {
			t.Errorf("%s: the last row is %v", command, last)
		}
	}
}

// hostileNames are names of studies that other programs would take for more.
var hostileNames = []string{
	"<script>alert(1)</script>", `=HYPERLINK("http://evil.example","x")`, "](javascript:alert(1))", "![x](http://evil.example/a.png)",
	"\u202egnp.exe", "@SUM(A1)", "+1-1|cmd", "-2+3", "＝1+1", "`code` *bold* _em_ ~~s~~ | a | b", "# head", "1. one", "www.evil.example a@b.example",
	strings.Repeat("long ", 400),
}

func hostileSheet(t *testing.T) string {
	t.Helper()
	var out strings.Builder
	w := csv.NewWriter(&out)
	_ = w.Write([]string{"study", "outcome", "measure", "events treated", "total treated", "events control", "total control"})
	for i, name := range hostileNames {
		_ = w.Write([]string{name, hostileNames[0], "risk ratio", strconv.Itoa(5 + i), "100", strconv.Itoa(9 + i), "100"})
	}
	w.Flush()
	path := filepath.Join(t.TempDir(), "hostile.csv")
	if err := os.WriteFile(path, []byte(out.String()), 0o644); err != nil {
		t.Fatal(err)
	}
	return path
}

// TestHostileNamesStayTextInTables: no cell of a CSV starts like a formula, and no
// Markdown holds markup, links or images of a name.
func TestHostileNamesStayTextInTables(t *testing.T) {
	sheet := hostileSheet(t)
	// In CommonMark a backslash takes the meaning from punctuation: what is left unescaped
	// counts.
	escaped := regexp.MustCompile(`\\[[:punct:]]|&(#\d+|lt|gt|amp);`)
	live := regexp.MustCompile("[<`*_~#!\\[\\]]|://|www\\.|[a-z]@[a-z]")
	for _, command := range tableCommands {
		args := append([]string{command[0], sheet}, command[1:]...)
		for _, row := range csvRows(t, "", args...) {
			for name, cell := range row {
				if _, err := strconv.ParseFloat(cell, 64); err != nil && strings.ContainsAny(cell[:min(1, len(cell))], "=+-@\t\r") {
					t.Errorf("%v: %s is %q", command, name, cell)
				}
				if strings.ContainsRune(cell, '\u202e') {
					t.Errorf("%v: %s turns the direction of writing: %q", command, name, cell)
				}
			}
		}
		text, stderr, code := call(t, "", append(args, "--format", "markdown")...)
		if code != codeDone && code != codeData {
			t.Fatalf("%v: %s", command, stderr)
		}
		for _, line := range strings.Split(text, "\n") {
			line = strings.TrimPrefix(escaped.ReplaceAllString(line, ""), "## ")
			if found := live.FindString(line); found != "" {
				t.Errorf("%v: %q is live in %.200q", command, found, line)
			}
		}
	}
}

// TestMarkdownTablesAreWhole: each row of a pipe table has as many cells as its head.
func TestMarkdownTablesAreWhole(t *testing.T) {
	sheet := hostileSheet(t)
	for _, command := range tableCommands {
		text, _, _ := call(t, "", append([]string{command[0], sheet, "--format", "markdown"}, command[1:]...)...)
		cells, tables := 0, 0
		for _, line := range strings.Split(text, "\n") {
			n := strings.Count(line, "|") - strings.Count(line, `\|`)
			switch {
			case !strings.HasPrefix(line, "|"):
				cells = 0
			case cells == 0:
				cells, tables = n, tables+1
			case n != cells:
				t.Errorf("%v: %d cells under a head of %d in %.200q", command, n, cells, line)
			}
		}
		if tables == 0 && command[0] != "check" {
			t.Errorf("%v: no table in\n%.500s", command, text)
		}
	}
}

func TestGoldenMarkdown(t *testing.T) {
	for _, command := range []string{"pool", "leave-one-out"} {
		text, _, _ := call(t, "", command, data+"checks/bcg_counts.csv", "--format", "markdown")
		golden(t, "bcg-"+command+".md", text)
	}
}

// TestRecords: the rules for columns, on a small document.
func TestRecords(t *testing.T) {
	type pair struct {
		Prior     float64 `json:"prior"`
		Posterior float64 `json:"posterior"`
	}
	type inner struct {
		Name  string   `json:"name"`
		Value *float64 `json:"value,omitempty"`
		Tags  []string `json:"tags"`
		Pairs []pair   `json:"beliefs"`
	}
	type outer struct {
		Outcome string  `json:"outcome"`
		List    []inner `json:"list"`
	}
	half := 0.5
	content := records([]outer{
		{"a", []inner{{"=x", &half, []string{"p", "q"}, nil}, {"y", nil, nil, []pair{{0.25, 0.75}}}}},
		{"b", nil},
	}, "list")
	want := "outcome,name,value,tags,beliefs_0.25\na,'=x,0.5,p; q,\na,y,,,0.75\nb,,,,\n"
	if string(content) != want {
		t.Errorf("got\n%s\nwant\n%s", content, want)
	}
	empty := records(struct {
		List []inner `json:"list"`
	}{[]inner{}}, "list")
	if string(empty) != "name\n" {
		t.Errorf("an empty list gives %q, want its heads", empty)
	}
}
