package layout

import (
	"sort"
	"unicode"
)

// unitsPerEm is the number of font units in a type size.
const unitsPerEm = 2048

// glyphRange is a run of neighbouring characters that the face has. The widths
// of its characters stand in regularWidths and boldWidths from position at on.
type glyphRange struct {
	first, last rune
	at          int
}

// find returns the position of r in the width tables.
func find(r rune) (int, bool) {
	i := sort.Search(len(glyphRanges), func(i int) bool { return glyphRanges[i].last >= r })
	if i == len(glyphRanges) || r < glyphRanges[i].first {
		return 0, false
	}
	return glyphRanges[i].at + int(r-glyphRanges[i].first), true
}

// Has reports whether Liberation Sans, regular and bold, has a glyph for r.
func Has(r rune) bool {
	_, ok := find(r)
	return ok
}

// advance returns the width of a character in font units.
func advance(r rune, bold bool) int {
	at, ok := find(r)
	switch {
	case !ok && unicode.Is(unicode.M, r):
		return 0
	case !ok && eastAsian(r):
		return unitsPerEm
	case !ok:
		return int(regularWidths[digitAt])
	case bold:
		return int(boldWidths[at])
	}
	return int(regularWidths[at])
}

// digitAt is the position of the digit 0, whose width stands in for a
// character that the face lacks.
var digitAt = func() int { at, _ := find('0'); return at }()
