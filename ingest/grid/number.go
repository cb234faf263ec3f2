package grid

import (
	"math"
	"strconv"
	"strings"
)

// maxNumberBytes is far above any number in print.
const maxNumberBytes = 400

// ParseNumber reads a number as people type it. decimal is the column's decimal
// mark, '.' or ',' (see Decimal). The grammar is
//
//	[sign] digits [mark digits] [e [sign] digits]    or    [sign] mark digits …
//
// where surrounding blanks are free, the digits before the mark may be grouped
// by threes with one kind of separator (the other of "." and ",", a blank or an
// apostrophe), and the following are read as what they look like: minus signs
// and dashes, full-width digits, the raised dot as decimal mark, no-break and
// narrow blanks. Words such as NaN and inf, hexadecimal numbers, underscores,
// percent signs and anything else are refused.
//
// normalised is the number in plain spelling: ASCII, decimal point, no
// separators, such as "-0.42" for "−0·42"; it differs from the text wherever
// something was normalised. The error is a *NumberError, and then value is 0 and
// normalised blank.
func ParseNumber(text string, decimal rune) (value float64, normalised string, err error) {
	fail := func(problem string) (float64, string, error) {
		return 0, "", &NumberError{Text: text, Problem: problem}
	}
	trimmed := strings.TrimSpace(text)
	switch {
	case trimmed == "":
		return fail("is blank, not a number")
	case len(trimmed) > maxNumberBytes:
		return fail("is too long to be a number")
	}
	plain := strings.Map(plainRune, trimmed)
	sign, whole, fraction, exponent, ok := dissect(plain, decimal)
	if !ok {
		return fail(notANumber(plain, decimal))
	}
	normalised = sign + whole + fraction + exponent
	value, err = strconv.ParseFloat(normalised, 64)
	switch {
	case err != nil || math.IsInf(value, 0):
		return fail("is too large; the largest number is about 1.8e308")
	case value == 0 && strings.ContainsAny(whole+fraction, "123456789"):
		return fail("is too close to zero; the smallest number is about 5e-324")
	}
	return value, normalised, nil
}

// groupBlank stands for every kind of blank within a number, raisedDot for a
// decimal mark that is neither point nor comma.
const (
	groupBlank = ' '
	raisedDot  = '·'
	apostrophe = '\''
)

// plainRune maps the look-alikes of digits, signs and marks.
func plainRune(r rune) rune {
	switch r {
	case '\u2212', '\u2010', '\u2011', '\u2012', '\u2013', '\uff0d': // minus, hyphens, figure and en dash, full-width hyphen
		return '-'
	case '\uff0b':
		return '+'
	case '\uff0e':
		return '.'
	case '\uff0c':
		return ','
	case '\u00a0', '\u202f', '\u2009', '\u2007': // no-break, narrow no-break, thin, figure space
		return groupBlank
	case '\u2019':
		return apostrophe
	}
	if '\uff10' <= r && r <= '\uff19' {
		return r - '\uff10' + '0'
	}
	return r
}

// dissect takes a number apart: sign "-" or "", digits without separators,
// fraction and exponent with their "." and "e", each blank if there is none.
func dissect(plain string, decimal rune) (sign, whole, fraction, exponent string, ok bool) {
	rest := plain
	if c := firstByte(rest); c == '-' || c == '+' {
		sign, rest = strings.TrimSuffix(rest[:1], "+"), rest[1:]
	}
	if i := strings.IndexAny(rest, "eE"); i >= 0 {
		exponent, ok = plainExponent(rest[i+1:])
		if !ok {
			return "", "", "", "", false
		}
		rest = rest[:i]
	}
	mark := string(decimal)
	if strings.ContainsRune(rest, raisedDot) {
		mark = string(raisedDot)
	}
	before, after, marked := strings.Cut(rest, mark)
	if whole, ok = joinGroups(before, decimal); !ok && !(before == "" && marked) {
		return "", "", "", "", false
	}
	if whole == "" {
		whole = "0"
	}
	if marked {
		if !allDigits(after) {
			return "", "", "", "", false
		}
		fraction = "." + after
	}
	return sign, whole, fraction, exponent, true
}

// plainExponent reads what follows the e of an exponent.
func plainExponent(text string) (exponent string, ok bool) {
	digits := text
	if c := firstByte(digits); c == '-' || c == '+' {
		digits = digits[1:]
	}
	return "e" + text, allDigits(digits)
}

// joinGroups takes the separators out of digits grouped by threes: one to three
// digits that do not begin with zero, then groups of three, all parted alike.
func joinGroups(text string, decimal rune) (digits string, ok bool) {
	i := strings.IndexAny(text, ".,' ")
	if i < 0 {
		return text, allDigits(text)
	}
	separator := text[i : i+1]
	groups := strings.Split(text, separator)
	if separator == string(decimal) || len(groups[0]) > 3 || firstByte(groups[0]) == '0' {
		return "", false
	}
	for j, group := range groups {
		if !allDigits(group) || j > 0 && len(group) != 3 {
			return "", false
		}
	}
	return strings.Join(groups, ""), true
}

// notANumber says what is wrong with a text that is no number.
func notANumber(plain string, decimal rune) string {
	other := '.'
	if decimal == '.' {
		other = ','
	}
	if _, _, _, _, ok := dissect(plain, other); ok {
		return "is not a number with the decimal mark " + strconv.Quote(string(decimal)) + "; it is one with " + strconv.Quote(string(other))
	}
	return "is not a number"
}

func firstByte(text string) byte {
	if text == "" {
		return 0
	}
	return text[0]
}

// allDigits reports whether text is one or more ASCII digits.
func allDigits(text string) bool {
	for i := 0; i < len(text); i++ {
		if text[i] < '0' || text[i] > '9' {
			return false
		}
	}
	return text != ""
}
