//go:build browser

package main

import (
	"fmt"
	"strings"
	"testing"

	"steelyard/forest/words"
	"steelyard/meta/synthesis"
)

// The tests of this file change an analysis as a reader does: with the page's controls.

// change does something on the page and waits until its answer is shown.
func (b *browser) change(act string) {
	b.t.Helper()
	b.eval(`(async () => {
		await whatIf.settled(); // what comes late of the change before
		const shown = new Promise((give, refuse) => { document.addEventListener('whatif:shown', () => setTimeout(give), {once: true}); setTimeout(() => refuse(new Error('nothing was shown')), 30000); });
		`+act+`;
		await shown;
	})()`, nil)
}

// set gives a control a value, as a reader does who then leaves it.
func (b *browser) set(id, value string) {
	b.t.Helper()
	b.change(fmt.Sprintf(`const e = document.getElementById(%q); e.focus(); e.value = %q; e.dispatchEvent(new Event('change', {bubbles: true}))`, id, value))
}

// press presses a key, with modifiers as the protocol counts them: 2 Control, 8 Shift.
func (b *browser) press(key string, code, modifiers int) {
	b.t.Helper()
	for _, kind := range []string{"rawKeyDown", "keyUp"} {
		b.call("Input.dispatchKeyEvent", map[string]any{"type": kind, "key": key, "code": key, "windowsVirtualKeyCode": code, "modifiers": modifiers}, nil)
	}
}

// pressed presses a key and waits until the answer to it is shown.
func (b *browser) pressed(key string, code, modifiers int) {
	b.t.Helper()
	b.eval(`whatIf.settled().then(() => { window.answered = new Promise((give, refuse) => { document.addEventListener('whatif:shown', () => setTimeout(give), {once: true}); setTimeout(() => refuse(new Error('no key was answered')), 30000); }); })`, nil)
	b.press(key, code, modifiers)
	b.eval("answered", nil)
}

// compared is the table that sets the plan and the change side by side.
func (b *browser) compared() [][]string {
	b.t.Helper()
	var rows [][]string
	b.eval(`[...document.querySelectorAll('#o1-whatif .wi-compare tbody tr')].map((r) => [...r.cells].map((c) => c.textContent))`, &rows)
	return rows
}

// shows wants the table, the strip and the answer to be those of the command line.
func (b *browser) shows(planned, now synthesis.Document, difference string) {
	b.t.Helper()
	rows := b.compared()
	text := func(d synthesis.Document, of func(*synthesis.OutcomeDocument) string) string {
		return of(&d.Outcomes[0])
	}
	ratio := words.Notation{Ratio: true}
	for i, of := range []func(*synthesis.OutcomeDocument) string{
		func(o *synthesis.OutcomeDocument) string { return ratio.Value(*o.Pooled.Display.Estimate) },
		func(o *synthesis.OutcomeDocument) string {
			return ratio.Value(*o.Pooled.Display.Low) + " to " + ratio.Value(*o.Pooled.Display.High)
		},
		func(o *synthesis.OutcomeDocument) string { return words.Linear(o.Pooled.Steps, 2) },
	} {
		if len(rows) < 3 || rows[i][1] != text(planned, of) || rows[i][2] != text(now, of) {
			b.t.Errorf("row %d of %q, want %s as planned and %s now", i, rows, text(planned, of), text(now, of))
			return
		}
	}
	if want := words.StepsChange(mustWritten(b.t, rows[2][2]) - mustWritten(b.t, rows[2][1])); rows[2][3] != want {
		b.t.Errorf("the difference in steps is %s, want %s", rows[2][3], want)
	}
	if got := b.text("#o1-whatif .wi-says"); got != "Not the plan: "+difference+"." {
		b.t.Errorf("the banner says %q, want %q", got, difference)
	}
	for _, place := range []string{"#o1-lead .wi-tag", "#o1-answer .wi-tag"} {
		if got := b.text(place); !strings.Contains(got, difference) {
			b.t.Errorf("%s says %q", place, got)
		}
	}
	if strip, want := b.text("#o1 .wi-strip"), rows[0][2]+" ("+rows[1][2]+")"; !strings.Contains(strip, want) || !strings.Contains(strip, "Plan: "+rows[0][1]) {
		b.t.Errorf("the strip says %q, want %q and the plan", strip, want)
	}
	if lead := b.text("#o1-lead .lead"); !strings.Contains(lead, rows[0][2]) {
		b.t.Errorf("the page opens with %q, want %s", lead, rows[0][2])
	}
}

func mustWritten(t *testing.T, text string) float64 {
	t.Helper()
	var x float64
	if _, err := fmt.Sscan(strings.ReplaceAll(text, "−", "-"), &x); err != nil {
		t.Fatalf("%q: %v", text, err)
	}
	return x
}

