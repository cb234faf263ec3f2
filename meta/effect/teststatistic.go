package effect

import (
	"math"

	"steelyard/meta/numeric"
)

// SEFromT returns the standard error of an effect from the effect and its t (or
// z) statistic, se = |estimate/t|, on the scale on which the statistic was
// computed. It returns an *InputError unless both numbers are finite and not 0,
// have the same sign, and give a finite standard error above 0.
//
// Source: Cochrane Handbook 6.5.2.3.
func SEFromT(estimate, t float64) (float64, Conversion, error) {
	for _, v := range []Value{{"estimate", estimate}, {"t", t}} {
		if err := checkFinite(v.Name, v.Value); err != nil {
			return 0, Conversion{}, err
		}
		if v.Value == 0 {
			return 0, Conversion{}, &InputError{What: v.Name, Value: 0, Why: "is 0, from which no standard error follows", Do: "use the interval or the standard deviations"}
		}
	}
	if math.Signbit(estimate) != math.Signbit(t) {
		return 0, Conversion{}, &InputError{What: "t", Value: t, Why: "has the other sign than the estimate", Do: "check the direction of both"}
	}
	se := estimate / t
	if err := checkPositive("se", se, "check the size of estimate and t"); err != nil {
		return 0, Conversion{}, err
	}
	return se, Conversion{
		What: "standard error from a t statistic",
		From: []Value{{"estimate", estimate}, {"t", t}}, To: []Value{{"se", se}}, Source: "Cochrane Handbook 6.5.2.3",
	}, nil
}

// SEFromP returns the standard error of an effect from the effect and an exact
// two-sided p-value: se = |estimate|/t, t the two-sided quantile of Student's t
// on df degrees of freedom (n₁ + n₂ − 2 for two means; +Inf for the normal).
// estimate is on the analysis scale. A p-value given as a bound, such as
// "p < 0.05", has no place here. It returns an *InputError unless estimate is
// finite and not 0, 0 < p < 1 and df > 0.
//
// Source: Cochrane Handbook 6.5.2.3.
func SEFromP(estimate, p, df float64) (float64, Conversion, error) {
	if err := checkP(p, "two-sided"); err != nil {
		return 0, Conversion{}, err
	}
	if err := checkFreedom(df); err != nil {
		return 0, Conversion{}, err
	}
	t := numeric.StudentCritical(p, df)
	se, _, err := SEFromT(estimate, math.Copysign(t, estimate))
	if err != nil {
		return 0, Conversion{}, err
	}
	return se, Conversion{
		What: "standard error from a two-sided p-value",
		From: []Value{{"estimate", estimate}, {"p", p}, {"degrees of freedom", df}},
		To:   []Value{{"t", t}, {"se", se}}, Source: "Cochrane Handbook 6.5.2.3",
	}, nil
}

// SEFromOneSidedP returns the standard error of an effect from the effect and an
// exact one-sided p-value of the test for an effect in the direction tested:
// se = estimate/t, t the upper quantile of p by Student's t on df degrees of
// freedom (+Inf for the normal), turned where lower was tested. estimate is on
// the analysis scale; it lies in the direction tested where p < ½ and in the
// other where p > ½. It returns an *InputError unless that is so, 0 < p < 1,
// p is not ½ and df > 0, and for an unknown direction.
//
// Source: Cochrane Handbook 6.5.2.3, with one tail.
func SEFromOneSidedP(estimate, p, df float64, tested Direction) (float64, Conversion, error) {
	if err := checkP(p, "one-sided"); err != nil {
		return 0, Conversion{}, err
	}
	if err := checkFreedom(df); err != nil {
		return 0, Conversion{}, err
	}
	if err := tested.check(); err != nil {
		return 0, Conversion{}, err
	}
	t := tested.Sign() * numeric.StudentFromLogTail(math.Log(p), df)
	se, _, err := SEFromT(estimate, t)
	if err != nil {
		return 0, Conversion{}, err
	}
	return se, Conversion{
		What: "standard error from a one-sided p-value, tested for " + tested.String(),
		From: []Value{{"estimate", estimate}, {"p", p}, {"degrees of freedom", df}},
		To:   []Value{{"t", t}, {"se", se}}, Source: "Cochrane Handbook 6.5.2.3",
	}, nil
}

// FromT returns the estimate of a study, given in the reader's unit, with its
// standard error from a t (or z) statistic of the test against no effect on the
// analysis scale. Errors: a *MeasureError for a measure without a null, which
// no such test can be of; else as SEFromT.
//
// Source: Cochrane Handbook 6.5.2.3.
func FromT(m Measure, estimate, t float64) (Estimate, []Conversion, error) {
	return fromTest(m, estimate, "a test against no effect", func(y float64) (float64, Conversion, error) { return SEFromT(y, t) })
}

// FromP is FromT with an exact two-sided p-value on df degrees of freedom in
// place of the statistic; see SEFromP.
func FromP(m Measure, estimate, p, df float64) (Estimate, []Conversion, error) {
	return fromTest(m, estimate, "a p-value", func(y float64) (float64, Conversion, error) { return SEFromP(y, p, df) })
}

// FromOneSidedP is FromT with an exact one-sided p-value of the test for an
// effect in the direction tested; see SEFromOneSidedP.
func FromOneSidedP(m Measure, estimate, p, df float64, tested Direction) (Estimate, []Conversion, error) {
	return fromTest(m, estimate, "a p-value", func(y float64) (float64, Conversion, error) { return SEFromOneSidedP(y, p, df, tested) })
}

func fromTest(m Measure, estimate float64, from string, se func(y float64) (float64, Conversion, error)) (Estimate, []Conversion, error) {
	if !m.HasNull() {
		return Estimate{}, nil, &MeasureError{Measure: m, From: from, Valid: measuresWithNull()}
	}
	y, err := fromReader(m, "estimate", estimate)
	if err != nil {
		return Estimate{}, nil, err
	}
	s, step, err := se(y)
	if err != nil {
		return Estimate{}, nil, err
	}
	return checked(Estimate{Y: y, SE: s}, append(scaleStep(m, Value{"estimate", estimate}), step))
}

// SDFromDifferenceSE returns the standard deviation, taken to be the same in
// both arms, from the standard error of a difference in means and the numbers
// of people: SD = se / √(1/n₁ + 1/n₂). It returns an *InputError unless se is
// finite and above 0 and both numbers are finite and at least 2.
//
// Source: Cochrane Handbook 6.5.2.3.
func SDFromDifferenceSE(se, treated, control float64) (float64, Conversion, error) {
	for _, v := range []Value{{"total treated", treated}, {"total control", control}} {
		if err := checkPeople(v.Name, v.Value); err != nil {
			return 0, Conversion{}, err
		}
	}
	if err := checkPositive("se", se, "enter the standard error of the difference"); err != nil {
		return 0, Conversion{}, err
	}
	sd := se / math.Sqrt(1/treated+1/control)
	if err := checkFinite("sd", sd); err != nil {
		return 0, Conversion{}, err
	}
	return sd, Conversion{
		What: "standard deviation from the standard error of a difference in means",
		From: []Value{{"se", se}, {"total treated", treated}, {"total control", control}},
		To:   []Value{{"sd", sd}}, Source: "Cochrane Handbook 6.5.2.3",
	}, nil
}
