//go:build soak && unix

// The tests of this file take a minute; run them by "make soak".

package ingest

import (
	"archive/zip"
	"bytes"
	"compress/flate"
	"fmt"
	"io"
	"strings"
	"testing"
	"time"
)

// What reading any file may take.
const (
	mostMB        = 1000
	mostProcessor = 10 * time.Second
)

// worstCases are files made to take as much memory or time as the limits let them.
var worstCases = map[string]func() []byte{
	"texts.csv": func() []byte { // a remark in each of ten million cells
		return repeated("study,y,se,a,b,c,d,e,f,g\n", 1_048_000, func(i int) string { return fmt.Sprintf("T%d,1,1,x%d,xy,xz,yx,é ü,yz,zz\n", i, i) })
	},
	"numbers.csv": func() []byte { // a number in nine of ten columns
		return repeated("study,mean treated,sd treated,total treated,mean control,sd control,total control,estimate,se,p\n", 1_048_000,
			func(i int) string { return fmt.Sprintf("T%d,1.5,2.5,40,1.25,2.75,41,0.5,0.25,0.5\n", i) })
	},
	"mistakes.csv": func() []byte {
		return repeated("study,mean treated,sd treated,total treated,mean control,sd control,total control,estimate,se,p\n", 1_048_000,
			func(int) string { return "T,a,b,c,d,e,f,g,h,i\n" })
	},
	"commas.csv": func() []byte {
		return repeated("study;mean treated;sd treated;total treated;mean control;sd control;total control;estimate;se;p\n", 1_000_000,
			func(i int) string {
				return fmt.Sprintf("T%d;1,234;2,345;3,456;4,567;5,678;6,789;7,891;8,912;9,123\n", i)
			})
	},
	"outcomes.csv": func() []byte {
		return repeated("study,outcome,y,se\n", 1_048_000, func(i int) string { return fmt.Sprintf("T%d,outcome %d,1,1\n", i, i) })
	},
	"euros.csv": func() []byte { // each byte becomes three
		return repeated("study,y,se,note\n", 2600, func(i int) string { return fmt.Sprintf("T%d,1,1,%s\n", i, strings.Repeat("\x80", 40_000)) })
	},
	"dirty.csv": func() []byte { // each field is copied to be cleaned
		return repeated("study,y,se,note\n", 1000, func(i int) string { return fmt.Sprintf("T%d,1,1,\x01%s\n", i, strings.Repeat("é  ", 25_000)) })
	},
	"utf16.csv": func() []byte {
		return append([]byte("\xff\xfe"), bytes.Repeat([]byte("\x00\x4e\n\x00"), 24<<20)...)
	},
	"quotes.csv": func() []byte { return []byte("study,y,se\n" + strings.Repeat(`"""",1,1`+"\n", 1_040_000)) },
	"cells.xlsx": func() []byte { // five million cells, each with a text of its own
		head := `<row>` + inline("study") + inline("y") + inline("se") + inline("a") + inline("b") + `</row>`
		return package1(head, 990_000, func(i int) string {
			return fmt.Sprintf(`<row><c t="str"><v>T%d</v></c><c><v>1</v></c><c><v>2</v></c><c t="str"><v>x%d</v></c><c t="str"><v>y%d</v></c></row>`, i, i, i)
		})
	},
	"elements.xlsx": func() []byte { // as much XML as is read, of no use
		return package1("", 9_000_000, func(i int) string { return fmt.Sprintf(`<q%d/>`, i*7919%100_000) })
	},
	"namespaces.xlsx": func() []byte {
		var b strings.Builder
		for i := range 90 {
			fmt.Fprintf(&b, ` xmlns:n%d="u"`, i)
		}
		return package1("<row"+b.String()+">", 9_000_000, func(i int) string { return fmt.Sprintf(`<q%d/>`, i*7919%100_000) })
	},
	"long text.xlsx": func() []byte { // one text in a million cells
		return package1(`<row>`+inline("study")+inline("y")+inline("se")+`</row>`, 1_000_000, func(int) string { return `<row><c t="s"><v>0</v></c><c><v>1</v></c><c><v>1</v></c></row>` })
	},
	"headers.xlsx": func() []byte {
		return package1("", 5000, func(i int) string {
			return `<row>` + strings.Repeat(inline("a b c d e f g h i j k l"), 900) + `</row>`
		})
	},
}

