package effect

// Estimate is an effect on the analysis scale (a natural logarithm for ratios)
// with its standard error.
type Estimate struct{ Y, SE float64 }

// Conversion is the record of one step from extracted numbers to an estimate.
type Conversion struct {
	What   string  // in words, such as "standard error from a 95% interval"
	From   []Value // what went in
	To     []Value // what came out
	Source string  // of the formula
	Added  bool    // something went in that nobody counted, as in a zero-cell correction
}

// Value is a named number of a conversion.
type Value struct {
	Name  string
	Value float64
}
