package review

import (
	"math"
	"strconv"
	"strings"
)

// HalfUnit returns half a unit in the last decimal of the number as it was typed: how
// far rounding may have moved it.
func (n Number) HalfUnit() float64 { return 0.5 * math.Pow10(-n.Decimals()) }

// Decimals counts the digits that the number as typed has after its decimal mark.
// Where the text has no point, or is not the number itself, they are those of the
// shortest text of the value.
func (n Number) Decimals() int {
	text := strings.TrimSpace(n.Place.Text)
	point := strings.LastIndexAny(text, ".·")
	if point < 0 || strings.ContainsAny(text, "eE%") {
		text = strconv.FormatFloat(n.Value, 'f', -1, 64)
		point = strings.LastIndexByte(text, '.')
	}
	if point < 0 {
		return 0
	}
	return min(len([]rune(strings.TrimRight(text[point:], " \t%*")))-1, 15)
}

// Typed returns the number as a reader of the sheet sees it; a long text gives way to
// three digits of the value.
func (n Number) Typed() string {
	if text := strings.TrimSpace(n.Place.Text); text != "" && len(text) < 12 {
		return text
	}
	return strconv.FormatFloat(n.Value, 'g', 4, 64)
}

// Exact returns a number with all the digits that it has.
func Exact(x float64) string { return strconv.FormatFloat(x, 'g', -1, 64) }
