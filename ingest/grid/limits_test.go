package grid

import (
	"archive/zip"
	"bytes"
	"context"
	"encoding/xml"
	"errors"
	"fmt"
	"runtime"
	"strings"
	"testing"
	"time"
)

// frugal runs f and demands that it allocates little in all, most of which is
// garbage soon: so it cannot take long either.
func frugal(t *testing.T, megabytes uint64, f func()) {
	t.Helper()
	var before, after runtime.MemStats
	runtime.ReadMemStats(&before)
	f()
	runtime.ReadMemStats(&after)
	if got := (after.TotalAlloc - before.TotalAlloc) >> 20; got > megabytes {
		t.Errorf("%d MB were allocated, want at most %d", got, megabytes)
	}
}

func TestUnzipBombsAreRefusedFast(t *testing.T) {
	for _, bomb := range []struct{ name, inner, word string }{
		{"blanks", strings.Repeat(" ", 24<<20), "single value of more than 2 MB"},
		{"empty rows", strings.Repeat("<row/>", 4<<20), "1048576 rows"},
		{"unknown elements", strings.Repeat("<x/>", 3<<20), "200 times its size"},
	} {
		data := rows(bomb.inner).pack(t)
		t.Run(bomb.name, func(t *testing.T) {
			frugal(t, 500, func() { mustRefuse(t, data, "bomb.xlsx", "bomb.xlsx, Data", sheet1, bomb.word) })
		})
	}
	data := rows("").packWith(t, func(h *zip.FileHeader, _ []byte) []byte {
		if h.Name != sheet1 {
			return nil
		}
		h.UncompressedSize64 = 2 << 30
		return deflate(t, []byte("x"))
	})
	frugal(t, 5, func() { mustRefuse(t, data, "bomb.xlsx", sheet1, "128 MB") })
}

// TestUnreadPartsDoNotCount: a picture that unpacks to much is never opened.
func TestUnreadPartsDoNotCount(t *testing.T) {
	p := rows(`<row><c><v>1</v></c></row>`)
	p["xl/media/image1.png"] = make([]byte, 64<<20)
	p["xl/vbaProject.bin"] = []byte("\xd0\xcf")
	p["xl/externalLinks/externalLink1.xml"] = []byte("<broken")
	data := p.pack(t)
	frugal(t, 5, func() { equal(t, "rows", texts(mustRead(t, data, "a.xlsm").Sheets[0]), []string{"1: 1"}) })
}

func TestAllPartsTogetherAreLimited(t *testing.T) {
	a, err := openArchive(context.Background(), rows("").pack(t), "a.xlsx")
	if err != nil {
		t.Fatal(err)
	}
	a.unzipped = MaxUnzippedBytes - 10
	err = a.read(sheet1, "Data", mainNamespaces, "worksheet", func(x *xmlPart) error { return x.children(func(xml.StartElement) error { return x.skip() }) })
	if err == nil || !strings.Contains(err.Error(), "256 MB") {
		t.Errorf("error %v, want the limit of 256 MB", err)
	}
}

func TestLimitsOfAWorkbook(t *testing.T) {
	manyTexts := rows("")
	manyTexts[shared] = []byte(`<sst ` + mainNS + `>` + strings.Repeat("<si/>", MaxStrings+1) + `</sst>`)
	manyStyles := rows("")
	manyStyles[styles] = []byte(`<styleSheet ` + mainNS + `><cellXfs>` + strings.Repeat(`<xf/>`, MaxStyles+1) + `</cellXfs></styleSheet>`)
	manySheets := rows("")
	var list strings.Builder
	for i := range MaxSheets {
		fmt.Fprintf(&list, `<sheet name="s%d" r:id="rId1"/>`, i)
	}
	manySheets.change(t, mainPart, "</sheets>", list.String()+"</sheets>")
	for _, tt := range []struct {
		name  string
		data  []byte
		words []string
	}{
		{"texts", manyTexts.packStored(t), []string{shared, "2000000"}},
		{"styles", manyStyles.packStored(t), []string{styles, "100000"}},
		{"sheets", manySheets.pack(t), []string{mainPart, "1000"}},
		{"columns", rows(`<row r="3"><c r="ALM3"><v>1</v></c></row>`).pack(t), []string{"Data", "ALM3", "column 1001", "1000 columns"}},
		{"last column", rows(`<row r="3"><c r="XFD3"/><c><v>1</v></c></row>`).pack(t), []string{"Data", "XFE3", "16384"}},
		{"row zero", rows(`<row><c r="ALL0"><v>1</v></c></row>`).pack(t), []string{"Data", "row 1", `"ALL0"`}},
		{"merged ranges", minimal("<sheetData/><mergeCells>" + strings.Repeat(`<mergeCell ref="A1"/>`, MaxMerges+1) + "</mergeCells>").packStored(t), []string{"Data", "100000"}},
		{"a long text", rows(`<row><c t="inlineStr"><is><t>` + strings.Repeat("long ", 30000) + `</t></is></c></row>`).pack(t), []string{"Data", "A1", "131068"}},
		{"a long result", rows(`<row><c t="str"><v>` + strings.Repeat("long ", 30000) + `</v></c></row>`).pack(t), []string{"Data", "A1", "131068"}},
		{"a long number", rows(`<row><c><v>` + strings.Repeat("1", 30000) + `</v></c></row>`).pack(t), []string{"Data", "A1", "…"}},
		{"a long tag", rows(`<row><c ` + strings.Repeat(`a="1" `, 1<<19) + `/></row>`).packStored(t), []string{"Data", "single value of more than 2 MB"}},
	} {
		t.Run(tt.name, func(t *testing.T) { mustRefuse(t, tt.data, "a.xlsx", tt.words...) })
	}
}

