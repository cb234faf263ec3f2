package main

import (
	"bytes"
	"context"
	"encoding/csv"
	"encoding/json"
	"fmt"
	"io"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"steelyard/meta/synthesis"
)

// bulkKind is a kind of table: its header after the name of the set, and a row's
// numbers.
type bulkKind struct {
	name, header string
	row          func(random *rand.Rand) string
}

var bulkKinds = []bulkKind{
	{"estimate and se", "study,estimate,se", func(r *rand.Rand) string {
		return fmt.Sprintf("%.*f,%.*f", 2+r.IntN(10), 0.6*r.NormFloat64(), 2+r.IntN(10), 0.05+r.Float64())
	}},
	{"odds ratio with limits", "study,odds ratio,95% ci low,95% ci high", func(r *rand.Rand) string {
		y, s := 0.6*r.NormFloat64(), 0.1+r.Float64()
		return fmt.Sprintf("%.5g,%.5g,%.5g", math.Exp(y), math.Exp(y-1.96*s), math.Exp(y+1.96*s))
	}},
	{"log hazard ratio with 90 % limits", "study,log hr,log hr ci low,log hr ci high,ci level", func(r *rand.Rand) string {
		y, s := 0.6*r.NormFloat64(), 0.1+r.Float64()
		return fmt.Sprintf("%.5f,%.5f,%.5f,0.9", y, y-1.645*s, y+1.645*s)
	}},
	{"counts", "study,events treated,total treated,events control,total control", func(r *rand.Rand) string {
		n1, n2 := 20+r.IntN(200), 20+r.IntN(200)
		return fmt.Sprintf("%d,%d,%d,%d", r.IntN(n1/3), n1, r.IntN(n2/3), n2)
	}},
	{"means", "study,mean treated,sd treated,total treated,mean control,sd control,total control", func(r *rand.Rand) string {
		return fmt.Sprintf("%.2f,%.2f,%d,%.2f,%.2f,%d", 10+r.NormFloat64(), 1+r.Float64(), 10+r.IntN(50), 10+r.NormFloat64(), 1+r.Float64(), 10+r.IntN(50))
	}},
}

// bulkTables returns the same random sets as a table for bulk and as a sheet for
// pool, which takes each set for an outcome.
func bulkTables(kind bulkKind, sets int) (table, sheet string) {
	random := rand.New(rand.NewPCG(13, 20))
	var t, s strings.Builder
	fmt.Fprintf(&t, "set,%s\n", kind.header)
	fmt.Fprintf(&s, "outcome,%s\n", kind.header)
	for set := range sets {
		for study := range 1 + random.IntN(14) {
			row := kind.row(random)
			fmt.Fprintf(&t, "g%d,study %d,%s\n", set, study, row)
			fmt.Fprintf(&s, "g%d,study %d,%s\n", set, study, row)
		}
	}
	return t.String(), s.String()
}

// bulkRows runs bulk with JSON and returns its objects by set.
func bulkRows(t *testing.T, stdin string, args ...string) (map[string]map[string]any, []string) {
	t.Helper()
	stdout, stderr, code := call(t, stdin, append([]string{"bulk", "-", "--format", "json"}, args...)...)
	if code != codeDone {
		t.Fatalf("bulk %v: exit %d, %s", args, code, stderr)
	}
	rows, order := map[string]map[string]any{}, []string(nil)
	for _, line := range strings.Split(strings.TrimSpace(stdout), "\n") {
		var row map[string]any
		if err := json.Unmarshal([]byte(line), &row); err != nil {
			t.Fatalf("%v in %s", err, line)
		}
		name, _ := row["set"].(string)
		rows[name], order = row, append(order, name)
	}
	return rows, order
}

