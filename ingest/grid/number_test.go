package grid

import (
	"errors"
	"fmt"
	"math"
	"strconv"
	"strings"
	"testing"
)

func TestParseNumber(t *testing.T) {
	for _, tt := range []struct {
		text       string
		decimal    rune
		want       float64
		normalised string
	}{
		{"0", '.', 0, "0"},
		{"12", '.', 12, "12"},
		{"-0.42", '.', -0.42, "-0.42"},
		{"+3.5", '.', 3.5, "3.5"},
		{" 1.5\t", '.', 1.5, "1.5"},
		{".05", '.', 0.05, "0.05"},
		{"1e-3", '.', 0.001, "1e-3"},
		{"2.5E+2", '.', 250, "2.5e+2"},
		{"1e308", '.', 1e308, "1e308"},
		{"5e-324", '.', 5e-324, "5e-324"},
		{"0e-999", '.', 0, "0e-999"},
		{"007", '.', 7, "007"},
		{"0.12345678901234567", '.', 0.12345678901234567, "0.12345678901234567"},
		{"1,5", ',', 1.5, "1.5"},
		{"-,5", ',', -0.5, "-0.5"},
		{"\u22120.42", '.', -0.42, "-0.42"}, // minus sign
		{"\u20130.42", '.', -0.42, "-0.42"}, // en dash
		{"\u22120·42", '.', -0.42, "-0.42"}, // raised dot
		{"0·42", ',', 0.42, "0.42"},
		{"１２．５", '.', 12.5, "12.5"}, // full width
		{"１２，５", ',', 12.5, "12.5"},
		{"1,234", '.', 1234, "1234"},
		{"1,234,567.5", '.', 1234567.5, "1234567.5"},
		{"1.234.567,5", ',', 1234567.5, "1234567.5"},
		{"1 234,5", ',', 1234.5, "1234.5"},
		{"12\u00a0345", '.', 12345, "12345"},
		{"12\u202f345.5", '.', 12345.5, "12345.5"},
		{"1'234.5", '.', 1234.5, "1234.5"},
		{"1’234.5", '.', 1234.5, "1234.5"},
	} {
		got, normalised, err := ParseNumber(tt.text, tt.decimal)
		if err != nil || got != tt.want || normalised != tt.normalised {
			t.Errorf("ParseNumber(%q, %q) = %v, %q, %v; want %v, %q", tt.text, tt.decimal, got, normalised, err, tt.want, tt.normalised)
		}
	}
}

func TestParseNumberRefuses(t *testing.T) {
	for _, tt := range []struct {
		text    string
		decimal rune
		problem string
	}{
		{"", '.', "blank"}, {" \u00a0", '.', "blank"}, {"1e999", '.', "too large"}, {"-1e400", '.', "too large"}, {"1e-999", '.', "close to zero"},
		{strings.Repeat("1", 500), '.', "too long"},
		{"1,5", '.', `it is one with ","`}, {"1.5", ',', `it is one with "."`}, {"0,123", '.', `it is one with ","`},
		{"NaN", '.', "not a number"}, {"inf", '.', ""}, {"-Infinity", '.', ""}, {"0x1p-2", '.', ""}, {"0x10", '.', ""}, {"1_000", '.', ""},
		{"1.", '.', ""}, {".", '.', ""}, {"-", '.', ""}, {"—", '.', ""}, {"- 5", '.', ""}, {"--5", '.', ""}, {"5-", '.', ""}, {"1e", '.', ""}, {"e5", '.', ""}, {"1e5.5", '.', ""}, {"1e+-5", '.', ""},
		{"1,23", '.', ""}, {"12,34,567", '.', ""}, {"1234,567", '.', ""}, {"1,234 567", '.', ""}, {"1,,234", '.', ""}, {",234", '.', ""}, {"1,234,", '.', ""}, {"0,123,456", '.', ""},
		{"1.234,567.8", '.', ""}, {"1.5.2", '.', ""}, {"1  234", '.', ""}, {"1.234 567", '.', ""}, {"12 34", '.', ""},
		{"<0.001", '.', ""}, {"5%", '.', ""}, {"5*", '.', ""}, {"3-12", '.', ""}, {"1/2", '.', ""}, {"12 (5)", '.', ""}, {"(5)", '.', ""}, {"£5", '.', ""}, {"n/a", '.', ""}, {"٣", '.', ""}, {"5\x00", '.', ""},
	} {
		got, normalised, err := ParseNumber(tt.text, tt.decimal)
		var e *NumberError
		if !errors.As(err, &e) || got != 0 || normalised != "" {
			t.Errorf("ParseNumber(%q, %q) = %v, %q, %v; want a *NumberError alone", tt.text, tt.decimal, got, normalised, err)
		} else if !strings.Contains(err.Error(), tt.problem) || !strings.Contains(err.Error(), tt.text) {
			t.Errorf("ParseNumber(%q, %q): %q does not say %q", tt.text, tt.decimal, err, tt.problem)
		}
	}
}

