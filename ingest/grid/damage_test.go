package grid

import (
	"archive/zip"
	"bytes"
	"context"
	"hash/crc32"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"
)

// trials is a healthy workbook of texts and numbers made by another program.
func trials(tb testing.TB) parts {
	return unpack(tb, build(tb, func(f *excelize.File) {
		set(tb, f, "A1", "study", "B1", "events", "C1", "total")
		for i, name := range []string{"Ash", "Birch", "Cedar", "Elm", "Fir", "Hazel", "Larch"} {
			row := i + 2
			set(tb, f, reference(row, 1), name, reference(row, 2), 90+row, reference(row, 3), 300+row)
		}
	}))
}

// tableDamages are the damaged files that a lenient reader takes for shorter or
// different ones, each with what the refusal must say.
var tableDamages = []struct {
	name   string
	damage func(testing.TB, parts)
	words  []string
}{
	{"sheet cut in half", func(_ testing.TB, p parts) { p[sheet1] = p[sheet1][:len(p[sheet1])/2] },
		[]string{"trials.xlsx, Sheet1, " + sheet1, "cut short"}},
	{"sheet cut before its last tag", func(_ testing.TB, p parts) { p[sheet1] = bytes.TrimSuffix(p[sheet1], []byte("</worksheet>")) },
		[]string{"Sheet1", sheet1, "cut short"}},
	{"broken tag in row 7", func(tb testing.TB, p parts) { p.change(tb, sheet1, `</c></row><row r="8"`, `</row><row r="8"`) },
		[]string{"Sheet1", sheet1, "C7", "damaged"}},
	{"bad cell reference", func(tb testing.TB, p parts) { p.change(tb, sheet1, `r="B2"`, `r="?2"`) },
		[]string{"Sheet1", sheet1, "A2", `"?2"`}},
	{"cell of another row", func(tb testing.TB, p parts) { p.change(tb, sheet1, `r="B2"`, `r="B3"`) },
		[]string{"Sheet1", sheet1, "A2", "B3", "another row"}},
	{"cell twice", func(tb testing.TB, p parts) { p.change(tb, sheet1, `r="C4"`, `r="B4"`) },
		[]string{"Sheet1", sheet1, "B4", "twice"}},
	{"row twice", func(tb testing.TB, p parts) { p.change(tb, sheet1, `<row r="5"`, `<row r="3"`) },
		[]string{"Sheet1", sheet1, "row 3", "twice"}},
	{"row number beyond the sheet", func(tb testing.TB, p parts) { p.change(tb, sheet1, `<row r="5"`, `<row r="5000000000"`) },
		[]string{"Sheet1", sheet1, "row 5000000000", "1048576"}},
	{"text index out of range", func(tb testing.TB, p parts) { p.change(tb, sheet1, `<v>4</v>`, `<v>99</v>`) },
		[]string{"Sheet1", sheet1, "A3", `text "99"`, "10 texts"}},
	{"negative text index", func(tb testing.TB, p parts) { p.change(tb, sheet1, `<v>4</v>`, `<v>-1</v>`) },
		[]string{"Sheet1", sheet1, "A3", `text "-1"`}},
	{"string table missing", func(_ testing.TB, p parts) { delete(p, shared) }, []string{shared, "missing"}},
	{"string table not listed", func(tb testing.TB, p parts) {
		p.change(tb, "xl/_rels/workbook.xml.rels", "relationships/sharedStrings", "relationships/theme")
	},
		[]string{"Sheet1", sheet1, "A1", "0 texts"}},
	{"string table broken", func(_ testing.TB, p parts) { p[shared] = p[shared][:len(p[shared])-20] }, []string{shared, "cut short"}},
	{"string table of another kind", func(_ testing.TB, p parts) { p[shared] = []byte("<html/>") }, []string{shared, "<sst>"}},
	{"style out of range", func(tb testing.TB, p parts) { p.change(tb, sheet1, `r="B2"`, `r="B2" s="77"`) },
		[]string{"Sheet1", sheet1, "B2", `style "77"`}},
	{"number that is none", func(tb testing.TB, p parts) { p.change(tb, sheet1, `<v>92</v>`, `<v>NaN</v>`) },
		[]string{"Sheet1", sheet1, "B2", `"NaN"`}},
	{"unknown cell type", func(tb testing.TB, p parts) { p.change(tb, sheet1, `r="B2"`, `r="B2" t="x"`) },
		[]string{"Sheet1", sheet1, "B2", `type "x"`}},
	{"content after the end", func(_ testing.TB, p parts) { p[sheet1] = append(p[sheet1], "<worksheet/>"...) },
		[]string{"Sheet1", sheet1, "after its end"}},
	{"document type", func(tb testing.TB, p parts) {
		p.change(tb, sheet1, "<worksheet", `<!DOCTYPE x [<!ENTITY e "7">]><worksheet`)
	}, []string{"Sheet1", sheet1, "document type"}},
	{"unknown entity", func(tb testing.TB, p parts) { p.change(tb, sheet1, `<v>92</v>`, `<v>&e;</v>`) },
		[]string{"Sheet1", sheet1, "B2", "entity"}},
	{"sheet missing", func(_ testing.TB, p parts) { delete(p, sheet1) }, []string{"Sheet1", sheet1, "missing"}},
	{"sheet not listed", func(tb testing.TB, p parts) { p.change(tb, "xl/_rels/workbook.xml.rels", `Id="rId1"`, `Id="rId77"`) },
		[]string{"Sheet1", mainPart, "rId1", "not in the file"}},
	{"workbook missing", func(_ testing.TB, p parts) { delete(p, mainPart) }, []string{mainPart, "missing"}},
	{"relations missing", func(_ testing.TB, p parts) { delete(p, "_rels/.rels") }, []string{"_rels/.rels", "missing"}},
	{"styles missing", func(_ testing.TB, p parts) { delete(p, styles) }, []string{styles, "missing"}},
	{"sheet without rows", func(_ testing.TB, p parts) { p[sheet1] = []byte("<worksheet " + mainNS + "/>") },
		[]string{"Sheet1", sheet1, "no table of rows"}},
	{"empty part", func(_ testing.TB, p parts) { p[sheet1] = nil }, []string{"Sheet1", sheet1, "is empty"}},
	{"no XML", func(_ testing.TB, p parts) { p[sheet1] = []byte("study,events") }, []string{"Sheet1", sheet1, "XML"}},
	{"merged range that is none", func(tb testing.TB, p parts) {
		p.change(tb, sheet1, "</sheetData>", `</sheetData><mergeCells><mergeCell ref="B2:A1"/></mergeCells>`)
	}, []string{"Sheet1", sheet1, `"B2:A1"`}},
	{"deep nesting", func(tb testing.TB, p parts) {
		p.change(tb, sheet1, "</sheetData>", "</sheetData>"+strings.Repeat("<x>", 100)+strings.Repeat("</x>", 100))
	}, []string{"Sheet1", sheet1, "too deep"}},
}

