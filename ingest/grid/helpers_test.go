package grid

import (
	"archive/zip"
	"bytes"
	"compress/flate"
	"context"
	"errors"
	"hash/crc32"
	"io"
	"slices"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"
)

// build makes a workbook with a spreadsheet library that is not used for reading.
func build(tb testing.TB, fill func(*excelize.File)) []byte {
	tb.Helper()
	f := excelize.NewFile()
	defer f.Close()
	fill(f)
	var b bytes.Buffer
	if err := f.Write(&b); err != nil {
		tb.Fatal(err)
	}
	return b.Bytes()
}

// set writes cells given as "A1", value, "B1", value …
func set(tb testing.TB, f *excelize.File, pairs ...any) {
	tb.Helper()
	for i := 0; i < len(pairs); i += 2 {
		if err := f.SetCellValue("Sheet1", pairs[i].(string), pairs[i+1]); err != nil {
			tb.Fatal(err)
		}
	}
}

// parts is a zip package taken apart.
type parts map[string][]byte

func unpack(tb testing.TB, data []byte) parts {
	tb.Helper()
	z, err := zip.NewReader(bytes.NewReader(data), int64(len(data)))
	if err != nil {
		tb.Fatal(err)
	}
	p := parts{}
	for _, f := range z.File {
		r, err := f.Open()
		if err != nil {
			tb.Fatal(err)
		}
		content, err := io.ReadAll(r)
		if err != nil {
			tb.Fatal(err)
		}
		p[f.Name] = content
	}
	return p
}

// pack puts the parts together again, in the order of their names.
func (p parts) pack(tb testing.TB) []byte {
	tb.Helper()
	return p.packWith(tb, func(*zip.FileHeader, []byte) []byte { return nil })
}

// packStored puts the parts together without compressing them, which is quick.
func (p parts) packStored(tb testing.TB) []byte {
	tb.Helper()
	return p.packWith(tb, func(h *zip.FileHeader, content []byte) []byte {
		h.Method = zip.Store
		return append([]byte{}, content...)
	})
}

// packWith lets falsify change the header and packed bytes of a part; it returns
// nil for parts it leaves alone.
func (p parts) packWith(tb testing.TB, falsify func(h *zip.FileHeader, content []byte) []byte) []byte {
	tb.Helper()
	var names []string
	for name := range p {
		names = append(names, name)
	}
	slices.Sort(names)
	var b bytes.Buffer
	z := zip.NewWriter(&b)
	for _, name := range names {
		h := &zip.FileHeader{Name: name, Method: zip.Deflate, CRC32: crc32.ChecksumIEEE(p[name]), UncompressedSize64: uint64(len(p[name]))}
		packed := falsify(h, p[name])
		if packed == nil {
			packed = deflate(tb, p[name])
		}
		h.CompressedSize64 = uint64(len(packed))
		w, err := z.CreateRaw(h)
		if err != nil {
			tb.Fatal(err)
		}
		if _, err := w.Write(packed); err != nil {
			tb.Fatal(err)
		}
	}
	if err := z.Close(); err != nil {
		tb.Fatal(err)
	}
	return b.Bytes()
}

func deflate(tb testing.TB, content []byte) []byte {
	tb.Helper()
	var b bytes.Buffer
	w, err := flate.NewWriter(&b, flate.DefaultCompression)
	if err != nil {
		tb.Fatal(err)
	}
	if _, err := w.Write(content); err != nil {
		tb.Fatal(err)
	}
	if err := w.Close(); err != nil {
		tb.Fatal(err)
	}
	return b.Bytes()
}

// change replaces text in a part, which must hold it.
func (p parts) change(tb testing.TB, part, old, new string) {
	tb.Helper()
	if !bytes.Contains(p[part], []byte(old)) {
		tb.Fatalf("%s does not hold %q:\n%s", part, old, p[part])
	}
	p[part] = bytes.Replace(p[part], []byte(old), []byte(new), 1)
}

// The parts of a minimal workbook, written out so that each test shows its cells.
const (
	sheet1   = "xl/worksheets/sheet1.xml"
	mainPart = "xl/workbook.xml"
	shared   = "xl/sharedStrings.xml"
	styles   = "xl/styles.xml"
	mainNS   = `xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main"`
	relsNS   = `xmlns="http://schemas.openxmlformats.org/package/2006/relationships"`
	relType  = "http://schemas.openxmlformats.org/officeDocument/2006/relationships/"
)