// TestCellsAreCountedWithGaps: a small file with a value in column 1000 of many
// rows takes as much room as a full one.
func TestCellsAreCountedWithGaps(t *testing.T) {
	var b strings.Builder
	for i := range MaxWorkbookCells/MaxColumns + 1 {
		fmt.Fprintf(&b, `<row r="%d"><c r="ALL%d"><v>%d</v></c></row>`, i+1, i+1, i)
	}
	mustRefuse(t, rows(b.String()).pack(t), "a.xlsx", "Data", "ALL5001", "5000000 cells")

	s := &splitter{ctx: context.Background(), file: "a.csv", text: "a,b\n,,c\nd\n", delim: ',', line: 1, cells: cellStore{limit: 5}}
	if err := s.split(); err == nil || !strings.Contains(err.Error(), "a.csv, line 3: has more than 5 cells") {
		t.Errorf("error %v, want the limit of 5 cells passed in line 3", err)
	}
}

// TestTextsAreCountedForEachCell: a file can show one long text in millions of cells.
func TestTextsAreCountedForEachCell(t *testing.T) {
	p := rows(strings.Repeat(`<row><c t="s"><v>0</v></c></row>`, MaxWorkbookText/MaxFieldBytes+1))
	p[shared] = []byte(`<sst ` + mainNS + `><si><t>` + strings.Repeat("w", MaxFieldBytes) + `</t></si></sst>`)
	frugal(t, 30, func() { mustRefuse(t, p.packStored(t), "a.xlsx", "Data", "longer than 128 MB together") })
}

// TestNamespacesAreLimited: each is looked through for every element.
func TestNamespacesAreLimited(t *testing.T) {
	var b strings.Builder
	for i := range MaxNamespaces {
		fmt.Fprintf(&b, ` xmlns:n%d="u"`, i)
	}
	mustRefuse(t, rows(`<row`+b.String()+`/>`).packStored(t), "a.xlsx", "more than 100 namespaces")
}

// TestBlankStyledCellsBeyondTheColumnsAreNothing: whole rows are often coloured.
func TestBlankStyledCellsBeyondTheColumnsAreNothing(t *testing.T) {
	book := mustRead(t, rows(`<row r="1"><c r="A1"><v>1</v></c><c r="XFD1" s="1"/></row>`).pack(t), "a.xlsx")
	equal(t, "rows", texts(book.Sheets[0]), []string{"1: 1"})
}

func TestEntriesAreLimited(t *testing.T) {
	var b bytes.Buffer
	z := zip.NewWriter(&b)
	for i := range MaxEntries + 1 {
		if _, err := z.CreateHeader(&zip.FileHeader{Name: fmt.Sprint(i)}); err != nil {
			t.Fatal(err)
		}
	}
	if err := z.Close(); err != nil {
		t.Fatal(err)
	}
	mustRefuse(t, b.Bytes(), "a.xlsx", "10001 packed parts", "10000")
}

func TestRowsOfTextAreLimited(t *testing.T) {
	mustRefuse(t, []byte(strings.Repeat("\n", MaxRows)+"x\n"), "a.csv", "line 1048577", "1048576 rows")
	mustRead(t, []byte(strings.Repeat("\n", MaxRows-1)+"x\n"), "a.csv")
}

func TestLargeFilesAreRefused(t *testing.T) {
	mustRefuse(t, make([]byte, MaxFileBytes+1), "a.csv", "100 MB")
}

func TestReadingEndsWithItsContext(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	for name, data := range map[string][]byte{"a.csv": []byte(strings.Repeat("a,b\n", 5000)), "a.xlsx": trials(t).pack(t)} {
		if book, err := Read(ctx, data, name); !errors.Is(err, context.Canceled) || book != nil {
			t.Errorf("Read(%s) = %v, %v; want the cancelled context alone", name, book, err)
		}
		if book, err := ReadFrom(ctx, bytes.NewReader(data), name); !errors.Is(err, context.Canceled) || book != nil {
			t.Errorf("ReadFrom(%s) = %v, %v; want the cancelled context alone", name, book, err)
		}
	}
}

// TestTimeIsLimited: a file that takes longer than the limit is refused with it; the
// limit is a nanosecond here.
func TestTimeIsLimited(t *testing.T) {
	defer func() { timeLimit = MaxTime }()
	timeLimit = time.Nanosecond
	mustRefuse(t, trials(t).pack(t), "a.xlsx", "takes longer to read than 1ns, the limit")
	mustRefuse(t, []byte(strings.Repeat("a,b\n", 5000)), "a.csv", "takes longer to read than 1ns, the limit")
}

// faulty stands for a fault of the reader: it panics where the reader asks it.
type faulty struct{ context.Context }

func (faulty) Err() error { panic("a fault") }

func TestAPanicBecomesAnError(t *testing.T) {
	err := readWorkbook(faulty{context.Background()}, trials(t).pack(t), &Book{File: "a.xlsx"})
	var e *FileError
	if !errors.As(err, &e) || !strings.Contains(err.Error(), "a.xlsx: cannot be read, by a fault of this program (a fault)") {
		t.Errorf("error %v, want a *FileError that names the fault", err)
	}
}
