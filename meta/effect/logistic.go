package effect

import "math"

// logisticSD is the standard deviation of the standard logistic law, π/√3.
var logisticSD = math.Pi / math.Sqrt(3)

// StandardisedFromOdds returns the standardised difference that a log odds ratio
// stands for if the outcome behind it is logistic with the same spread in both
// arms: y·√3/π, its standard error likewise. An approximation. It returns an
// *InputError unless y is finite and se finite and above 0.
//
// Source: Chinn (2000), Statistics in Medicine 19:3127-3131; Cochrane Handbook
// 10.6.
func StandardisedFromOdds(e Estimate) (Estimate, []Conversion, error) {
	return logistic(e, 1/logisticSD, "standardised mean difference from a log odds ratio, an approximation")
}

// OddsFromStandardised returns the log odds ratio that a standardised difference
// stands for, the reverse of StandardisedFromOdds: y·π/√3, its standard error
// likewise. An approximation. It returns the same errors.
//
// Source: as StandardisedFromOdds.
func OddsFromStandardised(e Estimate) (Estimate, []Conversion, error) {
	return logistic(e, logisticSD, "log odds ratio from a standardised mean difference, an approximation")
}

func logistic(e Estimate, factor float64, what string) (Estimate, []Conversion, error) {
	if err := checkFinite("estimate", e.Y); err != nil {
		return Estimate{}, nil, err
	}
	if err := checkSE(e.SE); err != nil {
		return Estimate{}, nil, err
	}
	out := Estimate{Y: factor * e.Y, SE: factor * e.SE}
	return checked(out, []Conversion{{What: what, From: e.values(), To: out.values(), Source: "Chinn 2000"}})
}
