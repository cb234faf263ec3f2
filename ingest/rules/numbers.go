package rules

import (
	"math"
	"slices"
	"strconv"

	"steelyard/meta/review"
)

// box is a reported number with all that it may have been before it was rounded:
// half a unit in its last reported decimal to either side.
type box struct{ low, high float64 }

func boxOf(n review.Number) box {
	h := halfUnit(n)
	return box{n.Value - h, n.Value + h}
}

// gap returns how far two boxes lie apart, 0 if they meet; it is signed: above 0
// where b lies above.
func (a box) gap(b box) float64 {
	switch {
	case b.low > a.high:
		return b.low - a.high
	case a.low > b.high:
		return b.high - a.low
	}
	return 0
}

// mapped returns the box under an increasing function.
func (a box) mapped(g func(float64) float64) box { return box{g(a.low), g(a.high)} }

func (a box) finite() bool { return finite(a.low) && finite(a.high) }

func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }

func halfUnit(n review.Number) float64 { return n.HalfUnit() }
func decimals(n review.Number) int     { return n.Decimals() }
func typed(n review.Number) string     { return n.Typed() }

// shown returns a computed number with about three significant digits.
func shown(x float64) string {
	if a := math.Abs(x); a >= 100 {
		return strconv.FormatFloat(x, 'f', 0, 64)
	}
	return strconv.FormatFloat(x, 'g', 3, 64)
}

// median returns the median of values; NaN of none.
func median(values []float64) float64 {
	if len(values) == 0 {
		return math.NaN()
	}
	sorted := slices.Sorted(slices.Values(values))
	m := len(sorted) / 2
	if len(sorted)%2 == 1 {
		return sorted[m]
	}
	return (sorted[m-1] + sorted[m]) / 2
}

// spread returns the median of the absolute differences from the median.
func spread(values []float64) float64 {
	center := median(values)
	away := make([]float64, len(values))
	for i, v := range values {
		away[i] = math.Abs(v - center)
	}
	return median(away)
}

// perMAD turns a median absolute deviation into the standard deviation of a
// normal distribution with it.
const perMAD = 1.4826

// leastSpread is the least standard deviation of logarithms that is believed, so
// that values which happen to agree closely do not make outliers of all others.
const leastSpread = 0.1

// scale holds logarithms of values of one kind, and says how far one of them lies
// from the others. seen is their robust standard deviation, sd is no less than the
// least believed.
type scale struct{ center, sd, seen float64 }

// scaleOf returns the median of logarithms and their robust standard deviation.
func scaleOf(logs []float64) scale {
	seen := perMAD * spread(logs)
	return scale{median(logs), math.Max(seen, leastSpread), seen}
}

// z returns how many standard deviations a logarithm lies from the median.
func (s scale) z(log float64) float64 { return (log - s.center) / s.sd }

// near reports whether x lies within a fraction of y.
func near(x, y, fraction float64) bool { return math.Abs(x-y) <= fraction*math.Abs(y) }

// with returns a reading of a row that changes some of its numbers.
func (r *row) with(label string, values ...fieldValue) review.Reading {
	reading := review.Reading{Label: label}
	for _, v := range values {
		n, ok := r.Number(v.field)
		if !ok {
			n = review.Number{Field: v.field, Place: review.Spot{Row: r.Row.Row}}
		}
		n.Value = v.value
		reading.Numbers = append(reading.Numbers, n)
	}
	return reading
}

// asEntered returns the reading of a row that leaves some of its numbers as they
// are.
func (r *row) asEntered(fields ...review.Field) review.Reading {
	reading := review.Reading{Label: "as entered"}
	for _, f := range fields {
		if n, ok := r.Number(f); ok {
			reading.Numbers = append(reading.Numbers, n)
		}
	}
	return reading
}

type fieldValue struct {
	field review.Field
	value float64
}

// arm names the columns of one arm.
type arm struct {
	name                                                  string
	events, total, mean, sd, se, baseMean, baseSD, median review.Field
	randomised                                            review.Field
}

var arms = [2]arm{
	{"treated", review.EventsTreated, review.TotalTreated, review.MeanTreated, review.SDTreated, review.SETreated, review.BaselineMeanTreated, review.BaselineSDTreated, review.MedianTreated, review.RandomisedTreated},
	{"control", review.EventsControl, review.TotalControl, review.MeanControl, review.SDControl, review.SEControl, review.BaselineMeanControl, review.BaselineSDControl, review.MedianControl, review.RandomisedControl},
}
