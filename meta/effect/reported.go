package effect

import (
	"fmt"
	"math"

	"steelyard/meta/numeric"
)

// ToReader returns an effect y of the analysis scale as a reader sees it: its
// exponential for a ratio (+Inf or 0 where that leaves the range of numbers),
// y itself otherwise.
func ToReader(m Measure, y float64) float64 {
	if m.Log() {
		return math.Exp(y)
	}
	return y
}

// FromReader returns an effect x in the reader's unit on the analysis scale:
// its natural logarithm for a ratio, x itself otherwise. It returns an
// *InputError if x is not finite, or not above 0 for a ratio.
func FromReader(m Measure, x float64) (float64, error) { return fromReader(m, "estimate", x) }

func fromReader(m Measure, what string, x float64) (float64, error) {
	if !m.Log() {
		return x, checkFinite(what, x)
	}
	if err := checkPositive(what, x, "a "+m.String()+" is above 0; enter the ratio itself, not its logarithm"); err != nil {
		return 0, err
	}
	return math.Log(x), nil
}

// FromSE returns the estimate and standard error of a study that reports both.
// estimate is in the reader's unit (the ratio itself for a ratio, whose
// logarithm is taken and recorded); se is on the analysis scale, so it is the
// standard error of the logarithm for a ratio. It returns an *InputError unless
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
	return checked(Estimate{Y: y, SE: se}, logStep(m, Value{"estimate", estimate}))
}

func checkSE(se float64) error {
	return checkPositive("se", se, "enter the standard error, on the log scale for a ratio")
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
	z := numeric.NormalCritical(1 - level)
	width := scaled[2] - scaled[1]
	if m.Log() {
		width = logQuotient(high, low)
	}
	e := Estimate{Y: scaled[0], SE: width / (2 * z)}
	step := Conversion{
		What: fmt.Sprintf("standard error from a %v%% interval", math.Round(level*1e8)/1e6),
		From: append(given[1:], Value{"ci level", level}),
		To:   []Value{{"se", e.SE}}, Source: "Cochrane Handbook 6.3.1",
	}
	if m.Log() {
		step.What += " on the log scale"
		step.Source = "Cochrane Handbook 6.3.2"
	}
	return checked(e, append(logStep(m, Value{"estimate", estimate}), step))
}

func checkLimits(estimate, low, high, level float64) error {
	switch {
	case !(level > 0 && level < 1):
		return &InputError{What: "ci level", Value: level, Why: "is not between 0 and 1", Do: "give it as a share, such as 0.95 for 95%"}
	case low >= high:
		return &InputError{What: "ci low", Value: low, Why: fmt.Sprintf("is not below ci high (%v)", high), Do: "check whether the limits are exchanged"}
	case estimate < low || estimate > high:
		return &InputError{What: "estimate", Value: estimate, Why: fmt.Sprintf("lies outside its own interval (%v to %v)", low, high),
			Do: "check the estimate and both limits, and that all three are on the same scale"}
	}
	return nil
}

// logStep records that a ratio's logarithm was taken; it is empty for others.
func logStep(m Measure, v Value) []Conversion {
	if !m.Log() {
		return nil
	}
	return []Conversion{{
		What: "natural logarithm of the " + m.String(), From: []Value{v},
		To: []Value{{"estimate", math.Log(v.Value)}}, Source: "Cochrane Handbook 6.3.2",
	}}
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
