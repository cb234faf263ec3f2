//go:build browser

package main

import (
	"bytes"
	"encoding/base64"
	"encoding/json"
	"encoding/xml"
	"fmt"
	"image/png"
	"io"
	"math"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"steelyard/meta/synthesis"
)

// The tests of this file are about what a reader takes along: the exported result, the
// link, the figures, paper; and about a changed page at all widths, for everybody.

// catch keeps what the page would save or copy; saved returns the last file, copied the
// last text.
const catch = `(() => { window.files = []; const make = URL.createObjectURL; URL.createObjectURL = (blob) => { files.push(blob); return make.call(URL, blob); };
	HTMLAnchorElement.prototype.click = function () { window.savedAs = this.download; };
	window.copies = []; Object.defineProperty(navigator, 'clipboard', {value: {writeText: async (text) => { copies.push(text); }}}); })()`

func (b *browser) saved() (name string, content []byte) {
	b.t.Helper()
	var file struct{ Name, Content string }
	b.eval(`(async () => { for (let i = 0; i < 300 && !files.length; i++) await new Promise((f) => setTimeout(f, 20));
		const bytes = new Uint8Array(await files.pop().arrayBuffer()); let text = ''; bytes.forEach((x) => { text += String.fromCharCode(x); });
		return {Name: savedAs, Content: btoa(text)}; })()`, &file)
	content, err := base64.StdEncoding.DecodeString(file.Content)
	if err != nil {
		b.t.Fatal(err)
	}
	return file.Name, content
}

// button presses a button of the first outcome's controls by its text.
func (b *browser) button(text string) {
	b.t.Helper()
	b.eval(fmt.Sprintf(`[...document.querySelectorAll('#o1-whatif button')].find((e) => e.textContent === %q).click()`, text), nil)
}

// TestBrowserExport: the exported result holds the answer, the variant, the command and
// every variant looked at; the command copied from it prints the same answer; the link
// opens the page in the same state.
func TestBrowserExport(t *testing.T) {
	needEngine(t)
	page := reportFile(t, data+"demo.xlsx")
	b := startBrowser(t)
	b.open(page, 1400)
	b.eval(catch, nil)
	b.set("o1-wi-interval", "wald")
	b.set("o1-wi-effects", "common")
	b.pressed("z", 90, 2)
	b.change(`document.querySelector('#o1-whatif [data-row="8"]').click()`)
	b.button("Result as JSON")
	name, content := b.saved()
	var result struct {
		Format  string
		Outcome string
		Variant struct {
			Changes map[string]string
			LeftOut []int `json:"left_out"`
		}
		Differs  []string `json:"differs_from_plan"`
		Command  string
		LookedAt struct {
			Count    int
			Variants []struct {
				Differs []string `json:"differs_from_plan"`
				Answer  struct{ Estimate, Interval, Steps string }
			}
		} `json:"looked_at"`
		Planned, Shown struct{ Estimate, Interval string }
		Result         synthesis.Document
	}
	if err := json.Unmarshal(content, &result); err != nil {
		t.Fatal(err)
	}
	if name != "o1-what-if.json" || result.Format != "steelyard-what-if/1" || result.Variant.Changes["interval"] != "wald" || fmt.Sprint(result.Variant.LeftOut) != "[8]" || len(result.Differs) != 2 {
		t.Errorf("%s: %+v", name, result.Variant)
	}
	if result.LookedAt.Count != 3 || len(result.LookedAt.Variants) != 3 || result.LookedAt.Variants[1].Differs[0] != "effects common (planned: random)" || result.LookedAt.Variants[1].Answer.Estimate == "" {
		t.Errorf("looked at: %+v", result.LookedAt)
	}
	want := pooled(t, data+"demo.xlsx", "--outcome", result.Outcome, "--interval", "wald", "--where", "sheet row is not 8")
	if got, want := result.Result.Outcomes[0].Pooled, want.Outcomes[0].Pooled; math.Abs(got.Estimate-want.Estimate) > 1e-12 || math.Abs(got.Low-want.Low) > 1e-12 || math.Abs(got.Steps-want.Steps) > 1e-12 {
		t.Errorf("the exported result is %v from %v (%v steps), want %v from %v (%v)", got.Estimate, got.Low, got.Steps, want.Estimate, want.Low, want.Steps)
	}
	if result.Planned.Estimate != "0.71" || result.Shown.Interval == result.Planned.Interval {
		t.Errorf("planned %+v, shown %+v", result.Planned, result.Shown)
	}
	b.button("Copy")
	b.button("Copy a link to this state")
	var copies []string
	b.eval("copies", &copies)
	if len(copies) != 2 || copies[0] != result.Command || !strings.Contains(copies[0], "--interval wald --where 'sheet row is not 8'") {
		t.Fatalf("copied: %q", copies)
	}
	_, fragment, found := strings.Cut(copies[1], "#what-if?")
	if !found {
		t.Fatalf("the link is %q", copies[1])
	}
	strip := b.text("#o1 .wi-strip")
	b.openLink(page, "#what-if?"+fragment)
	if got := b.text("#o1 .wi-strip"); got != strip {
		t.Errorf("the link opens %q, want %q", got, strip)
	}
	b.openLink(page, "#what-if?outcome=nonsense&tau=guess")
	b.asPlanned()
	if got := b.text("#o1-whatif .wi-problem"); !strings.Contains(got, "nonsense") {
		t.Errorf("of a link for another page it says %q", got)
	}
	for _, complaint := range b.complaints() {
		t.Errorf("%.400s", complaint)
	}
}

