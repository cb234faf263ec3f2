package stream

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strconv"
	"testing"
)

// TestShortDecimalIsExact: wherever the quick reader takes a number it gives the bits
// of strconv.ParseFloat, which rounds correctly.
func TestShortDecimalIsExact(t *testing.T) {
	random := rand.New(rand.NewPCG(53, 1))
	taken := 0
	check := func(text string) {
		got, ok := shortDecimal([]byte(text))
		if !ok {
			return
		}
		taken++
		want, err := strconv.ParseFloat(text, 64)
		if err != nil || math.Float64bits(got) != math.Float64bits(want) {
			t.Errorf("%s: %v, want %v, %v", text, got, want, err)
		}
	}
	for range 100_000 {
		digits := strconv.FormatUint(random.Uint64()>>random.IntN(64), 10)
		point := random.IntN(len(digits) + 1)
		sign := []string{"", "-"}[random.IntN(2)]
		check(sign + digits[:point] + "." + digits[point:])
		check(sign + digits)
	}
	for _, whole := range []uint64{1<<53 - 1, 1 << 53, 1<<53 + 1, 1<<53 + 2, 999999999999999999} {
		for point := range 18 {
			digits := fmt.Sprintf("%018d", whole)
			check(digits[:point] + "." + digits[point:])
		}
	}
	for _, text := range []string{"0", "-0", "0.0", ".5", "-.5", "000.25", "1.5", "9007199254740993"} {
		check(text)
	}
	if taken < 100_000 {
		t.Errorf("%d numbers were taken, too few to prove anything", taken)
	}
}

// TestNumberRefuses: what is no number with a decimal point, or too large.
func TestNumberRefuses(t *testing.T) {
	for _, text := range []string{"", "-", ".", "1.", "NaN", "inf", "0x10", "1_000", "1,5", "1.2.3", "--1", "1e999", "1e151", "abc", "1.e5", "e5", "1e", "1e+"} {
		if value, problem := number([]byte(text)); problem == "" {
			t.Errorf("%q is read as %v", text, value)
		}
	}
	for text, want := range map[string]float64{"1e-3": 0.001, "+2.5": 2.5, "−0.5": -0.5, "0.12345678901234567": 0.12345678901234567, "-1.5E+2": -150, "1,234.5": 1234.5, "0.1": 0.1} {
		if value, problem := number([]byte(text)); problem != "" || value != want {
			t.Errorf("%q: %v, %q, want %v", text, value, problem, want)
		}
	}
}

func BenchmarkNumber(b *testing.B) {
	for _, text := range []string{"-0.1234", "0.12345678901234567"} {
		b.Run("text="+text, func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				if _, problem := number([]byte(text)); problem != "" {
					b.Fatal(problem)
				}
			}
		})
	}
}
