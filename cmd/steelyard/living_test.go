package main

import (
	"bytes"
	"context"
	"encoding/json"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/santhosh-tekuri/jsonschema/v6"

	"steelyard/ingest"
	"steelyard/ingest/ledger"
	"steelyard/meta/synthesis"
)

// trials returns the first n of the 13 published BCG trials as a sheet.
func trials(t testing.TB, n int) []byte {
	t.Helper()
	text, err := os.ReadFile(data + "checks/bcg_counts.csv")
	if err != nil {
		t.Fatal(err)
	}
	lines := bytes.SplitAfter(text, []byte("\n"))
	return bytes.Join(lines[:n+1], nil)
}

// atNoon holds the clock, a day on with each call.
func atNoon(t testing.TB) {
	t.Helper()
	days := 0
	clock = func() time.Time {
		days++
		return time.Date(2026, 6, days/4+1, 12, 0, 0, 0, time.UTC)
	}
	t.Cleanup(func() { clock = time.Now })
}

// livingFolder is a folder with the sheet trials.csv.
type livingFolder struct {
	t             testing.TB
	sheet, review string
}

func newLiving(t testing.TB) *livingFolder {
	t.Helper()
	dir := t.TempDir()
	return &livingFolder{t, filepath.Join(dir, "trials.csv"), filepath.Join(dir, "review")}
}

func (f *livingFolder) save(content []byte) {
	f.t.Helper()
	if err := os.WriteFile(f.sheet, content, 0o644); err != nil {
		f.t.Fatal(err)
	}
}

// living runs a subcommand with --in, and wants an exit code.
func (f *livingFolder) living(want int, args ...string) (stdout, stderr string) {
	f.t.Helper()
	stdout, stderr, code := call(f.t, "", append([]string{"living", args[0], "--in", f.review}, args[1:]...)...)
	if code != want {
		f.t.Fatalf("living %v: exit %d, want %d\n%s\n%s", args, code, want, stdout, stderr)
	}
	return stdout, stderr
}

// TestLivingCycle goes through a cycle: the report holds the numbers of pool, in text
// and JSON, and every document is valid by its schema.
func TestLivingCycle(t *testing.T) {
	atNoon(t)
	f := newLiving(t)
	f.save(trials(t, 9))
	f.living(codeDone, "start", f.sheet, "--searched", "2026-05-01", "--by", "Ada", "--note", "first search", "--baseline", "usual 0.05")
	before := pooled(t, f.sheet).Outcomes[0]
	f.save(bytes.Replace(trials(t, 13), []byte(",62,"), []byte(",61,"), 1))
	now := pooled(t, f.sheet).Outcomes[0]

	text, _ := f.living(codeTrigger, "update", f.sheet, "--searched", "2026-06-01", "--fail-on-trigger")
	golden(t, "living-update.txt", hashless(text))
	history, _ := f.living(codeDone, "history")
	golden(t, "living-history.txt", hashless(history))
	markdown, _ := f.living(codeDone, "compare", "1", "2", "--format", "markdown")
	golden(t, "living-compare.md", markdown)
	verify, _ := f.living(codeDone, "verify")
	golden(t, "living-verify.txt", verify)
	show, _ := f.living(codeDone, "show", "1")
	if !strings.Contains(show, "Computed again    the same numbers") || !strings.Contains(show, "first search") || !strings.Contains(show, "baseline usual 0.05 (flag)") {
		t.Errorf("show 1:\n%s", show)
	}

	var d synthesis.ChangeDocument
	f.document("steelyard-change-1", &d, "compare")
	o := d.Outcomes[0]
	for name, pair := range map[string][2]float64{
		"previous estimate": {o.Previous.Pooled.Estimate, before.Pooled.Estimate}, "current estimate": {o.Current.Pooled.Estimate, now.Pooled.Estimate},
		"previous limit": {o.Previous.Pooled.Low, before.Pooled.Low}, "current limit": {o.Current.Pooled.High, now.Pooled.High},
		"previous τ²": {*o.Previous.Tau2, before.Tau.Tau2}, "current prediction": {o.Current.Prediction.High, now.Prediction.High},
		"current evidence":  {o.Current.Pooled.LnEvidence, now.Pooled.LnEvidence},
		"previous weight":   {*o.Weights[0].Before, before.Studies[0].Weight},
		"current weight":    {*o.Weights[12].After, now.Studies[12].Weight},
		"absolute, by hand": {o.Absolute[0].After.Difference.Value, 1000 * 0.05 * (math.Exp(now.Pooled.Estimate) - 1)},
	} {
		if !(math.Abs(pair[0]-pair[1]) < 1e-9) {
			t.Errorf("%s: %v, want %v", name, pair[0], pair[1])
		}
	}
	if !d.Material || len(o.Rows.New) != 4 || len(o.Rows.Changed) != 1 || o.Rows.Changed[0].Cell != "C5" || o.Weights[12].Before != nil {
		t.Errorf("material %v, rows %+v", d.Material, o.Rows)
	}
	f.document("steelyard-history-1", &synthesis.HistoryDocument{}, "history")
	f.document("steelyard-state-1", &synthesis.StateReport{}, "show", "2")
	var v synthesis.VerifyDocument
	f.document("steelyard-verify-1", &v, "verify")
	if !v.Intact || v.States != 2 || v.Computed != 2 || len(v.Problems) != 0 {
		t.Errorf("verify: %+v", v)
	}
}

