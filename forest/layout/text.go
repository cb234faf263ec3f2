package layout

import (
	"slices"
	"strings"
	"unicode"
	"unicode/utf8"

	"steelyard/meta/letters"
)

// Anchor says which part of a text stands at its x.
type Anchor int

// The anchors.
const (
	Start Anchor = iota
	Middle
	End
)

// Text is one line of text: spans on a common baseline Y, all of one size in
// points.
type Text struct {
	Y, Size float64
	Spans   []Span
}

// Span is a piece of a line. A span with Follow starts where the one before it
// ends and has no x of its own; the first span of a line never follows.
type Span struct {
	X            float64
	Anchor       Anchor
	Text         string
	Ink          Ink
	Bold, Italic bool
	Follow       bool
}

// Run is a span with its start resolved by the width table.
type Run struct {
	Span
	Left, Width float64
}

// Runs returns the spans with their left edges and widths in points.
func (t Text) Runs() []Run {
	runs := make([]Run, len(t.Spans))
	at := 0.0
	for i, s := range t.Spans {
		w := Width(s.Text, t.Size, s.Bold)
		left := s.X
		switch {
		case s.Follow && i > 0:
			left = at
		case s.Anchor == Middle:
			left -= w / 2
		case s.Anchor == End:
			left -= w
		}
		runs[i] = Run{Span: s, Left: left, Width: w}
		at = left + w
	}
	return runs
}

// Width returns the length of a text in points at the given type size in
// Liberation Sans; the italic face has the widths of the upright one. A
// character that the face lacks counts as wide as a digit, or as its type size
// when it is East Asian; combining marks count nothing.
func Width(text string, size float64, bold bool) float64 {
	units := 0
	for _, r := range text {
		units += advance(r, bold)
	}
	return float64(units) * size / unitsPerEm
}

// Clean returns text as it may stand in a drawing: valid UTF-8 in composed form
// (NFC), without control characters and without marks that change the
// direction of writing; line breaks and tabs become blanks.
func Clean(text string) string {
	text = strings.Map(func(r rune) rune {
		switch {
		case r == '\n' || r == '\t' || r == '\r' || r == '\u2028' || r == '\u2029':
			return ' '
		case unicode.IsControl(r), steersDirection(r), r&0xFFFE == 0xFFFE, 0xFDD0 <= r && r <= 0xFDEF:
			return -1
		}
		return r
	}, strings.ToValidUTF8(text, "\uFFFD"))
	return strings.TrimSpace(letters.Composed(text))
}

// steersDirection reports the invisible marks that reorder or hide text:
// embeddings, overrides, isolates, direction marks, zero-width characters and
// the byte order mark.
func steersDirection(r rune) bool {
	switch {
	case 0x202A <= r && r <= 0x202E, 0x2066 <= r && r <= 0x2069, 0x200B <= r && r <= 0x200F, 0x2060 <= r && r <= 0x2064:
		return true
	case r == 0x061C, r == 0xFEFF, r == 0x00AD:
		return true
	}
	return false
}

// Printable returns text with every character that Liberation Sans lacks
// replaced by a hollow box, so that a loss is seen in PDF and PNG.
func Printable(text string) string {
	return strings.Map(func(r rune) rune {
		if Has(r) {
			return r
		}
		return '\u25A1'
	}, text)
}

// missing returns the characters in the drawings' texts without a glyph.
func missing(pages []Drawing) []rune {
	var found []rune
	for _, d := range pages {
		d.Each(func(it Item) {
			t, ok := it.(Text)
			if !ok {
				return
			}
			for _, s := range t.Spans {
				for _, r := range s.Text {
					if !Has(r) {
						found = append(found, r)
					}
				}
			}
		})
	}
	slices.Sort(found)
	return slices.Compact(found)
}

// eastAsian reports characters that are drawn in a full square.
func eastAsian(r rune) bool {
	return unicode.In(r, unicode.Han, unicode.Hiragana, unicode.Katakana, unicode.Hangul, unicode.Bopomofo) ||
		0x3000 <= r && r <= 0x303F || 0xFF00 <= r && r <= 0xFF60 || r >= 0x1F300 && utf8.ValidRune(r)
}
