package missing

import (
	"errors"
	"fmt"
)

var (
	// ErrTooFew reports fewer studies than a method can be computed for at all.
	ErrTooFew = errors.New("the method needs 3 studies at least, and more to tell anything")
	// ErrAlike reports studies of one precision, along which nothing can change.
	ErrAlike = errors.New("the studies are equally precise, so that small and large ones cannot be told apart")
	// ErrExactLine reports studies that lie on a line without any scatter, where
	// a test would divide by 0.
	ErrExactLine = errors.New("the studies lie exactly on one line, so that there is no scatter to test against: check the sheet")
	// ErrOneSide reports studies that all lie on one side of the step in p.
	ErrOneSide = errors.New("all studies lie on one side of the step in p, so that nothing tells how often the others stay unseen: choose another step")
	// ErrNoMaximum reports a likelihood that still rises at the end of the range in
	// which its maximum was looked for.
	ErrNoMaximum = errors.New("the likelihood has no maximum within reach: these studies cannot tell selection from a small effect")
	// ErrUnsettled reports a number of missing studies that changes for ever.
	ErrUnsettled = errors.New("the number of missing studies does not settle")
)

// InputError reports a number that cannot be used; Index counts from 0.
type InputError struct {
	Index   int
	Problem string
}

func (e *InputError) Error() string {
	if e.Index < 0 {
		return e.Problem
	}
	return fmt.Sprintf("study %d in the order given: %s", e.Index+1, e.Problem)
}
