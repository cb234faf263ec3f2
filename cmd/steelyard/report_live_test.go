package main

import (
	"encoding/json"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"steelyard/forest/webpage"
	"steelyard/forest/whatif"
)

// livePageOf writes a page for the demo workbook with stand-ins for the engine.
func livePageOf(t *testing.T, live webpage.Live) string {
	t.Helper()
	page, err := webpage.Page(demoSynthesis(t), webpage.Options{Version: "1", Live: &live})
	if err != nil {
		t.Fatal(err)
	}
	return string(page)
}

// TestLivePolicy: a page with the engine may compile it and run its worker, and no more
// than that beyond a page that only shows.
func TestLivePolicy(t *testing.T) {
	page := livePageOf(t, webpage.Live{Code: "#$%", Worker: "onmessage = null;", Script: "void 0;\n", Sheet: []byte(`{"version":"1"}`)})
	policy := regexp.MustCompile(`http-equiv="Content-Security-Policy" content="([^"]*)"`).FindStringSubmatch(page)
	if policy == nil {
		t.Fatal("no policy")
	}
	text := strings.ReplaceAll(policy[1], "&#39;", "'")
	checkPolicy(t, page, text)
	if !strings.HasPrefix(text, "default-src 'none';") || strings.Count(text, "unsafe") != 1 || !strings.Contains(text, "' 'wasm-unsafe-eval'; worker-src blob:;") {
		t.Errorf("the policy is %q", text)
	}
}

// TestLiveIslands: what would end the element that holds it is escaped in JSON, and
// refused elsewhere.
func TestLiveIslands(t *testing.T) {
	page := livePageOf(t, webpage.Live{Sheet: []byte(`{"version":"</script><!--"}`)})
	island := regexp.MustCompile(`<script type="application/json" id="sheet">(.*?)</script>`).FindStringSubmatch(page)
	if island == nil {
		t.Fatal("no data for the engine")
	}
	var sheet struct{ Version string }
	if err := json.Unmarshal([]byte(island[1]), &sheet); err != nil || sheet.Version != "</script><!--" || strings.Contains(island[1], "<!--") {
		t.Errorf("%v, version %q in %.80s", err, sheet.Version, island[1])
	}
	for _, live := range []webpage.Live{
		{Code: "a</SCRIPT>", Sheet: []byte(`{"version":"1"}`)}, {Worker: "a <!-- b", Sheet: []byte(`{"version":"1"}`)}, {Sheet: []byte(`[]`)},
	} {
		if _, err := webpage.Page(demoSynthesis(t), webpage.Options{Live: &live}); err == nil {
			t.Errorf("%+v: no error", live)
		}
	}
}

// TestReportParts: an outcome's share of the page is what the page holds.
func TestReportParts(t *testing.T) {
	s := demoSynthesis(t)
	page := livePageOf(t, webpage.Live{Sheet: []byte(`{"version":"1"}`)})
	island := regexp.MustCompile(`<script type="application/json" id="sheet">(.*?)</script>`).FindStringSubmatch(page)
	var sheet struct{ Outcomes []webpage.Place }
	if err := json.Unmarshal([]byte(island[1]), &sheet); err != nil || len(sheet.Outcomes) != len(s.Outcomes) {
		t.Fatalf("%v, %d places", err, len(sheet.Outcomes))
	}
	for i := range s.Outcomes {
		part, err := webpage.PartOf(s, i, sheet.Outcomes[i], webpage.Whole)
		if err != nil {
			t.Fatal(err)
		}
		if len(part.Sections) < 8 || part.Lead == "" || part.Data.ID != sheet.Outcomes[i].ID {
			t.Errorf("%s: %d sections, lead %q", s.Outcomes[i].Name, len(part.Sections), part.Lead)
		}
		for _, section := range part.Sections {
			if !strings.Contains(page, section.HTML) || !strings.Contains(section.HTML, ` id="`+section.ID+`"`) {
				t.Errorf("the page lacks %s", section.ID)
			}
		}
		if !strings.Contains(page, part.Lead) {
			t.Errorf("the page lacks %q", part.Lead)
		}
		for _, rule := range strings.SplitAfter(part.CSS, "}") {
			if !strings.Contains(page, rule) {
				t.Errorf("the page lacks the rule %s", rule)
			}
		}
	}
}

// TestReportSaysStatic: a report says whether and why its page computes nothing; with the
// engine built in, it says nothing and the page holds the sheet as it was read.
func TestReportSaysStatic(t *testing.T) {
	withoutFigures(t)
	write := func(args ...string) string {
		_, stderr, code := call(t, "", append([]string{"report", data + "demo.xlsx", "--out", filepath.Join(t.TempDir(), "out")}, args...)...)
		if code != codeDone && code != codeData {
			t.Fatalf("exit %d, %s", code, stderr)
		}
		return stderr
	}
	if got := write("--static"); !strings.Contains(got, "computes no other: as --static asks") {
		t.Errorf("with --static the report says %q", got)
	}
	_, built := whatif.Packed()
	if got := write(); strings.Contains(got, "built without the engine") == built {
		t.Errorf("the engine is built in: %v; the report says %q", built, got)
	}
}
