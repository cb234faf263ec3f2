package formula

import (
	"fmt"
	"math"

	"steelyard/meta/numeric"
)

// elementwise are the functions of one number, applied to each of a list.
var elementwise = map[string]func(float64) float64{
	"ABS": math.Abs, "SQRT": math.Sqrt, "LN": math.Log, "EXP": math.Exp,
	"ASIN": math.Asin, "SIN": math.Sin, "ATANH": math.Atanh, "TANH": math.Tanh,
	"SIGN": func(x float64) float64 { return truth(x > 0) - truth(x < 0) },
	"GAMMALN": func(x float64) float64 {
		if !(x > 0) {
			return math.NaN()
		}
		return numeric.LogGamma(x)
	},
	"NORMSDIST": func(z float64) float64 { return numeric.NormalTail(-z) },
	"NORMSINV":  normalQuantile,
}

// normalQuantile returns z with the lower tail p.
func normalQuantile(p float64) float64 {
	switch {
	case !(p > 0 && p < 1):
		return math.NaN()
	case p < 0.5:
		return -numeric.NormalFromLogTail(math.Log(p))
	}
	return numeric.NormalFromLogTail(math.Log1p(-p))
}

// ofTwo are the functions of two numbers.
var ofTwo = map[string]func(x, y float64) float64{
	"TINV":    func(p, df float64) float64 { return numeric.StudentCritical(p, df) },
	"CHIDIST": func(x, df float64) float64 { return numeric.ChiSquareTail(x, df) },
	"CHIINV":  func(p, df float64) float64 { return numeric.ChiSquareUpperQuantile(p, df) },
}

func (c call) evaluate(s Sheets) (Value, error) {
	if c.name == "IF" {
		return c.choose(s)
	}
	arguments := make([]Value, len(c.arguments))
	for i, a := range c.arguments {
		var err error
		if arguments[i], err = a.evaluate(s); err != nil {
			return Value{}, err
		}
	}
	if f, ok := elementwise[c.name]; ok && len(arguments) == 1 {
		return each(arguments[0], arguments[0], func(x, _ float64) float64 { return f(x) })
	}
	if f, ok := ofTwo[c.name]; ok && len(arguments) == 2 {
		return each(arguments[0], arguments[1], f)
	}
	return c.fold(arguments)
}

// choose evaluates only the branch that is taken.
func (c call) choose(s Sheets) (Value, error) {
	if len(c.arguments) != 3 {
		return Value{}, fmt.Errorf("IF needs three values")
	}
	test, err := c.arguments[0].evaluate(s)
	switch {
	case err != nil:
		return test, err
	case test.IsText || test.List != nil:
		return test, errList
	case test.Number != 0:
		return c.arguments[1].evaluate(s)
	}
	return c.arguments[2].evaluate(s)
}

// fold evaluates the functions that make one number of many.
func (c call) fold(arguments []Value) (Value, error) {
	switch c.name {
	case "TDIST":
		if len(arguments) != 3 || arguments[2].Number != 2 {
			return Value{}, fmt.Errorf("TDIST is known with two tails alone")
		}
		return Number(2 * numeric.StudentTail(arguments[0].Number, arguments[1].Number)), nil
	case "INDEX":
		i := 0
		if len(arguments) == 2 {
			i = int(arguments[1].Number)
		}
		if i < 1 || i > len(arguments[0].List) {
			return Value{}, fmt.Errorf("INDEX points outside its range")
		}
		return Number(arguments[0].List[i-1]), nil
	case "SUMPRODUCT":
		product := Number(1)
		for _, a := range arguments {
			var err error
			if product, err = each(product, a, operators["*"]); err != nil {
				return Value{}, err
			}
		}
		return fold(numeric.Sum{}, flat([]Value{product})), nil
	case "SUM":
		return fold(numeric.Sum{}, flat(arguments)), nil
	case "PI":
		return Number(math.Pi), nil
	}
	all := flat(arguments)
	if len(all) == 0 {
		return Value{}, fmt.Errorf("%s has no value", c.name)
	}
	out := all[0]
	for _, x := range all[1:] {
		switch c.name {
		case "MAX":
			out = max(out, x)
		case "MIN":
			out = min(out, x)
		case "AND":
			out = truth(out != 0 && x != 0)
		case "OR":
			out = truth(out != 0 || x != 0)
		}
	}
	switch c.name {
	case "MAX", "MIN", "AND", "OR":
		return Number(out), nil
	case "COUNT":
		return Number(float64(len(all))), nil
	}
	return Value{}, fmt.Errorf("the function %s is not known", c.name)
}

// fold adds numbers up with their rounding errors.
func fold(sum numeric.Sum, all []float64) Value {
	for _, x := range all {
		sum.Add(x)
	}
	return Number(sum.Value())
}

// flat joins numbers and lists.
func flat(values []Value) []float64 {
	var all []float64
	for _, v := range values {
		if v.List != nil {
			all = append(all, v.List...)
			continue
		}
		all = append(all, v.Number)
	}
	return all
}
