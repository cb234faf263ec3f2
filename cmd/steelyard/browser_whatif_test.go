//go:build browser

package main

import (
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"steelyard/forest/whatif"
	"steelyard/forest/words"
	"steelyard/meta/synthesis"
)

// whatIfReply is what the page's engine answers.
type whatIfReply struct {
	Document *synthesis.Document
	Command  string
	Problem  string
	Lead     string
	Sections []struct{ ID, HTML string }
}

// needEngine fails a test of a program without the engine: make browser builds it in.
func needEngine(t *testing.T) {
	t.Helper()
	if _, ok := whatif.Packed(); !ok {
		t.Fatal("this test needs the engine: run make engine first")
	}
}

// ask shows a changed analysis and returns the reply.
func (b *browser) ask(outcome, variant string) whatIfReply {
	b.t.Helper()
	var reply whatIfReply
	b.eval(fmt.Sprintf("whatIf.ask(%q, %s)", outcome, variant), &reply)
	return reply
}

// TestBrowserWhatIf: the page computes a changed analysis from file://, within its policy,
// shows it in place of the outcome, keeps focus and slider, and what is read near its place in the window, and goes back to the
// plan, which then reads as before.
func TestBrowserWhatIf(t *testing.T) {
	needEngine(t)
	b := startBrowser(t)
	b.open(reportFile(t, data+"demo.xlsx"), 1400)
	const shown = `[...document.querySelectorAll('#o1-lead, #o1 > section, #o1-methods, #o2')].map((e) => e.innerText).join('\n').replace(/\s*\n\s*/g, '\n')`
	var before, changed, after string
	b.eval(shown, &before)
	b.eval(`(() => { window.start = document.getElementById('o1-prior').value; window.looks = []; document.addEventListener('whatif:shown', (e) => looks.push([e.detail.outcomeId, e.detail.variant.changes.effects, e.detail.reply.document.outcomes[0].k]));
		const e = document.getElementById('o1-prior'); e.value = 3; e.dispatchEvent(new Event('input')); e.focus(); scrollTo(0, 700); window.top0 = e.getBoundingClientRect().top;
		document.querySelector('#o1-accrual details').open = true; })()`, nil)
	const variant = `{outcome: whatIf.sheet.outcomes[0].name, changes: %s, left_out: %s, added: null}`
	reply := b.ask("o1", fmt.Sprintf(variant, `{effects: "common"}`, `[JSON.parse(document.getElementById('data').textContent).outcomes[0].studies[0].row]`))
	if reply.Document == nil || !strings.HasSuffix(reply.Command, "--effects common --where 'sheet row is not 6'") {
		t.Fatalf("%q, problem %q", reply.Command, reply.Problem)
	}
	b.eval(shown, &changed)
	estimate := words.Notation{Ratio: true}.Value(*reply.Document.Outcomes[0].Pooled.Display.Estimate)
	for _, want := range []string{estimate, "In eight studies with 1,790 people", "common effect"} {
		if !strings.Contains(changed, want) {
			t.Errorf("the changed page lacks %q: %.300s", want, changed)
		}
	}
	var state struct {
		Looks  [][]any
		Focus  string
		Scroll float64
		Prior  string
		Open   bool
		Rows   int
	}
	// The browser keeps what is read in its place, but for a few lines that the answer itself gains.
	const now = `({Looks: looks, Focus: document.activeElement.id, Scroll: Math.abs(document.getElementById('o1-prior').getBoundingClientRect().top - top0), Prior: document.querySelector('#o1 [data-t=prior]').textContent,
		Open: document.querySelector('#o1-accrual details').open, Rows: document.querySelectorAll('#o1-studies tbody tr[data-study]').length})`
	b.eval(now, &state)
	if len(state.Looks) < 1 || fmt.Sprint(state.Looks[0]) != "[o1 common 8]" || state.Focus != "o1-prior" || state.Scroll > 80 || state.Prior != "5%" || !state.Open || state.Rows != 8 {
		t.Errorf("after the change: %+v", state)
	}
	b.ask("o1", fmt.Sprintf(variant, "{}", "[]"))
	b.eval("whatIf.settled()", nil)
	b.eval(`(() => { const e = document.getElementById('o1-prior'); e.value = start; e.dispatchEvent(new Event('input')); document.querySelector('#o1-accrual details').open = false; })()`, nil)
	b.eval(shown, &after)
	if before != after {
		t.Errorf("back at the plan the page reads otherwise:\n%s", firstDifference(before, after))
	}
	for _, complaint := range b.complaints() {
		t.Errorf("%.400s", complaint)
	}
}

// TestBrowserDamaged: a page whose engine is damaged still shows the report, says why it
// computes nothing, and refuses to be asked.
func TestBrowserDamaged(t *testing.T) {
	needEngine(t)
	page := reportFile(t, data+"demo.xlsx")
	content, err := os.ReadFile(page)
	if err != nil {
		t.Fatal(err)
	}
	text := string(content)
	at := strings.Index(text, `id="engine">`) + len(`id="engine">`)
	damages := map[string]func() string{
		"a digit that is none": func() string { return text[:at+1000] + "é" + text[at+1001:] },
		"other bytes":          func() string { return text[:at+500000] + strings.Repeat("#", 1000) + text[at+501000:] },
		"cut short":            func() string { return text[:at+300000] + text[strings.Index(text[at:], "</script>")+at:] },
		"none":                 func() string { return text[:at] + text[strings.Index(text[at:], "</script>")+at:] },
	}
	b := startBrowser(t)
	for name, damaged := range damages {
		path := filepath.Join(t.TempDir(), "damaged.html")
		if err := os.WriteFile(path, []byte(damaged()), 0o600); err != nil {
			t.Fatal(err)
		}
		b.open(path, 1400)
		var shown struct {
			Status, Refused, Posterior string
			Visible                    bool
			Charts                     int
		}
		b.eval(`(async () => {
			const refused = await whatIf.ask('o1', {outcome: whatIf.sheet.outcomes[0].name, changes: {}, left_out: [], added: null}).then(() => '', (e) => e.message);
			const status = document.getElementById('whatif-status');
			return {Status: status.textContent, Visible: status.getClientRects().length > 0, Refused: refused, Posterior: document.querySelector('#o1 [data-t=posterior]').textContent,
				Charts: [...document.querySelectorAll('svg.chart')].filter((e) => e.getClientRects().length).length};
		})()`, &shown)
		if !shown.Visible || shown.Refused == "" || !strings.Contains(shown.Status, "cannot compute another: "+shown.Refused) || shown.Posterior != "88%" || shown.Charts < 12 {
			t.Errorf("%s: %+v", name, shown)
		}
		t.Logf("%s: %s", name, shown.Status)
	}
}
