package ingest

import (
	"archive/zip"
	"bytes"
	"context"
	"encoding/csv"
	"fmt"
	"io"
	"testing"

	"github.com/xuri/excelize/v2"

	"steelyard/meta/review"
)

// table is a sheet written down in a test: rows of texts and numbers, nil or ""
// for a blank cell.
type table [][]any

// csv returns the table as a text file.
func (rows table) csv(t testing.TB) []byte {
	t.Helper()
	var buffer bytes.Buffer
	w := csv.NewWriter(&buffer)
	for _, row := range rows {
		record := make([]string, len(row))
		for i, value := range row {
			if value != nil {
				record[i] = fmt.Sprint(value)
			}
		}
		if err := w.Write(record); err != nil {
			t.Fatal(err)
		}
	}
	w.Flush()
	return buffer.Bytes()
}

// xlsx returns the table as a workbook of one sheet, with ranges of cells merged.
func (rows table) xlsx(t testing.TB, merges ...string) []byte {
	t.Helper()
	f := excelize.NewFile()
	defer f.Close()
	rows.fill(t, f, "Sheet1")
	for _, m := range merges {
		first, last, _ := cutRange(m)
		if err := f.MergeCell("Sheet1", first, last); err != nil {
			t.Fatal(err)
		}
	}
	return saved(t, f)
}

func cutRange(m string) (first, last string, ok bool) {
	a, b, found := bytes.Cut([]byte(m), []byte(":"))
	return string(a), string(b), found
}

// fill writes the table into a sheet.
func (rows table) fill(t testing.TB, f *excelize.File, sheet string) {
	t.Helper()
	for i, row := range rows {
		for j, value := range row {
			if value == nil || value == "" {
				continue
			}
			cell, err := excelize.CoordinatesToCellName(j+1, i+1)
			if err != nil {
				t.Fatal(err)
			}
			if err := f.SetCellValue(sheet, cell, value); err != nil {
				t.Fatal(err)
			}
		}
	}
}

func saved(t testing.TB, f *excelize.File) []byte {
	t.Helper()
	buffer, err := f.WriteToBuffer()
	if err != nil {
		t.Fatal(err)
	}
	return buffer.Bytes()
}

// mustRead reads a file that has to be readable.
func mustRead(t testing.TB, data []byte, name string, o Options) *review.Extraction {
	t.Helper()
	x, plan, err := Read(context.Background(), data, name, o)
	if err != nil {
		t.Fatalf("%s: %v", name, err)
	}
	if plan == nil {
		t.Fatalf("%s: no plan", name)
	}
	return x
}

// line is what a study says, without its place in the file.
func line(s *review.Study) string {
	text := fmt.Sprintf("%s|%s|%s|%s|%s|%s", s.Name, s.ID, s.Date, s.Outcome, s.Measure, s.Better)
	for f := review.Estimate; int(f) < review.FieldCount; f++ {
		if n, ok := s.Number(f); ok {
			text += fmt.Sprintf("|%s=%g", f, n.Value)
		}
	}
	for _, r := range s.Remarks {
		text += fmt.Sprintf("|%s: %s", r.Header, r.Text)
	}
	return text
}

func lines(x *review.Extraction) []string {
	var all []string
	for i := range x.Studies {
		all = append(all, line(&x.Studies[i]))
	}
	return all
}

// said returns findings as "severity rule place", without the file's name.
func said(x *review.Extraction) []string {
	var all []string
	for _, f := range x.Findings {
		text := fmt.Sprintf("%s %s %s", f.Severity, f.Rule, f.Place.Cell())
		if f.Accepted != "" {
			text += " accepted"
		}
		all = append(all, text)
	}
	return all
}

// withErrorCell returns a workbook whose cell B2 stores the error of a formula,
// which the library for writing cannot make: the stored number is replaced.
func withErrorCell(t testing.TB) []byte {
	t.Helper()
	return editPart(t, table{{"study", "y", "se"}, {"A", 987, 1}}.xlsx(t), "xl/worksheets/sheet1.xml",
		`<c r="B2"><v>987</v></c>`, `<c r="B2" t="e"><f>1/0</f><v>#DIV/0!</v></c>`)
}

// editPart replaces a text in a part of a workbook.
func editPart(t testing.TB, data []byte, part, from, to string) []byte {
	t.Helper()
	r, err := zip.NewReader(bytes.NewReader(data), int64(len(data)))
	if err != nil {
		t.Fatal(err)
	}
	var out bytes.Buffer
	w := zip.NewWriter(&out)
	for _, entry := range r.File {
		in, err := entry.Open()
		if err != nil {
			t.Fatal(err)
		}
		content, err := io.ReadAll(in)
		if err != nil {
			t.Fatal(err)
		}
		if entry.Name == part {
			if !bytes.Contains(content, []byte(from)) {
				t.Fatalf("%s has no %s", part, from)
			}
			content = bytes.Replace(content, []byte(from), []byte(to), 1)
		}
		made, err := w.Create(entry.Name)
		if err != nil {
			t.Fatal(err)
		}
		if _, err := made.Write(content); err != nil {
			t.Fatal(err)
		}
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	return out.Bytes()
}