// openLink opens the page anew by a link and waits until it shows what it names.
func (b *browser) openLink(page, fragment string) {
	b.t.Helper()
	b.call("Page.navigate", map[string]any{"url": "about:blank"}, nil)
	absolute, err := filepath.Abs(page)
	if err != nil {
		b.t.Fatal(err)
	}
	since := len(b.events)
	b.call("Page.navigate", map[string]any{"url": "file://" + filepath.ToSlash(absolute) + fragment}, nil)
	b.wait("Page.loadEventFired", since)
	b.eval(`(async () => { for (let i = 0; i < 1500 && !document.querySelector('.wi-strip:not([hidden]), .wi-problem'); i++) await new Promise((f) => setTimeout(f, 20)); })()`, nil)
}

// TestBrowserFigures: a figure is saved as SVG that is well-formed and says what differs
// from the plan, and as PNG with 300 pixels to the inch and ink on it; both in light
// colours on a dark page.
func TestBrowserFigures(t *testing.T) {
	needEngine(t)
	b := startBrowser(t)
	b.call("Emulation.setEmulatedMedia", map[string]any{"features": []map[string]string{{"name": "prefers-color-scheme", "value": "dark"}}}, nil)
	b.open(reportFile(t, data+"demo.xlsx"), 800)
	b.eval(catch, nil)
	b.set("o1-wi-effects", "common")
	b.button("SVG")
	name, content := b.saved()
	text := string(content)
	if name != "o1-forest.svg" || !strings.Contains(text, "What if, not the plan: effects common") || strings.Contains(text, "var(") {
		t.Errorf("%s: %.300s", name, text)
	}
	for _, tag := range regexp.MustCompile("<text[^>]*>").FindAllString(text, -1) {
		if !strings.Contains(tag, " fill=") {
			t.Errorf("a text has no colour of its own: %s", tag)
		}
	}
	decoder := xml.NewDecoder(bytes.NewReader(content))
	for {
		if _, err := decoder.Token(); err == io.EOF {
			break
		} else if err != nil {
			t.Fatalf("the SVG is not well-formed: %v", err)
		}
	}
	b.button("PNG")
	name, content = b.saved()
	image, err := png.Decode(bytes.NewReader(content))
	if err != nil {
		t.Fatalf("%s: %v", name, err)
	}
	size := image.Bounds().Size()
	if size.X != 2126 { // 180 mm at 300 pixels to the inch: 180/25.4·300
		t.Errorf("%s is %v pixels", name, size)
	}
	dark, blue := 0, 0
	for x := 0; x < size.X; x++ {
		for y := 0; y < size.Y; y++ {
			r, g, bl, _ := image.At(x, y).RGBA()
			switch {
			case r>>8 == 0x1a && g>>8 == 0x1a && bl>>8 == 0x1a:
				dark++
			case r>>8 == 0 && g>>8 == 0x72 && bl>>8 == 0xb2:
				blue++
			}
		}
	}
	if r, _, _, _ := image.At(1, 1).RGBA(); r>>8 != 0xff || dark < 1000 || blue < 1000 {
		t.Errorf("%s has %d pixels of ink and %d of the estimates' blue; its corner is %x", name, dark, blue, r>>8)
	}
	if folder := os.Getenv("STEELYARD_PICTURES"); folder != "" {
		b.save(filepath.Join(folder, "what-if-forest.png"), base64.StdEncoding.EncodeToString(content))
		b.save(filepath.Join(folder, "what-if-forest.svg"), base64.StdEncoding.EncodeToString([]byte(text)))
	}
}

