package evidence

import (
	"errors"
	"fmt"
	"math"
)

// Location describes an estimate whose place among regions is weighed: on the
// analysis scale, with its standard error and the degrees of freedom of that,
// +Inf for a normal error. Form says which form the evidence takes when the
// degrees of freedom are finite.
type Location struct {
	Estimate, SE, DF float64
	Form             Form
}

// ErrLocation reports an estimate, standard error or degrees of freedom that
// cannot be weighed.
var ErrLocation = errors.New("invalid estimate")

// Check returns an error wrapping ErrLocation unless the estimate is finite, the
// standard error finite and positive, and the degrees of freedom positive.
func (l Location) Check() error {
	switch {
	case math.IsNaN(l.Estimate) || math.IsInf(l.Estimate, 0):
		return fmt.Errorf("%w: the estimate is %g; it must be a finite number", ErrLocation, l.Estimate)
	case !(l.SE > 0) || math.IsInf(l.SE, 1):
		return fmt.Errorf("%w: the standard error is %g; it must be a finite number above 0", ErrLocation, l.SE)
	case !(l.DF > 0):
		return fmt.Errorf("%w: the degrees of freedom are %g; they must be above 0", ErrLocation, l.DF)
	}
	return nil
}

// check validates an estimate and regions.
func (l Location) check(regions ...Region) error {
	if err := l.Check(); err != nil {
		return fmt.Errorf("evidence for a region: %w", err)
	}
	for _, r := range regions {
		if err := r.Check(); err != nil {
			return fmt.Errorf("evidence for a region: %w", err)
		}
	}
	return nil
}

// Region returns the evidence that the true effect lies in r1 over that it lies
// in r2. With M the mean of the likelihood over the reference posterior within a
// region, relative to the largest,
//
//	ln ER = ln M₁ - ln M₂ - (β₁ - β₂)
//
// where β corrects for using the data twice, from 0 for a region that is a point
// to ½ for one that holds the estimate well inside. A shrinking region tends to
// the form of a point null: Normal, Matched or Student.
//
// The regions are on the analysis scale and fixed before the data are seen. It
// returns an error that wraps ErrLocation or ErrRegion for invalid input.
func (l Location) Region(r1, r2 Region) (Ratio, error) {
	if err := l.check(r1, r2); err != nil {
		return Ratio{}, err
	}
	beta := l.Correction(r1) - l.Correction(r2)
	if l.student() {
		beta *= 2 * correctionF(1, l.DF)
	}
	return Ratio{ln: l.LnM(r1) - l.LnM(r2) - beta}, nil
}

// student says whether the Student-t form is used, rather than a normal one.
func (l Location) student() bool { return l.Form == StudentForm && !math.IsInf(l.DF, 1) }

// LnM returns the log of the mean likelihood within a region under the reference
// posterior, relative to √½ of the largest: 0 for the whole line. NaN where
// Check fails for the location or the region.
func (l Location) LnM(r Region) float64 {
	if l.check(r) != nil {
		return math.NaN()
	}
	if !l.student() {
		strips := l.matched(r)
		return strips.lnNormal(math.Sqrt2, 0) - strips.lnNormal(1, 0)
	}
	strips := l.standardised(r)
	square := 2*l.DF + 1
	return strips.lnStudent(math.Sqrt(square/l.DF), square) - strips.lnStudent(1, l.DF)
}

// Posterior returns the share of the reference posterior that lies in the
// region: Student's t (or the normal law) round the estimate. NaN where Check
// fails for the location or the region.
func (l Location) Posterior(r Region) float64 {
	if l.check(r) != nil {
		return math.NaN()
	}
	return min(1, math.Exp(l.standardised(r).lnStudent(1, l.DF)))
}

// Correction returns β of a region: with G(x) the log of the numerator of M
// for an estimate at x, U standard normal and c the point of the region nearest
// to the estimate, in standard errors,
//
//	β = ½ + E G(c+U) - E G(c+U/√2)
//
// Beside a t interval the region's limits are first matched to normal ones; for
// the Student-t form they are taken as they are. NaN where Check fails for the
// location or the region.
func (l Location) Correction(r Region) float64 {
	if l.check(r) != nil {
		return math.NaN()
	}
	if l.student() {
		return l.standardised(r).correction()
	}
	return l.matched(r).correction()
}
