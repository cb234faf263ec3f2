//go:build browser

package main

import (
	"bufio"
	"encoding/json"
	"fmt"
	"io"
	"math"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"
)

// whatIfVariant is a changed analysis, as the page hands it to the engine.
type whatIfVariant struct {
	Outcome string            `json:"outcome"`
	Changes map[string]string `json:"changes"`
	LeftOut []int             `json:"left_out"`
	Added   any               `json:"added"`
}

// whatIfPlace is an outcome of the page with its rows.
type whatIfPlace struct {
	ID, Name string
	Rows     []int
}

// randomVariant returns a change such as a reader may make.
func randomVariant(r *rand.Rand, place whatIfPlace) whatIfVariant {
	v := whatIfVariant{Outcome: place.Name, Changes: map[string]string{}, LeftOut: []int{}}
	for _, setting := range []struct {
		name   string
		values []string
	}{
		{"effects", []string{"common", "random"}}, {"tau", []string{"restricted-ml", "paule-mandel", "dersimonian-laird", "maximum-likelihood"}},
		{"interval", []string{"wald", "hartung-knapp", "hartung-knapp-floor"}}, {"level", []string{"0.9", "0.95", "0.99"}},
		{"prior", []string{"0.1", "0.03, 0.5"}}, {"important", []string{"0.8", "0.9, 1.2"}}, {"where", []string{"converted is no", `study is not "Nobody's"`}},
	} {
		if r.IntN(3) == 0 {
			v.Changes[setting.name] = setting.values[r.IntN(len(setting.values))]
		}
	}
	if v.Changes["effects"] == "common" {
		delete(v.Changes, "tau")
		delete(v.Changes, "interval")
	}
	for _, row := range place.Rows {
		if r.IntN(5) == 0 {
			v.LeftOut = append(v.LeftOut, row)
		}
	}
	return v
}

// places returns the outcomes of the page that is shown.
func (b *browser) places() []whatIfPlace {
	b.t.Helper()
	var all []whatIfPlace
	b.eval(`(() => { const data = JSON.parse(document.getElementById('data').textContent).outcomes;
		return whatIf.sheet.outcomes.map((o) => ({ID: o.id, Name: o.name, Rows: data.find((d) => d.id === o.id).studies.map((s) => s.row)})); })()`, &all)
	return all
}

// nativeEngine is the engine as a program of this machine, opened on a page's sheet.
type nativeEngine struct {
	t    *testing.T
	to   io.Writer
	from *bufio.Reader
}

func startEngine(t *testing.T, program, page string) *nativeEngine {
	t.Helper()
	content, err := os.ReadFile(page)
	if err != nil {
		t.Fatal(err)
	}
	sheet := regexp.MustCompile(`<script type="application/json" id="sheet">(.*?)</script>`).FindSubmatch(content)
	if sheet == nil {
		t.Fatal("the page holds no sheet")
	}
	command := exec.Command(program)
	to, err := command.StdinPipe()
	if err != nil {
		t.Fatal(err)
	}
	from, err := command.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := command.Start(); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		_ = to.Close() // it ends with its input
		_ = command.Wait()
	})
	e := &nativeEngine{t, to, bufio.NewReaderSize(from, 1<<20)}
	e.write(sheet[1])
	return e
}

func (e *nativeEngine) write(line []byte) {
	e.t.Helper()
	if _, err := e.to.Write(append(line, '\n')); err != nil {
		e.t.Fatal(err)
	}
}

func (e *nativeEngine) ask(v whatIfVariant) (r whatIfReply) {
	e.t.Helper()
	request, err := json.Marshal(v)
	if err != nil {
		e.t.Fatal(err)
	}
	e.write(request)
	line, err := e.from.ReadBytes('\n')
	if err == nil {
		err = json.Unmarshal(line, &r)
	}
	if err != nil {
		e.t.Fatal(err)
	}
	return r
}

