package words

import (
	"math"

	"steelyard/meta/panel"
)

// Absolute returns a difference per 1000 people (negative: fewer events) with
// its interval, the limit nearer to none first: "82 fewer (33 to 122 fewer)". An
// interval across zero runs from its lower to its upper end: "9 fewer (30 fewer
// to 12 more)". An interval within 2 of none has the
// decimals that it needs.
func Absolute(difference, low, high float64) string {
	decimals := absoluteDecimals(max(math.Abs(low), math.Abs(high)))
	return fewerOrMore(difference, decimals) + " (" + absoluteInterval(low, high, decimals) + ")"
}

// AbsoluteInterval returns the interval of Absolute alone: "33 to 122 fewer",
// "30 fewer to 12 more".
func AbsoluteInterval(low, high float64) string { return absoluteInterval(low, high, 0) }

// AbsoluteValue returns a difference per 1000 alone: "82 fewer".
func AbsoluteValue(difference float64) string {
	return fewerOrMore(difference, absoluteDecimals(math.Abs(difference)))
}

// absoluteDecimals is how many decimals differences per 1000 need of which the largest
// has a size.
func absoluteDecimals(size float64) int {
	const rounding = 1e-9 // of what went through the analysis scale
	decimals := 0
	for size > 0 && size < 2*(1-rounding) && decimals < 3 {
		size *= 10
		decimals++
	}
	return decimals
}

func absoluteInterval(low, high float64, decimals int) string {
	if math.IsNaN(low) || math.IsNaN(high) {
		return Missing
	}
	near, far := min(low, high), max(low, high)
	if near < 0 && far > 0 && rounded(far, decimals) > 0 {
		return Interval(fewerOrMore(near, decimals), fewerOrMore(far, decimals))
	}
	if math.Abs(near) > math.Abs(far) {
		near, far = far, near
	}
	return Interval(Linear(math.Abs(near), decimals), fewerOrMore(far, decimals))
}

// fewerOrMore writes a difference with its direction in a word; none is "0".
func fewerOrMore(x float64, decimals int) string {
	text := Linear(math.Abs(x), decimals)
	switch {
	case text == Missing || rounded(x, decimals) == 0:
		return text
	case x < 0:
		return text + " fewer"
	}
	return text + " more"
}

// NumberNeeded returns a number needed to treat with its interval, each rounded
// up to whole people, the smaller limit first: "13 (9 to 31)".
func NumberNeeded(n, low, high float64) string {
	if math.IsNaN(low) || math.IsNaN(high) {
		return WithInterval(wholeUp(n), Missing, Missing)
	}
	return WithInterval(wholeUp(n), wholeUp(min(low, high)), wholeUp(max(low, high)))
}

// Needed returns a number needed to treat with what it is for; an interval that holds
// no difference goes through infinity: "13 (9 to 31) for one fewer", "100 for one fewer
// (20 for one fewer, through infinity, to 40 for one more)".
func Needed(n panel.Needed) string {
	side := map[bool]string{true: " for one fewer", false: " for one more"}
	if !n.Through {
		return NumberNeeded(n.Value, n.Low, n.High) + side[n.Fewer]
	}
	value := wholeUp(n.Value) + side[n.Fewer]
	if math.IsInf(n.Value, 1) {
		value = "infinite"
	}
	return value + " (" + wholeUp(n.ForFewer) + side[true] + ", through infinity, to " + wholeUp(n.ForMore) + side[false] + ")"
}

// wholeUp rounds up, but for a part that rounding errors left: 10.000000000002
// is 10.
func wholeUp(x float64) string {
	switch {
	case math.IsNaN(x) || x < 0:
		return Missing
	case math.IsInf(x, 1):
		return "infinity"
	}
	return Linear(math.Ceil(x*(1-1e-9)), 0)
}
