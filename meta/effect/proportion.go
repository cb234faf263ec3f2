package effect

import "math"

// FromProportion returns the proportion of people with the event in one arm, on
// the analysis scale, with its standard error (x of n people):
//
//	proportion        ln(x/(n−x))                          variance 1/x + 1/(n−x)
//	arcsine           asin√(x/n)                           variance 1/(4n)
//	double arcsine    (asin√(x/(n+1)) + asin√((x+1)/(n+1)))/2   variance 1/(4n+2)
//
// The correction is used for the logit only, where nobody or everybody had the
// event: 0.5 is added to events and to non-events, and recorded; there being no
// other arm, TreatmentArm adds the same as Half. ToReader brings all three back
// to a proportion, the double arcsine by sin² as the single one, which does not
// depend on n and is drawn towards ½ in few people.
//
// Errors: a *MeasureError for another measure; an *InputError for counts that
// fail Check, or that need a correction when c is NoCorrection.
//
// Source: Woolf (1955), Annals of Human Genetics 19:251-253 (logit); Freeman &
// Tukey (1950), Annals of Mathematical Statistics 21:607-611 (arcsines).
func FromProportion(m Measure, arm Counts, c Correction) (Estimate, []Conversion, error) {
	if m != Proportion && m != ArcsineProportion && m != DoubleArcsineProportion {
		return Estimate{}, nil, &MeasureError{Measure: m, From: "events and total of one arm",
			Valid: []Measure{Proportion, ArcsineProportion, DoubleArcsineProportion}}
	}
	if err := arm.Check(); err != nil {
		return Estimate{}, nil, err
	}
	x, rest, n := arm.Events, arm.Total-arm.Events, arm.Total
	var steps []Conversion
	var e Estimate
	source := "Freeman & Tukey 1950"
	switch m {
	case ArcsineProportion:
		e = Estimate{Y: math.Atan2(math.Sqrt(x), math.Sqrt(rest)), SE: 0.5 / math.Sqrt(n)}
	case DoubleArcsineProportion:
		lower := math.Atan2(math.Sqrt(x), math.Sqrt(rest+1))
		upper := math.Atan2(math.Sqrt(x+1), math.Sqrt(rest))
		e = Estimate{Y: (lower + upper) / 2, SE: 1 / math.Sqrt(4*n+2)}
	default:
		if x == 0 || rest == 0 {
			step, err := c.oneArm(Value{"events", x}, Value{"total", n})
			if err != nil {
				return Estimate{}, nil, err
			}
			x, rest, steps = x+0.5, rest+0.5, append(steps, step)
		}
		e = Estimate{Y: logQuotient(x, rest), SE: math.Sqrt(1/x + 1/rest)}
		source = "Woolf 1955"
	}
	return checked(e, append(steps, Conversion{
		What: m.scaled() + " and its standard error from events and total",
		From: []Value{{"events", x}, {"total", x + rest}}, To: e.values(), Source: source,
	}))
}

// oneArm returns the record of 0.5 added to the events of the only arm, and to
// its non-events if the second number is a total.
func (c Correction) oneArm(events, second Value) (Conversion, error) {
	if _, err := ParseCorrection(c.String()); err != nil {
		return Conversion{}, err
	}
	if c == NoCorrection {
		return Conversion{}, uncorrected(events)
	}
	to := "events"
	if second.Name == "total" {
		to = "events and to non-events"
	}
	return Conversion{
		What: "zero-cell correction half, added to " + to,
		From: []Value{events, second}, To: []Value{{"added", 0.5}}, Source: "Cochrane Handbook 10.4.4.2", Added: true,
	}, nil
}
