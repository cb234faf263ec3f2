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

// formulaCell is a cell with a formula as the library writes it: its reference and
// style, then the formula, without a value.
var formulaCell = regexp.MustCompile(`<c r="([A-Z]+)([0-9]+)"((?: s="[0-9]+")?) t="str"><f>([^<]*)</f>(?:<v></v>|<v/>)?</c>`)

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

// valued fills in the values of a sheet's formulas.
func (s *sheet) valued(content []byte) []byte {
	return formulaCell.ReplaceAllFunc(content, func(found []byte) []byte {
		m := formulaCell.FindSubmatch(found)
		row, _ := strconv.Atoi(string(m[2]))
		kind, value := cachedValue(s.get(columnNumber(string(m[1])), row))
		return fmt.Appendf(nil, `<c r="%s%s"%s%s><f>%s</f><v>%s</v></c>`, m[1], m[2], m[3], kind, m[4], value)
	})
}

func cachedValue(v formula.Value) (kind, text string) {
	if !v.IsText {
		return "", strconv.FormatFloat(v.Number, 'g', -1, 64)
	}
	var b bytes.Buffer
	_ = xml.EscapeText(&b, []byte(v.Text)) // a buffer takes everything
	return ` t="str"`, b.String()
}
