package effect

import "math"

// Events are events counted over person-time, in one arm. The unit of time is
// that of the rate.
type Events struct{ Events, PersonTime float64 }

// Check returns an *InputError unless events are a finite whole number of 0 or
// more and person-time is finite and above 0.
func (x Events) Check() error { return x.check("") }

func (x Events) check(arm string) error {
	if err := checkCount(named("events", arm), x.Events); err != nil {
		return err
	}
	return checkPositive(named("person time", arm), x.PersonTime, "enter how long all people of the arm were followed, added up")
}

// FromRate returns the log rate of one arm, ln(events/person-time), with
// standard error 1/√events. Where there are no events, 0.5 is added, and
// recorded; TreatmentArm adds the same as Half. It returns an *InputError for
// numbers that fail Check, or that need a correction when c is NoCorrection.
//
// Source: Cochrane Handbook 6.7.1.
func FromRate(x Events, c Correction) (Estimate, []Conversion, error) {
	if err := x.Check(); err != nil {
		return Estimate{}, nil, err
	}
	var steps []Conversion
	if x.Events == 0 {
		step, err := c.oneArm(Value{"events", x.Events}, Value{"person time", x.PersonTime})
		if err != nil {
			return Estimate{}, nil, err
		}
		x.Events, steps = 0.5, append(steps, step)
	}
	e := Estimate{Y: math.Log(x.Events) - math.Log(x.PersonTime), SE: 1 / math.Sqrt(x.Events)}
	return checked(e, append(steps, Conversion{
		What: "log rate and its standard error from events and person-time",
		From: []Value{{"events", x.Events}, {"person time", x.PersonTime}}, To: e.values(), Source: "Cochrane Handbook 6.7.1",
	}))
}

// FromRates returns the log rate ratio, treated against control, from events E
// and person-time T of both arms: ln(E₁/T₁) − ln(E₂/T₂), variance 1/E₁ + 1/E₂.
// Where one arm has no events, the correction is added to the events of both,
// and recorded: 0.5 each (Half), or shares of 1 in proportion to person-time
// (TreatmentArm). Errors: an *InputError for numbers that fail Check, or that
// need a correction when c is NoCorrection; ErrNothingToCompare if neither arm
// has an event.
//
// Source: Cochrane Handbook 6.7.1.
func FromRates(treated, control Events, c Correction) (Estimate, []Conversion, error) {
	if err := treated.check("treated"); err != nil {
		return Estimate{}, nil, err
	}
	if err := control.check("control"); err != nil {
		return Estimate{}, nil, err
	}
	if treated.Events == 0 && control.Events == 0 {
		return Estimate{}, nil, ErrNothingToCompare
	}
	var steps []Conversion
	if treated.Events == 0 || control.Events == 0 {
		step, err := c.rates(&treated, &control)
		if err != nil {
			return Estimate{}, nil, err
		}
		steps = append(steps, step)
	}
	e := Estimate{
		Y:  logQuotient(treated.Events/treated.PersonTime, control.Events/control.PersonTime),
		SE: math.Sqrt(1/treated.Events + 1/control.Events),
	}
	return checked(e, append(steps, Conversion{
		What: "log rate ratio and its standard error from events and person-time",
		From: ratesValues(treated, control), To: e.values(), Source: "Cochrane Handbook 6.7.1",
	}))
}

func ratesValues(treated, control Events) []Value {
	return []Value{
		{"events treated", treated.Events}, {"person time treated", treated.PersonTime},
		{"events control", control.Events}, {"person time control", control.PersonTime},
	}
}

// rates adds the correction to the events of both arms and returns its record.
func (c Correction) rates(treated, control *Events) (Conversion, error) {
	k1, k2 := 0.5, 0.5
	switch c {
	case Half:
	case TreatmentArm:
		k1 = 1 / (1 + control.PersonTime/treated.PersonTime)
		k2 = 1 / (1 + treated.PersonTime/control.PersonTime)
	case NoCorrection:
		culprit := Value{"events treated", treated.Events}
		if treated.Events != 0 {
			culprit = Value{"events control", control.Events}
		}
		return Conversion{}, uncorrected(culprit)
	default:
		_, err := ParseCorrection(c.String())
		return Conversion{}, err
	}
	step := Conversion{
		What: "zero-cell correction " + c.String() + ", added to events", From: ratesValues(*treated, *control),
		To: []Value{{"added treated", k1}, {"added control", k2}}, Source: "Cochrane Handbook 10.4.4.2", Added: true,
	}
	treated.Events += k1
	control.Events += k2
	return step, nil
}
