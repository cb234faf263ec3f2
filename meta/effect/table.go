package effect

import (
	"math"
	"slices"
)

// Table is a 2×2 table: people with the event and people in all, in the
// treated arm (1) and in the control arm (2).
type Table struct{ Events1, Total1, Events2, Total2 float64 }

// largestCount is the largest count taken: up to it products of two counts
// keep fifteen digits and sums of counts are exact.
const largestCount = 1e15

// Check returns an *InputError unless every count is a finite whole number,
// 0 ≤ events ≤ total and total > 0.
func (t Table) Check() error {
	for _, v := range t.values() {
		if err := checkCount(v.Name, v.Value); err != nil {
			return err
		}
	}
	return t.checkArms()
}

// Whole reports whether every count is a whole number.
func (t Table) Whole() bool {
	return !slices.ContainsFunc(t.values(), func(v Value) bool { return v.Value != math.Trunc(v.Value) })
}

// checkArms returns an *InputError unless 0 < total and events ≤ total.
func (t Table) checkArms() error {
	if err := checkEvents("treated", t.Events1, t.Total1); err != nil {
		return err
	}
	return checkEvents("control", t.Events2, t.Total2)
}

// checkCount returns an *InputError unless x is a count of people or events.
func checkCount(what string, x float64) error {
	if err := checkAmount(what, x); err != nil {
		return err
	}
	if x != math.Trunc(x) {
		return &InputError{What: what, Value: x, Why: "is not a whole number", Do: "enter a count of people, not a percentage or a rate"}
	}
	return nil
}

// checkAmount returns an *InputError unless 0 ≤ x ≤ largestCount.
func checkAmount(what string, x float64) error {
	switch {
	case !finite(x):
		return checkFinite(what, x)
	case x < 0:
		return &InputError{What: what, Value: x, Why: "is below 0", Do: "enter a count of people"}
	case x > largestCount:
		return &InputError{What: what, Value: x, Why: "is too large for a count of people", Do: "enter the count as the report prints it"}
	}
	return nil
}

// checkEvents names the numbers after the arm, or after none if arm is blank.
func checkEvents(arm string, events, total float64) error {
	if total == 0 {
		return &InputError{What: named("total", arm), Value: total, Why: "is 0", Do: "enter how many people were in the arm"}
	}
	if events > total {
		return &InputError{What: named("events", arm), Value: events, Why: "is more than " + named("total", arm),
			Do: "check both; the total counts everybody in the arm, with the event or without"}
	}
	return nil
}

// named is the name of a number of an arm, or of the only arm if arm is blank.
func named(what, arm string) string {
	if arm == "" {
		return what
	}
	return what + " " + arm
}

func (t Table) values() []Value {
	return []Value{{"events treated", t.Events1}, {"total treated", t.Total1}, {"events control", t.Events2}, {"total control", t.Total2}}
}

// cells are events and non-events of the treated (a, b) and of the control arm
// (c, d), with what a correction added.
type cells struct{ a, b, c, d float64 }

func (t Table) cells() cells {
	return cells{a: t.Events1, b: t.Total1 - t.Events1, c: t.Events2, d: t.Total2 - t.Events2}
}

func (x cells) values() []Value {
	return []Value{{"events treated", x.a}, {"total treated", x.a + x.b}, {"events control", x.c}, {"total control", x.c + x.d}}
}

// bothEmpty reports no event in either arm; bothFull nothing but events.
func (t Table) bothEmpty() bool { return t.Events1 == 0 && t.Events2 == 0 }
func (t Table) bothFull() bool  { return t.Events1 == t.Total1 && t.Events2 == t.Total2 }

// FromTable returns the log odds ratio, the log risk ratio, the risk difference
// or the arcsine difference of a table, treated against control, with its
// standard error. With cells a, b of the treated arm (events, non-events) and c, d of the control arm:
//
//	log odds ratio   ln(ad/bc)              variance 1/a + 1/b + 1/c + 1/d
//	log risk ratio   ln(a/n₁) − ln(c/n₂)    variance b/(a n₁) + d/(c n₂)
//	risk difference  a/n₁ − c/n₂            variance ab/n₁³ + cd/n₂³
//	arcsine          asin√(a/n₁) − asin√(c/n₂)  variance 1/(4n₁) + 1/(4n₂)
//
// The correction c is used only where the estimate or its variance would
// otherwise be undefined or 0, and is always recorded:
//
//   - odds ratio: any of the four cells is 0;
//   - risk ratio: an arm has no events;
//   - risk difference: each arm has either no events or nothing but events (so
//     that the variance is 0); the estimate stays that of the raw counts and
//     only the variance is taken from the corrected ones;
//   - arcsine difference: never.
//
// Errors: a *MeasureError for another measure; an *InputError for a table that
// fails Check, or one that needs a correction when c is NoCorrection;
// ErrNothingToCompare for a ratio if neither arm has an event, or if everybody in
// both arms has one: a risk ratio of 1 would then have a standard error made of
// the correction alone, and the more people, the smaller.
//
// Source: Cochrane Handbook 6.4.1, 10.4.4.2; Deeks, Altman & Bradburn (2001),
// in Systematic Reviews in Health Care, chapter 15; Rücker, Schwarzer, Carpenter
// & Olkin (2009), Statistics in Medicine 28:721-738 (arcsine).
func FromTable(m Measure, t Table, c Correction) (Estimate, []Conversion, error) {
	if err := m.checkTable(); err != nil {
		return Estimate{}, nil, err
	}
	if err := t.Check(); err != nil {
		return Estimate{}, nil, err
	}
	return fromTable(m, t, c)
}

