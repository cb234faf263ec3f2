package formula

import "errors"

// What can go wrong in evaluating: the values do not suit the operation.
var (
	errText   = errors.New("a text stands where a number is needed")
	errLength = errors.New("two ranges differ in length")
	errNumber = errors.New("no number results: a division by zero, or a value outside a function's range")
	errList   = errors.New("a range stands where a single value is needed")
)
