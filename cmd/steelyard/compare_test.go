package main

import (
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// Two invented extractions of three studies: the second row differs by rounding, the
// third by a slip that changes its effect by more than a tenth.
const (
	oneExtraction     = "study,year,odds ratio,ci low,ci high\nAhlgren 2001,2001,0.71,0.49,1.02\nBecker 2004,2004,0.8,0.52,1.25\nDubois 2010,2010,0.89,0.65,1.21\n"
	anotherExtraction = "study,year,odds ratio,ci low,ci high\nAhlgren 2001,2001,0.71,0.49,1.02\nBecker 2004,2004,0.81,0.52,1.25\nDubois 2010,2010,0.69,0.50,0.94\n"
)

// TestCheckCompare wants the counts, both readings, and a workbook that reads back with
// an error for each number to be settled.
func TestCheckCompare(t *testing.T) {
	dir := t.TempDir()
	a, b, settle := filepath.Join(dir, "a.csv"), filepath.Join(dir, "b.csv"), filepath.Join(dir, "settle.xlsx")
	for path, text := range map[string]string{a: oneExtraction, b: anotherExtraction} {
		if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
	}
	d := checked(t, "", codeDone, a, "--compare", b, "--settle", settle)
	if got := d.Compared; got == nil || got.Identical != 1 || got.Rounding != 1 || got.Differing != 1 || got.Large != 1 || got.Other.File != "b.csv" {
		t.Errorf("compared %+v", got)
	}
	readings := 0
	for _, f := range d.Findings {
		if f.Rule == "A9" {
			readings += len(f.Readings)
		}
	}
	if readings != 2 {
		t.Errorf("%d readings of the row that differs, want 2", readings)
	}
	back := checked(t, "", codeData, settle)
	if back.Rows != 3 || back.Counts.Errors != 3 {
		t.Errorf("the workbook has %d rows with %d errors, want 3 with the 3 numbers to be settled", back.Rows, back.Counts.Errors)
	}
	if _, stderr, code := call(t, "", "check", a, "--compare", b, "--settle", settle); code != codeCall || !strings.Contains(stderr, "--overwrite") {
		t.Errorf("over the workbook: exit %d, stderr %q", code, stderr)
	}
	for _, args := range [][]string{{"check", a, "--settle", settle}, {"check", a, "--compare", b, "--settle", filepath.Join(dir, "x.csv")}} {
		if _, stderr, code := call(t, "", args...); code != codeCall {
			t.Errorf("%v: exit %d, stderr %q", args, code, stderr)
		}
	}
	if _, _, code := call(t, "", "check", a, "--compare", filepath.Join(dir, "none.csv")); code != codeFile {
		t.Errorf("no such file: exit %d, want %d", code, codeFile)
	}
}
