//go:build browser

package main

import (
	"encoding/base64"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"steelyard/forest/words"
	"steelyard/meta/evidence"
)

// The tests of this file show the report in a real browser: make browser.

// reportFile writes a report without figures and returns the page's path.
func reportFile(t *testing.T, sheet string, args ...string) string {
	t.Helper()
	withoutFigures(t)
	folder := filepath.Join(t.TempDir(), "out")
	_, stderr, code := call(t, "", append([]string{"report", sheet, "--out", folder}, args...)...)
	if code != codeDone && code != codeData {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	return filepath.Join(folder, "report.html")
}

// browserWidths are the widths that the page is looked at, in CSS pixels.
var browserWidths = []int{320, 360, 800, 1400}

// TestBrowserFits: at every width nothing stands beyond the window, nothing complains and
// nothing is asked of a network; hostile names included.
func TestBrowserFits(t *testing.T) {
	sheets := map[string]string{"demo": data + "demo.xlsx", "hostile": hostileSheet(t), "bcg": data + "checks/bcg_counts.csv"}
	b := startBrowser(t)
	for name, sheet := range sheets {
		page := reportFile(t, sheet)
		for _, width := range browserWidths {
			b.open(page, width)
			b.withinWindow(fmt.Sprintf("%s at %d px", name, width), "main *, header *, nav *, footer *", ".scroll, .beam, .vh, svg, [hidden]")
			b.picture(fmt.Sprintf("%s-%d.png", name, width))
		}
	}
	for _, complaint := range b.complaints() {
		t.Errorf("%.400s", complaint)
	}
}

// withinWindow reports the elements of a selector that stick out of the window, and a page
// that does; those within the exceptions may.
func (b *browser) withinWindow(what, selector, exceptions string) {
	b.t.Helper()
	var wide []string
	b.eval(fmt.Sprintf(`(() => {
		const wide = document.documentElement.scrollWidth > innerWidth ? ['the page: ' + document.documentElement.scrollWidth] : [];
		for (const e of document.querySelectorAll(%q)) {
			if (e.closest(%q) || !e.getClientRects().length) continue;
			const r = e.getBoundingClientRect();
			if (r.right > innerWidth + 0.5 || r.left < -0.5) wide.push(e.tagName + '.' + e.className + ': ' + e.textContent.slice(0, 60));
		}
		return wide.slice(0, 5);
	})()`, selector, exceptions), &wide)
	if len(wide) > 0 {
		b.t.Errorf("%s: beyond the window: %s", what, strings.Join(wide, "; "))
	}
}

// TestBrowserSliders: the slider of beliefs shows at each stop what Bayes' rule makes of
// the evidence in results.json, everywhere on the page; that of baseline risks multiplies
// them by the pooled risk ratio.
func TestBrowserSliders(t *testing.T) {
	page := reportFile(t, data+"demo.xlsx")
	_, results := reportOf(t, data+"demo.xlsx")
	b := startBrowser(t)
	b.open(page, 1400)
	if got := b.text("#o1 [data-t=posterior]"); got != "88%" { // Bayes' rule: 1/(1+4·exp(−3.3619))
		t.Errorf("at the start the probability is %s, want 88%%", got)
	}
	move := func(id string, stop int) {
		b.eval(fmt.Sprintf(`(() => { const e = document.getElementById(%q); e.value = %d; e.dispatchEvent(new Event('input')); })()`, id, stop), nil)
	}
	var stops int
	b.eval("+document.getElementById('o1-prior').max", &stops)
	for stop := 0; stop <= stops; stop++ {
		move("o1-prior", stop)
		var shown struct {
			Priors, Posteriors []string
			Spoken             string
			Number             float64
		}
		b.eval(`(() => { const texts = (slot) => [...document.querySelectorAll('#o1 [data-t=' + slot + ']')].map((e) => e.textContent);
			return {Priors: texts('prior'), Posteriors: texts('posterior'), Spoken: document.getElementById('o1-prior').getAttribute('aria-valuetext'), Number: parseFloat(texts('prior')[0]) / 100}; })()`, &shown)
		want := words.Probability(evidence.Posterior(shown.Number, evidence.FromLn(results.Outcomes[0].Pooled.LnEvidence)))
		for _, got := range shown.Posteriors {
			if got != want {
				t.Errorf("from %s: %s, want %s", shown.Priors[0], got, want)
			}
		}
		if len(shown.Posteriors) < 3 || !strings.Contains(shown.Spoken, want) {
			t.Errorf("from %s: %d places, spoken as %q", shown.Priors[0], len(shown.Posteriors), shown.Spoken)
		}
	}
	b.eval("+document.getElementById('o1-baseline').max", &stops)
	ratio := *results.Outcomes[0].Pooled.Display.Estimate
	for stop := 0; stop <= stops; stop += 5 {
		move("o1-baseline", stop)
		var base, with float64
		b.eval(`parseFloat(document.querySelector('#o1 [data-t=base]').textContent)`, &base)
		b.eval(`parseFloat(document.querySelector('#o1 [data-t=with]').textContent)`, &with)
		if want := base * ratio; with < want-0.51 || with > want+0.51 {
			t.Errorf("at %v per 1000: %v with treatment, want %v", base, with, want)
		}
	}
	if got := b.text("#o2 [data-t=posterior]"); got != words.Probability(evidence.Posterior(0.2, evidence.FromLn(results.Outcomes[1].Pooled.LnEvidence))) {
		t.Errorf("moving one outcome's slider moved another's: %s", got)
	}
	for _, complaint := range b.complaints() {
		t.Errorf("%.400s", complaint)
	}
}

// TestBrowserTable: heads sort, the filter narrows and says how many are left, and a row
// that is pointed at is lit in the charts.
func TestBrowserTable(t *testing.T) {
	b := startBrowser(t)
	b.open(reportFile(t, data+"demo.xlsx"), 1400)
	names := func() string {
		var text string
		b.eval(`[...document.querySelectorAll('#o1-studies tbody tr')].filter((r) => !r.hidden).map((r) => r.cells[0].textContent.split(' ')[0]).join(' ')`, &text)
		return text
	}
	const sheet = "Halvorsen Zielińska Okwuosa Brandão Marchetti-Ruiz Lindqvist Abernethy Dvořák Obradović"
	if got := names(); got != sheet {
		t.Fatalf("the rows are %s, want those of the sheet", got)
	}
	click := func(head string) {
		b.eval(fmt.Sprintf(`[...document.querySelectorAll('#o1-studies thead button')].find((e) => e.textContent.startsWith(%q)).click()`, head), nil)
	}
	click("Risk ratio")
	if got := names(); got != "Okwuosa Lindqvist Halvorsen Abernethy Obradović Dvořák Zielińska Brandão Marchetti-Ruiz" { // the counts' risk ratios, by hand
		t.Errorf("by risk ratio the rows are %s", got)
	}
	click("Risk ratio")
	if got := names(); !strings.HasPrefix(got, "Marchetti-Ruiz Brandão") {
		t.Errorf("and down again %s", got)
	}
	if got := b.text(`#o1-studies th[aria-sort=descending]`); !strings.HasPrefix(got, "Risk ratio") {
		t.Errorf("the sorted head is %q", got)
	}
	b.eval(`(() => { const e = document.querySelector('#o1-data select'); e.value = 'low'; e.dispatchEvent(new Event('input')); })()`, nil)
	if got := strings.Fields(names()); len(got) != 5 {
		t.Errorf("at low risk of bias: %v", got)
	}
	if got := b.text("#o1-data .filter output"); got != "5 of 9 rows" {
		t.Errorf("the filter says %q", got)
	}
	var dim int
	b.eval(`document.querySelectorAll('#o1-forest .wide .dim').length`, &dim)
	if dim != 4 {
		t.Errorf("%d rows of the chart are dimmed, want 4", dim)
	}
	b.eval(`(() => { const e = document.querySelector('#o1-data input[type=search]'); e.value = 'obra'; e.dispatchEvent(new Event('input')); })()`, nil)
	if got := names(); got != "Obradović" {
		t.Errorf("searched: %s", got)
	}
	var lit []string
	b.eval(`(() => { document.querySelector('[data-study=o1-9]').dispatchEvent(new Event('pointerenter'));
		return [...document.querySelectorAll('svg .on')].map((e) => e.textContent.trim().split(' ')[0].slice(0, 9)); })()`, &lit)
	if len(lit) != 2 || lit[0] != "Obradović" || lit[1] != "Obradović" {
		t.Errorf("pointed at Obradović, lit in the charts: %q, want it in the forest and the leave-one-out chart", lit)
	}
	for _, complaint := range b.complaints() {
		t.Errorf("%.400s", complaint)
	}
}

// TestBrowserWithoutScript: without script every number is still there, and no control
// that would do nothing.
func TestBrowserWithoutScript(t *testing.T) {
	b := startBrowser(t)
	b.call("Emulation.setScriptExecutionDisabled", map[string]any{"value": true}, nil)
	b.open(reportFile(t, data+"demo.xlsx"), 1400)
	b.call("Emulation.setScriptExecutionDisabled", map[string]any{"value": false}, nil)
	var shown struct {
		Controls, Charts, Rows int
		Posterior              string
	}
	b.eval(`({Controls: [...document.querySelectorAll('input, button, select')].filter((e) => e.getClientRects().length).length,
		Charts: [...document.querySelectorAll('svg.chart')].filter((e) => e.getClientRects().length).length,
		Rows: document.querySelectorAll('#o1-studies tbody tr').length, Posterior: document.querySelector('#o1 [data-t=posterior]').textContent})`, &shown)
	if shown.Controls != 0 || shown.Charts < 12 || shown.Rows != 9 || shown.Posterior != "88%" {
		t.Errorf("without script: %+v", shown)
	}
}

// TestBrowserPrints: the page prints to PDF, light on any screen, folded tables open and
// nothing cut at the side.
func TestBrowserPrints(t *testing.T) {
	b := startBrowser(t)
	b.open(reportFile(t, data+"demo.xlsx"), 1400)
	b.call("Emulation.setEmulatedMedia", map[string]any{"media": "print", "features": []map[string]string{{"name": "prefers-color-scheme", "value": "dark"}}}, nil)
	var paper string
	b.eval("getComputedStyle(document.body).backgroundColor", &paper)
	if paper != "rgb(255, 255, 255)" {
		t.Errorf("a dark screen prints on %s", paper)
	}
	b.eval("dispatchEvent(new Event('beforeprint'))", nil)
	var closed int
	b.eval("document.querySelectorAll('details:not([open])').length", &closed)
	if closed != 0 {
		t.Errorf("%d folded parts stay closed in print", closed)
	}
	var pdf struct{ Data string }
	b.call("Page.printToPDF", map[string]any{"preferCSSPageSize": true, "printBackground": true}, &pdf)
	content, err := base64.StdEncoding.DecodeString(pdf.Data)
	if err != nil || !strings.HasPrefix(string(content), "%PDF-") || len(content) < 20000 {
		t.Fatalf("the PDF has %d bytes, %v", len(content), err)
	}
	if folder := os.Getenv("STEELYARD_PICTURES"); folder != "" {
		b.save(filepath.Join(folder, "print.pdf"), pdf.Data)
	}
}

// TestBrowserDark: the dark page has other colours in page and charts.
func TestBrowserDark(t *testing.T) {
	b := startBrowser(t)
	b.open(reportFile(t, data+"checks/bcg_counts.csv"), 1400)
	colours := func() (paper, square string) {
		b.eval("getComputedStyle(document.body).backgroundColor", &paper)
		b.eval(`getComputedStyle(document.querySelector('#o1-forest [fill="#0072B2"]')).fill`, &square)
		return paper, square
	}
	paper, square := colours()
	b.eval("document.getElementById('theme').click()", nil)
	darkPaper, darkSquare := colours()
	if paper != "rgb(255, 255, 255)" || darkPaper != "rgb(20, 23, 26)" || square == darkSquare {
		t.Errorf("light %s %s, dark %s %s", paper, square, darkPaper, darkSquare)
	}
	b.picture("dark-1400.png")
}
