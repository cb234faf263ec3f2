package effect

import (
	"fmt"
	"math"

	"steelyard/meta/numeric"
)

// FromMedian is an arm whose mean and standard deviation were worked out from a
// median with quartiles or a range, as if the outcome were normal, with a check
// of that.
type FromMedian struct {
	Arm      Arm
	Skewness float64 // |low + high − 2·median| / (high − low), 0 if symmetric
	Skewed   bool    // Skewness above 0.25: the assumption is doubtful
}

// skewedAbove is the skewness from which a normal outcome is doubtful.
const skewedAbove = 0.25

// blom returns 2Φ⁻¹(share), about the distance in standard deviations between
// the two order statistics of a normal sample of which share is the upper.
func blom(share float64) float64 { return 2 * numeric.NormalCritical(2*(1-share)) }

// rangeWidth returns about the expected range of n normal numbers in standard
// deviations, ξ(n); quartileWidth that between their quartiles, η(n).
//
// Source: Wan, Wang, Liu & Tong (2014), equations 9 and 16.
func rangeWidth(n float64) float64    { return blom((n - 0.375) / (n + 0.25)) }
func quartileWidth(n float64) float64 { return blom((0.75*n - 0.125) / (n + 0.25)) }

// FromQuartiles returns an arm's mean and standard deviation from the median m,
// the quartiles and the number of people n:
//
//	mean  w(q1+q3)/2 + (1−w)m,  w = 0.7 + 0.39/n
//	SD    (q3−q1)/η(n),         η(n) = 2Φ⁻¹((0.75n−0.125)/(n+0.25))
//
// Skewness compares the quartiles. It returns an *InputError unless
// q1 ≤ m ≤ q3 are finite, q1 < q3 and n is finite and at least 2.
//
// Source: Luo, Wan, Liu & Tong (2018), Statistical Methods in Medical Research
// 27:1785-1805 (mean, weights from memory); Wan, Wang, Liu & Tong (2014), BMC
// Medical Research Methodology 14:135 (SD).
func FromQuartiles(q1, median, q3, n float64) (FromMedian, Conversion, error) {
	from := []Value{{"q1", q1}, {"median", median}, {"q3", q3}}
	if err := checkOrder(from, n); err != nil {
		return FromMedian{}, Conversion{}, err
	}
	w := 0.7 + 0.39/n
	mean := median + w*middle(q1, median, q3)
	return normalArm("a median with quartiles", from, Arm{Mean: mean, SD: (q3 - q1) / quartileWidth(n), N: n}, skewness(q1, median, q3))
}

// FromRange returns an arm's mean and standard deviation from the median m, the
// smallest and the largest value and the number of people n:
//
//	mean  w(min+max)/2 + (1−w)m,  w = 4/(4+n^0.75)
//	SD    (max−min)/ξ(n),         ξ(n) = 2Φ⁻¹((n−0.375)/(n+0.25))
//
// Skewness compares the two ends, which in few people scatter widely. It returns
// an *InputError unless min ≤ m ≤ max are finite, min < max and n is finite and
// at least 2.
//
// Source: as FromQuartiles.
func FromRange(min, median, max, n float64) (FromMedian, Conversion, error) {
	from := []Value{{"min", min}, {"median", median}, {"max", max}}
	if err := checkOrder(from, n); err != nil {
		return FromMedian{}, Conversion{}, err
	}
	w := 4 / (4 + math.Pow(n, 0.75))
	mean := median + w*middle(min, median, max)
	return normalArm("a median with a range", from, Arm{Mean: mean, SD: (max - min) / rangeWidth(n), N: n}, skewness(min, median, max))
}

// FromFiveNumbers returns an arm's mean and standard deviation from the smallest
// value, the quartiles, the median m, the largest value and the number of people
// n:
//
//	mean  w₁(min+max)/2 + w₂(q1+q3)/2 + (1−w₁−w₂)m
//	      w₁ = 2.2/(2.2+n^0.75),  w₂ = 0.7 − 0.72/n^0.55
//	SD    ((max−min)/ξ(n) + (q3−q1)/η(n)) / 2
//
// Skewness compares the quartiles. It returns an *InputError unless the five are
// finite and in this order, q1 < q3, and n is finite and at least 2.
//
// Source: as FromQuartiles.
func FromFiveNumbers(min, q1, median, q3, max, n float64) (FromMedian, Conversion, error) {
	from := []Value{{"min", min}, {"q1", q1}, {"median", median}, {"q3", q3}, {"max", max}}
	if err := checkOrder(from, n); err != nil {
		return FromMedian{}, Conversion{}, err
	}
	if err := checkOrder(from[1:4], n); err != nil {
		return FromMedian{}, Conversion{}, err
	}
	w1, w2 := 2.2/(2.2+math.Pow(n, 0.75)), 0.7-0.72/math.Pow(n, 0.55)
	mean := median + w1*middle(min, median, max) + w2*middle(q1, median, q3)
	sd := ((max-min)/rangeWidth(n) + (q3-q1)/quartileWidth(n)) / 2
	return normalArm("a median with quartiles and a range", from, Arm{Mean: mean, SD: sd, N: n}, skewness(q1, median, q3))
}

// middle returns how far the middle of low and high lies above the median.
func middle(low, median, high float64) float64 { return ((low - median) + (high - median)) / 2 }

func skewness(low, median, high float64) float64 {
	return 2 * math.Abs(middle(low, median, high)) / (high - low)
}

// checkOrder returns an *InputError unless the values are finite, none is above
// the next, the last is above the first, and n suits.
func checkOrder(values []Value, n float64) error {
	for i, v := range values {
		if err := checkFinite(v.Name, v.Value); err != nil {
			return err
		}
		if i > 0 && v.Value < values[i-1].Value {
			return &InputError{What: v.Name, Value: v.Value, Why: fmt.Sprintf("is below %s (%v)", values[i-1].Name, values[i-1].Value),
				Do: "check whether the two are exchanged"}
		}
	}
	first, last := values[0], values[len(values)-1]
	if first.Value == last.Value {
		return &InputError{What: last.Name, Value: last.Value, Why: "is equal to " + first.Name + ", which leaves no spread",
			Do: "check both, or use another measure of spread"}
	}
	return checkPeople("total", n)
}

func normalArm(what string, from []Value, arm Arm, skew float64) (FromMedian, Conversion, error) {
	if err := arm.Check(); err != nil {
		return FromMedian{}, Conversion{}, err
	}
	out := FromMedian{Arm: arm, Skewness: skew, Skewed: skew > skewedAbove}
	return out, Conversion{
		What: "mean and standard deviation from " + what + ", as if normal",
		From: append(from, Value{"total", arm.N}),
		To:   []Value{{"mean", arm.Mean}, {"sd", arm.SD}, {"skewness", skew}}, Source: "Luo et al. 2018 (mean); Wan et al. 2014 (SD)",
	}, nil
}
