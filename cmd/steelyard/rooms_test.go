package main

import (
	"os/exec"
	"strings"
	"testing"
)

// TestRooms holds the import rule of the house: data flows one way, and each
// outside library has its room.
func TestRooms(t *testing.T) {
	out, err := exec.Command("go", "list", "-f", "{{.ImportPath}}: {{join .Imports \" \"}}", "steelyard/...").Output()
	if err != nil {
		t.Fatalf("go list: %v", err)
	}
	imports := map[string][]string{}
	for _, line := range strings.Split(strings.TrimSpace(string(out)), "\n") {
		name, list, _ := strings.Cut(line, ":")
		imports[name] = strings.Fields(list)
	}
	if len(imports) < 12 {
		t.Fatalf("go list found %d packages; the rule would check nothing", len(imports))
	}
	for room, all := range imports {
		for _, imported := range all {
			if reason := forbidden(room, imported); reason != "" {
				t.Errorf("%s imports %s: %s", room, imported, reason)
			}
		}
	}
}

// TestRoomsClosed checks the import rule over all that the rooms under meta
// pull in, however indirectly.
func TestRoomsClosed(t *testing.T) {
	out, err := exec.Command("go", "list", "-deps", "steelyard/meta/...").Output()
	if err != nil {
		t.Fatalf("go list -deps: %v", err)
	}
	deps := strings.Fields(string(out))
	if len(deps) < 30 {
		t.Fatalf("go list found %d packages; the rule would check nothing", len(deps))
	}
	for _, dep := range deps {
		for _, outside := range []string{"steelyard/ingest", "steelyard/forest", "steelyard/cmd", "github.com/xuri", "git.sr.ht", "github.com/urfave", "codeberg.org", "net/http"} {
			if strings.HasPrefix(dep, outside) {
				t.Errorf("a room under meta depends on %s", dep)
			}
		}
	}
}

// forbidden says why a room may not import a package, or "" if it may.
func forbidden(room, imported string) string {
	under := func(path string) bool { return room == path || strings.HasPrefix(room, path+"/") }
	is := func(paths ...string) bool {
		for _, p := range paths {
			if imported == p || strings.HasPrefix(imported, p+"/") {
				return true
			}
		}
		return false
	}
	switch {
	case under("steelyard/meta") && is("steelyard/ingest", "steelyard/forest", "steelyard/cmd"):
		return "data flows from the sheet to the charts, never back"
	case under("steelyard/meta") && is("time", "os", "net"):
		return "results depend on their input alone: no clock, no files, no network"
	case under("steelyard/forest") && is("steelyard/ingest", "steelyard/cmd"):
		return "charts draw results and never read sheets"
	case under("steelyard/ingest") && is("steelyard/forest", "steelyard/cmd"):
		return "readers do not draw"
	case is("github.com/xuri/excelize") && !under("steelyard/ingest") && !under("steelyard/forest/report"):
		return "only ingest and forest/report open workbooks"
	case is("git.sr.ht/~sbinet/gg", "codeberg.org/go-pdf/fpdf", "codeberg.org/go-fonts") && room != "steelyard/forest":
		return "only forest puts ink on paper"
	case is("github.com/urfave/cli") && !under("steelyard/cmd"):
		return "only cmd reads flags"
	case room == "steelyard/meta/numeric" && is("steelyard"):
		return "numeric is the ground floor"
	case room == "steelyard/meta/choice" && is("steelyard"):
		return "choice is the ground floor"
	case room == "steelyard/meta" && is("steelyard/meta/review", "steelyard/meta/effect", "steelyard/meta/synthesis"):
		return "meta knows only estimates and standard errors"
	}
	return ""
}
