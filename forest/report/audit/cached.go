package audit

import (
	"archive/zip"
	"bytes"
	"encoding/xml"
	"fmt"
	"io"
	"regexp"
	"slices"
	"strconv"
	"strings"

	"steelyard/forest/report/audit/formula"
)

// How the library writes a cell with a formula, without a value:
// <c r="B7" s="3" t="str"><f>SUM(B1:B6)</f><v></v></c>, the style and the empty value
// not always.
const (
	cellBegins    = `<c r="`
	formulaBegins = ` t="str"><f>`
	formulaEnds   = "</f>"
	cellEnds      = "</c>"
)

// withValues puts into a saved workbook what the library itself cannot: the values of
// the formulas with all their digits, logarithmic horizontal axes, and one order for all.
func (b *book) withValues(saved []byte) ([]byte, error) {
	archive, err := zip.NewReader(bytes.NewReader(saved), int64(len(saved)))
	if err != nil {
		return nil, err
	}
	var out bytes.Buffer
	w := zip.NewWriter(&out)
	for _, part := range archive.File {
		content, err := contentOf(part)
		if err != nil {
			return nil, err
		}
		if part.Name == "[Content_Types].xml" {
			content = inOrder(content)
		}
		if n, isChart := partNumber(part.Name, "xl/charts/chart"); isChart && n <= len(b.charts) && b.charts[n-1] {
			content = bytes.Replace(content, []byte("<scaling>"), []byte(`<scaling><logBase val="2"></logBase>`), 1)
		}
		if n, isSheet := partNumber(part.Name, "xl/worksheets/sheet"); isSheet {
			if n > len(b.sheets) {
				return nil, fmt.Errorf("part %s belongs to no sheet", part.Name)
			}
			content = b.sheets[n-1].valued(content)
		}
		to, err := w.CreateHeader(&zip.FileHeader{Name: part.Name, Method: zip.Deflate})
		if err != nil {
			return nil, err
		}
		if _, err := to.Write(content); err != nil {
			return nil, err
		}
	}
	err = w.Close()
	return out.Bytes(), err
}

// defaultType says what files of an ending hold.
var defaultType = regexp.MustCompile(`<Default [^>]*></Default>`)

// inOrder sorts the kinds of files, which the library lists in any order.
func inOrder(content []byte) []byte {
	kinds := defaultType.FindAllString(string(content), -1)
	slices.Sort(kinds)
	next := 0
	return defaultType.ReplaceAllFunc(content, func([]byte) []byte {
		next++
		return []byte(kinds[next-1])
	})
}

func contentOf(part *zip.File) ([]byte, error) {
	r, err := part.Open()
	if err != nil {
		return nil, err
	}
	defer r.Close()
	return io.ReadAll(r)
}

// partNumber returns the number of a part whose name begins so.
func partNumber(part, begins string) (int, bool) {
	text, ok := strings.CutPrefix(part, begins)
	if !ok {
		return 0, false
	}
	n, err := strconv.Atoi(strings.TrimSuffix(text, ".xml"))
	return n, err == nil && n > 0
}

// valued fills in the values of a sheet's formulas. (A regular expression took ten times
// as long, on sheets of a megabyte.)
func (s *sheet) valued(content []byte) []byte {
	out := make([]byte, 0, 2*len(content))
	for {
		head, rest, found := bytes.Cut(content, []byte(formulaBegins))
		if !found {
			return append(out, content...)
		}
		text, rest, _ := bytes.Cut(rest, []byte(formulaEnds))
		_, rest, _ = bytes.Cut(rest, []byte(cellEnds))
		begin := bytes.LastIndex(head, []byte(cellBegins)) + len(cellBegins)
		reference, _, _ := bytes.Cut(head[begin:], []byte(`"`))
		kind, value := cachedValue(s.get(place(reference)))
		out = append(out, head...)
		out = fmt.Appendf(out, "%s><f>%s</f><v>%s</v></c>", kind, text, value)
		content = rest
	}
}

// place returns the column and row of a reference such as B7.
func place(reference []byte) (col, row int) {
	letters := bytes.TrimRight(reference, "0123456789")
	row, _ = strconv.Atoi(string(reference[len(letters):]))
	return columnNumber(string(letters)), row
}

func cachedValue(v formula.Value) (kind, text string) {
	if !v.IsText {
		return "", strconv.FormatFloat(v.Number, 'g', -1, 64)
	}
	var b bytes.Buffer
	_ = xml.EscapeText(&b, []byte(v.Text)) // a buffer takes everything
	return ` t="str"`, b.String()
}
