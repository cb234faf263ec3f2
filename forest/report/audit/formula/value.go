package formula

import "math"

// Value is what a formula yields: a number, a text, or a list of numbers, which a
// range or an expression over one is.
type Value struct {
	Number float64
	Text   string
	IsText bool
	List   []float64 // nil for a single value
}

// Number returns a single number.
func Number(x float64) Value { return Value{Number: x} }

// Text returns a text.
func Text(s string) Value { return Value{Text: s, IsText: true} }

// truth is a comparison as a number: 1 or 0.
func truth(b bool) float64 {
	if b {
		return 1
	}
	return 0
}

// each applies f to two values, element by element where one of them is a list.
func each(a, b Value, f func(x, y float64) float64) (Value, error) {
	switch {
	case a.IsText || b.IsText:
		return Value{}, errText
	case a.List == nil && b.List == nil:
		return Number(f(a.Number, b.Number)), nil
	case a.List != nil && b.List != nil && len(a.List) != len(b.List):
		return Value{}, errLength
	}
	n := max(len(a.List), len(b.List))
	out := make([]float64, n)
	for i := range out {
		x, y := a.Number, b.Number
		if a.List != nil {
			x = a.List[i]
		}
		if b.List != nil {
			y = b.List[i]
		}
		out[i] = f(x, y)
	}
	return Value{List: out}, nil
}

// finite returns an error unless every number is one: what a spreadsheet program
// would show as an error.
func (v Value) finite() error {
	bad := func(x float64) bool { return math.IsNaN(x) || math.IsInf(x, 0) }
	if !v.IsText && v.List == nil && bad(v.Number) {
		return errNumber
	}
	for _, x := range v.List {
		if bad(x) {
			return errNumber
		}
	}
	return nil
}
