package effect

import "math"

// FromCorrelation returns Fisher's z of a correlation coefficient r in n people,
// artanh r, with standard error 1/√(n−3). It returns an *InputError unless
// -1 < r < 1 and n is finite and above 3.
//
// Source: Fisher (1921), Metron 1:3-32.
func FromCorrelation(r, n float64) (Estimate, []Conversion, error) {
	y, err := fromReader(Correlation, "r", r)
	if err != nil {
		return Estimate{}, nil, err
	}
	if err := checkFinite("total", n); err != nil {
		return Estimate{}, nil, err
	}
	if !(n > 3) {
		return Estimate{}, nil, &InputError{What: "total", Value: n, Why: "is not above 3, so that Fisher's z has no standard error", Do: "leave the row out"}
	}
	e := Estimate{Y: y, SE: 1 / math.Sqrt(n-3)}
	return checked(e, []Conversion{{
		What: "Fisher's z and its standard error from a correlation",
		From: []Value{{"r", r}, {"total", n}}, To: e.values(), Source: "Fisher 1921",
	}})
}
