package grid

import (
	"bytes"
	"encoding/xml"
	"errors"
	"fmt"
	"io"
	"slices"
	"strings"
	"testing"
	"testing/iotest"
	"unicode/utf8"
)

// scanned lists the tokens of the scanner, neighbouring texts joined.
func scanned(r io.Reader) ([]string, error) {
	s := newXMLScanner(r)
	var list tokenList
	for {
		kind, err := s.next()
		switch {
		case err == io.EOF:
			return list.tokens, nil
		case err != nil:
			return nil, err
		case kind == startToken:
			list.start(s.element)
		case kind == endToken:
			list.add("end")
		default:
			list.text(string(s.text))
		}
	}
}

// decoded lists the tokens of encoding/xml in the same form.
func decoded(r io.Reader) ([]string, error) {
	d := xml.NewDecoder(r)
	var list tokenList
	for {
		token, err := d.Token()
		if err == io.EOF {
			return list.tokens, nil
		}
		if err != nil {
			return nil, err
		}
		switch t := token.(type) {
		case xml.StartElement:
			list.start(t)
		case xml.EndElement:
			list.add("end")
		case xml.CharData:
			list.text(string(t))
		case xml.Directive:
			return nil, errDocumentType
		}
	}
}

type tokenList struct {
	tokens []string
	inText bool
}

func (l *tokenList) add(token string) { l.tokens, l.inText = append(l.tokens, token), false }

func (l *tokenList) start(e xml.StartElement) {
	token := fmt.Sprintf("start %q %q", e.Name.Space, e.Name.Local)
	for _, a := range e.Attr {
		token += fmt.Sprintf(" %q %q=%q", a.Name.Space, a.Name.Local, a.Value)
	}
	l.add(token)
}

func (l *tokenList) text(text string) {
	switch {
	case text == "":
	case l.inText:
		l.tokens[len(l.tokens)-1] += text
	default:
		l.tokens, l.inText = append(l.tokens, "text "+text), true
	}
}

// xmlSamples are sound and broken pieces of XML.
var xmlSamples = []string{
	`<a/>`, `<a b="1" c='2'/>`, "<a>\r\n<b>x &amp; &#233;&#xe9; y</b>\r</a>", `<p:a xmlns:p="u"><b xmlns="v" p:c="1"/><p:d/><e/></p:a>`, `<a xml:space="preserve"> x </a>`,
	`<?xml version="1.0" encoding="UTF-8" standalone="yes"?><!-- c --><a><![CDATA[<x>]] &amp;]]>z</a><!-- end -->`, `<a b="&lt;&#10;&quot;"/>`, "<a b='x\r\ny'/>",
	`<a><b></a></b>`, `<a>`, `</a>`, `<a`, `<a b>`, `<a b=1/>`, `<a b="1/>`, `<a b="<"/>`, `<a>&nbsp;</a>`, `<a>&#0;</a>`, `<a>&amp</a>`, `<a>]]></a>`, `<a b="]]>"/>`, "<a>\x01</a>", "<a>\xff</a>",
	`<!DOCTYPE a><a/>`, `<a><!-- -- --></a>`, `<!-->`, `<!--->`, `<!---->`, `<!- x`, `<![CDAT[x]]>`, `<?xml version="1.1"?><a/>`, `<?xml encoding="latin1"?><a/>`, `<??>`, `<? x?>`,
	`<a:b:c/>`, `<:a/>`, `<a:/>`, `<1a/>`, `< a/>`, `<a / >`, `<a/ >`, `<a b = "1" />`, `</a >`, `<a></a >`, `<a b="1"c="2"/>`, `<é/>`, `<a é="1"/>`, `text`, ``, `<a/>text<b/>`, `<a xmlns="u" xmlns=""/>`,
	"<a>" + strings.Repeat("x", 70_000) + "</a>", `<a b="` + strings.Repeat("y", 70_000) + `"/>`, "<!--" + strings.Repeat("z", 70_000) + "-->",
}

// TestScannerAgreesWithTheStandardLibrary: tokens and refusals are those of
// encoding/xml, whatever the size of the pieces in which the bytes come.
func TestScannerAgreesWithTheStandardLibrary(t *testing.T) {
	for _, sample := range xmlSamples {
		compareTokens(t, []byte(sample))
		whole, err := scanned(strings.NewReader(sample))
		pieces, pieceErr := scanned(iotest.OneByteReader(strings.NewReader(sample)))
		if !slices.Equal(whole, pieces) || fmt.Sprint(err) != fmt.Sprint(pieceErr) {
			t.Errorf("%.80q: read whole %q, %v; byte by byte %q, %v", sample, whole, err, pieces, pieceErr)
		}
	}
}

// compareTokens holds the scanner to encoding/xml.
func compareTokens(t *testing.T, data []byte) {
	t.Helper()
	got, err := scanned(bytes.NewReader(data))
	want, wantErr := decoded(bytes.NewReader(data))
	switch {
	case err == nil && wantErr != nil && strings.Contains(wantErr.Error(), "invalid XML name"):
		// Names beyond ASCII: the tables of encoding/xml are those of an older Unicode.
	case err == nil && wantErr != nil:
		t.Errorf("%.200q is taken, encoding/xml says: %v", data, wantErr)
	case err == nil && !slices.Equal(got, want):
		t.Errorf("%.200q:\n got %q\nwant %q", data, got, want)
	case err != nil && wantErr == nil && !stricter(data, err):
		t.Errorf("%.200q is refused: %v; encoding/xml takes it", data, err)
	}
}

// stricter reports whether a refusal is one of those in which the scanner is
// stricter on purpose: names beyond ASCII that encoding/xml's older tables have,
// entities of more digits than any character needs, and document types.
func stricter(data []byte, err error) bool {
	beyondASCII := bytes.IndexFunc(data, func(r rune) bool { return r >= utf8.RuneSelf }) >= 0
	return errors.Is(err, errDocumentType) || errors.Is(err, errTokenTooLong) ||
		beyondASCII && strings.Contains(err.Error(), "name") || bytes.Contains(data, []byte("&#")) && strings.Contains(err.Error(), "entity")
}

func FuzzScanner(f *testing.F) {
	for _, sample := range xmlSamples {
		if len(sample) < 1000 {
			f.Add([]byte(sample))
		}
	}
	f.Add(minimal(`<sheetData><row r="1"><c r="A1" t="s"><v>1</v></c></row></sheetData>`)[sheet1])
	f.Fuzz(func(t *testing.T, data []byte) { compareTokens(t, data) })
}

// TestLongTokensAreRefused whatever they are.
func TestLongTokensAreRefused(t *testing.T) {
	long := strings.Repeat("x", maxTokenBytes)
	for _, data := range []string{"<a>" + long + "</a>", `<a b="` + long + `"/>`, "<!--" + long + "-->", "<?p " + long + "?>", "<![CDATA[" + long + "]]>", "<" + long + "/>"} {
		if _, err := scanned(strings.NewReader(data)); !errors.Is(err, errTokenTooLong) {
			t.Errorf("%.20s…: error %v, want a token too long", data, err)
		}
	}
}
