package meta

import (
	"math"

	"steelyard/meta/numeric"
)

// negligible is how far, in natural logs, an integrand must fall below its peak
// to be left out.
const negligible = 40

// logIntegral returns ln ∫exp(f(u))du from 0 to ∞ for a log integrand that has
// one peak and nowhere exceeds −u²/2, however small exp(f) may be: the range is
// cut where exp(f) is negligible beside the peak.
func logIntegral(f func(float64) float64) (float64, error) {
	atZero := f(0)
	far := math.Sqrt(-2*min(0, atZero)) + 1 // there f has fallen below f(0)
	peak, top, err := numeric.Minimum(func(u float64) float64 { return -f(u) }, 0, far, 1e-6)
	if err != nil {
		return 0, err
	}
	height := -top
	if atZero > height {
		peak, height = 0, atZero
	}
	floor := height - negligible
	from, to := 0.0, peak+1
	if atZero < floor {
		from = crossing(f, floor, peak, 0)
	}
	for f(to) > floor {
		to += to - peak
	}
	to = crossing(f, floor, peak, to)
	// exp(f) is no surer than the rounding of f.
	tolerance := max(1e-11, 1e-14*math.Abs(height))
	area, _, err := numeric.Integrate(func(u float64) float64 { return math.Exp(f(u) - height) }, from, to, tolerance)
	return height + math.Log(area), err
}

// crossing returns a point at which f is below floor, near where it crosses
// floor between a peak above it and a point below it.
func crossing(f func(float64) float64, floor, peak, below float64) float64 {
	above := peak
	for math.Abs(above-below) > 0.05*math.Abs(below-peak) {
		middle := 0.5 * (above + below)
		if f(middle) > floor {
			above = middle
		} else {
			below = middle
		}
	}
	return below
}
