package effect

import "math"

// FromDifferences returns the mean difference of a cross-over or other paired
// design from the mean and the standard deviation of the differences within n
// people (or pairs), with standard error SD/√n. It returns an *InputError unless
// the difference is finite, sd finite and above 0 and n finite and at least 2.
//
// Source: Cochrane Handbook 23.2.7.1 (5.1: 16.4.6.1).
func FromDifferences(difference, sd, n float64) (Estimate, []Conversion, error) {
	if err := checkFinite("mean difference", difference); err != nil {
		return Estimate{}, nil, err
	}
	if err := checkPositive("sd of the difference", sd, "enter the standard deviation of the differences within people"); err != nil {
		return Estimate{}, nil, err
	}
	if err := checkPeople("total", n); err != nil {
		return Estimate{}, nil, err
	}
	e := Estimate{Y: difference, SE: sd / math.Sqrt(n)}
	return checked(e, []Conversion{{
		What: "mean difference and its standard error from differences within people",
		From: []Value{{"mean difference", difference}, {"sd of the difference", sd}, {"total", n}},
		To:   e.values(), Source: "Cochrane Handbook 23.2.7.1",
	}})
}

// FromPaired returns the mean difference or the standardised difference of a
// cross-over or other paired design from the means and standard deviations under
// both treatments and the correlation r of the two measurements of a person:
//
//	mean difference  m₁ − m₂         se √((sd₁² + sd₂² − 2r·sd₁sd₂)/n)
//	standardised     d = (m₁−m₂)/s   se √(1/n + d²/(2n)) · √(2(1−r))
//
// s = √((sd₁²+sd₂²)/2), the spread between people and not that of the
// differences, so that it goes with trials of separate groups. d has no
// small-sample factor, as its source prints it. Both arms are the same n people.
//
// Errors: a *MeasureError for another measure; an *InputError for an arm that
// fails Check, for numbers of people that differ, and unless -1 ≤ r < 1.
//
// Source: Cochrane Handbook 5.1, 16.4.6.2, 16.4.6.4; 6: 23.2.7.
func FromPaired(m Measure, treated, control Arm, r float64) (Estimate, []Conversion, error) {
	if m != MeanDifference && m != StandardisedMeanDifference {
		return Estimate{}, nil, &MeasureError{Measure: m, From: "paired means", Valid: []Measure{MeanDifference, StandardisedMeanDifference}}
	}
	if err := checkPair(treated, control, r); err != nil {
		return Estimate{}, nil, err
	}
	n, difference := treated.N, treated.Mean-control.Mean
	spread := sdOfDifference(treated.SD, control.SD, r)
	from := []Value{
		{"mean treated", treated.Mean}, {"sd treated", treated.SD}, {"mean control", control.Mean}, {"sd control", control.SD},
		{"total", n}, {"correlation", r},
	}
	if m == MeanDifference {
		step := Conversion{
			What: "standard deviation of the differences within people with a stated correlation",
			From: []Value{from[1], from[3], from[5]}, To: []Value{{"sd of the difference", spread}}, Source: "Cochrane Handbook 23.2.7.2",
		}
		e, steps, err := FromDifferences(difference, spread, n)
		if err != nil {
			return Estimate{}, nil, err
		}
		return e, append([]Conversion{step}, steps...), nil
	}
	between := math.Hypot(treated.SD, control.SD) / math.Sqrt2
	d := difference / between
	e := Estimate{Y: d, SE: math.Hypot(1, d/math.Sqrt2) * math.Sqrt(2*(1-r)/n)}
	return checked(e, []Conversion{{
		What: "standardised mean difference and its standard error from paired means with a stated correlation",
		From: from, To: append(e.values(), Value{"pooled sd", between}), Source: "Cochrane Handbook 5.1, 16.4.6.4",
	}})
}

func checkPair(treated, control Arm, r float64) error {
	if err := treated.check("treated"); err != nil {
		return err
	}
	if err := control.check("control"); err != nil {
		return err
	}
	if treated.N != control.N {
		return &InputError{What: "total control", Value: control.N, Why: "is not that of the treated arm, though the same people had both",
			Do: "enter how many people were measured under both treatments"}
	}
	if err := checkCorrelation("correlation", r); err != nil {
		return err
	}
	if r == 1 {
		return &InputError{What: "correlation", Value: r, Why: "is 1, which leaves no standard error", Do: "enter a correlation below 1"}
	}
	return nil
}
