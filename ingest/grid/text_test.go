package grid

import (
	"encoding/binary"
	"fmt"
	"strings"
	"testing"
	"unicode/utf16"

	"github.com/xuri/excelize/v2"
	"golang.org/x/text/encoding/charmap"
)

func utf16Bytes(text string, order binary.ByteOrder) []byte {
	var b []byte
	for _, unit := range utf16.Encode([]rune(text)) {
		b = append(b, 0, 0)
		order.PutUint16(b[len(b)-2:], unit)
	}
	return b
}

// TestSameTableInEveryForm reads one table as a workbook and as text in all
// encodings, delimiters and line ends: the cells must be the same.
func TestSameTableInEveryForm(t *testing.T) {
	table := [][]string{
		{"study", "estimate", "note"},
		{"Müller, É.", "0.25", "two\nlines"},
		{"Ø \"quoted\"", "-1.5", ""},
		{"", "", ""},
		{"last; and |least", "1e-3", "x"},
	}
	want := []string{"1: study|estimate|note", "2: Müller, É.|0.25|two\nlines", "3: Ø \"quoted\"|-1.5", "5: last; and |least|1e-3|x"}

	workbook := build(t, func(f *excelize.File) {
		for i, row := range table {
			for j, text := range row {
				if err := f.SetCellStr("Sheet1", reference(i+1, j+1), text); err != nil {
					t.Fatal(err)
				}
			}
		}
	})
	equal(t, "workbook", texts(mustRead(t, workbook, "a.xlsx").Sheets[0]), want)

	encodings := map[string]func(string) []byte{
		"UTF-8":                func(s string) []byte { return []byte(s) },
		"UTF-8 with mark":      func(s string) []byte { return []byte("\ufeff" + s) },
		"UTF-16LE with mark":   func(s string) []byte { return utf16Bytes("\ufeff"+s, binary.LittleEndian) },
		"UTF-16BE with mark":   func(s string) []byte { return utf16Bytes("\ufeff"+s, binary.BigEndian) },
		"UTF-16LE without":     func(s string) []byte { return utf16Bytes(s, binary.LittleEndian) },
		"UTF-16BE without":     func(s string) []byte { return utf16Bytes(s, binary.BigEndian) },
		"Windows-1252":         func(s string) []byte { b, _ := charmap.Windows1252.NewEncoder().Bytes([]byte(s)); return b },
		"UTF-8, no final line": func(s string) []byte { return []byte(strings.TrimRight(s, "\r\n")) },
	}
	for name, encode := range encodings {
		for _, delimiter := range []string{",", ";", "\t", "|"} {
			for _, end := range []string{"\n", "\r\n", "\r"} {
				text := delimited(table, delimiter, end)
				data := encode(text)
				t.Run(fmt.Sprintf("%s %q %q", name, delimiter, end), func(t *testing.T) {
					book := mustRead(t, data, "a.csv")
					equal(t, "cells", texts(book.Sheets[0]), want)
					if !book.Text || len(book.Sheets) != 1 {
						t.Errorf("text file not told: %+v", book)
					}
					if name == "Windows-1252" {
						remarked(t, book, "Windows-1252")
					}
					if delimiter != "," {
						remarked(t, book, fmt.Sprintf("%q", delimiter))
					}
					checkLines(t, book.Sheets[0])
				})
			}
		}
	}
}

// checkLines: the note of row 2 takes two lines, so that row 3 begins in line 4.
func checkLines(t *testing.T, sheet Sheet) {
	t.Helper()
	for i, want := range []int{1, 2, 4, 6} {
		if sheet.Rows[i].Line != want {
			t.Errorf("row %d begins in line %d, want %d", sheet.Rows[i].Number, sheet.Rows[i].Line, want)
		}
	}
}

