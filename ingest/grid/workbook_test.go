package grid

import (
	"slices"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"
)

// one returns the cell of a sheet with a single cell A1, given as XML.
func one(t *testing.T, cell string) Cell {
	t.Helper()
	book := mustRead(t, rows(`<row r="1">`+cell+`</row>`).pack(t), "a.xlsx")
	if len(book.Sheets[0].Rows) == 0 {
		return Cell{}
	}
	return book.Sheets[0].Rows[0].Cell(1)
}

// TestCellKinds: the expected cells follow from ECMA-376 part 1, 18.3.1.4 (cell),
// 18.18.11 (cell types) and 22.9.2.19 (escapes), and from the text in the file.
func TestCellKinds(t *testing.T) {
	for _, tt := range []struct {
		name, xml string
		want      Cell
	}{
		{"number without type", `<c r="A1"><v>12</v></c>`, Cell{Kind: Number, Text: "12"}},
		{"number with type", `<c r="A1" t="n"><v>-0.5</v></c>`, Cell{Kind: Number, Text: "-0.5"}},
		{"17 digits", `<c r="A1"><v>0.12345678901234568</v></c>`, Cell{Kind: Number, Text: "0.12345678901234568"}},
		{"exponent", `<c r="A1"><v>1E-12</v></c>`, Cell{Kind: Number, Text: "1E-12"}},
		{"beyond all numbers", `<c r="A1"><v>1e999</v></c>`, Cell{Kind: Number, Text: "1e999"}},
		{"blanks around", `<c r="A1"><v> 7 </v></c>`, Cell{Kind: Number, Text: "7"}},
		{"shared text", `<c r="A1" t="s"><v>1</v></c>`, Cell{Kind: Text, Text: "beta"}},
		{"inline text", `<c r="A1" t="inlineStr"><is><t>in line</t></is></c>`, Cell{Kind: Text, Text: "in line"}},
		{"runs joined, reading aids left out", `<c r="A1" t="inlineStr"><is><r><rPr/><t xml:space="preserve">one </t></r><rPh sb="0" eb="1"><t>aid</t></rPh><r><t>two</t></r></is></c>`, Cell{Kind: Text, Text: "one two"}},
		{"white space not kept", `<c r="A1" t="inlineStr"><is><t>  x </t></is></c>`, Cell{Kind: Text, Text: "x"}},
		{"white space kept", `<c r="A1" t="inlineStr"><is><t xml:space="preserve">  x </t></is></c>`, Cell{Kind: Text, Text: "  x "}},
		{"escapes", `<c r="A1" t="inlineStr"><is><t>_x0041_ _x005F_x0041_ _x00 _xD83D__xDE00_</t></is></c>`, Cell{Kind: Text, Text: "A _x0041_ _x00 😀"}},
		{"line end", `<c r="A1" t="inlineStr"><is><t>a_x000D_&#10;b</t></is></c>`, Cell{Kind: Text, Text: "a\nb"}},
		{"entities of XML", `<c r="A1" t="inlineStr"><is><t>&lt;0.001 &amp; &#x2212;1</t></is></c>`, Cell{Kind: Text, Text: "<0.001 & −1"}},
		{"digits as text", `<c r="A1" t="inlineStr"><is><t>007</t></is></c>`, Cell{Kind: Text, Text: "007"}},
		{"result of a formula", `<c r="A1"><f>B1*2</f><v>4</v></c>`, Cell{Kind: Number, Text: "4", Formula: true}},
		{"text of a formula", `<c r="A1" t="str"><f>B1&amp;"x"</f><v>yx</v></c>`, Cell{Kind: Text, Text: "yx", Formula: true}},
		{"empty text of a formula", `<c r="A1" t="str"><f>""</f><v></v></c>`, Cell{}},
		{"formula never calculated", `<c r="A1"><f>B1*2</f></c>`, Cell{Kind: Uncalculated, Text: "=B1*2", Formula: true}},
		{"formula never calculated, empty value", `<c r="A1"><f>B1*2</f><v></v></c>`, Cell{Kind: Uncalculated, Text: "=B1*2", Formula: true}},
		{"text formula never calculated", `<c r="A1" t="str"><f>B1*2</f></c>`, Cell{Kind: Uncalculated, Text: "=B1*2", Formula: true}},
		{"true", `<c r="A1" t="b"><v>1</v></c>`, Cell{Kind: Bool, Text: "TRUE"}},
		{"false", `<c r="A1" t="b"><v>0</v></c>`, Cell{Kind: Bool, Text: "FALSE"}},
		{"error", `<c r="A1" t="e"><v>#DIV/0!</v></c>`, Cell{Kind: ErrorValue, Text: "#DIV/0!"}},
		{"error of a formula", `<c r="A1" t="e"><f>1/0</f><v>#DIV/0!</v></c>`, Cell{Kind: ErrorValue, Text: "#DIV/0!", Formula: true}},
		{"stored as ISO date", `<c r="A1" t="d"><v>2016-12-03T00:00:00</v></c>`, Cell{Kind: Date, Text: "2016-12-03"}},
		{"stored as ISO date and time", `<c r="A1" t="d"><v>2016-12-03T10:30:00Z</v></c>`, Cell{Kind: Date, Text: "2016-12-03T10:30:00"}},
		{"styled blank", `<c r="A1" s="1"/>`, Cell{}},
		{"white space alone", `<c r="A1" t="inlineStr"><is><t xml:space="preserve">  &#160;</t></is></c>`, Cell{}},
		{"elements of other vocabularies", `<c r="A1"><x:v xmlns:x="urn:x">9</x:v><v>1</v><extLst><v>8</v></extLst></c>`, Cell{Kind: Number, Text: "1"}},
	} {
		t.Run(tt.name, func(t *testing.T) {
			if got := one(t, tt.xml); got != tt.want {
				t.Errorf("got %+v, want %+v", got, tt.want)
			}
		})
	}
}