// asPlanned wants the page to show the plan and to say so.
func (b *browser) asPlanned() {
	b.t.Helper()
	var shown struct {
		Says              string
		Tags, Strip, Rows int
	}
	b.eval(`({Says: document.querySelector('#o1-whatif .wi-says').textContent, Tags: document.querySelectorAll('.wi-tag').length,
		Strip: document.querySelectorAll('.wi-strip:not([hidden])').length, Rows: document.querySelectorAll('#o1-whatif .wi-compare:not([hidden])').length})`, &shown)
	if shown.Says != "This is the analysis as planned." || shown.Tags != 0 || shown.Strip != 0 || shown.Rows != 0 {
		b.t.Errorf("back at the plan: %+v", shown)
	}
}

// TestBrowserControls: each way of changing an analysis gives the command line's numbers
// beside those of the plan, says in words what differs, and can be undone by a key.
func TestBrowserControls(t *testing.T) {
	needEngine(t)
	const sheet, outcome = data + "demo.xlsx", "flare within 24 weeks"
	pool := func(args ...string) synthesis.Document {
		return pooled(t, append([]string{sheet, "--outcome", outcome}, args...)...)
	}
	planned := pool()
	b := startBrowser(t)
	b.open(reportFile(t, sheet), 1400)
	b.asPlanned()
	b.eval(`document.querySelectorAll('#o1-whatif details').forEach((e) => { e.open = true; })`, nil)

	b.set("o1-wi-effects", "common")
	b.shows(planned, pool("--effects", "common"), "effects common (planned: random)")
	b.set("o1-wi-level", "0.9")
	b.pressed("z", 90, 2)
	b.shows(planned, pool("--effects", "common"), "effects common (planned: random)")
	b.pressed("z", 90, 2)
	b.asPlanned()
	b.pressed("Z", 90, 2|8)
	b.shows(planned, pool("--effects", "common"), "effects common (planned: random)")
	b.pressed("Escape", 27, 0)
	b.asPlanned()

	for name, act := range map[string]string{
		"its box":              `[...document.querySelectorAll('#o1-whatif [data-row]')].find((e) => e.dataset.studyName === 'Lindqvist 2017').click()`,
		"its row of the table": `[...document.querySelectorAll('#o1-studies .wi-box input')].find((e) => e.ariaLabel === 'Lindqvist 2017: pooled').click()`,
		"its row of the chart": `[...document.querySelectorAll('#o1-forest .wi-rows button')].find((e) => e.title === 'Leave out Lindqvist 2017').click()`,
	} {
		b.change(act)
		b.shows(planned, pool("--where", `study is not "Lindqvist 2017"`), "1 study left out: Lindqvist 2017")
		if got := b.text("#o1-studies tr.wi-out"); !strings.HasPrefix(got, "Lindqvist 2017") || !strings.Contains(got, "left out") {
			t.Errorf("by %s: the table says %q of what is left out", name, got)
		}
		b.change(`document.querySelector('#o1-studies tr.wi-out input').click()`)
		b.asPlanned()
	}
	b.change(`document.querySelector('#o1-whatif [data-column="risk of bias"] [data-value=low]').click()`)
	b.shows(planned, pool("--where", "risk of bias is not low"), "5 studies left out: Zielińska 2011, Brandão 2014, Lindqvist 2017, Abernethy 2019, Obradović 2024")
	b.pressed("Escape", 27, 0)
	b.change(`const e = document.querySelector('#o1-whatif [data-column=year] [data-end=from]'); e.value = '2014'; e.dispatchEvent(new Event('change', {bubbles: true}))`)
	b.shows(planned, pool("--where", "year >= 2014"), "3 studies left out: Halvorsen 2009, Zielińska 2011, Okwuosa 2012")
	var log []string
	b.eval(`[...document.querySelectorAll('#o1-whatif .wi-log li')].map((e) => e.textContent)`, &log)
	if len(log) != 5 || !strings.HasPrefix(log[0], "Effects common") || !strings.HasPrefix(log[4], "3 studies left out") || b.text("#o1-whatif .wi-log summary") != "5 variants looked at" {
		t.Errorf("the log has %q", log)
	}
	b.change(`document.querySelector('#o1-whatif .wi-log li button').click()`)
	b.shows(planned, pool("--effects", "common"), "effects common (planned: random)")
	for _, complaint := range b.complaints() {
		t.Errorf("%.400s", complaint)
	}
}

// TestBrowserNextStudy: a study that nobody has done counts as one of the sheet does, is
// named as hypothetical, and can be taken away.
func TestBrowserNextStudy(t *testing.T) {
	needEngine(t)
	b := startBrowser(t)
	b.open(reportFile(t, data+"checks/bcg_counts.csv"), 1400)
	b.change(`document.querySelectorAll('#o1-whatif [data-number]').forEach((e, i) => { e.value = [12, 900, 30, 905][i]; }); document.querySelector('#o1-whatif form').requestSubmit()`)
	rows := b.compared()
	// That its numbers are those of the sheet with that row is TestAdded of the engine.
	if len(rows) < 5 || rows[4][2] != "14 studies" || rows[4][3] != "+1" {
		t.Fatalf("%q", rows)
	}
	if got := b.text("#o1-whatif .wi-says"); got != "Not the plan: a hypothetical study added: events treated 12, total treated 900, events control 30, total control 905." {
		t.Errorf("the banner says %q", got)
	}
	if got := b.text("#o1-studies tbody tr:last-child"); !strings.HasPrefix(got, "What-if") || !strings.Contains(got, "12\u00a0of\u00a0900") {
		t.Errorf("the table ends with %q", got)
	}
	b.change(`document.querySelector('#o1-forest .wi-rows button[title="Take away What-if"]').click()`)
	b.asPlanned()
}