// delimited quotes every text that needs it; the blank row is a blank line.
func delimited(table [][]string, delimiter, end string) string {
	var b strings.Builder
	for _, row := range table {
		var fields []string
		for _, text := range row {
			if strings.ContainsAny(text, delimiter+"\"\n") {
				text = `"` + strings.ReplaceAll(strings.ReplaceAll(text, `"`, `""`), "\n", end) + `"`
			}
			fields = append(fields, text)
		}
		if line := strings.Join(fields, delimiter); strings.Trim(line, delimiter) != "" {
			b.WriteString(line)
		}
		b.WriteString(end)
	}
	return b.String()
}

func TestDelimiters(t *testing.T) {
	for _, tt := range []struct{ name, text, file, first string }{
		{"decimal commas", "study;est;se\na;0,5;0,2\nb;0,7;0,3\n", "a.csv", "study|est|se"},
		{"decimal commas under titles with commas", "Trials, all, of 2020\nread, again\n\nstudy;est\na;0,5\nb;0,7\n", "a.csv", "Trials, all, of 2020"},
		{"decimal commas, names with commas, a title with a comma", "Trials, of 2020\nstudy;who;est\na;X, Y;0,5\nb;Z, Y;0,7\n", "a.csv", "Trials, of 2020"},
		{"authors parted by semicolons, several numbers", "study,authors,n,e,m\na,X; Y,5,6,7\nb,X; Y,6,1,2\nc,Z; Y,7,2,2\nd,Z; Y,7,2,2\ne,Z; Y,7,2,2\nf,Z; Y,7,2,2\n", "a.csv", "study|authors|n|e|m"},
		{"authors parted by semicolons", "study,authors,n\na,\"X; Y\",5\nb,X; Y,6\nc,Z; Y,7\n", "a.csv", "study|authors|n"},
		{"rows without their last fields", "a;b;c;d\n1;2\n1,5;2;3\n1,5;2\n1,2;2;3;4\n", "a.csv", "a|b|c|d"},
		{"lists with commas in every row", "study\twho\na\tX,Y\nb\tZ,Y\n", "a.txt", "study|who"},
		{"tabs and commas", "study\test\nA, B\t1\nC, D\t2\n", "a.txt", "study|est"},
		{"a .tsv with one tab", "x, y, z\n1, 2, 3\tq\n", "a.tsv", "x, y, z"},
		{"pipes", "study|n\na|4\n", "a.txt", "study|n"},
		{"one column", "study\na\nb\n", "a.csv", "study"},
		{"announced", "sep=;\na;1,5\n", "a.csv", "a|1,5"},
		{"announced in quotes, against the look", "\"sep=|\"\r\na,b|c,d\r\n", "a.csv", "a,b|c,d"},
		{"announced, unusual", "SEP=^\na^b\n", "a.csv", "a|b"},
		{"a delimiter only in quotes", "a|\";;;;\"\nb|\";;;;\"\n", "a.csv", "a|;;;;"},
	} {
		t.Run(tt.name, func(t *testing.T) {
			book := mustRead(t, []byte(tt.text), tt.file)
			if got := texts(book.Sheets[0])[0]; got != "1: "+tt.first {
				t.Errorf("first row %q, want %q", got, "1: "+tt.first)
			}
		})
	}
}

func TestAnnouncedDelimiterIsNoRow(t *testing.T) {
	book := mustRead(t, []byte("sep=;\na;b\n"), "a.csv")
	if row := book.Sheets[0].Rows[0]; row.Number != 1 || row.Line != 2 {
		t.Errorf("row %d in line %d, want row 1 in line 2, as spreadsheet programs number it", row.Number, row.Line)
	}
	remarked(t, book, "as the first line says")
}

