package formula

import (
	"fmt"
	"math"
)

// Sheets gives the values that formulas refer to.
type Sheets interface {
	// Values returns the values of a range, row by row; a blank cell is 0.
	Values(r Range) []Value
	// Named returns the range of a defined name.
	Named(name string) (Range, bool)
}

// Evaluate returns the value of the expression. It returns an error where a
// spreadsheet program would show one.
func (e *Expression) Evaluate(sheets Sheets) (Value, error) {
	v, err := e.root.evaluate(sheets)
	if err == nil {
		err = v.finite()
	}
	return v, err
}

type node interface{ evaluate(Sheets) (Value, error) }

type (
	constant struct{ value Value }
	negative struct{ of node }
	binary   struct {
		op          string
		left, right node
	}
	reference struct{ cells Range }
	name      struct{ text string }
	call      struct {
		name      string
		arguments []node
	}
)

func (c constant) evaluate(Sheets) (Value, error) { return c.value, nil }

func (n negative) evaluate(s Sheets) (Value, error) {
	v, err := n.of.evaluate(s)
	if err != nil {
		return v, err
	}
	return each(v, v, func(x, _ float64) float64 { return -x })
}

func (r reference) evaluate(s Sheets) (Value, error) {
	values := s.Values(r.cells)
	if r.cells.From == r.cells.To {
		return values[0], nil
	}
	list := make([]float64, len(values))
	for i, v := range values {
		list[i] = v.Number // a text counts as 0, as in a sum
	}
	return Value{List: list}, nil
}

func (n name) evaluate(s Sheets) (Value, error) {
	cells, ok := s.Named(n.text)
	if !ok {
		return Value{}, fmt.Errorf("no cell is named %q", n.text)
	}
	return reference{cells}.evaluate(s)
}

var operators = map[string]func(x, y float64) float64{
	"+": func(x, y float64) float64 { return x + y },
	"-": func(x, y float64) float64 { return x - y },
	"*": func(x, y float64) float64 { return x * y },
	"/": func(x, y float64) float64 { return x / y },
	"^": power,
	"=": func(x, y float64) float64 { return truth(x == y) }, "<>": func(x, y float64) float64 { return truth(x != y) },
	"<": func(x, y float64) float64 { return truth(x < y) }, "<=": func(x, y float64) float64 { return truth(x <= y) },
	">": func(x, y float64) float64 { return truth(x > y) }, ">=": func(x, y float64) float64 { return truth(x >= y) },
}

func power(x, y float64) float64 {
	switch y {
	case 2:
		return x * x
	case 3:
		return x * x * x
	}
	return math.Pow(x, y)
}

func (b binary) evaluate(s Sheets) (Value, error) {
	left, err := b.left.evaluate(s)
	if err != nil {
		return left, err
	}
	right, err := b.right.evaluate(s)
	if err != nil {
		return right, err
	}
	if b.op == "&" {
		return Text(left.Text + right.Text), nil
	}
	if left.IsText && right.IsText && b.op == "=" {
		return Number(truth(left.Text == right.Text)), nil
	}
	return each(left, right, operators[b.op])
}