func TestDamagedWorkbooksAreRefusedWithPlace(t *testing.T) {
	for _, d := range tableDamages {
		t.Run(d.name, func(t *testing.T) {
			p := trials(t)
			d.damage(t, p)
			mustRefuse(t, p.pack(t), "/some/where/trials.xlsx", append(d.words, "trials.xlsx")...)
		})
	}
}

// TestUndamagedWorkbookIsReadWhole is the healthy counterpart: taken apart and
// packed again without a damage, every cell is there.
func TestUndamagedWorkbookIsReadWhole(t *testing.T) {
	book := mustRead(t, trials(t).pack(t), "trials.xlsx")
	equal(t, "cells as they were written", texts(book.Sheets[0]), []string{"1: study|events|total", "2: Ash|92|302", "3: Birch|93|303",
		"4: Cedar|94|304", "5: Elm|95|305", "6: Fir|96|306", "7: Hazel|97|307", "8: Larch|98|308"})
	if len(book.Remarks) != 0 {
		t.Errorf("remarks on a plain workbook: %+v", book.Remarks)
	}
}

func TestAlteredBytesFailTheChecksum(t *testing.T) {
	p := trials(t)
	data := p.packWith(t, func(h *zip.FileHeader, content []byte) []byte {
		if h.Name != sheet1 {
			return nil
		}
		return deflate(t, bytes.Replace(content, []byte("<v>92</v>"), []byte("<v>29</v>"), 1)) // CRC of the original stays
	})
	mustRefuse(t, data, "trials.xlsx", "Sheet1", sheet1, "checksum")
}

func TestSizesThatLieAreRefused(t *testing.T) {
	for _, lie := range []struct {
		name string
		size func(uint64) uint64
	}{
		{"declared shorter, checksum of the shorter text", func(n uint64) uint64 { return n - 40 }},
		{"declared longer", func(n uint64) uint64 { return n + 40 }},
		{"declared beyond the limit", func(uint64) uint64 { return MaxPartBytes + 1 }},
	} {
		t.Run(lie.name, func(t *testing.T) {
			data := trials(t).packWith(t, func(h *zip.FileHeader, content []byte) []byte {
				if h.Name != sheet1 {
					return nil
				}
				h.UncompressedSize64 = lie.size(h.UncompressedSize64)
				if h.UncompressedSize64 < uint64(len(content)) {
					h.CRC32 = crc32.ChecksumIEEE(content[:h.UncompressedSize64])
				}
				return deflate(t, content)
			})
			mustRefuse(t, data, "trials.xlsx", sheet1)
		})
	}
}