func TestQuotesAndRaggedRows(t *testing.T) {
	for _, tt := range []struct {
		name, text string
		want       []string
	}{
		{"doubled quotes", "a,b\n\"say \"\"yes\"\"\",\"\"\"\"\n", []string{"1: a|b", `2: say "yes"|"`}},
		{"empty quotes", "a,b\n\"\",x\n", []string{"1: a|b", "2: |x"}},
		{"a quote within", "a,b\n5\" tube,x\n", []string{"1: a|b", `2: 5" tube|x`}},
		{"blanks after a quote", "a,b\n\"x\" ,y\n", []string{"1: a|b", "2: x|y"}},
		{"short and long rows", "a,b,c\n1\n1,2,3,4\n,,3\n,,\n1,,\n", []string{"1: a|b|c", "2: 1", "3: 1|2|3|4", "4: ||3", "6: 1"}},
		{"blank lines count", "\n\na\n  \n\nb\n", []string{"3: a", "6: b"}},
		{"mixed line ends", "a,b\r\n1,2\r3,4\n5,6", []string{"1: a|b", "2: 1|2", "3: 3|4", "4: 5|6"}},
		{"digits stay as typed", "a,b\n007,1.50\n1E5,0.12345678901234567890\n", []string{"1: a|b", "2: 007|1.50", "3: 1E5|0.12345678901234567890"}},
		{"unwanted characters", "a,b\n\u202ex\u0007,y\n", []string{"1: a|b", "2: x|y"}},
	} {
		t.Run(tt.name, func(t *testing.T) {
			equal(t, "rows", texts(mustRead(t, []byte(tt.text), "a.csv").Sheets[0]), tt.want)
		})
	}
	remarked(t, mustRead(t, []byte("a,b\nx,y\u202ez\n"), "a.csv"), "B2", removedCharacters)
}

func TestTextThatIsRefused(t *testing.T) {
	long := strings.Repeat("x", MaxFieldBytes+1)
	for _, tt := range []struct {
		name, text string
		words      []string
	}{
		{"quote left open", "a,b\n1,2\n\"3,4\n5,6\n7,8\n", []string{"line 3", "opened here and not closed"}},
		{"quote left open before a quoted value", "a,b\n\"1,2\n3,\"4\"\n", []string{"line 3", "opened in line 2"}},
		{"quote left open in a long file", "a,b\n\"1,2\n" + strings.Repeat("3,4\n", MaxFieldBytes), []string{"line 2", "not closed"}},
		{"text after a quote", "a,b\n\"x\"y,2\n", []string{"line 2", "follows the quote"}},
		{"long value", "a,b\n1," + long + "\n", []string{"line 2", "131068"}},
		{"zero bytes", "a,b\n1,\x002\n", []string{"line 2", "binary file"}},
		{"UTF-8 with one bad byte", "a,é\n1,\xe9\n", []string{"line 2", "0xe9", "mixes encodings"}},
		{"marked UTF-8 with one bad byte", "\ufeffa,b\n1,\xe9\n", []string{"line 2", "0xe9"}},
		{"no known encoding", "a,b\n1,\x81\n", []string{"line 2", "0x81"}},
		{"UTF-32", "\xff\xfe\x00\x00a\x00\x00\x00", []string{"UTF-32"}},
		{"UTF-16 cut short", "\xff\xfea\x00b", []string{"cut short"}},
		{"half a UTF-16 character", "\xff\xfea\x00\n\x00\x00\xd8b\x00", []string{"line 2", "half a UTF-16"}},
		{"UTF-16 with zeros", "\xff\xfea\x00\x00\x00", []string{"line 1", "binary"}},
		{"10,000 columns", strings.Repeat("x,", 9999) + "x\n", []string{"line 1", "1000 columns"}},
	} {
		t.Run(tt.name, func(t *testing.T) {
			mustRefuse(t, []byte(tt.text), "trials.csv", append(tt.words, "trials.csv")...)
		})
	}
}

func TestBlankColumnsBeyondTheLimitAreNothing(t *testing.T) {
	book := mustRead(t, []byte("a,b"+strings.Repeat(",", 20000)+"\n1,2\n"), "a.csv")
	equal(t, "rows", texts(book.Sheets[0]), []string{"1: a|b", "2: 1|2"})
}
