package main

import (
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"
)

// auditFile runs audit and opens the workbook.
func auditFile(t testing.TB, stdin string, args ...string) *excelize.File {
	t.Helper()
	out := filepath.Join(t.TempDir(), "audit.xlsx")
	stdout, stderr, code := call(t, stdin, append([]string{"audit", "--out", out}, args...)...)
	if (code != codeDone && code != codeData) || stdout != out+"\n" {
		t.Fatalf("audit %v: exit %d, stdout %q, stderr %q", args, code, stdout, stderr)
	}
	f, err := excelize.OpenFile(out, excelize.Options{RawCellValue: true})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { _ = f.Close() })
	return f
}

// textsOf returns all texts of a sheet.
func textsOf(t testing.TB, f *excelize.File, sheet string) string {
	t.Helper()
	rows, err := f.GetRows(sheet)
	if err != nil {
		t.Fatal(err)
	}
	var all []string
	for _, row := range rows {
		all = append(all, strings.Join(row, " "))
	}
	return strings.Join(all, "\n")
}

// checkEffectFormulas checks that the audit workbook of a sheet of one study derives
// its effect by formulas alone.
func checkEffectFormulas(t *testing.T, sheet string, args []string, estimate, se float64) {
	t.Helper()
	f := auditFile(t, sheet, append(args, "-")...)
	if about := textsOf(t, f, "about"); strings.Contains(about, "Does not move: A:") || strings.Contains(about, "nine digits") {
		t.Errorf("the effect is not derived by formulas alone:\n%s", about)
	}
	for cell, want := range map[string]float64{"D12": estimate, "E12": se} {
		text, err := f.GetCellValue("pooling", cell)
		if err != nil {
			t.Fatal(err)
		}
		if formula, _ := f.GetCellFormula("pooling", cell); formula == "" {
			t.Errorf("%s is no formula", cell)
		}
		if got, err := strconv.ParseFloat(text, 64); err != nil || math.Abs(got-want) > 1e-9*math.Abs(want)+1e-13 {
			t.Errorf("%s is %q, want %v", cell, text, want)
		}
	}
}

// TestAuditCommand: the workbook is written whole, never over a file unless told, and
// rows that were left out are named.
func TestAuditCommand(t *testing.T) {
	out := filepath.Join(t.TempDir(), "bcg.xlsx")
	bcg := data + "checks/bcg_counts.csv"
	if stdout, stderr, code := call(t, "", "audit", bcg, "--out", out); code != codeDone || stdout != out+"\n" || stderr != "" {
		t.Fatalf("exit %d, %q, %q", code, stdout, stderr)
	}
	first, err := os.ReadFile(out)
	if err != nil {
		t.Fatal(err)
	}
	if _, stderr, code := call(t, "", "audit", bcg, "--out", out); code != codeCall || !strings.Contains(stderr, "--overwrite") {
		t.Errorf("an existing file: exit %d, %s", code, stderr)
	}
	if _, _, code := call(t, "", "audit", bcg, "--out", out, "--overwrite"); code != codeDone {
		t.Errorf("--overwrite: exit %d", code)
	}
	second, err := os.ReadFile(out)
	if err != nil || string(first) != string(second) {
		t.Errorf("two runs differ (%v)", err)
	}
	left, err := os.ReadDir(filepath.Dir(out))
	if err != nil || len(left) != 1 {
		t.Errorf("left behind: %v, %v", left, err)
	}
	wrong := "study,events treated,total treated,events control,total control\nA,5,50,9,50\nB,60,50,9,50\nC,7,60,8,60\n"
	_, stderr, code := call(t, wrong, "audit", "-", "--out", out, "--overwrite")
	if code != codeData || !strings.Contains(stderr, "2 of 3 rows pooled") {
		t.Errorf("a wrong row: exit %d, %s", code, stderr)
	}
}

// TestAuditDemo: every outcome has its sheets, the first sheet leads to each, and the
// rows stand with their places.
func TestAuditDemo(t *testing.T) {
	f := auditFile(t, "", data+"demo.xlsx")
	about := textsOf(t, f, "about")
	sheets := f.GetSheetList()
	if len(sheets) != 5+3*7 {
		t.Errorf("%d sheets: %v", len(sheets), sheets)
	}
	for _, sheet := range sheets[1:] {
		if !strings.Contains(about, sheet) {
			t.Errorf("the first sheet does not name %q", sheet)
		}
	}
	if !strings.HasPrefix(about[strings.Index(about, "Cautions"):], "Cautions\n Decision support only") {
		t.Error("the cautions do not come first")
	}
	studies := textsOf(t, f, "studies")
	for _, text := range []string{"trials row 6", "Dvořák 2021", "0.71"} {
		if !strings.Contains(studies, text) {
			t.Errorf("the sheet of studies lacks %q", text)
		}
	}
	for _, sheet := range sheets {
		if strings.HasPrefix(sheet, "charts") {
			if pictures, err := f.GetPictures(sheet, "A4"); err != nil || len(pictures) != 1 {
				t.Errorf("%s: %d pictures at A4, %v", sheet, len(pictures), err)
			}
		}
	}
}

// BenchmarkAudit writes the workbook of the demo, and of 100 studies.
func BenchmarkAudit(b *testing.B) {
	var rows strings.Builder
	rows.WriteString("study,year,events treated,total treated,events control,total control\n")
	for i := range 100 {
		row := []string{"Study " + strconv.Itoa(i), strconv.Itoa(1920 + i), strconv.Itoa(3 + i*7%23), strconv.Itoa(90 + i), strconv.Itoa(5 + i*11%29), strconv.Itoa(95 + i)}
		rows.WriteString(strings.Join(row, ",") + "\n")
	}
	for name, args := range map[string][]string{"demo": {data + "demo.xlsx"}, "100 studies": {"-"}} {
		b.Run(name, func(b *testing.B) {
			out := filepath.Join(b.TempDir(), "audit.xlsx")
			for b.Loop() {
				if _, stderr, code := call(b, rows.String(), append([]string{"audit", "--overwrite", "--out", out}, args...)...); code != codeDone {
					b.Fatalf("exit %d, %s", code, stderr)
				}
			}
			info, err := os.Stat(out)
			if err != nil {
				b.Fatal(err)
			}
			b.ReportMetric(float64(info.Size())/1e6, "MB")
		})
	}
}
