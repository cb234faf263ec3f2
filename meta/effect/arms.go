package effect

import "math"

// Arm is a continuous outcome in one arm: mean and standard deviation in the
// outcome's unit, and the number of people (an effective number, so not
// necessarily whole, where clusters were randomised).
type Arm struct{ Mean, SD, N float64 }

// Check returns an *InputError unless the mean is finite, the standard
// deviation finite and above 0, and the number of people finite and at least 2.
func (a Arm) Check() error { return a.check("") }

// check names the numbers after the arm, "treated" or "control".
func (a Arm) check(arm string) error {
	if err := checkFinite(named("mean", arm), a.Mean); err != nil {
		return err
	}
	if err := checkPositive(named("sd", arm), a.SD, enterSD); err != nil {
		return err
	}
	return checkPeople(named("total", arm), a.N)
}

const enterSD = "enter the standard deviation, or leave it blank where it is not reported"

// checkPeople returns an *InputError unless n is finite and at least 2, the
// fewest people that have a standard deviation.
func checkPeople(what string, n float64) error {
	if err := checkFinite(what, n); err != nil {
		return err
	}
	if n < 2 {
		return &InputError{What: what, Value: n, Why: "is below 2", Do: "enter how many people the mean and standard deviation are of"}
	}
	return nil
}

// FromArms returns the difference in means, the standardised difference or the
// log ratio of means, treated against control, with its standard error:
//
//	mean difference    m₁ − m₂          variance sd₁²/n₁ + sd₂²/n₂
//	standardised       g = J(m₁−m₂)/sd  variance N/(n₁n₂) + g²/(2(N−3.94))
//	log ratio of means ln m₁ − ln m₂    variance sd₁²/(n₁m₁²) + sd₂²/(n₂m₂²)
//
// N = n₁ + n₂, sd the pooled standard deviation, J = SmallSampleFactor(N−2).
//
// Errors: a *MeasureError for another measure; an *InputError for an arm that
// fails Check, for a mean that is not above 0 where the ratio is wanted, and
// for a result outside the range of numbers.
//
// Source: Cochrane Handbook 6.5.1, 10.5; Hedges (1981), Journal of Educational
// Statistics 6:107-128 (J); Hedges, Gurevitch & Curtis (1999), Ecology
// 80:1150-1156 (ratio of means).
func FromArms(m Measure, treated, control Arm) (Estimate, []Conversion, error) {
	if m != MeanDifference && m != StandardisedMeanDifference && m != RatioOfMeans {
		return Estimate{}, nil, &MeasureError{Measure: m, From: "means and standard deviations",
			Valid: []Measure{MeanDifference, StandardisedMeanDifference, RatioOfMeans}}
	}
	if err := treated.check("treated"); err != nil {
		return Estimate{}, nil, err
	}
	if err := control.check("control"); err != nil {
		return Estimate{}, nil, err
	}
	switch m {
	case StandardisedMeanDifference:
		return standardised(treated, control)
	case RatioOfMeans:
		return ratioOfMeans(treated, control)
	}
	e := Estimate{
		Y:  treated.Mean - control.Mean,
		SE: math.Hypot(treated.SD/math.Sqrt(treated.N), control.SD/math.Sqrt(control.N)),
	}
	return checked(e, []Conversion{armsStep(m, treated, control, e, "Cochrane Handbook 6.5.1, 10.5")})
}