// TestBulkEqualsPool: for every set of every kind of table, bulk gives the numbers
// that pool gives for the set alone, bit for bit.
func TestBulkEqualsPool(t *testing.T) {
	for _, kind := range bulkKinds {
		for _, settings := range [][]string{nil, {"--effects", "common"}, {"--tau", "dersimonian-laird", "--interval", "wald", "--level", "0.9"},
			{"--tau", "paule-mandel", "--interval", "hartung-knapp", "--evidence", "student-t"}} {
			table, sheet := bulkTables(kind, 15)
			got, _ := bulkRows(t, table, settings...)
			stdout, stderr, code := call(t, sheet, append([]string{"pool", "-", "--format", "json"}, settings...)...)
			var want synthesis.Document
			if err := json.Unmarshal([]byte(stdout), &want); err != nil {
				t.Fatalf("pool: exit %d, %s, %v", code, stderr, err)
			}
			if len(want.Outcomes) != len(got) || len(got) != 15 {
				t.Fatalf("%s %v: %d sets from bulk, %d outcomes from pool", kind.name, settings, len(got), len(want.Outcomes))
			}
			for _, o := range want.Outcomes {
				sameNumbers(t, kind.name+" "+strings.Join(settings, " "), got[o.Outcome], &o)
			}
		}
	}
}

// sameNumbers compares a row of bulk with an outcome of pool.
func sameNumbers(t *testing.T, what string, got map[string]any, o *synthesis.OutcomeDocument) {
	t.Helper()
	if o.ResultDocument == nil || got == nil {
		t.Errorf("%s, %s: pool %v, bulk %v", what, o.Outcome, o.Problem, got)
		return
	}
	p := o.Pooled
	want := map[string]float64{"k": float64(o.K), "estimate": p.Estimate, "se": p.SE, "ci_low": p.Low, "ci_high": p.High,
		"p": p.P, "ln_p": p.LnP, "ln_evidence": p.LnEvidence, "steps": p.Steps, "tau2": 0, "i2": 0}
	if o.Tau != nil && p.Effects == "random" {
		want["tau2"] = o.Tau.Tau2
	}
	if o.Heterogeneity != nil && o.Heterogeneity.I2Tau != nil {
		want["i2"] = o.Heterogeneity.I2Tau.Value
	}
	for name, value := range want {
		if got[name] != value {
			t.Errorf("%s, %s: %s = %v, pool gives %v", what, o.Outcome, name, got[name], value)
		}
	}
}

// TestBulkOrder: the results come in the order of the table whatever the number of
// workers, and CSV has the numbers of JSON.
func TestBulkOrder(t *testing.T) {
	table, _ := bulkTables(bulkKinds[0], 4000)
	one, _, _ := call(t, table, "bulk", "-", "--workers", "1")
	many, _, _ := call(t, table, "bulk", "-", "--workers", "7")
	if one != many {
		t.Error("the output of one worker and of seven differ")
	}
	rows, order := bulkRows(t, table)
	for i, name := range order {
		if name != fmt.Sprintf("g%d", i) {
			t.Fatalf("set %d is %s", i, name)
		}
	}
	records, err := csv.NewReader(strings.NewReader(one)).ReadAll()
	if err != nil || len(records) != 4001 {
		t.Fatalf("%d rows, %v", len(records), err)
	}
	for _, record := range records[1:] {
		for j, text := range record[1:] {
			if want := fmt.Sprint(rows[record[0]][records[0][j+1]]); text != want {
				if x, _ := strconv.ParseFloat(text, 64); x != rows[record[0]][records[0][j+1]] {
					t.Fatalf("%s, %s: %s, JSON has %s", record[0], records[0][j+1], text, want)
				}
			}
		}
	}
}

// TestBulkGroup: shuffled rows are refused with the remedy, and with --group give the
// results of the sorted table. Nothing stays in the temporary folder.
func TestBulkGroup(t *testing.T) {
	temporary := t.TempDir()
	t.Setenv("TMPDIR", temporary)
	table, _ := bulkTables(bulkKinds[0], 300)
	lines := strings.Split(strings.TrimSpace(table), "\n")
	shuffled := append([]string(nil), lines[1:]...)
	rand.New(rand.NewPCG(1, 1)).Shuffle(len(shuffled), func(i, j int) { shuffled[i], shuffled[j] = shuffled[j], shuffled[i] })
	mixed := lines[0] + "\n" + strings.Join(shuffled, "\n") + "\n"
	_, stderr, code := call(t, mixed, "bulk", "-")
	if code != codeData || !strings.Contains(stderr, "comes a second time") || !strings.Contains(stderr, "--group") {
		t.Errorf("shuffled: exit %d, %s", code, stderr)
	}
	want, _ := bulkRows(t, table)
	got, order := bulkRows(t, mixed, "--group", "--collection")
	if len(got) != len(want) {
		t.Fatalf("%d sets, want %d", len(got), len(want))
	}
	for name, row := range want {
		// The order of the rows within a set differs, and with it the last digits.
		for _, column := range []string{"k", "estimate", "se", "ln_evidence"} {
			a, _ := got[name][column].(float64)
			b, _ := row[column].(float64)
			if math.Abs(a-b) > 1e-9*(1+math.Abs(b)) {
				t.Errorf("%s: %s = %v, want %v", name, column, a, b)
			}
		}
	}
	if order[0] != "g0" || order[1] != "g1" || order[2] != "g10" {
		t.Errorf("order %v, want that of the texts", order[:3])
	}
	if left, err := os.ReadDir(temporary); err != nil || len(left) > 0 {
		t.Errorf("left behind: %v, %v", left, err)
	}
}

