package main

import (
	"bytes"
	"crypto/sha256"
	"encoding/base64"
	"encoding/json"
	"fmt"
	"io/fs"
	"math/rand/v2"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"steelyard/forest/webpage"
	"steelyard/forest/words"
	"steelyard/ingest"
	"steelyard/meta/synthesis"
)

// reportOf writes a report that only shows of a sheet and returns page and results.
func reportOf(t *testing.T, sheet string, args ...string) (page string, results synthesis.Document) {
	t.Helper()
	folder := filepath.Join(t.TempDir(), "out")
	_, stderr, code := call(t, "", append([]string{"report", sheet, "--static", "--out", folder}, args...)...)
	if code != codeDone && code != codeData {
		t.Fatalf("report: exit %d, %s", code, stderr)
	}
	content, err := os.ReadFile(filepath.Join(folder, "report.html"))
	if err != nil {
		t.Fatal(err)
	}
	raw, err := os.ReadFile(filepath.Join(folder, "results.json"))
	if err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal(raw, &results); err != nil {
		t.Fatal(err)
	}
	return string(content), results
}

// withoutFigures leaves the figures out of reports for the time of a test.
func withoutFigures(t *testing.T) {
	t.Helper()
	parts := reportParts
	reportParts = parts[:2:2]
	t.Cleanup(func() { reportParts = parts })
}

// TestReportPolicy: the page's policy allows the one style and the one script by the
// hashes of what stands there, and nothing else; no element has a style of its own, an
// event handler or an address to fetch.
func TestReportPolicy(t *testing.T) {
	withoutFigures(t)
	page, _ := reportOf(t, data+"demo.xlsx")
	policy := regexp.MustCompile(`http-equiv="Content-Security-Policy" content="([^"]*)"`).FindStringSubmatch(page)
	if policy == nil {
		t.Fatal("no policy")
	}
	text := strings.NewReplacer("&#39;", "'", "&#43;", "+").Replace(policy[1])
	checkPolicy(t, page, text)
	if !strings.HasPrefix(text, "default-src 'none';") || strings.Contains(text, "unsafe") || strings.Contains(text, "worker") {
		t.Errorf("the policy is %q", text)
	}
}

// checkPolicy checks the hashes of a page's policy, and that the page needs no more.
func checkPolicy(t *testing.T, page, text string) {
	t.Helper()
	for name, element := range map[string]string{"style-src": `<style>([\s\S]*?)</style>`, "script-src": `<script>([\s\S]*?)</script>`} {
		found := regexp.MustCompile(element).FindAllStringSubmatch(page, -1)
		if len(found) != 1 {
			t.Fatalf("%d elements for %s, want 1", len(found), name)
		}
		sum := sha256.Sum256([]byte(found[0][1]))
		if want := name + " 'sha256-" + base64.StdEncoding.EncodeToString(sum[:]) + "'"; !strings.Contains(text, want) {
			t.Errorf("the policy %q lacks %s", text, want)
		}
	}
	for _, bad := range []string{` style="`, ` src="`, `href="http`, `url(`, `@import`} {
		if strings.Contains(page, bad) {
			t.Errorf("the page holds %s", bad)
		}
	}
	if found := regexp.MustCompile(`<[^>]* on[a-z]+=`).FindString(page); found != "" {
		t.Errorf("the page has an event handler: %s", found)
	}
}

// TestReportNumbers: the page shows the numbers of results.json, as package words writes
// them.
func TestReportNumbers(t *testing.T) {
	withoutFigures(t)
	page, results := reportOf(t, data+"demo.xlsx")
	for _, o := range results.Outcomes {
		display := o.Pooled.Display
		notation := words.Notation{Ratio: true}
		if o.Scale != "log" {
			notation = words.Notation{Decimals: 2}
		}
		for _, want := range []string{
			"<b>" + notation.Value(*display.Estimate) + "</b> (95% interval " + notation.Interval(*display.Low, *display.High) + ")",
			words.NoBreak(words.Odds(o.Pooled.LnEvidence)),
			words.PValue(o.Pooled.LnP),
		} {
			if !strings.Contains(page, want) {
				t.Errorf("%s: the page lacks %q", o.Outcome, want)
			}
		}
		for _, study := range o.Studies {
			if !strings.Contains(page, study.Study) {
				t.Errorf("the page lacks %s", study.Study)
			}
		}
		if len(o.Cumulative) == 0 || len(o.LeaveOneOut) == 0 || o.Beliefs == nil || len(o.Runs) == 0 {
			t.Errorf("%s: results.json lacks a part that the page shows", o.Outcome)
		}
	}
}

