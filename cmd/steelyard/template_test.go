package main

import (
	"bytes"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"
)

// TestTemplateToAnswer writes a template, fills in two of the published BCG
// trials by hand, and pools them: the whole way of a reviewer.
func TestTemplateToAnswer(t *testing.T) {
	path := filepath.Join(t.TempDir(), "bcg.xlsx")
	stdout, stderr, code := call(t, "", "template", "--measure", "Odds Ratio", "--out", path)
	if code != codeDone || stdout != path+"\n" || stderr != "" {
		t.Fatalf("exit %d, stdout %q, stderr %q", code, stdout, stderr)
	}
	_, stderr, code = call(t, "", "pool", path)
	if code != codeData || !strings.Contains(stderr, "studies: the header stands in row 1: no row with a study follows the header") {
		t.Errorf("an empty template: exit %d, %s", code, stderr)
	}
	f, err := excelize.OpenFile(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	column := map[string]string{}
	for col := 'A'; col <= 'Z'; col++ {
		header, err := f.GetCellValue("studies", string(col)+"1")
		if err != nil {
			t.Fatal(err)
		}
		column[header] = string(col)
	}
	// Colditz et al., JAMA 1994;271:698-702: Aronson 1948 and Ferguson & Simes 1949.
	for row, study := range []map[string]any{
		{"study": "Aronson 1948", "date": "1948", "events treated": 4, "total treated": 123, "events control": 11, "total control": 139},
		{"study": "Ferguson 1949", "date": "1949", "events treated": 6, "total treated": 306, "events control": 29, "total control": 303},
	} {
		for header, value := range study {
			if column[header] == "" {
				t.Fatalf("the template has no column %q", header)
			}
			if err := f.SetCellValue("studies", column[header]+string(rune('2'+row)), value); err != nil {
				t.Fatal(err)
			}
		}
		if err := f.SetCellStr("studies", column["outcome"]+string(rune('2'+row)), "tuberculosis"); err != nil {
			t.Fatal(err)
		}
	}
	if err := f.Save(); err != nil {
		t.Fatal(err)
	}
	d := pooled(t, path)
	if len(d.Outcomes) != 1 || d.Outcomes[0].Measure != "odds ratio" || len(d.Outcomes[0].Studies) != 2 || len(d.Findings) != 0 {
		t.Fatalf("outcomes %+v, findings %+v", d.Outcomes, d.Findings)
	}
}

// TestTemplateNeverOverwrites: a file that exists stays as it is without
// --overwrite.
func TestTemplateNeverOverwrites(t *testing.T) {
	path := filepath.Join(t.TempDir(), "mine.xlsx")
	if err := os.WriteFile(path, []byte("months of work"), 0o600); err != nil {
		t.Fatal(err)
	}
	_, stderr, code := call(t, "", "template", "--measure", "risk ratio", "--out", path)
	if code != codeCall || !strings.Contains(stderr, "--overwrite") {
		t.Errorf("exit %d, %s", code, stderr)
	}
	if kept, err := os.ReadFile(path); err != nil || string(kept) != "months of work" {
		t.Errorf("the file was changed (%v)", err)
	}
	if _, stderr, code := call(t, "", "template", "--measure", "risk ratio", "--out", path, "--overwrite"); code != codeDone {
		t.Errorf("with --overwrite: exit %d, %s", code, stderr)
	}
	if written, err := os.ReadFile(path); err != nil || !bytes.HasPrefix(written, []byte("PK")) {
		t.Errorf("with --overwrite no workbook was written (%v)", err)
	}
}

// TestTemplateCalls: a call that leaves something out is told what.
func TestTemplateCalls(t *testing.T) {
	for args, says := range map[string]string{
		"":                                 "--measure with one of: ",
		"--measure|risk ratio":             "add --out F.xlsx",
		"--measure|risc|--out|F.xlsx":      "odds ratio, risk ratio",
		"--measure|risk ratio|--out|F.csv": "name it .xlsx",
		"--measure|risk ratio|F.xlsx":      "--out F.xlsx",
		"--measure|risk ratio|--from|means|--out|F.xlsx":                "--from means",
		"--measure|risk ratio|--from|medals|--out|F.xlsx":               "counts, means",
		"--measure|risk ratio|--from|counts|--out|/nowhere/at/all.xlsx": "/nowhere/at",
	} {
		var parts []string
		if args != "" {
			parts = strings.Split(args, "|")
		}
		stdout, stderr, code := call(t, "", append([]string{"template"}, parts...)...)
		want := codeCall
		if strings.Contains(args, "nowhere") {
			want = codeFile
		}
		if code != want || stdout != "" || !strings.Contains(stderr, says) || strings.Count(stderr, "\n") != 1 {
			t.Errorf("template %s: exit %d, stdout %q, stderr %q; want %q", args, code, stdout, stderr, says)
		}
	}
}

// TestGoldenTemplateHelp pins the command's help text.
func TestGoldenTemplateHelp(t *testing.T) {
	stdout, stderr, code := call(t, "", "template", "--help")
	if code != codeDone || stderr != "" {
		t.Fatalf("exit %d, stderr %q", code, stderr)
	}
	golden(t, "help-template.txt", stdout)
}
