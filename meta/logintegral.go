package meta

import (
	"math"

	"steelyard/meta/numeric"
)

// negligible is how far, in natural logs, an integrand must fall below its peak
// to be left out.
const negligible = 40

// logIntegral returns ln ∫exp(f) from low to ∞ for a log integrand with one peak
// that falls from there on at least as fast as −x²/2, however small exp(f) may
// be: the range is cut where exp(f) is negligible beside the peak.
func logIntegral(f func(float64) float64, low float64) (float64, error) {
	// Past the peak f is at most −x²/2: the peak lies before the x where that
	// falls below f(low).
	far := math.Sqrt(max(low*low, -2*f(low))) + 1
	peak, top, err := numeric.Minimum(func(x float64) float64 { return -f(x) }, low, far, 1e-6)
	if err != nil {
		return 0, err
	}
	height := -top
	if atLow := f(low); atLow > height {
		peak, height = low, atLow
	}
	floor := height - negligible
	from, to := low, peak+1
	if f(low) < floor {
		from = crossing(f, floor, peak, low)
	}
	for f(to) > floor {
		to += to - peak
	}
	to = crossing(f, floor, peak, to)
	area, _, err := numeric.Integrate(func(x float64) float64 { return math.Exp(f(x) - height) }, from, to, 1e-11)
	return height + math.Log(area), err
}

// crossing returns a point near which f passes through floor between a peak
// above it and a point below it.
func crossing(f func(float64) float64, floor, above, below float64) float64 {
	peak := above
	for range 200 {
		middle := 0.5 * (above + below)
		if f(middle) > floor {
			above = middle
		} else {
			below = middle
		}
		if math.Abs(above-below) < 0.05*math.Abs(below-peak) {
			break
		}
	}
	return below
}
