package stream

import (
	"math"
	"strconv"

	"steelyard/ingest/grid"
)

// exactTen are the powers of ten that a float64 holds exactly.
var exactTen = [...]float64{1, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11,
	1e12, 1e13, 1e14, 1e15, 1e16, 1e17, 1e18, 1e19, 1e20, 1e21, 1e22}

// largestExact is the largest whole number up to which every one is a float64.
const largestExact = 1 << 53

// shortDecimal reads the commonest form of a number: a sign, digits, a point, digits,
// whose digits together make a whole number up to 2⁵³. That number and the power of
// ten it is divided by are both exact, so that the one rounding of the division gives
// the nearest float64: the same bits as strconv.ParseFloat.
//
// Source: Clinger (1990), How to read floating point numbers accurately, PLDI '90.
func shortDecimal(text []byte) (value float64, ok bool) {
	i, negative := 0, false
	if len(text) > 0 && text[0] == '-' {
		negative, i = true, 1
	}
	if len(text)-i > 19 { // 18 digits and a point fit an int64
		return 0, false
	}
	digits, after := int64(0), -1
	first := i
	for ; i < len(text); i++ {
		switch c := text[i]; {
		case '0' <= c && c <= '9':
			digits = digits*10 + int64(c-'0')
		case c == '.' && after < 0:
			after = len(text) - i - 1
		default:
			return 0, false
		}
	}
	count := len(text) - first
	if after >= 0 {
		count--
	}
	if count == 0 || after == 0 || count > 18 || digits > largestExact {
		return 0, false
	}
	value = float64(digits)
	if after > 0 {
		value /= exactTen[after]
	}
	if negative {
		value = -value
	}
	return value, true
}

// largest is the size beyond which a number is no result of a study, as in ingest.
const largest = 1e150

// number reads a cell as ingest does with the point as decimal mark.
func number(text []byte) (float64, string) {
	if value, ok := shortDecimal(text); ok {
		return value, ""
	}
	var value float64
	var err error
	if plain(text) {
		value, err = strconv.ParseFloat(string(text), 64)
	} else {
		value, _, err = grid.ParseNumber(string(text), '.')
	}
	if err != nil {
		return 0, "is no number with a decimal point"
	}
	if !(math.Abs(value) <= largest) {
		return 0, "is too large to be a result of a study"
	}
	return value, ""
}

// plain reports whether a text is a number as programs write it: a minus, digits, a
// point with digits, an exponent. ParseFloat takes more than is a number here.
func plain(text []byte) bool {
	if len(text) > 0 && text[0] == '-' {
		text = text[1:]
	}
	text, whole := digits(text)
	if len(text) > 0 && text[0] == '.' {
		after := false
		if text, after = digits(text[1:]); !after {
			return false
		}
		whole = true
	}
	if whole && len(text) > 1 && (text[0] == 'e' || text[0] == 'E') {
		if text = text[1:]; text[0] == '-' || text[0] == '+' {
			text = text[1:]
		}
		text, whole = digits(text)
	}
	return whole && len(text) == 0
}

// digits takes digits off the front of a text; any is false if there are none.
func digits(text []byte) (rest []byte, any bool) {
	for len(text) > 0 && '0' <= text[0] && text[0] <= '9' {
		text, any = text[1:], true
	}
	return text, any
}
