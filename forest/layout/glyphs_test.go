package layout

import (
	"bytes"
	"flag"
	"fmt"
	"go/format"
	"math"
	"os"
	"testing"

	"codeberg.org/go-fonts/liberation/liberationsansbold"
	"codeberg.org/go-fonts/liberation/liberationsansitalic"
	"codeberg.org/go-fonts/liberation/liberationsansregular"
	"golang.org/x/image/font"
	"golang.org/x/image/font/sfnt"
	"golang.org/x/image/math/fixed"
)

var update = flag.Bool("update", false, "rewrite the width table and the golden drawings")

const tableFile = "glyphs_table.go"

// face reads advances from a font file.
type face struct {
	t   *testing.T
	f   *sfnt.Font
	buf sfnt.Buffer
}

func openFace(t *testing.T, ttf []byte) *face {
	t.Helper()
	f, err := sfnt.Parse(ttf)
	if err != nil {
		t.Fatal(err)
	}
	if f.UnitsPerEm() != unitsPerEm {
		t.Fatalf("font has %d units per em, the table assumes %d", f.UnitsPerEm(), unitsPerEm)
	}
	return &face{t: t, f: f}
}

// advance returns the width of a character in font units, false without a glyph.
func (f *face) advance(r rune) (int, bool) {
	index, err := f.f.GlyphIndex(&f.buf, r)
	if err != nil {
		f.t.Fatal(err)
	}
	if index == 0 {
		return 0, false
	}
	a, err := f.f.GlyphAdvance(&f.buf, index, fixed.I(unitsPerEm), font.HintingNone)
	if err != nil {
		f.t.Fatal(err)
	}
	return a.Round(), true
}

// TestWidthsAgainstFont compares every character of the basic plane with the
// font file itself; -update writes the table from it.
func TestWidthsAgainstFont(t *testing.T) {
	regular, bold := openFace(t, liberationsansregular.TTF), openFace(t, liberationsansbold.TTF)
	if *update {
		writeTable(t, regular, bold)
		return
	}
	glyphs := 0
	for r := rune(0x20); r <= 0xFFFF; r++ {
		if r >= 0x7F && r < 0xA0 || r >= 0xD800 && r < 0xE000 {
			continue
		}
		wantRegular, inRegular := regular.advance(r)
		wantBold, inBold := bold.advance(r)
		if got := Has(r); got != (inRegular && inBold) {
			t.Errorf("Has(%q) = %v, the font says %v", r, got, inRegular && inBold)
			continue
		}
		if !Has(r) {
			continue
		}
		glyphs++
		if got := advance(r, false); got != wantRegular {
			t.Errorf("width of %q = %d, font says %d", r, got, wantRegular)
		}
		if got := advance(r, true); got != wantBold {
			t.Errorf("bold width of %q = %d, font says %d", r, got, wantBold)
		}
	}
	if glyphs < 2000 {
		t.Errorf("compared %d glyphs, the font has over 2000", glyphs)
	}
}

// TestItalicWidths holds the assumption that italic text is as long as upright
// text, for what the charts set in italic.
func TestItalicWidths(t *testing.T) {
	italic := openFace(t, liberationsansitalic.TTF)
	for r := rune(' '); r <= '~'; r++ {
		want, _ := italic.advance(r)
		if got := advance(r, false); got != want {
			t.Errorf("width of italic %q = %d, font says %d", r, got, want)
		}
	}
}

func TestWidth(t *testing.T) {
	for _, tt := range []struct {
		text   string
		bold   bool
		want   float64
		source string
	}{
		{"0.56", false, 7.5 * (3*1139 + 569) / 2048, "hmtx of Liberation Sans: digit 1139, full stop 569 of 2048"},
		{"", true, 0, "empty"},
		{"中", false, 7.5, "East Asian: a full square"},
		{"e\u1AB0", false, 7.5 * 1139 / 2048, "hmtx: e 1139; a combining mark adds nothing"},
	} {
		if got := Width(tt.text, 7.5, tt.bold); !(math.Abs(got-tt.want) < 1e-12) {
			t.Errorf("Width(%q) = %v, want %v (%s)", tt.text, got, tt.want, tt.source)
		}
	}
}

func writeTable(t *testing.T, regular, bold *face) {
	var ranges []glyphRange
	var regularWidths, boldWidths []int
	for r := rune(0x20); r <= 0xFFFF; r++ {
		if r >= 0x7F && r < 0xA0 || r >= 0xD800 && r < 0xE000 {
			continue
		}
		a, ok := regular.advance(r)
		b, ok2 := bold.advance(r)
		if !ok || !ok2 {
			continue
		}
		if n := len(ranges); n > 0 && ranges[n-1].last == r-1 {
			ranges[n-1].last = r
		} else {
			ranges = append(ranges, glyphRange{first: r, last: r, at: len(regularWidths)})
		}
		regularWidths, boldWidths = append(regularWidths, a), append(boldWidths, b)
	}
	var out bytes.Buffer
	out.WriteString("package layout\n\n// Written by `go test ./forest/layout -run Widths -update` from Liberation Sans\n// regular and bold; the same test without -update compares it with the font.\n\n")
	out.WriteString("// glyphRanges are the characters that both faces have, in order.\nvar glyphRanges = [...]glyphRange{\n")
	for i, g := range ranges {
		fmt.Fprintf(&out, "{%#x, %#x, %d},", g.first, g.last, g.at)
		if i%4 == 3 {
			out.WriteByte('\n')
		}
	}
	out.WriteString("\n}\n\n")
	writeWidths(&out, "regularWidths", regularWidths)
	writeWidths(&out, "boldWidths", boldWidths)
	src, err := format.Source(out.Bytes())
	if err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(tableFile, src, 0o644); err != nil {
		t.Fatal(err)
	}
	t.Logf("%d ranges, %d glyphs", len(ranges), len(regularWidths))
}

func writeWidths(out *bytes.Buffer, name string, widths []int) {
	fmt.Fprintf(out, "// %s holds the widths of the characters of glyphRanges in font units.\nvar %s = [...]uint16{", name, name)
	for i, w := range widths {
		if i%20 == 0 {
			out.WriteByte('\n')
		}
		fmt.Fprintf(out, "%d,", w)
	}
	out.WriteString("\n}\n\n")
}