func TestDisplayFormatDoesNotRound(t *testing.T) {
	data := build(t, func(f *excelize.File) {
		set(t, f, "A1", 0.12345, "A2", "007")
		style, err := f.NewStyle(&excelize.Style{NumFmt: 2}) // shows 0.12
		if err != nil {
			t.Fatal(err)
		}
		if err := f.SetCellStyle("Sheet1", "A1", "A1", style); err != nil {
			t.Fatal(err)
		}
		if err := f.SetCellDefault("Sheet1", "A3", "0.30000000000000004"); err != nil {
			t.Fatal(err)
		}
	})
	equal(t, "digits as stored", texts(mustRead(t, data, "a.xlsx").Sheets[0]), []string{"1: 0.12345", "2: 007", "3: 0.30000000000000004"})
}

func TestUnwantedCharactersAreRemovedAndRemarked(t *testing.T) {
	p := rows(`<row r="2"><c r="C2" t="inlineStr"><is><t>a_x0007_b&#x202E;c&#x200B;</t></is></c><c r="D2" t="s"><v>0</v></c></row>`)
	p.change(t, shared, "alpha", "al&#x202A;pha")
	book := mustRead(t, p.pack(t), "a.xlsx")
	equal(t, "without bell, override and zero-width space", texts(book.Sheets[0]), []string{"2: ||abc|alpha"})
	remarked(t, book, "Data", "C2", removedCharacters)
	remarked(t, book, "Data", "D2", removedCharacters)
}