// olderBCG writes the BCG trials but for the last two.
func olderBCG(t *testing.T) string {
	t.Helper()
	content, err := os.ReadFile(data + "checks/bcg_counts.csv")
	if err != nil {
		t.Fatal(err)
	}
	lines := strings.SplitAfter(strings.TrimSpace(string(content)), "\n")
	path := filepath.Join(t.TempDir(), "older.csv")
	if err := os.WriteFile(path, []byte(strings.Join(lines[:len(lines)-2], "")), 0o644); err != nil {
		t.Fatal(err)
	}
	return path
}

// TestReportSince: what changed since an earlier sheet is what pool says of the two.
func TestReportSince(t *testing.T) {
	withoutFigures(t)
	page, _ := reportOf(t, data+"checks/bcg_counts.csv", "--since", olderBCG(t))
	before, now := pooled(t, olderBCG(t)).Outcomes[0], pooled(t, data+"checks/bcg_counts.csv").Outcomes[0]
	ratio := words.Notation{Ratio: true}
	changed := page[strings.Index(page, `id="changed"`):]
	for _, o := range []synthesis.OutcomeDocument{before, now} {
		d := o.Pooled.Display
		if want := ratio.Estimate(*d.Estimate, *d.Low, *d.High); !strings.Contains(changed, want) {
			t.Errorf("the section on changes lacks %s", want)
		}
	}
	if without, _ := reportOf(t, data+"checks/bcg_counts.csv"); strings.Contains(without, `id="changed"`) {
		t.Error("a section on changes without an earlier sheet")
	}
}

// TestReportUnstatedBelief: without a stated prior the key numbers hold no probability.
func TestReportUnstatedBelief(t *testing.T) {
	withoutFigures(t)
	unstated, _ := reportOf(t, data+"checks/bcg_counts.csv")
	stated, _ := reportOf(t, data+"checks/bcg_counts.csv", "--prior", "0.2")
	for page, want := range map[string]bool{unstated: false, stated: true} {
		keys := page[strings.Index(page, `<dl class="keys">`):]
		if keys = keys[:strings.Index(keys, "</dl>")]; strings.Contains(keys, "Probability") != want {
			t.Errorf("a probability among the key numbers: %v, want %v", !want, want)
		}
	}
}

// TestReportHostileNames: names stay text on the page.
func TestReportHostileNames(t *testing.T) {
	withoutFigures(t)
	page, _ := reportOf(t, hostileSheet(t))
	if n := strings.Count(page, "<script"); n != 2 {
		t.Errorf("%d script elements, want the data and the script", n)
	}
	for _, bad := range []string{"<script>alert", "\u202e", `href="javascript`, `<img`} {
		if strings.Contains(page, bad) {
			t.Errorf("the page holds %q", bad)
		}
	}
	if !strings.Contains(page, "&lt;script&gt;alert(1)&lt;/script&gt;") {
		t.Error("the name is not there as text")
	}
}

