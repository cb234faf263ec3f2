//go:build office

package main

import (
	"bytes"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"
)

// change is a number changed in the sheet and in the workbook made from it.
type change struct {
	study, outcome, column string  // where it stands in the workbook
	cell                   string  // where it stands in the sheet, for a workbook
	from, to               string  // the row's text before and after, for a text file
	value                  float64 // the new number
}

// otherKinds is an invented sheet of means, medians, a standard error and a p-value.
const otherKinds = `study,mean treated,sd treated,n treated,mean control,sd control,n control,median treated,q1 treated,q3 treated,median control,q1 control,q3 control,estimate,se,p
A,10,2,25,8,3,36,,,,,,,,,
B,11,2.5,40,9,3.1,42,,,,,,,,,
C,,,30,,,31,10,8,13,9,7,11,,,
D,,,50,,,52,,,,,,,1.5,0.6,
E,,,50,,,52,,,,,,,1.1,,0.03
F,3,4,12,2,5,12,,,,,,,,,
`

// TestOfficeAuditMoves: numbers changed in the workbook and computed anew by another
// spreadsheet program give what the program gives for the sheet so changed.
func TestOfficeAuditMoves(t *testing.T) {
	for _, test := range []struct {
		name, path string
		changes    []change
	}{
		{"one count", "checks/bcg_counts.csv", []change{
			{study: "Trial 4", column: "events treated", from: "Trial 4,1977,62,13598", to: "Trial 4,1977,95,13598", value: 95},
		}},
		{"several counts", "checks/bcg_counts.csv", []change{
			{study: "Trial 2", column: "total treated", from: "Trial 2,1949,6,306", to: "Trial 2,1949,6,196", value: 196},
			{study: "Trial 8", column: "events control", from: "88391,499,88391", to: "88391,512,88391", value: 512},
		}},
		{"a count of none", "published/magnesium.csv", []change{
			{study: "Morton", column: "events treated", from: "Morton,1984,1,1,40", to: "Morton,1984,1,0,40", value: 0},
		}},
		{"counts, means and limits", "demo.xlsx", []change{
			{study: "Lindqvist 2017", outcome: "flare within 24 weeks", column: "events treated", cell: "D11", value: 52},
			{study: "Dvořák 2021", outcome: "flare within 24 weeks", column: "ci low", cell: "M13", value: 0.55},
			{study: "Obradović 2024", outcome: "symptom score at 24 weeks", column: "sd control", cell: "K21", value: 8.1},
			{study: "Obradović 2024", outcome: "serious harm", column: "events control", cell: "H30", value: 0},
		}},
		{"medians, a standard error and a p-value", "", []change{
			{study: "C", column: "q3 treated", from: "10,8,13", to: "10,8,14", value: 14},
			{study: "D", column: "se", from: "1.5,0.6", to: "1.5,0.75", value: 0.75},
			{study: "E", column: "p", from: "1.1,,0.03", to: "1.1,,0.012", value: 0.012},
			{study: "F", column: "total treated", from: "F,3,4,12,", to: "F,3,4,21,", value: 21},
		}},
	} {
		t.Run(test.name, func(t *testing.T) {
			path := filepath.Join("../../testdata", test.path)
			if test.path == "" {
				path = filepath.Join(t.TempDir(), "kinds.csv")
				if err := os.WriteFile(path, []byte(otherKinds), 0o600); err != nil {
					t.Fatal(err)
				}
			}
			before, changed := auditOf(t, path), auditOf(t, changedSheet(t, path, test.changes))
			edited := changedWorkbook(t, before.data, test.changes)
			want := readWorkbook(t, changed.data)
			if n := compareFormulas(t, readWorkbook(t, before.data), want); n < 100 {
				t.Fatalf("the change moves %d formulas: the comparison would say nothing", n)
			}
			theirs := recalculated(t, falsified(t, edited), true)
			if n := compareFormulas(t, theirs, want); n > 0 {
				t.Errorf("%d formulas differ", n)
			}
			checkResults(t, theirs, want, changed.s)
		})
	}
}

// changedSheet returns a copy of a sheet with the changes made in it.
func changedSheet(t *testing.T, path string, changes []change) string {
	t.Helper()
	out := filepath.Join(t.TempDir(), filepath.Base(path))
	if filepath.Ext(path) == ".xlsx" {
		f := openWorkbook(t, path)
		for _, c := range changes {
			checkStudy(t, f, c)
			if err := f.SetCellValue("trials", c.cell, c.value); err != nil {
				t.Fatal(err)
			}
		}
		if err := f.SaveAs(out); err != nil {
			t.Fatal(err)
		}
		return out
	}
	content, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range changes {
		if bytes.Count(content, []byte(c.from)) != 1 {
			t.Fatalf("%q does not stand once in %s", c.from, path)
		}
		content = bytes.Replace(content, []byte(c.from), []byte(c.to), 1)
	}
	if err := os.WriteFile(out, content, 0o600); err != nil {
		t.Fatal(err)
	}
	return out
}

// checkStudy makes sure that a cell of the sheet belongs to the study and outcome.
func checkStudy(t *testing.T, f *excelize.File, c change) {
	t.Helper()
	row := strings.TrimLeft(c.cell, "ABCDEFGHIJKLMNOPQRSTUVWXYZ")
	name, _ := f.GetCellValue("trials", "A"+row)
	outcome, _ := f.GetCellValue("trials", "C"+row)
	old, _ := f.GetCellValue("trials", c.cell)
	if name != c.study || outcome != c.outcome || old == "" {
		t.Fatalf("cell %s holds %q of %q, %q", c.cell, old, name, outcome)
	}
}

// changedWorkbook makes the changes in the audit workbook's sheet of studies.
func changedWorkbook(t *testing.T, data []byte, changes []change) []byte {
	t.Helper()
	f := readWorkbook(t, data)
	rows, err := f.GetRows("studies")
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range changes {
		done := false
		for i, row := range rows {
			if i < 4 || row[0] != c.study || row[2] != c.outcome {
				continue
			}
			for j, head := range rows[3] {
				if head == c.column {
					cell, err := excelize.CoordinatesToCellName(j+1, i+1)
					if err != nil {
						t.Fatal(err)
					}
					if err := f.SetCellValue("studies", cell, c.value); err != nil {
						t.Fatal(err)
					}
					done = true
				}
			}
		}
		if !done {
			t.Fatalf("the workbook has no %s of %s, %s", c.column, c.study, c.outcome)
		}
	}
	var b bytes.Buffer
	if err := f.Write(&b); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}
