package effect

import (
	"errors"
	"fmt"
	"math"
	"strings"
)

// ErrNothingToCompare reports a 2×2 table whose arms both have no events, or
// both have nothing but events, for a measure that such a table cannot inform.
var ErrNothingToCompare = errors.New("the table carries no information about a ratio: nobody in either arm had the event, or everybody had; leave the row out of this measure, or use a risk difference")

// InputError reports a number from which nothing can be computed.
type InputError struct {
	What  string  // which number, by the name of its column, such as "sd treated"
	Value float64 // as given
	Why   string  // what is wrong with it, such as "is below 0"
	Do    string  // what to do about it
}

func (e *InputError) Error() string {
	return fmt.Sprintf("%s %s (%v): %s", e.What, e.Why, e.Value, e.Do)
}

// MeasureError reports an effect measure that cannot be had from the numbers
// given.
type MeasureError struct {
	Measure Measure
	From    string    // what was given, such as "a 2×2 table"
	Valid   []Measure // what can be had from it
}

func (e *MeasureError) Error() string {
	names := make([]string, len(e.Valid))
	for i, m := range e.Valid {
		names[i] = m.String()
	}
	return fmt.Sprintf("measure %q cannot be computed from %s; use one of: %s", e.Measure, e.From, strings.Join(names, ", "))
}

// finite reports whether x is neither NaN nor infinite.
func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }

// checkFinite returns an *InputError if x is no number to compute with.
func checkFinite(what string, x float64) error {
	if finite(x) {
		return nil
	}
	return &InputError{What: what, Value: x, Why: "is not a finite number", Do: "enter the number as the report prints it"}
}

// checkPositive returns an *InputError unless x is finite and above 0.
func checkPositive(what string, x float64, do string) error {
	if err := checkFinite(what, x); err != nil {
		return err
	}
	if x > 0 {
		return nil
	}
	return &InputError{What: what, Value: x, Why: "is not above 0", Do: do}
}

// checkFreedom returns an *InputError unless df > 0; +Inf stands for the normal
// law.
func checkFreedom(df float64) error {
	if df > 0 {
		return nil
	}
	return &InputError{What: "degrees of freedom", Value: df, Why: "is not above 0", Do: "enter the number of people less 2, or leave it out"}
}

// checkP returns an *InputError unless p is above 0 and below 1.
func checkP(p float64, kind string) error {
	if p > 0 && p < 1 {
		return nil
	}
	return &InputError{What: "p", Value: p, Why: "is not between 0 and 1", Do: "enter the exact " + kind + " p-value"}
}

// checkCorrelation returns an *InputError unless -1 ≤ r ≤ 1.
func checkCorrelation(what string, r float64) error {
	if r >= -1 && r <= 1 {
		return nil
	}
	return &InputError{What: what, Value: r, Why: "is not between -1 and 1", Do: "enter the correlation coefficient"}
}

// checked passes an estimate on if both its numbers are usable: numbers that
// are legal one by one can still be too large or too small together.
func checked(e Estimate, steps []Conversion) (Estimate, []Conversion, error) {
	const do = "check the size and the unit of the numbers it comes from"
	if !finite(e.Y) {
		return Estimate{}, nil, &InputError{What: "estimate", Value: e.Y, Why: "is too large to compute with", Do: do}
	}
	if !(e.SE > 0) || !finite(e.SE) {
		return Estimate{}, nil, &InputError{What: "se", Value: e.SE, Why: "is outside the range that can be computed with", Do: do}
	}
	return e, steps, nil
}