// TestBrowserFocus: the keyboard stays where it was through changes, also where the row
// that it stood on is gone, and those who listen hear what is shown.
func TestBrowserFocus(t *testing.T) {
	needEngine(t)
	b := startBrowser(t)
	b.open(reportFile(t, data+"demo.xlsx"), 1400)
	focus := func() string {
		var name string
		b.eval(`document.activeElement.getAttribute('aria-label') || document.activeElement.id || document.activeElement.tagName`, &name)
		return name
	}
	b.eval(`document.querySelector('#o1-forest .wi-rows button').focus()`, nil)
	b.press("ArrowDown", 40, 0)
	b.press("ArrowDown", 40, 0)
	if got := focus(); got != "Leave out Okwuosa 2012" {
		t.Fatalf("two down the focus is on %q", got)
	}
	var before, after float64
	const height = `whatIf.settled().then(() => document.activeElement.getBoundingClientRect().top)`
	b.eval(height, &before)
	b.change(`document.activeElement.click()`)
	if got := focus(); got != "Leave out Brandão 2014" {
		t.Errorf("after leaving a row out the focus is on %q, want the row that came in its place", got)
	}
	if b.eval(height, &after); after < before-2 || after > before+2 {
		t.Errorf("the row moved from %v to %v in the window", before, after)
	}
	b.eval(`[...document.querySelectorAll('#o1-studies .wi-box input')].find((e) => e.ariaLabel.startsWith('Okwuosa')).focus()`, nil)
	b.eval(height, &before)
	b.change(`document.activeElement.click()`)
	if got := focus(); got != "Okwuosa 2012: pooled" {
		t.Errorf("after taking a row in by its box the focus is on %q", got)
	}
	if b.eval(height, &after); after < before-2 || after > before+2 {
		t.Errorf("the box moved from %v to %v in the window", before, after)
	}
	b.asPlanned()
	b.eval(`document.querySelector('[data-group=model]').open = true`, nil)
	b.set("o1-wi-tau", "paule-mandel")
	if got := focus(); got != "o1-wi-tau" {
		t.Errorf("after a change of a setting the focus is on %q", got)
	}
	if got := b.text("#o1-whatif [role=status]"); !strings.HasPrefix(got, "Not the plan: 1 difference. Risk ratio 0.71 (") {
		t.Errorf("spoken: %q", got)
	}
	b.pressed("Escape", 27, 0)
	if got := b.text("#o1-whatif [role=status]"); !strings.HasPrefix(got, "Back at the plan. Risk ratio 0.71 (0.58 to 0.86), evidence 2.55 steps") || focus() != "o1-wi-tau" {
		t.Errorf("spoken: %q; focus on %q", got, focus())
	}
}

// TestBrowserRefused: a value that the engine refuses stays in its field with the reason,
// changes nothing, does not stand in the way of the next change, and Escape takes it back.
func TestBrowserRefused(t *testing.T) {
	needEngine(t)
	b := startBrowser(t)
	b.open(reportFile(t, data+"demo.xlsx"), 1400)
	lead := b.text("#o1-lead")
	b.eval(`document.querySelector('[data-group=model]').open = true`, nil)
	b.set("o1-wi-level", "95")
	const field = `(() => { const e = document.getElementById('o1-wi-level'); return [e.value, e.getAttribute('aria-invalid') || '', (document.getElementById(e.getAttribute('aria-errormessage')) || {textContent: ''}).textContent]; })()`
	var shown []string
	if b.eval(field, &shown); shown[0] != "95" || shown[1] != "true" || !strings.Contains(shown[2], "for 95% write 0.95") {
		t.Errorf("the field shows %q", shown)
	}
	if got := b.text("#o1-lead"); got != lead {
		t.Errorf("the page opens with %q", got)
	}
	b.press("Escape", 27, 0)
	if b.eval(field, &shown); shown[0] != "" || shown[1] != "" {
		t.Errorf("after Escape the field shows %q", shown)
	}
	b.set("o1-wi-level", "95")
	b.set("o1-wi-effects", "common")
	if got := b.text("#o1-whatif .wi-says"); got != "Not the plan: effects common (planned: random)." {
		t.Errorf("after a refused level and another change: %q", got)
	}
	b.eval(`document.querySelector('#o1-whatif form').requestSubmit()`, nil)
	if got := b.text("#o1-whatif .wi-problem"); !strings.Contains(got, "a number is missing") {
		t.Errorf("an empty study is refused with %q", got)
	}
}
