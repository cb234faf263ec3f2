package sparse

import (
	"errors"
	"fmt"
	"math"

	"steelyard/meta/effect"
	"steelyard/meta/evidence"
)

// ErrNothingToCompare reports tables none of which carries information about the
// measure.
var ErrNothingToCompare = errors.New("no table carries information about this measure: in each of them nobody had the event, or everybody had; report the counts without pooling them")

// ErrNoVariance reports tables whose arms all hold either no events or nothing
// but events: the method then gives no standard error.
var ErrNoVariance = errors.New("every arm has either no events or nothing but events, so that the estimate has no standard error; use the odds ratio with conditional-exact")

// TableError reports a table that cannot be used. Index counts from 0 in the
// order given; Err is the *effect.InputError that says why.
type TableError struct {
	Index int
	Err   error
}

func (e *TableError) Error() string {
	return fmt.Sprintf("table %d in the order given: %v", e.Index+1, e.Err)
}

// Unwrap returns the reason.
func (e *TableError) Unwrap() error { return e.Err }

// SettingError reports a setting outside its range, or settings that do not go
// together. The message ends with the remedy.
type SettingError struct{ Problem string }

func (e *SettingError) Error() string { return e.Problem }

// BoundaryError reports that the estimate is no number: the ratio is estimated
// as 0 (Toward −1) or as infinite (Toward 1), because no table has an event
// where one would count against that. What can still be said is in OneSided; it
// is nil for a method that can say no more.
type BoundaryError struct {
	Method   Method
	Measure  effect.Measure
	Toward   int
	OneSided *OneSided
	Tally    Tally
}

// OneSided is what the data say where the estimate is 0 or infinite. The
// interval reaches from the estimate to Limit, on the analysis scale. Each side
// keeps half of 1 − level, as beside a finite estimate.
type OneSided struct {
	Limit     float64 // of the log odds ratio: the upper one at 0, the lower one at infinity
	Statistic float64 // signed root of the likelihood ratio against the null
	LnP       float64 // natural log of the two-sided p-value
	Evidence  evidence.Ratio
}

func (e *BoundaryError) Error() string {
	estimate, limit := "0", "at most"
	if e.Toward > 0 {
		estimate, limit = "infinite", "at least"
	}
	text := fmt.Sprintf("%s by %s is estimated as %s: no table has an event that speaks against that", e.Measure, e.Method, estimate)
	if e.OneSided == nil {
		return text + "; use conditional-exact, which gives the limit on the other side"
	}
	return text + fmt.Sprintf("; it is %s %.4g", limit, math.Exp(e.OneSided.Limit))
}

// UnboundedError reports that the likelihood of the binomial–normal model falls
// too little, however large the spread between studies is made: the tables say
// too little for a random effect.
type UnboundedError struct{ What string }

func (e *UnboundedError) Error() string {
	return e.What + " has no end within any plausible odds ratio: the tables say too little for a random effect; use a common effect or conditional-exact"
}

// SizeError reports counts too large for the conditional law to be written out:
// Terms is how many probabilities or products that would take.
type SizeError struct{ Terms float64 }

func (e *SizeError) Error() string {
	return fmt.Sprintf("the exact conditional law of these counts has %.3g terms, too many to sum; use mantel-haenszel, which agrees with it for counts of this size", e.Terms)
}