// TestReportFolder: a report is written whole, once more only with --overwrite and with
// the same bytes, replaces nothing that is not its own, and leaves nothing else behind.
func TestReportFolder(t *testing.T) {
	folder := filepath.Join(t.TempDir(), "out")
	sheet := filepath.Join(t.TempDir(), "few.csv")
	if err := os.WriteFile(sheet, []byte("study,year,estimate,se\nA,2001,1,0.5\nB,2002,2,0.5\nC,2003,1.5,0.4\n"), 0o644); err != nil {
		t.Fatal(err)
	}
	write := func(args ...string) (string, int) {
		_, stderr, code := call(t, "", append([]string{"report", sheet, "--static", "--out", folder}, args...)...)
		return stderr, code
	}
	if stderr, code := write(); code != codeDone {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	first := filesIn(t, folder)
	for _, name := range []string{"report.html", "results.json", "audit.xlsx", "manifest.json", "figures/1-forest-180mm.svg", "figures/1-forest-85mm.png", "figures/1-cumulative-180mm.pdf", "figures/1-leave-one-out-85mm.svg"} {
		if first[name] == nil {
			t.Errorf("no %s", name)
		}
	}
	if stderr, code := write(); code != codeCall || !strings.Contains(stderr, "--overwrite") {
		t.Errorf("a second report without --overwrite: exit %d, %s", code, stderr)
	}
	keep := filepath.Join(folder, "notes.txt")
	if err := os.WriteFile(keep, []byte("mine"), 0o644); err != nil {
		t.Fatal(err)
	}
	if stderr, code := write("--overwrite"); code != codeDone {
		t.Fatalf("with --overwrite: exit %d, %s", code, stderr)
	}
	second := filesIn(t, folder)
	if string(second["notes.txt"]) != "mine" || len(second) != len(first)+1 {
		t.Errorf("%d files after %d; the one beside them holds %q", len(second), len(first), second["notes.txt"])
	}
	for name, content := range first {
		if !bytes.Equal(second[name], content) {
			t.Errorf("%s differs from run to run", name)
		}
	}
}

// TestReportLeavesOthersAlone: a file that no manifest names, and a manifest that leads
// out of the folder, stop the report.
func TestReportLeavesOthersAlone(t *testing.T) {
	withoutFigures(t)
	folder, beside := t.TempDir(), filepath.Join(t.TempDir(), "other.txt")
	for path, content := range map[string]string{filepath.Join(folder, "report.html"): "mine", beside: "mine"} {
		if err := os.WriteFile(path, []byte(content), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	if _, stderr, code := call(t, "", "report", data+"demo.xlsx", "--out", folder, "--overwrite"); code != codeCall || !strings.Contains(stderr, "report.html exists") {
		t.Errorf("exit %d, %s", code, stderr)
	}
	if err := os.Remove(filepath.Join(folder, "report.html")); err != nil {
		t.Fatal(err)
	}
	out, err := filepath.Rel(folder, beside)
	if err != nil {
		t.Fatal(err)
	}
	list, err := indented(manifest{Writer: manifestWriter, Files: []manifestFile{{Name: filepath.ToSlash(out)}}})
	if err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(filepath.Join(folder, manifestName), list, 0o644); err != nil {
		t.Fatal(err)
	}
	if _, stderr, code := call(t, "", "report", data+"demo.xlsx", "--out", folder, "--overwrite"); code != codeDone {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	if content, err := os.ReadFile(beside); err != nil || string(content) != "mine" {
		t.Errorf("a file outside the folder was touched: %q, %v", content, err)
	}
}

// TestReportSize: the page of three outcomes of fifty studies each stays below a
// megabyte.
func TestReportSize(t *testing.T) {
	withoutFigures(t)
	draw := rand.New(rand.NewPCG(1, 2))
	var sheet strings.Builder
	sheet.WriteString("study,date,outcome,events treated,total treated,events control,total control,risk of bias\n")
	for _, outcome := range []string{"death", "stroke", "stay in hospital for more than a week"} {
		for i := range 50 {
			n := 60 + draw.IntN(340)
			fmt.Fprintf(&sheet, "Trialist-%d %d,%d-%02d,%s,%d,%d,%d,%d,low\n", i, 1970+i, 1970+i, 1+i%12, outcome, n/9+draw.IntN(n/9), n, n/7+draw.IntN(n/7), n)
		}
	}
	path := filepath.Join(t.TempDir(), "fifty.csv")
	if err := os.WriteFile(path, []byte(sheet.String()), 0o644); err != nil {
		t.Fatal(err)
	}
	page, _ := reportOf(t, path)
	if len(page) >= 1e6 {
		t.Errorf("the page has %d bytes", len(page))
	}
}

// filesIn returns the files of a folder by their names below it.
func filesIn(t *testing.T, folder string) map[string][]byte {
	t.Helper()
	files := map[string][]byte{}
	err := filepath.WalkDir(folder, func(path string, entry fs.DirEntry, err error) error {
		if err != nil || entry.IsDir() {
			return err
		}
		name, err := filepath.Rel(folder, path)
		if err != nil {
			return err
		}
		content, err := os.ReadFile(path)
		files[filepath.ToSlash(name)] = content
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	return files
}

// TestReportBadCalls: calls that cannot be carried out say so before any work.
func TestReportBadCalls(t *testing.T) {
	file := filepath.Join(t.TempDir(), "f")
	if err := os.WriteFile(file, nil, 0o644); err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		args []string
		want string
	}{
		{[]string{"report", data + "demo.xlsx"}, "--out FOLDER"},
		{[]string{"report", data + "demo.xlsx", "--out", file}, "is a file; name a folder"},
		{[]string{"report", "--out", "x"}, "which file?"},
	} {
		if _, stderr, code := call(t, "", c.args...); code != codeCall || !strings.Contains(stderr, c.want) {
			t.Errorf("%v: exit %d, %q, want %q", c.args, code, stderr, c.want)
		}
	}
}

// BenchmarkReport measures a whole report of the demo workbook, written to a folder.
func BenchmarkReport(b *testing.B) {
	for b.Loop() {
		folder := filepath.Join(b.TempDir(), "out")
		if _, stderr, code := call(b, "", "report", data+"demo.xlsx", "--out", folder); code != codeDone {
			b.Fatalf("exit %d, %s", code, stderr)
		}
	}
}

// BenchmarkReportPage measures the page alone.
func BenchmarkReportPage(b *testing.B) {
	s := demoSynthesis(b)
	b.ResetTimer()
	for b.Loop() {
		if _, err := webpage.Page(s, webpage.Options{}); err != nil {
			b.Fatal(err)
		}
	}
}

func demoSynthesis(t testing.TB) *synthesis.Synthesis {
	t.Helper()
	x, plan, err := ingest.Open(t.Context(), data+"demo.xlsx", ingest.Options{})
	if err != nil {
		t.Fatal(err)
	}
	s, err := synthesis.Run(t.Context(), x, plan, webpage.Wanted())
	if err != nil {
		t.Fatal(err)
	}
	return s
}