// TestBrowserSame: random changes give on the page the numbers that the command shown
// beside them prints, to the last digits but two, and every text and chart that the same
// engine writes as a program of this machine. (Exponentials and logarithms of WebAssembly
// and of the machine differ in their last bits.)
func TestBrowserSame(t *testing.T) {
	needEngine(t)
	program := filepath.Join(t.TempDir(), "engine")
	if out, err := exec.Command("go", "build", "-o", program, "../engine").CombinedOutput(); err != nil {
		t.Fatalf("%v\n%s", err, out)
	}
	b := startBrowser(t)
	for _, sheet := range []string{"checks/bcg_counts.csv", "published/magnesium.csv", "demo.xlsx"} {
		page := reportFile(t, data+sheet)
		b.open(page, 1400)
		native := startEngine(t, program, page)
		places := b.places()
		r := rand.New(rand.NewPCG(14, uint64(len(sheet))))
		pooled := 0
		for i := range 50 {
			place := places[i%len(places)]
			v := randomVariant(r, place)
			text, err := json.Marshal(v)
			if err != nil {
				t.Fatal(err)
			}
			var got whatIfReply
			b.eval(fmt.Sprintf("whatIf.ask(%q, %s).then((reply) => whatIf.settled().then(() => reply))", place.ID, text), &got)
			if got.Document == nil {
				t.Fatalf("%s: %s", text, got.Problem)
			}
			if got.Document.Outcomes[0].ResultDocument != nil {
				pooled++
			}
			sameParts(t, string(text), got, native.ask(v))
			sameAsPrinted(t, string(text), got, commandOutcome(t, data+sheet, got.Command))
		}
		if pooled < 25 {
			t.Errorf("%s: only %d of 50 variants could be pooled", sheet, pooled)
		}
	}
}

// sameParts compares what the page shows with what the engine writes as a program.
func sameParts(t *testing.T, variant string, got, want whatIfReply) {
	t.Helper()
	if got.Lead != want.Lead {
		t.Errorf("%s\nthe page opens with %s\nwant %s", variant, got.Lead, want.Lead)
	}
	if len(got.Sections) != len(want.Sections) {
		t.Fatalf("%s: %d sections, want %d", variant, len(got.Sections), len(want.Sections))
	}
	for i := range got.Sections {
		if got.Sections[i] != want.Sections[i] {
			t.Errorf("%s: section %s differs:\n%s", variant, want.Sections[i].ID, firstDifference(strings.ReplaceAll(want.Sections[i].HTML, "<", "\n<"), strings.ReplaceAll(got.Sections[i].HTML, "<", "\n<")))
		}
	}
}

// commandOutcome runs a command line as a shell splits it, on the sheet, and returns the
// outcome that it prints.
func commandOutcome(t *testing.T, sheet, command string) any {
	t.Helper()
	split, err := exec.Command("sh", "-c", `printf '%s\n' `+command).Output()
	if err != nil {
		t.Fatal(err)
	}
	args := strings.Split(strings.TrimSuffix(string(split), "\n"), "\n")
	args[2] = sheet
	stdout, stderr, code := call(t, "", append(args[1:], "--format", "json")...)
	if code != codeDone && code != codeData {
		t.Fatalf("%s: exit %d, %s", command, code, stderr)
	}
	var d struct{ Outcomes []any }
	if err := json.Unmarshal([]byte(stdout), &d); err != nil || len(d.Outcomes) != 1 {
		t.Fatalf("%s: %d outcomes, %v", command, len(d.Outcomes), err)
	}
	return d.Outcomes[0]
}

// sameAsPrinted wants all that the command prints in the page's answer.
func sameAsPrinted(t *testing.T, variant string, got whatIfReply, want any) {
	t.Helper()
	text, err := json.Marshal(got.Document.Outcomes[0])
	if err != nil {
		t.Fatal(err)
	}
	var have any
	if err := json.Unmarshal(text, &have); err != nil {
		t.Fatal(err)
	}
	for _, difference := range differences("", have, want) {
		t.Errorf("%s\n%s", variant, difference)
	}
}

// differences lists where have lacks what want holds. Numbers may differ by 1e-12 of
// themselves; the notes may be more, as the page asks for more parts.
func differences(at string, have, want any) []string {
	switch w := want.(type) {
	case map[string]any:
		h, _ := have.(map[string]any)
		var all []string
		for name := range w {
			if name != "plan" {
				all = append(all, differences(at+"/"+name, h[name], w[name])...)
			}
		}
		return all
	case []any:
		h, _ := have.([]any)
		if at == "/notes" {
			h = slices.DeleteFunc(slices.Clone(h), func(x any) bool { return !slices.Contains(w, x) })
		}
		if len(h) != len(w) {
			return []string{fmt.Sprintf("%s: %d, want %d", at, len(h), len(w))}
		}
		var all []string
		for i := range w {
			all = append(all, differences(fmt.Sprintf("%s/%d", at, i), h[i], w[i])...)
		}
		return all
	case float64:
		h, ok := have.(float64)
		if ok && math.Abs(h-w) <= 1e-12*math.Max(math.Abs(h), math.Abs(w)) {
			return nil
		}
	}
	if have == want {
		return nil
	}
	return []string{fmt.Sprintf("%s: %v, want %v", at, have, want)}
}