func TestHiddenThingsAreFlagged(t *testing.T) {
	data := build(t, func(f *excelize.File) {
		set(t, f, "A1", "x", "A2", "y", "C1", "z")
		for _, sheet := range []string{"Shown", "Put away", "Far away"} {
			if _, err := f.NewSheet(sheet); err != nil {
				t.Fatal(err)
			}
		}
		for _, err := range []error{f.SetRowVisible("Sheet1", 2, false), f.SetColVisible("Sheet1", "C:D", false),
			f.SetSheetVisible("Put away", false), f.SetSheetVisible("Far away", false, true)} {
			if err != nil {
				t.Fatal(err)
			}
		}
	})
	book := mustRead(t, data, "a.xlsx")
	var names []string
	for _, s := range book.Sheets {
		name := s.Name
		if s.Hidden {
			name += " (hidden)"
		}
		names = append(names, name)
	}
	equal(t, "sheets", names, []string{"Sheet1", "Shown", "Put away (hidden)", "Far away (hidden)"})
	s := book.Sheets[0]
	if s.Rows[0].Hidden || !s.Rows[1].Hidden || !slices.Equal(s.HiddenColumns, []int{3, 4}) {
		t.Errorf("rows %+v, hidden columns %v; want row 2 and columns 3, 4 hidden", s.Rows, s.HiddenColumns)
	}
}

func TestMergedCellsKeepTheTopLeftValue(t *testing.T) {
	data := build(t, func(f *excelize.File) {
		set(t, f, "B1", "Treated", "D1", "Control", "B2", "events", "C2", "total")
		for _, r := range [][2]string{{"B1", "C1"}, {"D1", "E1"}} {
			if err := f.MergeCell("Sheet1", r[0], r[1]); err != nil {
				t.Fatal(err)
			}
		}
	})
	book := mustRead(t, data, "a.xlsx")
	equal(t, "merged headers", texts(book.Sheets[0]), []string{"1: |Treated||Control", "2: |events|total"})
	if want := []Merge{{1, 2, 1, 3}, {1, 4, 1, 5}}; !slices.Equal(book.Sheets[0].Merges, want) {
		t.Errorf("merges %v, want %v", book.Sheets[0].Merges, want)
	}

	p := minimal(`<sheetData><row r="1"><c r="A1"><v>1</v></c><c r="B1"><v>2</v></c></row><row r="2"><c r="A2"><v>3</v></c></row><row r="3"><c r="A3"><v>4</v></c></row></sheetData><mergeCells><mergeCell ref="A1:B2"/></mergeCells>`)
	book = mustRead(t, p.pack(t), "a.xlsx")
	if got := book.Sheets[0].Rows; len(got) != 2 || got[0].Cell(2).Kind != Blank || got[1].Number != 3 {
		t.Errorf("rows %+v, want A1 and A3 alone: B1 and A2 lie under A1", got)
	}
	remarked(t, book, "Data", "B1", "hidden under merged cells", `"2"`)
	remarked(t, book, "Data", "A2", `"3"`)
}

func TestOverlappingMergesCannotStall(t *testing.T) {
	inner := `<sheetData>` + strings.Repeat(`<row><c><v>1</v></c></row>`, 2000) + `</sheetData><mergeCells>` +
		strings.Repeat(`<mergeCell ref="A1:XFD1048576"/>`, 20000) + `</mergeCells>`
	mustRefuse(t, minimal(inner).pack(t), "a.xlsx", "Data", "overlap")
}

func TestCommentsAreRead(t *testing.T) {
	data := build(t, func(f *excelize.File) {
		set(t, f, "A1", "x", "B3", 5)
		for _, c := range []excelize.Comment{{Cell: "B3", Author: "A", Text: "from figure 2"},
			{Cell: "A1", Paragraph: []excelize.RichTextRun{{Text: "read "}, {Text: "off a chart"}}}} {
			if err := f.AddComment("Sheet1", c); err != nil {
				t.Fatal(err)
			}
		}
	})
	notes := mustRead(t, data, "a.xlsx").Sheets[0].Notes
	if len(notes) != 2 || notes[0].Row != 1 || notes[0].Col != 1 || !strings.Contains(notes[0].Text, "read off a chart") ||
		notes[1].Row != 3 || notes[1].Col != 2 || !strings.Contains(notes[1].Text, "from figure 2") {
		t.Errorf("notes %+v, want those of A1 and B3", notes)
	}

	p := unpack(t, data)
	p.change(t, "xl/comments1.xml", `ref="B3"`, `ref="B"`)
	mustRefuse(t, p.pack(t), "a.xlsx", "Sheet1", "xl/comments1.xml", `"B"`)
}