// hashless masks checksums, which hold the last digits of every number and so differ
// between processors.
func hashless(text string) string {
	return regexp.MustCompile(`\b[0-9a-f]{8}\b`).ReplaceAllString(text, "········")
}

// document runs a subcommand with JSON, validates it by its schema and reads it.
func (f *livingFolder) document(schema string, into any, args ...string) {
	f.t.Helper()
	stdout, _ := f.living(codeDone, append(args, "--format", "json")...)
	compiled, err := jsonschema.NewCompiler().Compile("../../meta/synthesis/" + schema + ".schema.json")
	if err != nil {
		f.t.Fatal(err)
	}
	value, err := jsonschema.UnmarshalJSON(strings.NewReader(stdout))
	if err != nil {
		f.t.Fatal(err)
	}
	if err := compiled.Validate(value); err != nil {
		f.t.Errorf("living %v: %v", args, err)
	}
	if err := json.Unmarshal([]byte(stdout), into); err != nil {
		f.t.Fatal(err)
	}
}

// TestLivingQuiet: a search that brought nothing is a state of its own, and no trigger
// is met.
func TestLivingQuiet(t *testing.T) {
	f := newLiving(t)
	f.save(trials(t, 8))
	f.living(codeDone, "start", f.sheet)
	text, _ := f.living(codeDone, "update", f.sheet, "--fail-on-trigger")
	if !strings.Contains(text, "Nothing has changed: sheet, plan and results are as before.") || !strings.Contains(text, "recorded as state 2") {
		t.Errorf("nothing new:\n%s", text)
	}
	f.save(append(trials(t, 8), "Tiny,1990,1,20,1,20,44\n"...))
	text, _ = f.living(codeDone, "update", f.sheet, "--fail-on-trigger", "--trigger-information", "0.9", "--trigger-people", "10")
	if !strings.Contains(text, "Nothing material has changed: no trigger is met.") || !strings.Contains(text, "threshold 90%, flag") {
		t.Errorf("with a threshold of 90%%:\n%s", text)
	}
	text, stderr := f.living(codeDone, "update", f.sheet)
	if !strings.Contains(text, "taken over from state 3: --trigger-information 0.9, --trigger-people 10") || !strings.Contains(text, "threshold 90%, flag") || stderr != "" {
		t.Errorf("settings are not taken over:\n%s%s", text, stderr)
	}
	if text, _ = f.living(codeDone, "update", f.sheet, "--anew"); strings.Contains(text, "taken over") || !strings.Contains(text, "threshold 20%, default") {
		t.Errorf("--anew:\n%s", text)
	}
}

// TestLivingUpwards: without --in the nearest folder upwards is taken.
func TestLivingUpwards(t *testing.T) {
	f := newLiving(t)
	f.save(trials(t, 9))
	f.living(codeDone, "start", f.sheet)
	deep := filepath.Join(f.review, "minutes", "2026")
	if err := os.MkdirAll(deep, 0o755); err != nil {
		t.Fatal(err)
	}
	t.Chdir(deep)
	if stdout, stderr, code := call(t, "", "living", "update", f.sheet); code != codeDone || !strings.Contains(stdout, "recorded as state 2") {
		t.Errorf("exit %d: %s%s", code, stdout, stderr)
	}
	t.Chdir(filepath.Dir(f.review))
	if _, stderr, code := call(t, "", "living", "history"); code != codeCall || !strings.Contains(stderr, "name the folder with --in DIR") {
		t.Errorf("above the record: exit %d, %s", code, stderr)
	}
}

