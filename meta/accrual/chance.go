package accrual

import (
	"math"
	"slices"
)

// Value is a number with its Monte-Carlo standard error, which is 0 for a number
// that was computed.
type Value struct{ Value, Error float64 }

// Chance is the probability that the evidence reaches a number of steps: at least
// Steps where that is positive, at most Steps where it is negative.
type Chance struct {
	Steps float64
	Value
}

// share returns count/n as a probability.
func share(count, n int) Value {
	p := float64(count) / float64(n)
	return Value{Value: p, Error: math.Sqrt(p * (1 - p) / float64(n))}
}

// quantile returns the p quantile of ascending values; its standard error is half
// the distance between the order statistics one standard deviation of the rank
// away to either side.
func quantile(sorted []float64, p float64) Value {
	n := float64(len(sorted))
	at := func(rank float64) float64 {
		rank = max(0, min(n-1, rank))
		below := min(int(rank), max(0, len(sorted)-2))
		above := min(below+1, len(sorted)-1)
		part := rank - float64(below)
		return sorted[below]*(1-part) + sorted[above]*part
	}
	rank, spread := p*(n-1), math.Sqrt(n*p*(1-p))
	return Value{Value: at(rank), Error: 0.5 * (at(rank+spread) - at(rank-spread))}
}

// meanOf returns the mean of values with its standard error.
func meanOf(values []float64) Value {
	n := float64(len(values))
	total := 0.0
	for _, x := range values {
		total += x
	}
	mean, squares := total/n, 0.0
	for _, x := range values {
		squares += (x - mean) * (x - mean)
	}
	return Value{Value: mean, Error: math.Sqrt(squares / (n - 1) / n)}
}

// chancesOf returns the chance of each number of steps among ascending values.
func chancesOf(sorted []float64, steps []float64) []Chance {
	chances := make([]Chance, len(steps))
	for i, want := range steps {
		count, _ := slices.BinarySearch(sorted, want)
		if want > 0 {
			count = len(sorted) - count
		} else {
			count, _ = slices.BinarySearchFunc(sorted, want, func(x, bound float64) int {
				if x <= bound {
					return -1
				}
				return 1
			})
		}
		chances[i] = Chance{Steps: want, Value: share(count, len(sorted))}
	}
	return chances
}

// checkSteps returns an *InputError unless every number of steps is finite and
// not 0.
func checkSteps(steps []float64) error {
	for _, x := range steps {
		if math.IsNaN(x) || math.IsInf(x, 0) || x == 0 {
			return &InputError{"a number of steps to be reached must be finite and not 0: positive for an effect, negative for none"}
		}
	}
	return nil
}
