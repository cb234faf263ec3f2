package grid

import (
	"context"
	"errors"
	"math"
	"regexp"
	"slices"
	"strings"
	"testing"
	"unicode/utf8"
)

// checkBook demands what is promised of every answer: a whole book or a
// *FileError, never both, and cells that are in order.
func checkBook(t *testing.T, book *Book, err error) {
	t.Helper()
	if err != nil {
		var e *FileError
		if book != nil || !errors.As(err, &e) || e.File == "" || e.Problem == "" || e.Remedy == "" {
			t.Fatalf("book %v, error %#v; want a complete *FileError alone", book, err)
		}
		if strings.Contains(e.Problem, "fault of this program") {
			t.Fatalf("a panic was caught: %v", err)
		}
		return
	}
	for _, sheet := range book.Sheets {
		last := 0
		for _, row := range sheet.Rows {
			if row.Number <= last || row.Number > MaxRows || len(row.Cells) > MaxColumns || !slices.ContainsFunc(row.Cells, isFilled) {
				t.Fatalf("row %d after %d with %d cells: out of order, too long or blank", row.Number, last, len(row.Cells))
			}
			last = row.Number
			for _, cell := range row.Cells {
				checkCell(t, cell, book.Text)
			}
		}
		for _, m := range sheet.Merges {
			if m.FirstRow < 1 || m.FirstCol < 1 || m.LastRow < m.FirstRow || m.LastCol < m.FirstCol {
				t.Fatalf("merged range %v", m)
			}
		}
	}
}

func checkCell(t *testing.T, cell Cell, text bool) {
	t.Helper()
	switch {
	case (cell.Kind == Blank) != (strings.TrimSpace(cell.Text) == ""), cell.Kind == Blank && cell.Formula:
		t.Fatalf("cell %+v: blank or not?", cell)
	case text && (cell.Kind > Text || cell.Formula):
		t.Fatalf("cell %+v in a text file", cell)
	case !utf8.ValidString(cell.Text) || len(cell.Text) > 8*MaxFieldBytes || strings.ContainsAny(cell.Text, "\x00\x07\r\x7f\u202e\u2066\u200b\ufeff"):
		t.Fatalf("cell %+v: characters", cell)
	}
	if cell.Kind == Number && !validDouble(cell.Text) {
		t.Fatalf("cell %+v is no number", cell)
	}
}

// FuzzWorkbook replaces one part of a healthy workbook by any bytes.
func FuzzWorkbook(f *testing.F) {
	base := minimal(`<cols><col min="2" max="3" hidden="1"/></cols><sheetData><row r="1" hidden="1"><c r="A1" t="s"><v>1</v></c><c r="B1" s="2"><f>1+1</f><v>2</v></c></row></sheetData><mergeCells><mergeCell ref="A1:C2"/></mergeCells>`)
	base["xl/worksheets/_rels/sheet1.xml.rels"] = []byte(`<Relationships ` + relsNS + `><Relationship Id="r1" Type="` + relType + `comments" Target="../comments1.xml"/></Relationships>`)
	base["xl/comments1.xml"] = []byte(`<comments ` + mainNS + `><commentList><comment ref="A1"><text><r><t>note</t></r></text></comment></commentList></comments>`)
	var names []string
	for name := range base {
		names = append(names, name)
	}
	slices.Sort(names)
	for i, name := range names {
		f.Add(uint8(i), base[name])
		f.Add(uint8(i), base[name][:len(base[name])/2])
	}
	f.Add(uint8(len(names)), base.pack(f))
	f.Fuzz(func(t *testing.T, which uint8, content []byte) {
		data := content // the whole package, or one part
		if int(which) < len(names) {
			p := parts{}
			for name := range base {
				p[name] = base[name]
			}
			p[names[which]] = content
			data = p.packStored(t)
		}
		book, err := Read(context.Background(), data, "a.xlsx")
		checkBook(t, book, err)
	})
}

// FuzzText reads any bytes as text and demands that what was read, written as a
// quoted table, reads the same.
func FuzzText(f *testing.F) {
	for _, seed := range []string{"a,b\n1,2\n", "sep=;\na;1,5\n", "\ufeffa\tb\r\n\"x\"\"y\"\t2\r\n", "\xff\xfea\x00,\x00b\x00\n\x00", "a;b\r\r\"1\n2\";\xe9", "\"open\n", "a|b\n\u202ex|y"} {
		f.Add([]byte(seed), false)
	}
	f.Fuzz(func(t *testing.T, data []byte, tabs bool) {
		name := "a.csv"
		if tabs {
			name = "a.tsv"
		}
		book, err := Read(context.Background(), data, name)
		checkBook(t, book, err)
		if err != nil || !book.Text || len(book.Sheets[0].Rows) == 0 {
			return
		}
		again, err := Read(context.Background(), []byte(quoted(book.Sheets[0])), "a.csv")
		if err != nil {
			t.Fatalf("what was read and written is refused: %v", err)
		}
		if got, want := texts(again.Sheets[0])[1:], texts(book.Sheets[0]); !slices.Equal(stripNumbers(got), stripNumbers(want)) {
			t.Fatalf("written and read again:\n got %q\nwant %q", got, want)
		}
	})
}

// quoted writes rows with every field in quotes, under a header.
func quoted(sheet Sheet) string {
	var b strings.Builder
	b.WriteString("first,second\n")
	for _, row := range sheet.Rows {
		for i, cell := range row.Cells {
			if i > 0 {
				b.WriteByte(',')
			}
			b.WriteString(`"` + strings.ReplaceAll(cell.Text, `"`, `""`) + `"`)
		}
		b.WriteByte('\n')
	}
	return b.String()
}

func stripNumbers(rows []string) []string {
	var list []string
	for _, row := range rows {
		_, cells, _ := strings.Cut(row, ": ")
		list = append(list, cells)
	}
	return list
}

// plainNumber is the grammar of what ParseNumber returns, spelt independently.
var plainNumber = regexp.MustCompile(`^-?[0-9]+(\.[0-9]+)?(e[+-]?[0-9]+)?$`)

func FuzzParseNumber(f *testing.F) {
	for _, seed := range []string{"1", "-1.5e-3", "1,234", "1.234,5", "−0·42", "１２", "1e999", "NaN", "0x1p-2", "1_000", "12\u00a0345", ".5"} {
		f.Add(seed, false)
		f.Add(seed, true)
	}
	f.Fuzz(func(t *testing.T, text string, comma bool) {
		mark := '.'
		if comma {
			mark = ','
		}
		value, normalised, err := ParseNumber(text, mark)
		if err != nil {
			if value != 0 || normalised != "" {
				t.Fatalf("ParseNumber(%q) = %v, %q with error %v", text, value, normalised, err)
			}
			return
		}
		again, same, err := ParseNumber(normalised, '.')
		if math.IsNaN(value) || math.IsInf(value, 0) || !plainNumber.MatchString(normalised) || err != nil || again != value || same != normalised {
			t.Fatalf("ParseNumber(%q) = %v, %q; read again %v, %q, %v", text, value, normalised, again, same, err)
		}
		if _, err := Decimal([]string{text}); err != nil && !strings.ContainsAny(text, ",，") {
			t.Fatalf("Decimal(%q) without a comma: %v", text, err)
		}
	})
}
