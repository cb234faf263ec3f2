package sparse

import (
	"fmt"
	"math"

	"steelyard/meta/numeric"
)

// ascentSteps caps the steps to the top of a concave function.
const ascentSteps = 300

// ascend returns where a concave function has its top, from its slope and its
// curvature (below 0), by Newton's steps of at most widest, kept between the
// points where the slope is known to be positive and negative. It ends after a
// step of less than tolerance standard errors, 1/√−curvature; each step squares
// the error of the one before.
func ascend(slopes func(x float64) (slope, curvature float64), start, widest, tolerance float64) (float64, error) {
	x, low, high := start, math.Inf(-1), math.Inf(1)
	for range ascentSteps {
		slope, curvature := slopes(x)
		if math.IsNaN(slope) || math.IsNaN(curvature) {
			return 0, fmt.Errorf("top of a likelihood near %g: %w", x, numeric.ErrNotFinite)
		}
		if slope == 0 {
			return x, nil
		}
		if slope > 0 {
			low = x
		} else {
			high = x
		}
		step := math.Copysign(widest, slope)
		if curvature < 0 {
			step = math.Copysign(min(widest, math.Abs(slope/curvature)), slope)
		}
		next := x + step
		if next == x || math.Abs(step)*math.Sqrt(max(0, -curvature)) < tolerance && math.Abs(step) < widest {
			return next, nil
		}
		if next <= low || next >= high {
			if next = low + 0.5*(high-low); next == low || next == high {
				return next, nil
			}
		}
		x = next
	}
	return 0, fmt.Errorf("top of a likelihood near %g: %w", x, numeric.ErrNotConverged)
}