// TestBulkBadSets: a set with a bad row is reported by line and reason and left out;
// the others are pooled; the exit code is 1.
func TestBulkBadSets(t *testing.T) {
	table := "set,study,estimate,se\n" +
		"a,1,0.1,0.2\na,2,0.3,0.2\n" +
		"b,1,0.1,zero\nb,2,0.3,0.2\n" + // line 4
		"c,1,0.1,0\n" + // line 6
		"\n" +
		"d,1,0.4,\n" + // line 8
		"e,1,0.1,0.2\ne,2,0.2,0.1\n"
	stdout, stderr, code := call(t, table, "bulk", "-")
	if code != codeData {
		t.Errorf("exit %d", code)
	}
	for _, says := range []string{`line 4: set "b" is left out: se: "zero" is no number`, `line 6: set "c" is left out`, `line 8: set "d" is left out`, "3 of 5"} {
		if !strings.Contains(stderr, says) {
			t.Errorf("%q is not said in:\n%s", says, stderr)
		}
	}
	if rows := strings.Split(strings.TrimSpace(stdout), "\n"); len(rows) != 3 || rows[1][:2] != "a," || rows[2][:2] != "e," {
		t.Errorf("rows %q", rows)
	}
}

// TestBulkBadCalls: what cannot be pooled in bulk is refused by name, with the remedy.
func TestBulkBadCalls(t *testing.T) {
	for _, tt := range []struct {
		table string
		args  []string
		code  int
		says  []string
	}{
		{"study,estimate,se\na,1,2\n", nil, codeData, []string{`no column is headed "set"`, "--set"}},
		{"set,study,note\na,1,2\n", nil, codeData, []string{"no column of numbers", "--column"}},
		{"set,estimate,se,design\na,1,2,cluster\n", nil, codeData, []string{`"design"`, "split the file"}},
		{"set,estimate,se,measure\na,1,2,or\n", nil, codeData, []string{`"measure"`}},
		{"", nil, codeData, []string{"empty"}},
		{"set,estimate,se\n", nil, codeData, []string{"no row follows"}},
		{"set,set,estimate,se\na,a,1,1\n", nil, codeData, []string{"two columns"}},
		{"s\x00e\x00t\x00,\x00", nil, codeData, []string{"UTF-8"}},
		{"set,estimate,se\ra,1,1\r", nil, codeData, []string{"carriage return"}},
		{"set,estimate,se\na,1,1\n", []string{"--format", "text"}, codeCall, []string{"csv or json"}},
		{"set,estimate,se\na,1,1\n", []string{"--evidence", "averaged"}, codeCall, []string{"averaged", "use pool"}},
		{"set,estimate,se\na,1,1\n", []string{"--measure", "rate"}, codeCall, []string{"--null"}},
		{"set,estimate,se\na,1,1\n", []string{"--workers", "0"}, codeCall, []string{"--workers"}},
		{"set,estimate,se\na,1,1\n", []string{"--column", "se=sigma"}, codeData, []string{"sigma"}},
	} {
		stdout, stderr, code := call(t, tt.table, append([]string{"bulk", "-"}, tt.args...)...)
		if code != tt.code || stdout != "" {
			t.Errorf("%q %v: exit %d, %q", tt.table, tt.args, code, stdout)
		}
		for _, says := range tt.says {
			if !strings.Contains(stderr, says) {
				t.Errorf("%q %v: %q is not said in: %s", tt.table, tt.args, says, stderr)
			}
		}
	}
}

