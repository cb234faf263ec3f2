//go:build office

// The tests of this file need LibreOffice Calc on the path as "soffice"; run them
// by "make office". They fail without it.

package main

import (
	"archive/zip"
	"bytes"
	"context"
	"fmt"
	"io"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"
	"time"

	"github.com/xuri/excelize/v2"

	"steelyard/forest/report/audit"
	"steelyard/ingest"
	"steelyard/ingest/rules"
	"steelyard/meta"
	"steelyard/meta/synthesis"
)

// audited is the workbook of a file with the program's own results.
type audited struct {
	s    *synthesis.Synthesis
	data []byte
}

func auditOf(t *testing.T, path string) audited {
	t.Helper()
	x, plan, err := ingest.Open(context.Background(), path, ingest.Options{})
	if err != nil {
		t.Fatal(err)
	}
	rules.Apply(x, plan)
	s, err := synthesis.Run(context.Background(), x, plan, audit.Wanted())
	if err != nil {
		t.Fatal(err)
	}
	var b bytes.Buffer
	if err := audit.Write(&b, s, x, "test"); err != nil {
		t.Fatal(err)
	}
	if about := textsOf(t, readWorkbook(t, b.Bytes()), "about"); strings.Contains(about, "nine digits") {
		t.Fatalf("formulas do not give the program's numbers:\n%s", about)
	}
	return audited{s, b.Bytes()}
}

// alwaysRecalculate is a profile that recalculates every workbook it opens; by itself
// the program trusts the values that a workbook holds.
const alwaysRecalculate = `<?xml version="1.0" encoding="UTF-8"?>
<oor:items xmlns:oor="http://openoffice.org/2001/registry" xmlns:xs="http://www.w3.org/2001/XMLSchema" xmlns:xsi="http://www.w3.org/2001/XMLSchema-instance">
<item oor:path="/org.openoffice.Office.Calc/Formula/Load"><prop oor:name="OOXMLRecalcMode" oor:op="fuse"><value>0</value></prop></item>
</oor:items>`

// heldValue is the value of a formula's cell.
var heldValue = regexp.MustCompile(`(</f><v>)[^<]*(</v>)`)

// falsified replaces the value of every formula by 999, so that a value which comes
// back right was computed.
func falsified(t *testing.T, data []byte) []byte {
	t.Helper()
	archive, err := zip.NewReader(bytes.NewReader(data), int64(len(data)))
	if err != nil {
		t.Fatal(err)
	}
	var out bytes.Buffer
	w := zip.NewWriter(&out)
	replaced := 0
	for _, part := range archive.File {
		r, err := part.Open()
		if err != nil {
			t.Fatal(err)
		}
		content, err := io.ReadAll(r)
		if err != nil {
			t.Fatal(err)
		}
		if strings.HasPrefix(part.Name, "xl/worksheets/") {
			replaced += len(heldValue.FindAll(content, -1))
			content = heldValue.ReplaceAll(content, []byte("${1}999${2}"))
		}
		to, err := w.Create(part.Name)
		if err == nil {
			_, err = to.Write(content)
		}
		if err != nil {
			t.Fatal(err)
		}
	}
	if err := w.Close(); err != nil || replaced < 500 {
		t.Fatalf("%d values falsified, %v", replaced, err)
	}
	return out.Bytes()
}

// recalculated lets another spreadsheet program compute a workbook anew.
func recalculated(t *testing.T, data []byte, always bool) *excelize.File {
	t.Helper()
	folder := t.TempDir()
	profile := filepath.Join(folder, "profile")
	if err := os.MkdirAll(filepath.Join(profile, "user"), 0o700); err != nil {
		t.Fatal(err)
	}
	if always {
		if err := os.WriteFile(filepath.Join(profile, "user", "registrymodifications.xcu"), []byte(alwaysRecalculate), 0o600); err != nil {
			t.Fatal(err)
		}
	}
	before := filepath.Join(folder, "audit.xlsx")
	if err := os.WriteFile(before, data, 0o600); err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithTimeout(context.Background(), 3*time.Minute)
	defer cancel()
	command := exec.CommandContext(ctx, "soffice", "-env:UserInstallation=file://"+filepath.ToSlash(profile),
		"--headless", "--convert-to", "xlsx", "--outdir", filepath.Join(folder, "saved"), before)
	command.Env = append(os.Environ(), "HOME="+folder)
	if out, err := command.CombinedOutput(); err != nil {
		t.Fatalf("soffice: %v\n%s", err, out)
	}
	return openWorkbook(t, filepath.Join(folder, "saved", "audit.xlsx"))
}

