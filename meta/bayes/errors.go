package bayes

import "errors"

var (
	// ErrUniformNeedsThree reports fewer than three studies under a uniform prior
	// for τ: its integral does not exist.
	ErrUniformNeedsThree = errors.New("a uniform prior for τ needs at least 3 studies: choose half-normal, half-cauchy or log-normal")
	// ErrOutOfRange reports numbers too far apart to be integrated over.
	ErrOutOfRange = errors.New("the estimates, the null and the prior's scale lie too far apart to be compared: check their units")
	// ErrIncludesNull reports an interval that holds the null, which has no
	// scepticism limit.
	ErrIncludesNull = errors.New("the interval includes the null: there is no scepticism limit, the evidence convinces nobody who starts in doubt")
)

// PriorError reports a prior distribution whose settings are outside their
// range. The message ends with the remedy.
type PriorError struct{ Problem string }

func (e *PriorError) Error() string { return "prior: " + e.Problem }

// ObservationError reports an estimate, a standard error or an interval that
// cannot be weighed.
type ObservationError struct{ Problem string }

func (e *ObservationError) Error() string { return e.Problem }