func TestFormulasWithoutValuesAreRemarked(t *testing.T) {
	data := build(t, func(f *excelize.File) {
		set(t, f, "A1", 2)
		for i := range 30 {
			if err := f.SetCellFormula("Sheet1", reference(2+i, 2), "A1*2"); err != nil {
				t.Fatal(err)
			}
		}
	})
	book := mustRead(t, data, "a.xlsx")
	if c := book.Sheets[0].Rows[1].Cell(2); c != (Cell{Kind: Uncalculated, Text: "=A1*2", Formula: true}) {
		t.Errorf("B2 = %+v, want an uncalculated formula", c)
	}
	remarked(t, book, "Sheet1", "B2", "without a stored value")
	remarked(t, book, "Sheet1", "10 more cells")
	if len(book.Remarks) != remarksOfAKind+1 {
		t.Errorf("%d remarks, want %d and one that counts the rest", len(book.Remarks), remarksOfAKind)
	}
}

func TestRecalculationOnLoadIsRemarked(t *testing.T) {
	p := rows(`<row r="1"><c r="A1"><f>1+1</f><v>0</v></c></row>`)
	p.change(t, mainPart, "</sheets>", `</sheets><calcPr fullCalcOnLoad="1"/>`)
	remarked(t, mustRead(t, p.pack(t), "a.xlsx"), "Data", "out of date")
}

func TestOtherKindsOfSheets(t *testing.T) {
	p := rows(`<row r="1"><c r="A1"><v>1</v></c></row>`)
	p.change(t, mainPart, "</sheets>", `<sheet name="Plot" sheetId="2" r:id="rId9"/></sheets>`)
	p.change(t, "xl/_rels/workbook.xml.rels", "</Relationships>", `<Relationship Id="rId9" Type="`+relType+`chartsheet" Target="chartsheets/sheet1.xml"/></Relationships>`)
	book := mustRead(t, p.pack(t), "a.xlsx")
	remarked(t, book, "Plot", "chartsheet", "not read")
	if len(book.Sheets) != 1 || book.Sheets[0].Name != "Data" {
		t.Errorf("sheets %+v, want Data alone", book.Sheets)
	}
}

func TestStrictNamespaces(t *testing.T) {
	p := rows(`<row r="1"><c r="A1" t="s"><v>1</v></c><c r="B1" s="1" t="d"><v>2016-12-03</v></c></row>`)
	for name, content := range p {
		s := strings.ReplaceAll(string(content), "http://schemas.openxmlformats.org/spreadsheetml/2006/main", "http://purl.oclc.org/ooxml/spreadsheetml/main")
		p[name] = []byte(strings.ReplaceAll(s, "http://schemas.openxmlformats.org/officeDocument/2006/relationships", "http://purl.oclc.org/ooxml/officeDocument/relationships"))
	}
	equal(t, "the strict form of ISO/IEC 29500", texts(mustRead(t, p.pack(t), "a.xlsx").Sheets[0]), []string{"1: beta|2016-12-03"})
}

func TestListOfSheetsMustBeClear(t *testing.T) {
	p := rows("")
	p.change(t, mainPart, "</sheets>", `<sheet name="DATA" sheetId="2" r:id="rId1"/></sheets>`)
	mustRefuse(t, p.pack(t), "a.xlsx", mainPart, `"DATA"`)
	p = rows("")
	p.change(t, mainPart, "</sheets>", `<sheet name="Other" sheetId="2" r:id="rId1"/></sheets>`)
	mustRefuse(t, p.pack(t), "a.xlsx", "Other", "two sheets")
	p = rows("")
	p.change(t, mainPart, `<sheet name="Data" sheetId="1" r:id="rId1"/>`, "")
	mustRefuse(t, p.pack(t), "a.xlsx", mainPart, "no sheets")
}