// TestDecimal follows rules F3 and F4 of the catalogue: a comma before other
// than three digits proves decimal commas, all before three is ambiguous, both
// marks for decimals is an error.
func TestDecimal(t *testing.T) {
	for _, tt := range []struct {
		name, column string // cells parted by blanks
		want         rune
	}{
		{"nothing", "", '.'},
		{"words", "a b, n/a", '.'},
		{"whole numbers", "1 20 300", '.'},
		{"points", "1.5 0.123 1.234", '.'},
		{"a lone point before three digits", "1.234", '.'},
		{"commas", "1,5 20 0,25", ','},
		{"a comma before three digits beside a proof", "1,234 1,5", ','},
		{"a leading zero is proof", "0,123 1,234", ','},
		{"thousands and decimals", "1.234,5 1.234", ','},
		{"thousands commas by the point after them", "1,234 1,234.5", '.'},
		{"thousands commas by repetition", "1,234 1,234,567", '.'},
		{"thousands points by repetition", "1.234.567 1,5", ','},
		{"bounds and percentages", "<0,05 3,5%", ','},
		{"minus and exponent", "−0,5 1,5e-3", ','},
		{"raised dots prove nothing", "0·5 1,5", ','},
	} {
		got, err := Decimal(strings.Fields(tt.column))
		if err != nil || got != tt.want {
			t.Errorf("%s: Decimal(%q) = %q, %v; want %q", tt.name, tt.column, got, err, tt.want)
		}
	}
}

func TestDecimalRefuses(t *testing.T) {
	for _, column := range []string{"12 1,234 2,345", "0.5 12 1,234", "-1,234"} {
		fields := strings.Fields(column)
		got, err := Decimal(fields)
		var e *AmbiguousDecimalError
		if !errors.As(err, &e) || got != 0 {
			t.Errorf("Decimal(%q) = %q, %v; want ambiguous", column, got, err)
			continue
		}
		if !strings.Contains(fields[e.Index], ",") || e.Text != fields[e.Index] || math.Abs(e.AsDecimal) != 1.234 || math.Abs(e.AsThousands) != 1234 ||
			!strings.Contains(err.Error(), "1.234") || !strings.Contains(err.Error(), "1234") {
			t.Errorf("Decimal(%q): %+v, want 1.234 or 1234 of the first such cell", column, e)
		}
	}
	for column, want := range map[string]string{"1.5 1,5 7": "[0] [1]", "1,5 8 1.234": "[2] [0]", "1,234.5 1.234,5": "[0] [1]", "0,5 0.5 0,6 0.7": "[1 3] [0 2]"} {
		got, err := Decimal(strings.Fields(column))
		var e *MixedDecimalError
		if !errors.As(err, &e) || got != 0 {
			t.Errorf("Decimal(%q) = %q, %v; want mixed", column, got, err)
			continue
		}
		if rows := fmt.Sprint(e.Points, e.Commas); rows != want {
			t.Errorf("Decimal(%q): cells %s, want %s", column, rows, want)
		}
	}
}

// TestNumbersSurviveWriting: every number comes back from its shortest spelling,
// with either mark.
func TestNumbersSurviveWriting(t *testing.T) {
	x := 1.0
	for i := range 2000 {
		x = math.Float64frombits(math.Float64bits(x)*6364136223846793005 + uint64(i))
		if math.IsNaN(x) || math.IsInf(x, 0) {
			x = float64(i) + 0.1
		}
		text := strconv.FormatFloat(x, 'g', -1, 64)
		for _, mark := range ".," {
			got, _, err := ParseNumber(strings.Replace(text, ".", string(mark), 1), mark)
			if err != nil || got != x {
				t.Fatalf("%v written as %q with %q comes back as %v, %v", x, text, mark, got, err)
			}
		}
	}
}

func ExampleParseNumber() {
	value, normalised, err := ParseNumber("−0·42", '.')
	fmt.Println(value, normalised, err)
	_, _, err = ParseNumber("0,42", '.')
	fmt.Println(err)
	// Output:
	// -0.42 -0.42 <nil>
	// "0,42" is not a number with the decimal mark "."; it is one with ","
}

func ExampleDecimal() {
	mark, _ := Decimal([]string{"0,5", "12", "1,25"})
	fmt.Println(string(mark))
	_, err := Decimal([]string{"1,234", "12"})
	fmt.Println(err)
	// Output:
	// ,
	// "1,234" may be 1.234 (decimal comma) or 1234 (thousands comma); write decimals with a point, or leave thousands commas out
}