// checkTable returns a *MeasureError for a measure that no 2×2 table informs.
func (m Measure) checkTable() error {
	valid := []Measure{OddsRatio, RiskRatio, RiskDifference, ArcsineDifference}
	if slices.Contains(valid, m) {
		return nil
	}
	return &MeasureError{Measure: m, From: "a 2×2 table", Valid: valid}
}

// fromTable is FromTable for a measure and a table that were checked.
func fromTable(m Measure, t Table, c Correction) (Estimate, []Conversion, error) {
	if m.Log() && (t.bothEmpty() || t.bothFull()) {
		return Estimate{}, nil, ErrNothingToCompare
	}
	steps := make([]Conversion, 0, 2)
	used := t.cells()
	if culprit, needed := needsCorrection(m, t); needed {
		if c == NoCorrection {
			return Estimate{}, nil, uncorrected(culprit)
		}
		corrected, step, err := c.apply(t)
		if err != nil {
			return Estimate{}, nil, err
		}
		used, steps = corrected, append(steps, step)
	}
	e := used.estimate(m)
	if m == RiskDifference {
		e.Y = t.cells().estimate(m).Y
	}
	source := "Cochrane Handbook 6.4.1"
	if m == ArcsineDifference {
		source = "Rücker et al. 2009"
	}
	steps = append(steps, Conversion{
		What: m.scaled() + " and its standard error from a 2×2 table",
		From: used.values(), To: e.values(), Source: source,
	})
	return checked(e, steps)
}

// needsCorrection returns the number that leaves the estimate or its variance
// undefined or 0 for the raw counts, if one does; FromTable says when.
func needsCorrection(m Measure, t Table) (culprit Value, needed bool) {
	x := t.cells()
	treated, control := Value{"events treated", x.a}, Value{"events control", x.c}
	treatedEnd, controlEnd := x.a == 0 || x.b == 0, x.c == 0 || x.d == 0
	switch m {
	case OddsRatio:
		if treatedEnd {
			return treated, true
		}
		return control, controlEnd
	case RiskRatio:
		if x.a == 0 {
			return treated, true
		}
		return control, x.c == 0
	case ArcsineDifference:
		return Value{}, false
	}
	return treated, treatedEnd && controlEnd
}

func (x cells) estimate(m Measure) Estimate {
	a, b, c, d := x.a, x.b, x.c, x.d
	n1, n2 := a+b, c+d
	switch m {
	case OddsRatio:
		return Estimate{Y: logQuotient(a*d, b*c), SE: math.Sqrt(1/a + 1/b + 1/c + 1/d)}
	case RiskRatio:
		return Estimate{Y: logQuotient(a*n2, c*n1), SE: math.Sqrt(b/(a*n1) + d/(c*n2))}
	case ArcsineDifference:
		// The difference of two angles as one angle, so that it keeps its digits.
		ad, bc := math.Sqrt(a)*math.Sqrt(d), math.Sqrt(b)*math.Sqrt(c)
		rise := 0.0
		if a*d != b*c {
			rise = (a*d - b*c) / (ad + bc)
		}
		return Estimate{Y: math.Atan2(rise, math.Sqrt(a)*math.Sqrt(c)+math.Sqrt(b)*math.Sqrt(d)), SE: math.Sqrt(1/n1+1/n2) / 2}
	}
	return Estimate{Y: (a*n2 - c*n1) / (n1 * n2), SE: math.Sqrt(a/n1*(b/n1)/n1 + c/n2*(d/n2)/n2)}
}

// logQuotient returns ln(x/y) for x, y > 0, exact to the last digits where the
// quotient is near 1 too.
func logQuotient(x, y float64) float64 {
	if x > y/2 && x < 2*y {
		return math.Log1p((x - y) / y)
	}
	return math.Log(x) - math.Log(y)
}

func (e Estimate) values() []Value { return []Value{{"estimate", e.Y}, {"se", e.SE}} }
