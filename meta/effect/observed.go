package effect

import "math"

// Peto returns the observed minus the expected events of the treated arm, and
// the variance of that difference given the margins of the table:
//
//	O − E = a − n₁m/N    V = n₁n₂m(N−m) / (N²(N−1)),  m events among N people
//
// so that (O−E)/V estimates the log odds ratio with standard error 1/√V. No
// correction is ever needed. It returns an *InputError for a table that fails
// Check and ErrNothingToCompare if V is 0.
//
// Source: Yusuf, Peto, Lewis, Collins & Sleight (1985), Progress in
// Cardiovascular Diseases 27:335-371.
func Peto(t Table) (observedMinusExpected, variance float64, err error) {
	if err := t.Check(); err != nil {
		return 0, 0, err
	}
	return peto(t)
}

// peto is Peto for a table that was checked, of more than one person.
func peto(t Table) (observedMinusExpected, variance float64, err error) {
	if t.bothEmpty() || t.bothFull() {
		return 0, 0, ErrNothingToCompare
	}
	n1, n2 := t.Total1, t.Total2
	n, m := n1+n2, t.Events1+t.Events2
	observedMinusExpected = (t.Events1*n2 - t.Events2*n1) / n
	variance = n1 / n * (n2 / n) * m * (n - m) / (n - 1)
	return observedMinusExpected, variance, nil
}

// FromPeto returns Peto's log odds ratio of a table, (O−E)/V with standard error
// 1/√V; see Peto, whose errors it returns. It is meant for rare events, arms of
// like size and small effects.
//
// Source: Yusuf, Peto, Lewis, Collins & Sleight (1985); Cochrane Handbook
// 10.4.2.
func FromPeto(t Table) (Estimate, []Conversion, error) {
	difference, variance, err := Peto(t)
	if err != nil {
		return Estimate{}, nil, err
	}
	return fromPeto(t, difference, variance)
}

func fromPeto(t Table, difference, variance float64) (Estimate, []Conversion, error) {
	e, steps, err := FromObservedExpected(OddsRatio, difference, variance)
	if err != nil {
		return Estimate{}, nil, err
	}
	return e, append([]Conversion{{
		What: "observed minus expected events and their variance from a 2×2 table",
		From: t.values(), To: observed(difference, variance), Source: "Yusuf et al. 1985",
	}}, steps...), nil
}

// FromObservedExpected returns the log odds ratio, the log hazard ratio or the
// log rate ratio from the observed minus the expected events of the treated arm
// and the variance V of that difference: y = (O−E)/V, se = 1/√V. Errors: a
// *MeasureError for another measure; an *InputError unless both are finite and
// the variance is above 0.
//
// Source: Yusuf, Peto, Lewis, Collins & Sleight (1985); Tierney et al. (2007),
// Trials 8:16 (hazard ratio).
func FromObservedExpected(m Measure, observedMinusExpected, variance float64) (Estimate, []Conversion, error) {
	if m != OddsRatio && m != HazardRatio && m != RateRatio {
		return Estimate{}, nil, &MeasureError{Measure: m, From: "observed minus expected events", Valid: []Measure{OddsRatio, HazardRatio, RateRatio}}
	}
	if err := checkFinite("observed minus expected", observedMinusExpected); err != nil {
		return Estimate{}, nil, err
	}
	if err := checkVariance(variance); err != nil {
		return Estimate{}, nil, err
	}
	e := Estimate{Y: observedMinusExpected / variance, SE: 1 / math.Sqrt(variance)}
	source := "Yusuf et al. 1985"
	if m == HazardRatio {
		source = "Tierney et al. 2007"
	}
	return checked(e, []Conversion{{
		What: m.scaled() + " and its standard error from observed minus expected events",
		From: observed(observedMinusExpected, variance), To: e.values(), Source: source,
	}})
}

func observed(difference, variance float64) []Value {
	return []Value{{"observed minus expected", difference}, {"variance", variance}}
}

func checkVariance(v float64) error {
	return checkPositive("variance", v, "enter the variance of observed minus expected events")
}
