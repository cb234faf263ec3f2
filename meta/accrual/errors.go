package accrual

// InputError reports a question that cannot be asked. The message ends with the
// remedy.
type InputError struct{ Problem string }

func (e *InputError) Error() string { return e.Problem }
