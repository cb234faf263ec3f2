package words

import (
	"math"
	"strings"
	"testing"
	"unicode/utf8"

	"pgregory.net/rapid"

	"steelyard/meta/effect"
)

// row is a number rule at work. Unless a row says otherwise its source is
// STYLE §6 "Numbers and words": "style" marks its own examples and the numbers
// printed in its charts, "rule" an edge of a rule written there.
type row struct {
	source, got, want string
}

func check(t *testing.T, rows []row) {
	t.Helper()
	for _, r := range rows {
		if r.got != r.want {
			t.Errorf("got %q, want %q (%s)", r.got, r.want, r.source)
		}
	}
}

func TestRatio(t *testing.T) {
	check(t, []row{
		{"style", Ratio(0.71), "0.71"},
		{"style", Ratio(0.3), "0.30"},
		{"style: chart", Ratio(0.073), "0.073"},
		{"style: chart", Ratio(7.54), "7.54"},
		{"rule: 2 decimals", Ratio(1), "1.00"},
		{"rule: below 0.10 with 3", Ratio(0.0994), "0.099"},
		{"rule: the value shown decides", Ratio(0.0999), "0.10"},
		{"rule: the value shown decides", Ratio(0.1), "0.10"},
		{"rule: from 10 with 1", Ratio(12.34), "12.3"},
		{"rule: the value shown decides", Ratio(9.996), "10.0"},
		{"rule: the value shown decides", Ratio(9.994), "9.99"},
		{"rule: from 100 with 0", Ratio(123.4), "123"},
		{"rule: the value shown decides", Ratio(99.96), "100"},
		{"rule: the value shown decides", Ratio(99.94), "99.9"},
		{"rule: thousands with comma", Ratio(1234.5), "1,234"},
		{"rule: largest", Ratio(1e6), "1,000,000"},
		{"rule: very large", Ratio(1e12), "> 1,000,000"},
		{"rule: very large", Ratio(math.Inf(1)), "> 1,000,000"},
		{"rule: smallest", Ratio(0.0006), "0.001"},
		{"rule: very small", Ratio(0.0004), "< 0.001"},
		{"rule: very small", Ratio(1e-9), "< 0.001"},
		{"rule: underflow", Ratio(0), "< 0.001"},
		{"rule: no ratio", Ratio(-0.5), Missing},
		{"rule: no number", Ratio(math.NaN()), Missing},
	})
}

func TestLinear(t *testing.T) {
	check(t, []row{
		{"rule: minus is U+2212", Linear(-1.6, 2), "\u22121.60"},
		{"rule: decimals", Linear(3.14159, 3), "3.142"},
		{"rule: no negative zero", Linear(-0.004, 2), "0.00"},
		{"rule: no negative zero", Linear(math.Copysign(0, -1), 0), "0"},
		{"rule: sign decided by the value shown", Linear(-0.006, 2), "\u22120.01"},
		{"rule: thousands with comma", Linear(-1234567.89, 1), "\u22121,234,567.9"},
		{"rule: carried over a thousand", Linear(999.96, 1), "1,000.0"},
		{"rule: decimals from 0", Linear(2.5, -3), "2"},
		{"rule: decimals to 15", Linear(0.5, 40), "0.500000000000000"},
		{"rule: very large", Linear(1e300, 2), "> 1,000,000,000,000,000"},
		{"rule: very large", Linear(math.Inf(-1), 2), "< \u22121,000,000,000,000,000"},
		{"rule: no number", Linear(math.NaN(), 2), Missing},
	})
}

// "Decimals of the smallest standard error's second digit": each want counts
// the decimals of that standard error written with two significant digits.
func TestDecimals(t *testing.T) {
	for _, tt := range []struct {
		se   float64
		want int
	}{
		{0.31, 2}, {0.0127, 3}, {1.28, 1}, {12.8, 0}, {128, 0}, {0.0996, 2}, {0.996, 1}, {9.96, 0},
		{1e-5, 6}, {1e-9, 6}, {1e300, 0}, {5e-324, 6}, {0, 2}, {-1, 2}, {math.NaN(), 2}, {math.Inf(1), 2},
	} {
		if got := Decimals(tt.se); got != tt.want {
			t.Errorf("Decimals(%v) = %d, want %d", tt.se, got, tt.want)
		}
	}
}

func TestNotation(t *testing.T) {
	ratio := NotationOf(effect.RiskRatio, 0.1)
	linear := NotationOf(effect.MeanDifference, 0.31)
	check(t, []row{
		{"style", ratio.Interval(0.59, 0.89), "0.59 to 0.89"},
		{"style", ratio.Estimate(0.71, 0.58, 0.86), "0.71 (0.58 to 0.86)"},
		{"style: chart", ratio.Estimate(0.30, 0.073, 1.26), "0.30 (0.073 to 1.26)"},
		{"style: chart", ratio.Estimate(0.66, 0.058, 7.54), "0.66 (0.058 to 7.54)"},
		{"rule: differences of means", linear.Estimate(-1.204, -1.8116, 0.6), "\u22121.20 (\u22121.81 to 0.60)"},
		{"rule: differences of means", NotationOf(effect.MeanDifference, 4.1).Estimate(28.39, -0.81, 57.6), "28.4 (\u22120.8 to 57.6)"},
		{"rule: written limits", WithInterval(Tau(0.13), Tau(0), Tau(0.48)), "0.13 (0 to 0.48)"},
	})
}