// FromArmsUnbiased returns the standardised difference of FromArms with the
// unbiased estimate of its variance in place of the Cochrane Handbook's:
//
//	N/(n₁n₂) + (1 − (m−2)/(mJ²)) g²,  m = N − 2
//
// within 1% of the other from about ten people on. Errors: an *InputError for
// an arm that fails Check, for four people in all or fewer, of whom no variance
// exists, and for a result outside the range of numbers.
//
// Source: Hedges (1981), Journal of Educational Statistics 6:107-128 (J and the
// variance of d, from which it follows).
func FromArmsUnbiased(treated, control Arm) (Estimate, []Conversion, error) {
	if err := treated.check("treated"); err != nil {
		return Estimate{}, nil, err
	}
	if err := control.check("control"); err != nil {
		return Estimate{}, nil, err
	}
	n := treated.N + control.N
	if !(n > 4) {
		return Estimate{}, nil, &InputError{What: "total", Value: n, Why: "of both arms is not above 4", Do: "use the standardised difference with the usual variance"}
	}
	g, pooled, j := hedges(treated, control)
	share := 1 - (n-4)/((n-2)*j*j)
	e := Estimate{Y: g, SE: math.Hypot(math.Sqrt(1/treated.N+1/control.N), g*math.Sqrt(max(share, 0)))}
	step := armsStep(StandardisedMeanDifference, treated, control, e, "Hedges 1981, unbiased variance")
	step.To = append(step.To, Value{"pooled sd", pooled}, Value{"small-sample factor", j})
	return checked(e, []Conversion{step})
}

// hedges returns the standardised difference g, and the pooled standard
// deviation and the small-sample factor it is made with.
func hedges(treated, control Arm) (g, pooled, j float64) {
	n1, n2 := treated.N, control.N
	pooled = math.Hypot(math.Sqrt(n1-1)*treated.SD, math.Sqrt(n2-1)*control.SD) / math.Sqrt(n1+n2-2)
	j = SmallSampleFactor(n1 + n2 - 2)
	return j * ((treated.Mean - control.Mean) / pooled), pooled, j
}

func standardised(treated, control Arm) (Estimate, []Conversion, error) {
	n1, n2 := treated.N, control.N
	n := n1 + n2
	g, pooled, j := hedges(treated, control)
	e := Estimate{Y: g, SE: math.Hypot(math.Sqrt(1/n1+1/n2), g/math.Sqrt(2*(n-3.94)))}
	step := armsStep(StandardisedMeanDifference, treated, control, e, "Hedges 1981; Cochrane Handbook 10.5")
	step.To = append(step.To, Value{"pooled sd", pooled}, Value{"small-sample factor", j})
	return checked(e, []Conversion{step})
}

func ratioOfMeans(treated, control Arm) (Estimate, []Conversion, error) {
	const do = "a ratio needs two means above 0; use a difference in means"
	if err := checkPositive("mean treated", treated.Mean, do); err != nil {
		return Estimate{}, nil, err
	}
	if err := checkPositive("mean control", control.Mean, do); err != nil {
		return Estimate{}, nil, err
	}
	e := Estimate{
		Y:  logQuotient(treated.Mean, control.Mean),
		SE: math.Hypot(treated.SD/treated.Mean/math.Sqrt(treated.N), control.SD/control.Mean/math.Sqrt(control.N)),
	}
	return checked(e, []Conversion{armsStep(RatioOfMeans, treated, control, e, "Hedges, Gurevitch & Curtis 1999")})
}

func armsStep(m Measure, treated, control Arm, e Estimate, source string) Conversion {
	return Conversion{
		What: m.scaled() + " and its standard error from means and standard deviations",
		From: []Value{
			{"mean treated", treated.Mean}, {"sd treated", treated.SD}, {"total treated", treated.N},
			{"mean control", control.Mean}, {"sd control", control.SD}, {"total control", control.N},
		},
		To: e.values(), Source: source,
	}
}

// SEFromArms returns the standard error of a difference in means from the
// standard deviations and numbers of people of both arms, √(sd₁²/n₁ + sd₂²/n₂),
// for a difference that the report gives without one. It returns an *InputError
// unless both standard deviations are finite and above 0 and both numbers
// finite and at least 2; the means do not matter.
//
// Source: Cochrane Handbook 6.5.1.
func SEFromArms(treated, control Arm) (float64, Conversion, error) {
	treated.Mean, control.Mean = 0, 0
	e, steps, err := FromArms(MeanDifference, treated, control)
	if err != nil {
		return 0, Conversion{}, err
	}
	return e.SE, Conversion{
		What: "standard error of a difference in means from standard deviations",
		From: []Value{{"sd treated", treated.SD}, {"total treated", treated.N}, {"sd control", control.SD}, {"total control", control.N}},
		To:   []Value{{"se", e.SE}}, Source: steps[0].Source,
	}, nil
}