func TestPackedBytesDamagedOrCut(t *testing.T) {
	data := trials(t).pack(t)
	for _, n := range []int{5, 100, len(data) / 2, len(data) - 30, len(data) - 1} {
		mustRefuse(t, data[:n], "trials.xlsx", "cut short or damaged")
	}
	damaged := trials(t).packWith(t, func(h *zip.FileHeader, content []byte) []byte {
		if h.Name != sheet1 {
			return nil
		}
		packed := deflate(t, content)
		return packed[:len(packed)/2]
	})
	mustRefuse(t, damaged, "trials.xlsx", "Sheet1", sheet1, "damaged or cut short")
}

func TestPartsThatStandTwice(t *testing.T) {
	p := trials(t)
	p["XL/Worksheets/Sheet1.xml"] = p[sheet1] // names differ by case only: the same part
	mustRefuse(t, p.pack(t), "trials.xlsx", "Sheet1", "stands twice")
}

func TestOutOfOrderIsPlacedByReference(t *testing.T) {
	p := rows(`<row r="3"><c r="B3"><v>32</v></c></row><row r="1"><c r="C1"><v>13</v></c><c r="A1"><v>11</v></c></row>`)
	book := mustRead(t, p.pack(t), "a.xlsx")
	equal(t, "placed as the references say", texts(book.Sheets[0]), []string{"1: 11||13", "3: |32"})
	remarked(t, book, "Data", "order")
}

func TestReferencesMayBeLeftOut(t *testing.T) {
	book := mustRead(t, rows(`<row><c><v>1</v></c><c t="s"><v>1</v></c></row><row r="5"><c r="C5"><v>3</v></c><c><v>4</v></c></row><row><c><v>6</v></c></row>`).pack(t), "a.xlsx")
	equal(t, "counted on (ECMA-376 part 1, 18.3.1.4 and 18.3.1.73: r is optional)", texts(book.Sheets[0]), []string{"1: 1|beta", "5: ||3|4", "6: 6"})
}

// TestEveryFlippedBitIsSeenOrHarmless: a file in which one bit of any byte is
// flipped is refused, or its cells are those of the original.
func TestEveryFlippedBitIsSeenOrHarmless(t *testing.T) {
	data := rows(`<row r="1"><c r="A1" t="s"><v>0</v></c><c r="B1"><v>0.25</v></c></row><row r="2"><c r="A2" s="1"><v>42707</v></c></row>`).pack(t)
	want := []string{"1: alpha|0.25", "2: 2016-12-03"}
	equal(t, "the original", texts(mustRead(t, data, "a.xlsx").Sheets[0]), want)
	refused := 0
	for i := range data {
		flipped := bytes.Clone(data)
		flipped[i] ^= 1 << (i % 8)
		book, err := Read(context.Background(), flipped, "a.xlsx")
		checkBook(t, book, err)
		if err != nil {
			refused++
		} else if got := texts(book.Sheets[0]); book.Text || !slices.Equal(got, want) {
			t.Fatalf("bit %d of byte %d flipped: read as %q without an error", i%8, i, got)
		}
	}
	if refused < len(data)/3 {
		t.Errorf("%d of %d flips refused: hardly any was seen", refused, len(data))
	}
}

// TestMutatedPartsNeverPanic splices the XML of parts at random, with checksums
// that fit, so that only the readers themselves can notice.
func TestMutatedPartsNeverPanic(t *testing.T) {
	base := trials(t)
	names := []string{sheet1, shared, styles, mainPart, "xl/_rels/workbook.xml.rels", "_rels/.rels"}
	random := rand.New(rand.NewPCG(1, 2))
	for range 2000 {
		p := parts{}
		for name, content := range base {
			p[name] = content
		}
		name := names[random.IntN(len(names))]
		content := bytes.Clone(p[name])
		for range 1 + random.IntN(3) {
			from, to := random.IntN(len(content)), random.IntN(len(content))
			length := min(random.IntN(30), len(content)-max(from, to))
			switch random.IntN(3) {
			case 0:
				copy(content[to:to+length], content[from:from+length])
			case 1:
				content = slices.Insert(content, to, content[from:from+length]...)
			case 2:
				content[to] = byte(random.IntN(128))
			}
		}
		p[name] = content
		book, err := Read(context.Background(), p.packStored(t), "a.xlsx")
		checkBook(t, book, err)
	}
}
