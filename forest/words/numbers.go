package words

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"steelyard/meta/effect"
)

// Missing stands where there is no number to show: NaN, or a value that the
// kind of number cannot have, such as a ratio below 0.
const Missing = "—"

// minus is the sign of negative numbers (U+2212), as wide as a digit.
const minus = "−"

// largest is the largest size that is written out; beyond it no digit of an
// effect is worth the room.
const largest = 1e15

// fixed returns |x| with a number of decimals and commas between thousands, and
// whether anything but zeros is left of it.
func fixed(x float64, decimals int) (text string, nonzero bool) {
	text = strconv.FormatFloat(math.Abs(x), 'f', decimals, 64)
	whole, fraction, _ := strings.Cut(text, ".")
	for i := len(whole) - 3; i > 0; i -= 3 {
		whole = whole[:i] + "," + whole[i:]
	}
	nonzero = strings.Trim(text, "0.") != ""
	if fraction == "" {
		return whole, nonzero
	}
	return whole + "." + fraction, nonzero
}

// rounded returns |x| as fixed shows it with a number of decimals.
func rounded(x float64, decimals int) float64 {
	v, err := strconv.ParseFloat(strconv.FormatFloat(math.Abs(x), 'f', decimals, 64), 64)
	if err != nil { // out of range: x itself is as good
		return math.Abs(x)
	}
	return v
}

// Linear returns a number on a linear scale with a number of decimals (0 to
// 15): "−1.60", "1,871.0". Zero has no sign. Beyond a size of 10¹⁵ only that
// bound is given, with a sign of comparison.
func Linear(x float64, decimals int) string { return signed(x, decimals, "") }

// signed is Linear with a sign of its own for numbers above zero.
func signed(x float64, decimals int, plus string) string {
	switch {
	case math.IsNaN(x):
		return Missing
	case x > largest:
		return "> " + plus + bound(largest)
	case x < -largest:
		return "< " + minus + bound(largest)
	}
	text, nonzero := fixed(x, max(0, min(decimals, 15)))
	switch {
	case !nonzero:
		return text
	case x < 0:
		return minus + text
	}
	return plus + text
}

func bound(x float64) string {
	text, _ := fixed(x, 0)
	return text
}

// Decimals returns how many decimals values of a linear measure are shown with:
// as many as reach the second significant digit of the smallest standard error,
// 0 to 6; 2 if that is no number above 0.
func Decimals(smallestSE float64) int {
	if !(smallestSE > 0) || math.IsInf(smallestSE, 1) {
		return 2
	}
	_, exponent, _ := strings.Cut(strconv.FormatFloat(smallestSE, 'e', 1, 64), "e")
	e, err := strconv.Atoi(exponent)
	if err != nil {
		return 2
	}
	return max(0, min(1-e, 6))
}

// Ratio returns a ratio (not its logarithm): with 2 decimals, below 0.10 with
// 3, from 10 with 1, from 100 with 0. The value as shown decides which, so
// 0.0999 is "0.10" and 9.996 "10.0". What would be shown as 0.000 is
// "< 0.001", and beyond a million "> 1,000,000".
func Ratio(x float64) string {
	switch {
	case math.IsNaN(x) || x < 0:
		return Missing
	case rounded(x, 3) == 0:
		return "< 0.001"
	case x > 1e6:
		return "> 1,000,000"
	}
	decimals := 0
	switch {
	case rounded(x, 3) < 0.1:
		decimals = 3
	case rounded(x, 2) < 10:
		decimals = 2
	case rounded(x, 1) < 100:
		decimals = 1
	}
	text, _ := fixed(x, decimals)
	return text
}

// Notation is how the values of one measure are written, in the reader's unit.
type Notation struct {
	Ratio    bool
	Decimals int // of a linear measure
}

// NotationOf returns the notation of a measure; smallestSE is the smallest
// standard error among its studies, and matters to linear measures only.
func NotationOf(m effect.Measure, smallestSE float64) Notation {
	if m.Log() {
		return Notation{Ratio: true}
	}
	return Notation{Decimals: Decimals(smallestSE)}
}

// Value returns a value in the reader's unit, as Ratio or Linear writes it.
func (n Notation) Value(x float64) string {
	if n.Ratio {
		return Ratio(x)
	}
	return Linear(x, n.Decimals)
}

// Interval returns "0.59 to 0.89".
func (n Notation) Interval(low, high float64) string {
	return Interval(n.Value(low), n.Value(high))
}

// Estimate returns an estimate with its interval: "0.71 (0.58 to 0.86)".
func (n Notation) Estimate(x, low, high float64) string {
	return WithInterval(n.Value(x), n.Value(low), n.Value(high))
}

// Interval joins two written limits, never with a dash: "0.59 to 0.89".
func Interval(low, high string) string { return low + " to " + high }

// WithInterval puts an interval behind an estimate: "0.71 (0.58 to 0.86)".
func WithInterval(estimate, low, high string) string {
	return estimate + " (" + Interval(low, high) + ")"
}

// Tau returns a spread between studies with 2 decimals, a small one with 2
// significant digits: "0.13", "0.013", "0". Below a millionth it is
// "< 0.000001".
func Tau(x float64) string {
	switch {
	case math.IsNaN(x) || x < 0:
		return Missing
	case x == 0:
		return "0"
	case x < 1e-6:
		return "< 0.000001"
	}
	_, exponent, _ := strings.Cut(strconv.FormatFloat(x, 'e', 1, 64), "e")
	e, err := strconv.Atoi(exponent)
	if err != nil {
		return Linear(x, 2)
	}
	return Linear(x, max(2, 1-e))
}

// Count returns a whole number with commas between thousands: "1,871".
func Count(n int) string { return People(float64(n)) }

// Number returns a count with its noun: "1 table", "2 tables".
func Number(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return Count(n) + " " + many
}

// People returns a number of people, rounded to whole ones: "1,871".
func People(n float64) string { return Linear(n, 0) }

// Date returns a calendar date as far as it is known (0 for unknown): "2024",
// "2024-08", "2024-08-17". Parts that no calendar has are Missing.
func Date(year, month, day int) string {
	switch {
	case year < 1 || year > 9999 || month < 0 || month > 12 || day < 0 || day > 31 || month == 0 && day > 0:
		return Missing
	case month == 0:
		return fmt.Sprintf("%04d", year)
	case day == 0:
		return fmt.Sprintf("%04d-%02d", year, month)
	}
	return fmt.Sprintf("%04d-%02d-%02d", year, month, day)
}