// endless is a table without an end; it cancels the call once enough was read.
type endless struct {
	cancel func()
	sets   int
	ready  bytes.Buffer
}

func (e *endless) Read(p []byte) (int, error) {
	if e.sets == 0 {
		e.ready.WriteString("set,estimate,se\n")
	}
	for e.ready.Len() < len(p) {
		fmt.Fprintf(&e.ready, "%d,0.1,0.2\n%d,0.3,0.2\n", e.sets, e.sets)
		e.sets++
	}
	if e.sets > 200_000 {
		e.cancel()
	}
	return e.ready.Read(p)
}

// TestBulkInterrupted: an interrupt ends bulk with exit 130, says that part of the
// output stands, and takes an unfinished file away.
func TestBulkInterrupted(t *testing.T) {
	folder := t.TempDir()
	for _, args := range [][]string{{"bulk", "-"}, {"bulk", "-", "--out", filepath.Join(folder, "out.csv")}, {"bulk", "-", "--group"}} {
		ctx, cancel := context.WithCancel(context.Background())
		var out, errs bytes.Buffer
		code := run(ctx, append([]string{"steelyard"}, args...), streams{in: &endless{cancel: cancel}, out: &out, err: &errs})
		if code != codeInterrupted || !strings.Contains(errs.String(), "interrupted") {
			t.Errorf("%v: exit %d, %s", args, code, errs.String())
		}
	}
	if left, err := os.ReadDir(folder); err != nil || len(left) > 0 {
		t.Errorf("left behind: %v, %v", left, err)
	}
}

// TestBulkCollection: the adjusted p-values are those of the definition, worked out
// here from the p-values, and the columns are explained.
func TestBulkCollection(t *testing.T) {
	table, _ := bulkTables(bulkKinds[0], 400)
	stdout, stderr, code := call(t, table, "bulk", "-", "--collection", "--format", "json")
	if code != codeDone || !strings.Contains(stderr, "Benjamini") || !strings.Contains(stderr, "Efron") || !strings.Contains(stderr, "Caution") {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	var p, adjusted []float64
	decoder := json.NewDecoder(strings.NewReader(stdout))
	for {
		var row struct {
			P        float64  `json:"p"`
			Adjusted float64  `json:"p_adjusted"`
			Rate     *float64 `json:"local_rate"`
		}
		if err := decoder.Decode(&row); err == io.EOF {
			break
		} else if err != nil {
			t.Fatal(err)
		}
		if row.Rate == nil || !(*row.Rate > 0 && *row.Rate <= 1) {
			t.Fatalf("local rate %v", row.Rate)
		}
		p, adjusted = append(p, row.P), append(adjusted, row.Adjusted)
	}
	if len(p) != 400 {
		t.Fatalf("%d rows", len(p))
	}
	for i := range p {
		want := 1.0
		for _, threshold := range p {
			if threshold < p[i] {
				continue
			}
			below := 0
			for _, other := range p {
				if other <= threshold {
					below++
				}
			}
			want = min(want, threshold*float64(len(p))/float64(below))
		}
		if math.Abs(adjusted[i]-want) > 1e-12*want {
			t.Errorf("p %v: adjusted %v, want %v", p[i], adjusted[i], want)
		}
	}
	few, stderr, code := call(t, "set,estimate,se\na,1,1\nb,2,1\n", "bulk", "-", "--collection")
	if code != codeDone || !strings.Contains(stderr, "too few") || !strings.Contains(few, "p_adjusted") {
		t.Errorf("two sets: exit %d, %s%s", code, stderr, few)
	}
}

// TestBulkQuotesAndNames: quoted names, names that look like formulas, other
// delimiters, a byte order mark and columns named by the call.
func TestBulkQuotesAndNames(t *testing.T) {
	stdout, stderr, code := call(t, "\xef\xbb\xbfgene;x;beta;sigma\r\n\"a, \"\"b\"\"\";1;0.1;0.2\r\n=1+1;1;0.1;0.2\r\n", "bulk", "-", "--set", "Gene", "--column", "estimate=beta", "--column", "se=sigma")
	if code != codeDone {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	records, err := csv.NewReader(strings.NewReader(stdout)).ReadAll()
	if err != nil || len(records) != 3 || records[1][0] != `a, "b"` || records[2][0] != "'=1+1" {
		t.Errorf("%v, %v", records, err)
	}
}