func openWorkbook(t *testing.T, path string) *excelize.File {
	t.Helper()
	f, err := excelize.OpenFile(path, excelize.Options{RawCellValue: true})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { _ = f.Close() })
	return f
}

func readWorkbook(t *testing.T, data []byte) *excelize.File {
	t.Helper()
	f, err := excelize.OpenReader(bytes.NewReader(data), excelize.Options{RawCellValue: true})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { _ = f.Close() })
	return f
}

// formulasOf returns the value of every cell of a workbook that holds a formula in a
// template, by sheet and cell.
func formulasOf(t *testing.T, template, values *excelize.File) map[string]string {
	t.Helper()
	all := map[string]string{}
	for _, sheet := range template.GetSheetList() {
		rows, err := template.GetRows(sheet)
		if err != nil {
			t.Fatal(err)
		}
		for i, row := range rows {
			for j := range row {
				cell, err := excelize.CoordinatesToCellName(j+1, i+1)
				if err != nil {
					t.Fatal(err)
				}
				formula, err := template.GetCellFormula(sheet, cell)
				if err != nil {
					t.Fatal(err)
				}
				if formula == "" {
					continue
				}
				if all[sheet+"!"+cell], err = values.GetCellValue(sheet, cell); err != nil {
					t.Fatal(err)
				}
			}
		}
	}
	return all
}

// alike reports whether two cells hold the same: numbers to nine digits, with what
// rounding leaves of a difference that is 0.
func alike(got, want string) bool {
	x, errX := strconv.ParseFloat(got, 64)
	y, errY := strconv.ParseFloat(want, 64)
	if errX != nil || errY != nil {
		return got == want
	}
	return math.Abs(x-y) <= 1e-9*math.Abs(y)+1e-11
}

// compareFormulas compares every formula of a recalculated workbook with the values
// that the program wrote into another; it returns how many differ.
func compareFormulas(t *testing.T, got, want *excelize.File) int {
	t.Helper()
	computed, expected := formulasOf(t, want, got), formulasOf(t, want, want)
	if len(expected) < 500 {
		t.Fatalf("%d formulas: the comparison would say nothing", len(expected))
	}
	differ := 0
	for at, value := range expected {
		if strings.HasPrefix(computed[at], "#") || strings.HasPrefix(computed[at], "Err:") || !alike(computed[at], value) {
			differ++
			if differ < 10 {
				t.Logf("%s: %s, the program has %s", at, computed[at], value)
			}
		}
	}
	return differ
}

// checkResults compares the named cells and the tables of refits of a recalculated
// workbook with the program's results, to nine digits.
func checkResults(t *testing.T, f, template *excelize.File, s *synthesis.Synthesis) {
	t.Helper()
	names := map[string]string{}
	for _, n := range template.GetDefinedName() {
		names[n.Name] = n.RefersTo
	}
	for i := range s.Outcomes {
		o := &s.Outcomes[i]
		fit := o.Result.Fit
		for name, want := range map[string]float64{
			"estimate": fit.Mean.Estimate, "se": fit.Mean.SE, "ci_low": fit.Mean.Low, "ci_high": fit.Mean.High, "tau2": fit.Mean.Tau2,
			"p": math.Exp(fit.Mean.LnP), "q": fit.Heterogeneity.Q, "i2_tau": fit.Heterogeneity.I2Tau.Value, "tau2_high": fit.Tau2.High, "tau2_low": fit.Tau2.Low,
			"ln_evidence": fit.Mean.Evidence.Ln(), "steps": fit.Mean.Evidence.Steps(),
			"prediction_low": fit.Prediction.Low, "prediction_high": fit.Prediction.High,
		} {
			full := fmt.Sprintf("%s_%d", name, i+1)
			checkNumber(t, full, valueAt(t, f, names[full]), want)
		}
		for j, study := range o.Studies {
			first := startOf(names[fmt.Sprintf("y_%d", i+1)])
			checkNumber(t, study.Source.Name, valueAt(t, f, first.down(j)), study.Estimate.Y)
		}
		var steps []meta.Mean
		for _, step := range o.Accrual.Cumulative {
			steps = append(steps, step.Mean)
		}
		checkRefits(t, f, "cumulative", i, len(s.Outcomes), steps)
		steps = nil
		for _, omission := range o.Accrual.LeaveOneOut {
			steps = append(steps, omission.Mean)
		}
		checkRefits(t, f, "leave-one-out", i, len(s.Outcomes), steps)
	}
}