// TestBrowserWhatIfFits: a changed page with all its controls open stands within the window
// at every width, with hostile names, and names hold no markup.
func TestBrowserWhatIfFits(t *testing.T) {
	needEngine(t)
	b := startBrowser(t)
	for name, sheet := range map[string]string{"demo": data + "demo.xlsx", "hostile": hostileSheet(t)} {
		b.open(reportFile(t, sheet), 1400)
		b.set("o1-wi-effects", "common")
		b.change(`document.querySelectorAll('#o1-whatif [data-row]')[1].click()`)
		b.eval(`document.querySelectorAll('#o1-whatif details').forEach((e) => { e.open = true; })`, nil)
		for _, width := range browserWidths {
			b.call("Emulation.setDeviceMetricsOverride", map[string]any{"width": width, "height": 900, "deviceScaleFactor": 1, "mobile": false}, nil)
			b.eval(`new Promise((give) => requestAnimationFrame(() => setTimeout(give, 50)))`, nil)
			b.withinWindow(fmt.Sprintf("%s at %d px", name, width), ".whatif *, .wi-strip *, .wi-tag, .wi-rows button", ".vh, [hidden], option")
			b.picture(fmt.Sprintf("what-if-%s-%d.png", name, width))
		}
	}
	for _, complaint := range b.complaints() {
		t.Errorf("%.400s", complaint)
	}
}

// TestBrowserWhatIfAccess: a changed page with all its controls open keeps no reader out,
// light and dark.
func TestBrowserWhatIfAccess(t *testing.T) {
	needEngine(t)
	b := startBrowser(t)
	page := reportFile(t, data+"demo.xlsx")
	for _, scheme := range []string{"light", "dark"} {
		b.call("Emulation.setEmulatedMedia", map[string]any{"features": []map[string]string{{"name": "prefers-color-scheme", "value": scheme}}}, nil)
		b.open(page, 1400)
		b.eval("document.querySelectorAll('details').forEach((e) => { e.open = true; })", nil)
		b.set("o1-wi-effects", "common")
		b.change(`document.querySelector('#o1-whatif [data-row]').click()`)
		b.set("o1-wi-level", "95")
		b.eval("document.querySelectorAll('details').forEach((e) => { e.open = true; })", nil)
		for _, fault := range b.accessFaults() {
			t.Errorf("%s: %s", scheme, fault)
		}
	}
}

// TestBrowserWhatIfPrints: on paper a changed page says that it is none of the plan, with
// both answers, and shows no control; as planned it prints as if there were none.
func TestBrowserWhatIfPrints(t *testing.T) {
	needEngine(t)
	b := startBrowser(t)
	b.open(reportFile(t, data+"demo.xlsx"), 1400)
	seen := func() (shown []string) {
		b.eval(`['.whatif', '.wi-tag', '.wi-says', '.wi-compare table', '.wi-log li', '.wi-groups', '.wi-bar', '.wi-strip', '.wi-rows', '.wi-box', '.wi-export', '.wi-invite', '.wi-log button'].filter((s) => [...document.querySelectorAll(s)].some((e) => e.getClientRects().length))`, &shown)
		return shown
	}
	b.call("Emulation.setEmulatedMedia", map[string]any{"media": "print"}, nil)
	if got := seen(); len(got) != 0 {
		t.Errorf("as planned paper shows %q", got)
	}
	b.set("o1-wi-effects", "common")
	b.eval("dispatchEvent(new Event('beforeprint'))", nil)
	if got := strings.Join(seen(), " "); got != ".whatif .wi-tag .wi-says .wi-compare table .wi-log li" {
		t.Errorf("changed, paper shows %q", got)
	}
	if folder := os.Getenv("STEELYARD_PICTURES"); folder != "" {
		var pdf struct{ Data string }
		b.call("Page.printToPDF", map[string]any{"preferCSSPageSize": true, "printBackground": true}, &pdf)
		b.save(filepath.Join(folder, "what-if.pdf"), pdf.Data)
	}
}
