package effect

import (
	"math"

	"steelyard/meta/choice"
)

// ResultType says whether the means of an outcome are those at the end or those
// of the change from baseline.
type ResultType int

// The result types. The two may be pooled together as mean differences, not as
// standardised ones, whose standard deviations would differ in kind.
const (
	ResultTypeUnknown ResultType = iota
	Change
	Final
)

var resultTypeNames = choice.Of[ResultType]("result type", "", "change", "final").
	With(map[string]ResultType{
		"change from baseline": Change, "change score": Change, "change scores": Change,
		"final value": Final, "final values": Final, "endpoint": Final, "end point": Final, "post": Final,
	})

// String returns the type's name, blank if it is unknown.
func (r ResultType) String() string { return resultTypeNames.String(r) }

// ResultTypeNames returns the names of the result types.
func ResultTypeNames() []string { return resultTypeNames.All() }

// ParseResultType returns the result type that text names.
func ParseResultType(text string) (ResultType, error) { return resultTypeNames.Parse(text) }

// MarshalText writes the type's name.
func (r ResultType) MarshalText() ([]byte, error) { return []byte(r.String()), nil }

// UnmarshalText reads a type's name; a blank is ResultTypeUnknown.
func (r *ResultType) UnmarshalText(text []byte) (err error) {
	if len(text) == 0 {
		*r = ResultTypeUnknown
		return nil
	}
	*r, err = ParseResultType(string(text))
	return err
}

// sdOfDifference returns √(a² + b² − 2rab).
func sdOfDifference(a, b, r float64) float64 {
	return math.Hypot(a-b, math.Sqrt(2*(1-r))*math.Sqrt(a)*math.Sqrt(b))
}

// ChangeSD returns the standard deviation of the change from baseline from those
// at baseline and at the end and their correlation r, which is taken from
// another study or a range of assumptions: √(SDb² + SDf² − 2r·SDb·SDf). It
// returns an *InputError unless both are finite and above 0, -1 ≤ r ≤ 1 and the
// result is above 0.
//
// Source: Cochrane Handbook 6.5.2.8.
func ChangeSD(baseline, final, r float64) (float64, Conversion, error) {
	from := []Value{{"baseline sd", baseline}, {"sd", final}, {"correlation", r}}
	sd, err := differenceSD(from)
	if err != nil {
		return 0, Conversion{}, err
	}
	return sd, Conversion{
		What: "standard deviation of the change from baseline with a stated correlation",
		From: from, To: []Value{{"sd of change", sd}}, Source: "Cochrane Handbook 6.5.2.8",
	}, nil
}

// differenceSD checks two standard deviations and their correlation and returns
// that of the difference.
func differenceSD(from []Value) (float64, error) {
	for _, v := range from[:2] {
		if err := checkPositive(v.Name, v.Value, enterSD); err != nil {
			return 0, err
		}
	}
	if err := checkCorrelation(from[2].Name, from[2].Value); err != nil {
		return 0, err
	}
	sd := sdOfDifference(from[0].Value, from[1].Value, from[2].Value)
	return sd, checkPositive("sd of the difference", sd, "check both standard deviations and the correlation")
}

// ImpliedCorrelation returns the correlation between two measurements of the
// same people that their standard deviations and that of their difference imply,
// r = (SDb² + SDf² − SDc²) / (2·SDb·SDf). It returns an *InputError unless all
// three are finite and above 0, and for a correlation outside -1 to 1, which
// means that one of the three is wrong.
//
// Source: Cochrane Handbook 6.5.2.8.
func ImpliedCorrelation(baseline, final, change float64) (float64, Conversion, error) {
	from := []Value{{"baseline sd", baseline}, {"sd", final}, {"sd of change", change}}
	for _, v := range from {
		if err := checkPositive(v.Name, v.Value, enterSD); err != nil {
			return 0, Conversion{}, err
		}
	}
	r := ((baseline/final + final/baseline) - change/baseline*(change/final)) / 2
	if size := math.Abs(r); size > 1 && size <= 1+1e-9 { // rounding alone
		r = math.Copysign(1, r)
	}
	if !(math.Abs(r) <= 1) {
		return 0, Conversion{}, &InputError{What: "correlation", Value: r,
			Why: "implied by the three standard deviations is not between -1 and 1",
			Do:  "check them; one may be a standard error, or of another group"}
	}
	return r, Conversion{
		What: "correlation implied by three standard deviations", From: from,
		To: []Value{{"correlation", r}}, Source: "Cochrane Handbook 6.5.2.8",
	}, nil
}

// ChangeArm returns an arm's change from baseline from its measurements at the
// end and at baseline and their correlation r: the difference in means, with the
// standard deviation of ChangeSD. FromArms then compares two such arms. It
// returns an *InputError for a final arm that fails Check, for a baseline mean
// that is not finite, and as ChangeSD does.
//
// Source: Cochrane Handbook 6.5.2.8.
func ChangeArm(final Arm, baselineMean, baselineSD, r float64) (Arm, Conversion, error) {
	if err := final.Check(); err != nil {
		return Arm{}, Conversion{}, err
	}
	if err := checkFinite("baseline mean", baselineMean); err != nil {
		return Arm{}, Conversion{}, err
	}
	sd, _, err := ChangeSD(baselineSD, final.SD, r)
	if err != nil {
		return Arm{}, Conversion{}, err
	}
	out := Arm{Mean: final.Mean - baselineMean, SD: sd, N: final.N}
	if err := checkFinite("mean of change", out.Mean); err != nil {
		return Arm{}, Conversion{}, err
	}
	return out, Conversion{
		What: "change from baseline with a stated correlation",
		From: []Value{{"mean", final.Mean}, {"sd", final.SD}, {"baseline mean", baselineMean}, {"baseline sd", baselineSD}, {"correlation", r}},
		To:   []Value{{"mean of change", out.Mean}, {"sd of change", sd}}, Source: "Cochrane Handbook 6.5.2.8",
	}, nil
}