// checkRefits compares a table of refits: its columns E to G, I and J hold τ², mean,
// standard error, upper limit and evidence.
func checkRefits(t *testing.T, f *excelize.File, part string, outcome, outcomes int, want []meta.Mean) {
	t.Helper()
	prefix := part
	if outcomes > 1 {
		prefix = fmt.Sprintf("%s %d ", part, outcome+1)
	}
	for _, sheet := range f.GetSheetList() {
		if !strings.HasPrefix(sheet, prefix) {
			continue
		}
		for i, mean := range want {
			for col, x := range map[string]float64{"E": mean.Tau2, "F": mean.Estimate, "G": mean.SE, "I": mean.High, "J": mean.Evidence.Ln()} {
				at := fmt.Sprintf("'%s'!%s%d", sheet, col, 5+i)
				checkNumber(t, at, valueAt(t, f, at), x)
			}
		}
		return
	}
	t.Fatalf("no sheet begins with %q", prefix)
}

func checkNumber(t *testing.T, what, got string, want float64) {
	t.Helper()
	x, err := strconv.ParseFloat(got, 64)
	if err != nil || math.Abs(x-want) > 1e-9*math.Abs(want)+1e-14 {
		t.Errorf("%s: %q, want %.15g", what, got, want)
	}
}

// cellPlace is a reference such as 'pooling 1'!$D$12, and its range's first cell.
type cellPlace struct {
	sheet, column string
	row           int
}

var cellReference = regexp.MustCompile(`^'?(.*?)'?!\$?([A-Z]+)\$?([0-9]+)`)

func startOf(refers string) cellPlace {
	m := cellReference.FindStringSubmatch(refers)
	if m == nil {
		return cellPlace{}
	}
	row, _ := strconv.Atoi(m[3])
	return cellPlace{m[1], m[2], row}
}

func (p cellPlace) down(rows int) string {
	return fmt.Sprintf("'%s'!%s%d", p.sheet, p.column, p.row+rows)
}

func valueAt(t *testing.T, f *excelize.File, refers string) string {
	t.Helper()
	p := startOf(refers)
	if p.sheet == "" {
		t.Fatalf("%q is no reference", refers)
	}
	v, err := f.GetCellValue(p.sheet, fmt.Sprintf("%s%d", p.column, p.row))
	if err != nil {
		t.Fatal(err)
	}
	return v
}

// TestOfficeAudit: another spreadsheet program, which has no value of ours to trust,
// computes what the program has, and no cell ends in an error.
func TestOfficeAudit(t *testing.T) {
	for _, path := range []string{"checks/bcg_counts.csv", "published/magnesium.csv", "demo.xlsx"} {
		t.Run(path, func(t *testing.T) {
			a := auditOf(t, filepath.Join("../../testdata", path))
			ours := readWorkbook(t, a.data)
			theirs := recalculated(t, falsified(t, a.data), true)
			if n := compareFormulas(t, theirs, ours); n > 0 {
				t.Errorf("%d formulas differ", n)
			}
			checkResults(t, theirs, ours, a.s)
		})
	}
}

// TestOfficeAuditCanFail: without the profile that recalculates, the false values come
// back, so that agreement shows a recalculation.
func TestOfficeAuditCanFail(t *testing.T) {
	a := auditOf(t, "../../testdata/published/magnesium.csv")
	ours := readWorkbook(t, a.data)
	theirs := recalculated(t, falsified(t, a.data), false)
	if n := compareFormulas(t, theirs, ours); n < 500 {
		t.Errorf("only %d false values came back: what is compared may never be recalculated", n)
	}
}