// TestLivingRefused: what cannot be done says what to do, and records nothing.
func TestLivingRefused(t *testing.T) {
	f := newLiving(t)
	f.save(trials(t, 9))
	f.living(codeDone, "start", f.sheet)
	empty := filepath.Join(filepath.Dir(f.sheet), "empty.csv")
	if err := os.WriteFile(empty, []byte("study,estimate,se\nA,x,1\n"), 0o644); err != nil {
		t.Fatal(err)
	}
	path := filepath.Join(f.review, "steelyard.ledger")
	whole, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	for _, tt := range []struct {
		args string
		code int
		want string
	}{
		{"start SHEET", codeCall, "holds a ledger already"},
		{"start", codeCall, "which file?"},
		{"updat SHEET", codeCall, "did you mean update?"},
		{"update", codeCall, "which file?"},
		{"update SHEET SHEET", codeCall, "one file is taken"},
		{"update nosuch.csv", codeFile, "there is no such file"},
		{"update -", codeCall, "not standard input"},
		{"update EMPTY", codeData, "nothing can be pooled, so nothing is recorded"},
		{"update SHEET --searched 2026-13-01", codeCall, "is no date"},
		{"update SHEET --searched 2999-01-01", codeCall, "lies ahead of this computer's clock"},
		{"update SHEET --searched=", codeCall, "needs a date"},
		{"update SHEET --trigger-effect 0", codeCall, "is no threshold"},
		{"update SHEET --tau nosuch", codeCall, "is not a known"},
		{"update SHEET --looks 7", codeCall, "give 0 for none, or 100"},
		{"update SHEET --format yaml", codeCall, "is not known"},
		{"history 1", codeCall, "takes none"},
		{"history --outcome pain", codeCall, "one outcome, without a name"},
		{"history --chart f.doc", codeCall, "no format of a chart"},
		{"compare", codeCall, "one state only"},
		{"compare 1 2", codeCall, "there is no state \"2\""},
		{"compare 1 1 1", codeCall, "two states are compared"},
		{"show", codeCall, "which state?"},
		{"show 0", codeCall, "there is no state"},
		{"verify 1", codeCall, "takes no operand"},
		{"watch nosuch.csv", codeFile, "there is no such file"},
	} {
		args := strings.Fields(strings.NewReplacer("SHEET", f.sheet, "EMPTY", empty).Replace(tt.args))
		if tt.args == "updat SHEET" {
			if _, stderr, code := call(t, "", "living", "updat", f.sheet); code != codeCall || !strings.Contains(stderr, tt.want) {
				t.Errorf("%s: exit %d, %s", tt.args, code, stderr)
			}
			continue
		}
		if _, stderr := f.living(tt.code, args...); !strings.Contains(stderr, tt.want) {
			t.Errorf("%s: %q, want %q", tt.args, stderr, tt.want)
		}
	}
	if got, err := os.ReadFile(path); err != nil || !bytes.Equal(got, whole) {
		t.Errorf("the ledger has changed: %v", err)
	}
}

