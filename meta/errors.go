package meta

import (
	"errors"
	"fmt"
)

// ErrNoStudies reports that there is nothing to pool.
var ErrNoStudies = errors.New("no studies to pool: give at least one estimate with its standard error")

// InputError reports an estimate or a standard error that cannot be pooled.
// Index counts from 0 in the order given; it is -1 where the fault belongs to
// the input as a whole.
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

// ModelError reports settings that do not go together, or a setting outside its
// range. The message ends with the remedy.
type ModelError struct{ Problem string }

func (e *ModelError) Error() string { return e.Problem }