func TestTau(t *testing.T) {
	check(t, []row{
		{"style: chart", Tau(0.13), "0.13"},
		{"style: chart", Tau(0), "0"},
		{"rule: 2 decimals", Tau(12.345), "12.35"},
		{"rule: small, 2 significant digits", Tau(0.0133), "0.013"},
		{"rule: small, 2 significant digits", Tau(0.0996), "0.10"},
		{"rule: small, 2 significant digits", Tau(0.00012), "0.00012"},
		{"rule: very small", Tau(1e-9), "< 0.000001"},
		{"rule: no spread", Tau(-1), Missing},
		{"rule: no number", Tau(math.NaN()), Missing},
	})
}

func TestCountsAndDates(t *testing.T) {
	check(t, []row{
		{"style", People(1871), "1,871"},
		{"style", Count(1871), "1,871"},
		{"rule: large", Count(1301234567), "1,301,234,567"},
		{"rule: small", Count(0), "0"},
		{"rule: below a thousand", Count(999), "999"},
		{"rule: whole people", People(41.6), "42"},
		{"style", Date(2024, 8, 0), "2024-08"},
		{"rule: a year alone is a date", Date(1948, 0, 0), "1948"},
		{"rule: a day", Date(2024, 8, 7), "2024-08-07"},
		{"rule: no date", Date(0, 0, 0), Missing},
		{"rule: no month", Date(2024, 13, 0), Missing},
		{"rule: a day of no month", Date(2024, 0, 3), Missing},
	})
}

// everything returns what every function makes of a number and two neighbours.
func everything(x, low, high float64, n int) []string {
	ratio, linear := Notation{Ratio: true}, NotationOf(effect.MeanDifference, low)
	return []string{
		Linear(x, n), Ratio(x), ratio.Estimate(x, low, high), linear.Estimate(x, low, high),
		linear.Interval(low, high), Tau(x), Count(n), People(x), Date(n, int(int8(n)), 3),
		Odds(x), OddsInSentence(x), NoBreak(Odds(x)), Steps(x), StepsChange(x), StepsChangeShort(x),
		PValue(x), Percent(x), PercentFine(x), Weight(x), Probability(x), ProbabilityFrom(x, low),
		Absolute(x, low, high), AbsoluteInterval(low, high), NumberNeeded(x, low, high),
	}
}

// Whatever the number, the text is short, valid UTF-8, free of "NaN", "Inf",
// exponents, the hyphen as a minus and negative zero.
func TestEveryNumberIsReadable(t *testing.T) {
	anything := rapid.OneOf(
		rapid.Float64(), rapid.Float64Range(-2, 2), rapid.Float64Range(-2e4, 2e4),
		rapid.SampledFrom([]float64{math.NaN(), math.Inf(1), math.Inf(-1), math.Copysign(0, -1), 0, -0.4, -0.0004, 1e-320, math.MaxFloat64}),
	)
	rapid.Check(t, func(t *rapid.T) {
		x, low, high := anything.Draw(t, "x"), anything.Draw(t, "low"), anything.Draw(t, "high")
		for i, text := range everything(x, low, high, rapid.IntRange(-5, 3000).Draw(t, "n")) {
			if text == "" || !utf8.ValidString(text) || len(text) > 140 {
				t.Fatalf("function %d: %q", i, text)
			}
			for _, bad := range []string{"NaN", "Inf", "e+", "e-"} {
				if strings.Contains(text, bad) {
					t.Fatalf("function %d: %q holds %q", i, text, bad)
				}
			}
			for _, word := range strings.FieldsFunc(text, func(r rune) bool { return strings.ContainsRune(" ()%\u00a0", r) }) {
				if strings.HasPrefix(word, "-") || strings.HasPrefix(word, minus) && strings.Trim(word, minus+"0.,") == "" {
					t.Fatalf("function %d: %q holds %q", i, text, word)
				}
			}
		}
	})
}

// A larger number is never shown as a smaller one.
func TestOrderIsKept(t *testing.T) {
	value := func(text string) float64 {
		x := 0.0
		digits := strings.ReplaceAll(strings.TrimLeft(text, "<> "), ",", "")
		for i, r := range digits {
			if r == '.' {
				scale := 1.0
				for _, d := range digits[i+1:] {
					scale /= 10
					x += float64(d-'0') * scale
				}
				break
			}
			x = 10*x + float64(r-'0')
		}
		return x
	}
	rapid.Check(t, func(t *rapid.T) {
		a := math.Exp(rapid.Float64Range(-8, 16).Draw(t, "ln a"))
		b := a * rapid.Float64Range(1, 1.3).Draw(t, "factor")
		if first, second := Ratio(a), Ratio(b); value(first) > value(second)+1e-9 {
			t.Fatalf("%v is %q, the larger %v %q", a, first, b, second)
		}
		oddsA, _, _ := strings.Cut(Odds(math.Log(a)), " : 1")
		oddsB, _, _ := strings.Cut(Odds(math.Log(b)), " : 1")
		if a > 1 && value(oddsA) > value(oddsB)+1e-9 {
			t.Fatalf("odds %v are %q, the larger %v %q", a, oddsA, b, oddsB)
		}
	})
}
