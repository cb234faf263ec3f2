package effect

import "math"

// VarianceFromTotals returns the variance of observed minus expected events of a
// log-rank test from the events in both arms together and the numbers of people:
// V = events·n₁n₂/(n₁+n₂)². It returns an *InputError unless all three are
// finite and above 0.
//
// Source: Parmar, Torri & Stewart (1998), Statistics in Medicine 17:2815-2834;
// Tierney et al. (2007), Trials 8:16.
func VarianceFromTotals(events, treated, control float64) (float64, Conversion, error) {
	from := []Value{{"events", events}, {"total treated", treated}, {"total control", control}}
	return logRankVariance(from, "the numbers of people", func() float64 {
		return events / (1 + control/treated) / (1 + treated/control)
	})
}

// VarianceFromShares returns that variance from the events in both arms together
// and the shares of the people who were in each arm, such as ½ and ½ or ⅔ and ⅓:
// V = events·share₁·share₂. It returns an *InputError unless the events are
// finite and above 0, both shares above 0, and their sum within 0.01 of 1.
//
// Source: as VarianceFromTotals.
func VarianceFromShares(events, treated, control float64) (float64, Conversion, error) {
	from := []Value{{"events", events}, {"share treated", treated}, {"share control", control}}
	if sum := treated + control; treated > 0 && control > 0 && math.Abs(sum-1) > 0.01 {
		return 0, Conversion{}, &InputError{What: "share control", Value: control, Why: "and the share treated do not add up to 1", Do: "enter both as shares, such as 0.5 and 0.5"}
	}
	return logRankVariance(from, "the shares of both arms", func() float64 { return events * treated * control })
}

// VarianceFromEvents returns that variance from the events of each arm, which
// suits arms followed alike and a hazard ratio not far from 1:
// V = e₁e₂/(e₁+e₂). It returns an *InputError unless both are finite and above
// 0.
//
// Source: as VarianceFromTotals.
func VarianceFromEvents(treated, control float64) (float64, Conversion, error) {
	from := []Value{{"events treated", treated}, {"events control", control}}
	return logRankVariance(from, "the events of both arms", func() float64 { return treated / (1 + treated/control) })
}

func logRankVariance(from []Value, basis string, variance func() float64) (float64, Conversion, error) {
	for _, v := range from {
		if err := checkPositive(v.Name, v.Value, "enter the number as the report prints it"); err != nil {
			return 0, Conversion{}, err
		}
	}
	v := variance()
	if err := checkVariance(v); err != nil {
		return 0, Conversion{}, err
	}
	return v, Conversion{
		What: "variance of observed minus expected events from events and " + basis,
		From: from, To: []Value{{"variance", v}}, Source: "Parmar et al. 1998; Tierney et al. 2007",
	}, nil
}

// FromHazardP returns the log hazard ratio from an exact two-sided log-rank
// p-value, the direction of the effect and the variance V of observed minus
// expected events: y = ±z/√V, se = 1/√V, z the two-sided normal quantile of p.
// It returns an *InputError unless 0 < p ≤ 1, the direction is known, and V is
// finite and above 0.
//
// Source: Parmar, Torri & Stewart (1998); Tierney et al. (2007).
func FromHazardP(p float64, d Direction, variance float64) (Estimate, []Conversion, error) {
	z, step, err := SignedZ(p, d)
	if err != nil {
		return Estimate{}, nil, err
	}
	e, steps, err := FromHazardZ(z, variance)
	if err != nil {
		return Estimate{}, nil, err
	}
	return e, append([]Conversion{step}, steps...), nil
}

// FromHazardZ returns the log hazard ratio from a signed log-rank z, such as that
// of SignedZOneSided, and the variance V of observed minus expected events:
// y = z/√V, se = 1/√V. It returns an *InputError unless z is finite and V finite
// and above 0.
//
// Source: as FromHazardP.
func FromHazardZ(z, variance float64) (Estimate, []Conversion, error) {
	if err := checkFinite("z", z); err != nil {
		return Estimate{}, nil, err
	}
	if err := checkVariance(variance); err != nil {
		return Estimate{}, nil, err
	}
	e := Estimate{Y: z / math.Sqrt(variance), SE: 1 / math.Sqrt(variance)}
	return checked(e, []Conversion{{
		What: "log hazard ratio and its standard error from z and the variance of observed minus expected events",
		From: []Value{{"z", z}, {"variance", variance}}, To: e.values(), Source: "Parmar et al. 1998; Tierney et al. 2007",
	}})
}

// FromHazardVariance returns the log of a reported hazard ratio with standard
// error 1/√V, V the variance of observed minus expected events, as
// VarianceFromTotals and its kin give it. It returns an *InputError unless both
// are finite and above 0.
//
// Source: as FromHazardP.
func FromHazardVariance(estimate, variance float64) (Estimate, []Conversion, error) {
	y, err := fromReader(HazardRatio, "estimate", estimate)
	if err != nil {
		return Estimate{}, nil, err
	}
	if err := checkVariance(variance); err != nil {
		return Estimate{}, nil, err
	}
	e := Estimate{Y: y, SE: 1 / math.Sqrt(variance)}
	return checked(e, append(scaleStep(HazardRatio, Value{"estimate", estimate}), Conversion{
		What: "standard error from the variance of observed minus expected events",
		From: []Value{{"variance", variance}}, To: []Value{{"se", e.SE}}, Source: "Parmar et al. 1998; Tierney et al. 2007",
	}))
}