// minimal is a workbook of one sheet whose worksheet element holds inner; its
// string table is "alpha", "beta", its styles: general, date 14, custom d/m/yy
// h:mm, elapsed [h]:mm, time of day h:mm.
func minimal(inner string) parts {
	return parts{
		"[Content_Types].xml": []byte(`<Types xmlns="http://schemas.openxmlformats.org/package/2006/content-types"/>`),
		"_rels/.rels":         []byte(`<Relationships ` + relsNS + `><Relationship Id="r1" Type="` + relType + `officeDocument" Target="xl/workbook.xml"/></Relationships>`),
		mainPart: []byte(`<?xml version="1.0" encoding="UTF-8"?><workbook ` + mainNS + ` xmlns:r="http://schemas.openxmlformats.org/officeDocument/2006/relationships">` +
			`<workbookPr/><sheets><sheet name="Data" sheetId="1" r:id="rId1"/></sheets></workbook>`),
		"xl/_rels/workbook.xml.rels": []byte(`<Relationships ` + relsNS + `><Relationship Id="rId1" Type="` + relType + `worksheet" Target="worksheets/sheet1.xml"/>` +
			`<Relationship Id="rId2" Type="` + relType + `sharedStrings" Target="/xl/sharedStrings.xml"/><Relationship Id="rId3" Type="` + relType + `styles" Target="styles.xml"/></Relationships>`),
		shared: []byte(`<sst ` + mainNS + `><si><t>alpha</t></si><si><t>beta</t></si></sst>`),
		styles: []byte(`<styleSheet ` + mainNS + `><numFmts><numFmt numFmtId="164" formatCode="d/m/yy\ h:mm"/><numFmt numFmtId="165" formatCode="[h]:mm"/></numFmts>` +
			`<cellXfs><xf numFmtId="0"/><xf numFmtId="14"/><xf numFmtId="164"/><xf numFmtId="165"/><xf numFmtId="20"/></cellXfs></styleSheet>`),
		sheet1: []byte(`<worksheet ` + mainNS + `>` + inner + `</worksheet>`),
	}
}

// rows is minimal with rows only.
func rows(inner string) parts { return minimal("<sheetData>" + inner + "</sheetData>") }

// mustRead reads data that is in order.
func mustRead(tb testing.TB, data []byte, name string) *Book {
	tb.Helper()
	book, err := Read(context.Background(), data, name)
	if err != nil {
		tb.Fatalf("Read(%s): %v", name, err)
	}
	return book
}

// mustRefuse demands that data is refused by a *FileError whose text holds all
// words.
func mustRefuse(tb testing.TB, data []byte, name string, words ...string) *FileError {
	tb.Helper()
	book, err := Read(context.Background(), data, name)
	if err == nil {
		tb.Fatalf("Read(%s) gives %d sheets, want an error", name, len(book.Sheets))
	}
	if book != nil {
		tb.Errorf("Read(%s) returns a book together with the error %v", name, err)
	}
	var e *FileError
	if !errors.As(err, &e) {
		tb.Fatalf("Read(%s): error of type %T, want *FileError", name, err)
	}
	for _, word := range words {
		if !strings.Contains(err.Error(), word) {
			tb.Errorf("Read(%s): %q does not say %q", name, err, word)
		}
	}
	if e.File == "" || e.Problem == "" || e.Remedy == "" {
		tb.Errorf("Read(%s): %#v lacks file, problem or remedy", name, e)
	}
	return e
}

// texts shows the rows of a sheet as "number: cell|cell".
func texts(sheet Sheet) []string {
	var list []string
	for _, row := range sheet.Rows {
		line := reference(row.Number, 0) + ": "
		for i, cell := range row.Cells {
			if i > 0 {
				line += "|"
			}
			line += cell.Text
		}
		list = append(list, line)
	}
	return list
}

func equal(tb testing.TB, what string, got, want []string) {
	tb.Helper()
	if !slices.Equal(got, want) {
		tb.Errorf("%s:\n got %q\nwant %q", what, got, want)
	}
}

// remarked demands a remark that holds all words.
func remarked(tb testing.TB, book *Book, words ...string) {
	tb.Helper()
	for _, r := range book.Remarks {
		all := true
		for _, word := range words {
			all = all && strings.Contains(r.Sheet+" "+reference(r.Row, r.Col)+" "+r.Message, word)
		}
		if all {
			return
		}
	}
	tb.Errorf("no remark holds %q: %+v", words, book.Remarks)
}
