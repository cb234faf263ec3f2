package accrual

import (
	"slices"

	"steelyard/meta/numeric"
)

// piece is the part of a standard normal law between two neighbouring nodes, over
// which a value runs straight from low to high.
type piece struct{ low, high, chance float64 }

// gridQuantile returns the p quantile of a value that is known at nodes of a
// standard normal variable and straight between them, even where it turns.
func gridQuantile(nodes, values []float64, p float64) float64 {
	pieces := make([]piece, 0, len(nodes))
	total := 0.0
	for i := 1; i < len(nodes); i++ {
		c := numeric.NormalTail(nodes[i-1]) - numeric.NormalTail(nodes[i])
		if nodes[i] <= 0 {
			c = numeric.NormalTail(-nodes[i]) - numeric.NormalTail(-nodes[i-1])
		}
		total += c
		pieces = append(pieces, piece{min(values[i-1], values[i]), max(values[i-1], values[i]), c})
	}
	below := func(x float64) float64 {
		sum := 0.0
		for _, c := range pieces {
			switch {
			case x >= c.high:
				sum += c.chance
			case x > c.low:
				sum += c.chance * (x - c.low) / (c.high - c.low)
			}
		}
		return sum / total
	}
	low, high := slices.Min(values), slices.Max(values)
	for range 60 { // halving to the last digit
		middle := low + 0.5*(high-low)
		if below(middle) < p {
			low = middle
		} else {
			high = middle
		}
	}
	return high
}
