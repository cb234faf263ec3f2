package effect

import (
	"fmt"
	"math"

	"steelyard/meta/numeric"
)

// FromSE returns the estimate and standard error of a study that reports both.
// estimate is in the reader's unit (the ratio itself for a ratio, whose
// logarithm is taken and recorded); se is on the analysis scale, so it is the
// standard error of the logarithm for a ratio, of Fisher's z for a correlation. It returns an *InputError unless
// estimate suits the measure and se is finite and above 0.
//
// Source: Cochrane Handbook 6.3.
func FromSE(m Measure, estimate, se float64) (Estimate, []Conversion, error) {
	y, err := fromReader(m, "estimate", estimate)
	if err != nil {
		return Estimate{}, nil, err
	}
	if err := checkSE(se); err != nil {
		return Estimate{}, nil, err
	}
	return checked(Estimate{Y: y, SE: se}, scaleStep(m, Value{"estimate", estimate}))
}

func checkSE(se float64) error {
	return checkPositive("se", se, "enter the standard error, on the analysis scale (of the logarithm for a ratio)")
}

// FromLimits returns the estimate of a study with its standard error from the
// limits of its interval, on the analysis scale g (the logarithm for a ratio):
//
//	se = (g(high) − g(low)) / (2z),  z the two-sided normal quantile of level
//
// estimate, low and high are in the reader's unit; level is a share, such as
// 0.95. It returns an *InputError naming the number that does not suit the
// measure, that breaks low ≤ estimate ≤ high or low < high, or a level not
// between 0 and 1.
//
// Source: Cochrane Handbook 6.3.1, 6.3.2.
func FromLimits(m Measure, estimate, low, high, level float64) (Estimate, []Conversion, error) {
	return FromStudentLimits(m, estimate, low, high, level, math.Inf(1))
}

// FromStudentLimits is FromLimits for an interval made with Student's t on df
// degrees of freedom (n₁ + n₂ − 2 for two means) in place of the normal law,
// which matters in small samples. df = +Inf is the normal law. It returns an
// *InputError as FromLimits does, or unless df > 0.
//
// Source: Cochrane Handbook 6.5.2.3.
func FromStudentLimits(m Measure, estimate, low, high, level, df float64) (Estimate, []Conversion, error) {
	given := []Value{{"estimate", estimate}, {"ci low", low}, {"ci high", high}}
	var scaled [3]float64
	for i, v := range given {
		g, err := fromReader(m, v.Name, v.Value)
		if err != nil {
			return Estimate{}, nil, err
		}
		scaled[i] = g
	}
	if err := checkLimits(estimate, low, high, level); err != nil {
		return Estimate{}, nil, err
	}
	if err := checkFreedom(df); err != nil {
		return Estimate{}, nil, err
	}
	width := scaled[2] - scaled[1]
	if m.Log() {
		width = logQuotient(high, low)
	}
	e := Estimate{Y: scaled[0], SE: width / (2 * numeric.StudentCritical(1-level, df))}
	step := Conversion{
		What: fmt.Sprintf("standard error from a %v%% interval", math.Round(level*1e8)/1e6),
		From: append(given[1:], Value{"ci level", level}),
		To:   []Value{{"se", e.SE}}, Source: "Cochrane Handbook 6.3.1",
	}
	switch {
	case m.Log():
		step.What += " on the log scale"
		step.Source = "Cochrane Handbook 6.3.2"
	case m.scale() != nil:
		step.What += " on the analysis scale"
	}
	if !math.IsInf(df, 1) {
		step.What += " by Student's t"
		step.From = append(step.From, Value{"degrees of freedom", df})
		step.Source = "Cochrane Handbook 6.5.2.3"
	}
	return checked(e, append(scaleStep(m, Value{"estimate", estimate}), step))
}

func checkLimits(estimate, low, high, level float64) error {
	if err := checkInterval(low, high, level); err != nil {
		return err
	}
	if estimate < low || estimate > high {
		return &InputError{What: "estimate", Value: estimate, Why: fmt.Sprintf("lies outside its own interval (%v to %v)", low, high),
			Do: "check the estimate and both limits, and that all three are on the same scale"}
	}
	return nil
}

func checkInterval(low, high, level float64) error {
	switch {
	case !(level > 0 && level < 1):
		return &InputError{What: "ci level", Value: level, Why: "is not between 0 and 1", Do: "give it as a share, such as 0.95 for 95%"}
	case low >= high:
		return &InputError{What: "ci low", Value: low, Why: fmt.Sprintf("is not below ci high (%v)", high), Do: "check whether the limits are exchanged"}
	}
	return nil
}

// SDFromSE returns the standard deviation of one arm from the standard error
// of its mean and the number of people n, in the unit of the outcome:
// SD = se·√n. It returns an *InputError unless se is finite and above 0 and n
// finite and at least 2.
//
// Source: Cochrane Handbook 6.5.2.2.
func SDFromSE(se, n float64) (float64, Conversion, error) {
	if err := checkPositive("se", se, "enter the standard error of the mean"); err != nil {
		return 0, Conversion{}, err
	}
	if err := checkPeople("total", n); err != nil {
		return 0, Conversion{}, err
	}
	sd := se * math.Sqrt(n)
	if err := checkFinite("sd", sd); err != nil {
		return 0, Conversion{}, err
	}
	return sd, Conversion{
		What: "standard deviation from the standard error of a mean",
		From: []Value{{"se", se}, {"total", n}}, To: []Value{{"sd", sd}}, Source: "Cochrane Handbook 6.5.2.2",
	}, nil
}

// SDFromLimits returns the standard deviation of one arm from the interval of
// its mean and the number of people n, in the unit of the outcome:
//
//	SD = √n (high − low) / (2t),  t the two-sided quantile of level
//
// of Student's t on df degrees of freedom (n − 1 for one mean; +Inf for the
// normal). level is a share, such as 0.95. It returns an *InputError unless
// low < high are finite, 0 < level < 1, n is finite and at least 2 and df > 0.
//
// Source: Cochrane Handbook 6.5.2.2.
func SDFromLimits(low, high, level, n, df float64) (float64, Conversion, error) {
	for _, v := range []Value{{"ci low", low}, {"ci high", high}} {
		if err := checkFinite(v.Name, v.Value); err != nil {
			return 0, Conversion{}, err
		}
	}
	if err := checkInterval(low, high, level); err != nil {
		return 0, Conversion{}, err
	}
	if err := checkPeople("total", n); err != nil {
		return 0, Conversion{}, err
	}
	if err := checkFreedom(df); err != nil {
		return 0, Conversion{}, err
	}
	sd := math.Sqrt(n) * ((high - low) / (2 * numeric.StudentCritical(1-level, df)))
	if err := checkPositive("sd", sd, "check the size and the unit of the limits"); err != nil {
		return 0, Conversion{}, err
	}
	return sd, Conversion{
		What: "standard deviation from the interval of a mean",
		From: []Value{{"ci low", low}, {"ci high", high}, {"ci level", level}, {"total", n}, {"degrees of freedom", df}},
		To:   []Value{{"sd", sd}}, Source: "Cochrane Handbook 6.5.2.2",
	}, nil
}