func inline(text string) string { return `<c t="inlineStr"><is><t>` + text + `</t></is></c>` }

// repeated writes a header and n rows, as far as they fit into a file that is read.
func repeated(header string, n int, row func(i int) string) []byte {
	const most = 100 << 20
	b := bytes.NewBufferString(header)
	for i := range n {
		text := row(i)
		if b.Len()+len(text) > most {
			break
		}
		b.WriteString(text)
	}
	return b.Bytes()
}

// package1 is a workbook of one sheet with n pieces of XML between its rows, and a
// string table of one long text.
func package1(head string, n int, piece func(i int) string) []byte {
	const ns, rels = `xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main"`, "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
	const list = `<Relationships xmlns="http://schemas.openxmlformats.org/package/2006/relationships">`
	var b bytes.Buffer
	z := zip.NewWriter(&b)
	z.RegisterCompressor(zip.Deflate, func(w io.Writer) (io.WriteCloser, error) { return flate.NewWriter(w, flate.BestSpeed) })
	part := func(name, content string) io.Writer {
		w, err := z.Create(name)
		if err == nil {
			_, err = io.WriteString(w, content)
		}
		if err != nil {
			panic(err)
		}
		return w
	}
	part("[Content_Types].xml", `<Types xmlns="http://schemas.openxmlformats.org/package/2006/content-types"/>`)
	part("_rels/.rels", list+`<Relationship Id="r1" Type="`+rels+`/officeDocument" Target="xl/workbook.xml"/></Relationships>`)
	part("xl/workbook.xml", `<workbook `+ns+` xmlns:r="`+rels+`"><sheets><sheet name="x" sheetId="1" r:id="r1"/></sheets></workbook>`)
	part("xl/_rels/workbook.xml.rels", list+`<Relationship Id="r1" Type="`+rels+`/worksheet" Target="sheet.xml"/><Relationship Id="r2" Type="`+rels+`/sharedStrings" Target="strings.xml"/></Relationships>`)
	part("xl/strings.xml", `<sst `+ns+`><si><t>`+strings.Repeat("é  ", 30_000)+`</t></si></sst>`)
	w := part("xl/sheet.xml", `<worksheet `+ns+`><sheetData>`+head)
	pieces := repeated("", n, piece)
	if _, err := w.Write(pieces); err != nil {
		panic(err)
	}
	end := `</sheetData></worksheet>`
	if strings.HasPrefix(head, "<row ") {
		end = `</row>` + end
	}
	if _, err := io.WriteString(w, end); err != nil {
		panic(err)
	}
	if err := z.Close(); err != nil {
		panic(err)
	}
	return b.Bytes()
}

// TestWorstCases: no file takes a gigabyte or ten seconds of a processor.
func TestWorstCases(t *testing.T) {
	for name, build := range worstCases {
		t.Run(name, func(t *testing.T) {
			report, used := readInChild(t, written(t, name, build()))
			t.Logf("%d MB, %.1f s of processor, %.1f s in all; %d studies, %d findings, %.120s", used.peakMB, used.processor.Seconds(), used.wall.Seconds(), report.Studies, report.Findings, report.Error)
			if used.peakMB > mostMB || used.processor > mostProcessor {
				t.Errorf("%d MB and %v of a processor, want at most %d MB and %v", used.peakMB, used.processor, mostMB, mostProcessor)
			}
			if strings.Contains(report.Error, "takes longer") {
				t.Error("the limit of time was met; the other limits should have been")
			}
		})
	}
}

// TestTenThousandMutants is TestMutants for longer.
func TestTenThousandMutants(t *testing.T) { tryMutants(t, 10_000) }