// TestLivingDamage: a changed byte is found with its line, nothing is recorded beside
// it, and a newer format is refused.
func TestLivingDamage(t *testing.T) {
	f := newLiving(t)
	f.save(trials(t, 9))
	f.living(codeDone, "start", f.sheet, "--note", "first search")
	f.living(codeDone, "update", f.sheet, "--looks", "0")
	path := filepath.Join(f.review, "steelyard.ledger")
	whole, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	put := func(content []byte) {
		if err := os.WriteFile(path, content, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	put(bytes.Replace(whole, []byte("first"), []byte("First"), 1))
	if stdout, _ := f.living(codeData, "verify"); !strings.Contains(stdout, "steelyard.ledger line 2: the line is not as it was written") {
		t.Errorf("verify:\n%s", stdout)
	}
	if _, stderr := f.living(codeData, "update", f.sheet); !strings.Contains(stderr, "Nothing was recorded") {
		t.Errorf("update: %s", stderr)
	}
	put(bytes.Replace(whole, []byte("steelyard-ledger 1"), []byte("steelyard-ledger 2"), 1))
	for _, args := range []string{"history", "verify", "update " + f.sheet} {
		if _, stderr := f.living(codeFile, strings.Fields(args)...); !strings.Contains(stderr, "newer than the format 1") {
			t.Errorf("%s: %s", args, stderr)
		}
	}
	put(append(bytes.Clone(whole), "0123 torn"...))
	if stdout, _ := f.living(codeDone, "history"); !strings.Contains(stdout, "the last line was never finished") {
		t.Errorf("history of a torn ledger:\n%s", stdout)
	}
	if stdout, _ := f.living(codeDone, "update", f.sheet, "--looks", "0"); !strings.Contains(stdout, "set aside in steelyard.ledger.torn-1") {
		t.Errorf("update of a torn ledger:\n%s", stdout)
	}
	sheets, err := filepath.Glob(filepath.Join(f.review, "sheets", "*.csv"))
	if err != nil || len(sheets) != 1 {
		t.Fatalf("sheets %v, %v", sheets, err)
	}
	if err := os.WriteFile(sheets[0], []byte("study\n"), 0o644); err != nil {
		t.Fatal(err)
	}
	if stdout, _ := f.living(codeData, "verify"); !strings.Contains(stdout, "has been changed since it was stored") {
		t.Errorf("verify of a changed sheet:\n%s", stdout)
	}
	f.living(codeData, "show", "1")
}

// TestLivingOtherNumbers: a state that another program computed otherwise is reported
// with both numbers.
func TestLivingOtherNumbers(t *testing.T) {
	f := newLiving(t)
	files := &ingest.Files{Sheet: ingest.File{Name: "trials.csv", Data: trials(t, 9)}}
	state, err := ledger.Compute(t.Context(), files, "trials.csv", ledger.Call{})
	if err != nil {
		t.Fatal(err)
	}
	results, studies := ledger.ResultsOf(state.Synthesis)
	results[0].Pooled.Estimate = -0.75
	if _, err := ledger.Start(t.Context(), f.review, "test", ledger.Entry{Files: files, Studies: studies, Record: ledger.Record{At: "2026-01-01T00:00:00Z", Program: "0.0", Results: results}}); err != nil {
		t.Fatal(err)
	}
	f.save(trials(t, 9))
	want := fmt.Sprintf("estimate: recorded -0.75, computed now %.10g", pooled(t, f.sheet).Outcomes[0].Pooled.Estimate)
	for _, args := range []string{"verify", "show 1", "update " + f.sheet} {
		code := codeDone
		if args == "verify" {
			code = codeData
		}
		stdout, _ := f.living(code, strings.Fields(args)...)
		if !strings.Contains(strings.Join(strings.Fields(stdout), " "), want) {
			t.Errorf("%s lacks %q:\n%s", args, want, stdout)
		}
	}
}

// TestLivingChart draws the updates.
func TestLivingChart(t *testing.T) {
	f := newLiving(t)
	for _, n := range []int{5, 9, 13} {
		f.save(trials(t, n))
		if n == 5 {
			f.living(codeDone, "start", f.sheet, "--searched", "2025-01-01")
		} else {
			f.living(codeDone, "update", f.sheet, "--searched", fmt.Sprintf("2025-%02d-01", n-1))
		}
	}
	out := filepath.Join(filepath.Dir(f.sheet), "updates.svg")
	f.living(codeDone, "history", "--chart", out)
	svg, err := os.ReadFile(out)
	if err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{"Evidence at each update of the review", "2025-01-01", "2025-08-01", "2025-12-01", "The review has looked 3 times"} {
		if !strings.Contains(string(svg), want) {
			t.Errorf("the chart lacks %q", want)
		}
	}
}

// safeBuffer is a buffer for two goroutines.
type safeBuffer struct {
	mu sync.Mutex
	b  bytes.Buffer
}

func (s *safeBuffer) Write(p []byte) (int, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	return s.b.Write(p)
}

func (s *safeBuffer) String() string {
	s.mu.Lock()
	defer s.mu.Unlock()
	return s.b.String()
}

// TestLivingWatch: the sheet is read again when it has rested, half a sheet is waited
// out, nothing is recorded, and ctrl-C ends with 130.
func TestLivingWatch(t *testing.T) {
	pause, rest := watchPause, watchRest
	watchPause, watchRest = 5*time.Millisecond, 800*time.Millisecond
	defer func() { watchPause, watchRest = pause, rest }()
	f := newLiving(t)
	f.save(trials(t, 9))
	f.living(codeDone, "start", f.sheet)
	record := func() []byte {
		text, err := os.ReadFile(filepath.Join(f.review, "steelyard.ledger"))
		if err != nil {
			t.Fatal(err)
		}
		return text
	}
	whole := record()
	ctx, cancel := context.WithCancel(t.Context())
	defer cancel()
	var out, errs safeBuffer
	code := make(chan int)
	go func() {
		code <- run(ctx, []string{"steelyard", "living", "watch", f.sheet, "--in", f.review}, streams{in: strings.NewReader(""), out: &out, err: &errs})
	}()
	wait := func(what string) {
		t.Helper()
		for i := 0; !strings.Contains(out.String(), what); i++ {
			if i > 2000 {
				t.Fatalf("no %q in\n%s\n%s", what, out.String(), errs.String())
			}
			time.Sleep(5 * time.Millisecond)
		}
	}
	wait("Nothing has changed")
	for n := 10; n <= 13; n++ { // saved piece by piece, each a whole sheet of its own
		f.save(trials(t, n)[:len(trials(t, n))-9])
		time.Sleep(60 * time.Millisecond)
	}
	if err := os.Remove(f.sheet); err != nil { // as programs do that write a file anew
		t.Fatal(err)
	}
	time.Sleep(20 * time.Millisecond)
	f.save(trials(t, 13))
	wait("New: 4 rows")
	if strings.Contains(out.String(), "New: 1 row") || errs.String() != "steelyard: watching "+f.sheet+"; nothing is recorded; end with ctrl-C\n" {
		t.Errorf("a half-saved sheet was read:\n%s\n%s", out.String(), errs.String())
	}
	cancel()
	if got := <-code; got != codeInterrupted {
		t.Errorf("exit %d, want %d", got, codeInterrupted)
	}
	if !bytes.Equal(record(), whole) {
		t.Error("watching wrote to the ledger")
	}
}

// BenchmarkLiving measures an update of a review of 50 studies with 200 earlier states,
// and the history of 2,000 states.
func BenchmarkLiving(b *testing.B) {
	grown := func(n int) []byte {
		var text bytes.Buffer
		text.WriteString("study,year,events treated,total treated,events control,total control\n")
		for i := range n {
			fmt.Fprintf(&text, "Study %d,%d,%d,%d,%d,%d\n", i, 1950+i, 10+i%7, 100+i, 20+i%5, 101+i)
		}
		return text.Bytes()
	}
	var last ledger.Entry
	entry := func(i int) ledger.Entry {
		files := &ingest.Files{Sheet: ingest.File{Name: "trials.csv", Data: grown(10 + min(40, i/5))}}
		state, err := ledger.Compute(context.Background(), files, "trials.csv", ledger.Call{})
		if err != nil {
			b.Fatal(err)
		}
		e := ledger.Entry{Files: files, Record: ledger.Record{At: fmt.Sprintf("2026-01-01T00:%02d:%02dZ", i/60, i%60), Program: "0.1"}}
		e.Record.Results, e.Studies = ledger.ResultsOf(state.Synthesis)
		return e
	}
	fill := func(f *livingFolder, states int) {
		b.Helper()
		if _, err := ledger.Start(context.Background(), f.review, "bench", entry(0)); err != nil {
			b.Fatal(err)
		}
		store, err := ledger.Hold(context.Background(), f.review, "bench")
		if err != nil {
			b.Fatal(err)
		}
		defer store.Close()
		for i := 1; i < states; i++ {
			if i <= 200 {
				last = entry(i)
			}
			if _, _, err := store.Append(last); err != nil {
				b.Fatal(err)
			}
		}
	}
	b.Run("command=update/states=200", func(b *testing.B) {
		f := newLiving(b)
		fill(f, 200)
		f.save(grown(50))
		for b.Loop() {
			f.living(codeDone, "update", f.sheet)
		}
	})
	b.Run("command=history/states=2000", func(b *testing.B) {
		f := newLiving(b)
		fill(f, 2000)
		for b.Loop() {
			f.living(codeDone, "history")
		}
	})
}
