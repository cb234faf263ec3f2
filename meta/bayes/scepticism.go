package bayes

import (
	"fmt"
	"math"
)

// ScepticismLimit returns how far from the null, on the analysis scale, the prior
// interval of a doubter reaches who is centred at the null and whom the data just
// fail to convince: combined with it, the interval touches the null. Effects
// beyond that limit must be thought plausible for the result to be credible.
//
//	(U − L)²/(4√(UL)),  L and U the limits less the null
//
// Prior and interval have the same level. It returns ErrIncludesNull where the
// interval holds the null or ends at it, and an *ObservationError for limits that
// are not finite or not in order.
//
// Source: Matthews (2018), Royal Society Open Science 5:171047.
func ScepticismLimit(low, high, null float64) (float64, error) {
	l, u := low-null, high-null
	if math.IsNaN(u-l) || math.IsInf(u-l, 0) || !(l <= u) {
		return 0, &ObservationError{fmt.Sprintf("interval %v to %v with null %v: give finite limits in order", low, high, null)}
	}
	if l <= 0 && u >= 0 {
		return 0, ErrIncludesNull
	}
	near, far := min(math.Abs(l), math.Abs(u)), max(math.Abs(l), math.Abs(u))
	limit := 0.25 * (u - l) * ((u - l) / math.Sqrt(near) / math.Sqrt(far))
	if math.IsInf(limit, 1) {
		return 0, &ObservationError{fmt.Sprintf("interval %v to %v all but reaches the null %v: its scepticism limit exceeds the range of numbers", low, high, null)}
	}
	return limit, nil
}
