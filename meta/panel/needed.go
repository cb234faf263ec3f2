package panel

import "math"

// Needed is a number needed to treat for one event fewer or more than without
// treatment, with its limits. Where the interval of the difference holds 0 the limits
// lie on both sides and the numbers run from one through infinity to the other
// (Altman 1998, BMJ 317:1309-1312).
type Needed struct {
	Value float64 // for one event fewer or more, by Fewer; +Inf where the difference is 0
	Fewer bool    // one event fewer: the difference is below 0
	// Low and High are the limits, Low at most High, both for the same side as Value;
	// High is +Inf where a limit of the difference is 0. Through is false then.
	Low, High float64
	Through   bool
	// ForFewer and ForMore are the limits where Through: the least number that the
	// interval allows for one event fewer, and for one more.
	ForFewer, ForMore float64
}

// NumberNeeded returns the number needed to treat of a difference of risks:
//
//	1/|difference|
//
// unrounded. d is as in Absolute, per person.
//
// Check: a reduction of 1.3% (0.6 to 2.0) gives 77 (50 to 167) (GRADE guidelines 6,
// 2011, J Clin Epidemiol 64:1283-1293).
func NumberNeeded(d Range) Needed {
	n := Needed{Value: 1 / math.Abs(d.Value), Fewer: d.Value < 0}
	if d.Low < 0 && d.High > 0 {
		n.Through, n.ForFewer, n.ForMore = true, 1/-d.Low, 1/d.High
		return n
	}
	a, b := 1/math.Abs(d.Low), 1/math.Abs(d.High)
	n.Low, n.High = min(a, b), max(a, b)
	if d.Value == 0 {
		n.Fewer = d.Low < 0
	}
	return n
}
