//go:build browser

package main

import (
	"os"
	"strings"
	"testing"
)

// ownChecks look for the faults that keep readers out: they return one line for each.
const ownChecks = `(() => {
	const faults = [];
	const all = (s) => [...document.querySelectorAll(s)];
	const name = (e) => (e.getAttribute('aria-label') || (e.getAttribute('aria-labelledby') || '').split(' ').map((id) => (document.getElementById(id) || {textContent: ''}).textContent).join(' ')
		|| (e.labels && [...e.labels].map((l) => l.textContent).join(' ')) || e.textContent || e.title || '').trim();
	const ids = all('[id]').map((e) => e.id);
	ids.filter((id, i) => ids.indexOf(id) !== i).forEach((id) => faults.push('id twice: ' + id));
	all('[aria-labelledby]').forEach((e) => e.getAttribute('aria-labelledby').split(' ').forEach((id) => { if (!document.getElementById(id)) faults.push('labelled by nothing: ' + id); }));
	all('input, select, button, a[href], [role=img], [role=region], nav, [role=search], [role=group]').forEach((e) => { if (!name(e)) faults.push('no name: ' + e.outerHTML.slice(0, 80)); });
	all('a[href^="#"]').forEach((e) => { if (!e.closest('[hidden]') && !document.getElementById(e.getAttribute('href').slice(1))) faults.push('leads nowhere: ' + e.getAttribute('href')); });
	for (const landmark of ['header', 'nav', 'main', 'footer']) if (all(landmark).length !== 1) faults.push(all(landmark).length + ' of ' + landmark);
	if (all('h1').length !== 1) faults.push(all('h1').length + ' of h1');
	let level = 0;
	all('h1, h2, h3, h4').forEach((e) => { const now = +e.tagName[1]; if (now > level + 1) faults.push('heading skips to ' + e.tagName + ': ' + e.textContent.slice(0, 40)); level = now; });
	all('table').forEach((t) => {
		if (!t.caption) faults.push('table without caption');
		[...t.querySelectorAll('thead th')].forEach((h) => { if (h.scope !== 'col') faults.push('head without scope'); });
		const n = t.tHead.rows[0].cells.length;
		[...t.tBodies[0].rows].forEach((r) => { if (r.cells.length !== n) faults.push(r.cells.length + ' cells under ' + n + ' heads: ' + r.textContent.slice(0, 40)); });
	});
	all('.scroll').forEach((e) => { if (e.tabIndex !== 0) faults.push('a region that scrolls cannot be focused'); });
	all('svg[role=img]').forEach((e) => { const d = name(e); if (!/[0-9]/.test(d)) faults.push('a chart is described without numbers: ' + d.slice(0, 60)); });
	if (!document.documentElement.lang) faults.push('no language');
	const luminance = (c) => { const [r, g, b] = c.match(/[\d.]+/g).map((x) => { x /= 255; return x <= 0.04045 ? x / 12.92 : ((x + 0.055) / 1.055) ** 2.4; }); return 0.2126 * r + 0.7152 * g + 0.0722 * b; };
	const behind = (e) => { for (; e; e = e.parentElement) { const c = getComputedStyle(e).backgroundColor; if (!/, 0\)$|transparent/.test(c)) return c; } return 'rgb(255, 255, 255)'; };
	all('p, li, td, th, dt, dd, h1, h2, h3, h4, figcaption, caption, summary, a, label, output, button, span').forEach((e) => {
		if (!e.getClientRects().length || ![...e.childNodes].some((n) => n.nodeType === 3 && n.textContent.trim()) || e.closest('[aria-hidden=true], .vh')) return;
		const a = luminance(getComputedStyle(e).color), b = luminance(behind(e));
		const contrast = (Math.max(a, b) + 0.05) / (Math.min(a, b) + 0.05);
		if (contrast < 4.5) faults.push('contrast ' + contrast.toFixed(2) + ': ' + e.textContent.slice(0, 40));
	});
	return [...new Set(faults)];
})()`

// accessFaults returns what the tests' own checks find on the page, and what axe-core does
// where the environment names it.
func (b *browser) accessFaults() []string {
	b.t.Helper()
	var faults, more []string
	b.eval(ownChecks, &faults)
	path := os.Getenv("STEELYARD_AXE")
	if path == "" {
		b.t.Log("without axe-core")
		return faults
	}
	axe, err := os.ReadFile(path)
	if err != nil {
		b.t.Fatal(err)
	}
	b.eval(string(axe)+"; 0", nil)
	b.eval(`axe.run(document, {resultTypes: ['violations']}).then((r) => r.violations.filter((v) => v.impact === 'serious' || v.impact === 'critical').map((v) => 'axe-core: ' + v.id + ': ' + v.help + ' ' + v.nodes.slice(0, 3).map((n) => n.html.slice(0, 120)).join(' | ')))`, &more)
	return append(faults, more...)
}

// TestBrowserAccess: names, landmarks, headings, tables, descriptions with numbers and
// contrast, light and dark; and what axe-core finds, where the environment names it.
func TestBrowserAccess(t *testing.T) {
	b := startBrowser(t)
	for name, sheet := range map[string]string{"demo": data + "demo.xlsx", "bcg": data + "checks/bcg_counts.csv"} {
		page := reportFile(t, sheet)
		for _, scheme := range []string{"light", "dark"} {
			b.call("Emulation.setEmulatedMedia", map[string]any{"features": []map[string]string{{"name": "prefers-color-scheme", "value": scheme}}}, nil)
			b.open(page, 1400)
			b.eval("document.querySelectorAll('details').forEach((e) => { e.open = true; })", nil)
			for _, fault := range b.accessFaults() {
				t.Errorf("%s, %s: %s", name, scheme, fault)
			}
		}
	}
}

// TestBrowserKeyboard: the first stop of the keyboard skips to the answer, and every
// control can be reached and shows its focus.
func TestBrowserKeyboard(t *testing.T) {
	b := startBrowser(t)
	b.open(reportFile(t, data+"demo.xlsx"), 1400)
	press := func() {
		for _, kind := range []string{"rawKeyDown", "keyUp"} {
			b.call("Input.dispatchKeyEvent", map[string]any{"type": kind, "key": "Tab", "code": "Tab", "windowsVirtualKeyCode": 9}, nil)
		}
	}
	press()
	if got := b.text(":focus"); got != "Skip to the answer" {
		t.Errorf("the first stop is %q", got)
	}
	seen := map[string]bool{}
	for range 200 {
		press()
		var at struct {
			Name, Outline string
		}
		b.eval(`(() => { const e = document.activeElement; return {Name: e.id || e.tagName + ' ' + e.textContent.slice(0, 20), Outline: getComputedStyle(e).outlineStyle}; })()`, &at)
		if strings.HasPrefix(at.Name, "BODY") {
			break
		}
		if at.Outline == "none" {
			t.Errorf("%s has no visible focus", at.Name)
		}
		seen[at.Name] = true
	}
	for _, want := range []string{"theme", "o1-prior", "o1-baseline", "BUTTON Risk ratio (95% int"} {
		found := false
		for name := range seen {
			found = found || strings.HasPrefix(name, want[:min(len(want), 16)])
		}
		if !found {
			t.Errorf("the keyboard does not reach %s", want)
		}
	}
}
