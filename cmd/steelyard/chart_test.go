package main

import (
	"bytes"
	"encoding/xml"
	"image/png"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// TestChartFormats draws the demo's first outcome in each format at both widths.
func TestChartFormats(t *testing.T) {
	folder := t.TempDir()
	for _, name := range []string{"wide.svg", "wide.pdf", "wide.png", "narrow.svg", "narrow.pdf", "narrow.png"} {
		path := filepath.Join(folder, name)
		width := "180"
		if strings.HasPrefix(name, "narrow") {
			width = "85"
		}
		args := []string{"chart", "forest", data + "demo.xlsx", "--outcome", "flare within 24 weeks", "--width", width, "--out", path}
		if filepath.Ext(name) == ".png" {
			args = append(args, "--dpi", "100")
		}
		stdout, stderr, code := call(t, "", args...)
		if code != codeDone || stdout != path+"\n" || stderr != "" {
			t.Fatalf("%s: exit %d, stdout %q, stderr %q", name, code, stdout, stderr)
		}
		content, err := os.ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		checkChart(t, name, content)
		if _, stderr, code := call(t, "", args...); code != codeCall || !strings.Contains(stderr, "--overwrite") {
			t.Errorf("%s was drawn twice: exit %d, %s", name, code, stderr)
		}
		if _, _, code := call(t, "", append(args, "--overwrite")...); code != codeDone {
			t.Errorf("%s: --overwrite: exit %d", name, code)
		}
		again, err := os.ReadFile(path)
		if err != nil || !bytes.Equal(content, again) {
			t.Errorf("%s differs when drawn again (%v)", name, err)
		}
	}
	if entries, _ := os.ReadDir(folder); len(entries) != 6 {
		t.Errorf("the folder holds %d files, want 6: %v", len(entries), entries)
	}
}

func checkChart(t *testing.T, name string, content []byte) {
	t.Helper()
	switch filepath.Ext(name) {
	case ".svg":
		text := string(content)
		for _, words := range []string{"Halvorsen 2009", "Obradović 2024", "0.71", "29 : 1", "firm, 2.6 steps", "<title", "<desc"} {
			if !strings.Contains(text, words) {
				t.Errorf("%s does not say %q", name, words)
			}
		}
		for d := xml.NewDecoder(bytes.NewReader(content)); ; {
			if _, err := d.Token(); err == io.EOF {
				break
			} else if err != nil {
				t.Fatalf("%s: %v", name, err)
			}
		}
	case ".pdf":
		if !bytes.HasPrefix(content, []byte("%PDF-")) || !bytes.Contains(content, []byte("%%EOF")) {
			t.Errorf("%s is no PDF", name)
		}
	case ".png":
		picture, err := png.Decode(bytes.NewReader(content))
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
		want := 709 // 180 mm at 100 dots per inch
		if strings.HasPrefix(name, "narrow") {
			want = 335
		}
		if got := picture.Bounds().Dx(); got < want-1 || got > want+1 {
			t.Errorf("%s is %d pixels wide, want %d", name, got, want)
		}
	}
}

// TestChartEachOutcome: without --outcome every outcome has a file of its own.
func TestChartEachOutcome(t *testing.T) {
	folder := t.TempDir()
	stdout, stderr, code := call(t, "", "chart", "forest", data+"demo.xlsx", "--out", filepath.Join(folder, "f.svg"))
	if code != codeDone {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	for _, name := range []string{"f-1.svg", "f-2.svg", "f-3.svg"} {
		if _, err := os.Stat(filepath.Join(folder, name)); err != nil || !strings.Contains(stdout, name) {
			t.Errorf("%s: %v; stdout %q", name, err, stdout)
		}
	}
}

// TestHostileNames: markup and formulas from a sheet stay text in every output.
func TestHostileNames(t *testing.T) {
	folder := t.TempDir()
	sheet := filepath.Join(folder, "hostile.csv")
	content := "study,estimate,se\n\"<script>alert(1)</script>\",1,0.5\n\"=1+1\u202e\",2,0.5\n\"]]>&amp;\",0.5,0.4\n"
	if err := os.WriteFile(sheet, []byte(content), 0o644); err != nil {
		t.Fatal(err)
	}
	out := filepath.Join(folder, "f.svg")
	if _, stderr, code := call(t, "", "chart", "forest", sheet, "--out", out); code != codeDone {
		t.Fatalf("exit %d, %s", code, stderr)
	}
	svg, err := os.ReadFile(out)
	if err != nil {
		t.Fatal(err)
	}
	if strings.Contains(string(svg), "<script") || strings.Contains(string(svg), "\u202e") {
		t.Error("a name from the sheet is markup in the chart")
	}
	if !strings.Contains(string(svg), "&lt;script&gt;") {
		t.Error("the name is not in the chart as text")
	}
	stdout, _, _ := call(t, "", "pool", sheet, "--format", "json")
	if strings.Contains(stdout, "\u202e") || strings.Contains(stdout, "<script") {
		t.Errorf("the JSON holds live markup or direction marks:\n%s", stdout)
	}
}
