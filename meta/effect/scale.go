package effect

import "math"

// scale is the pair of functions between a measure as a reader sees it and as
// it is analysed.
type scale struct {
	name   string                  // of the way there, such as "natural logarithm"
	source string                  // of that
	to     func(y float64) float64 // to the reader
	from   func(x float64) float64 // from the reader
	check  func(what string, x float64) error
}

// The scales other than the linear one, which has none.
var (
	ratioScale = &scale{
		name: "natural logarithm", source: "Cochrane Handbook 6.3.2", to: math.Exp, from: math.Log,
	}
	fisherScale = &scale{
		name: "Fisher's z", source: "Fisher 1921", to: math.Tanh, from: math.Atanh,
		check: func(what string, x float64) error {
			return checkBetween(what, x, -1, 1, "a correlation lies between -1 and 1; enter the coefficient itself, not Fisher's z")
		},
	}
	logitScale = &scale{
		name: "logit", source: "Berkson 1944", to: shareOfLogit, from: logit,
		check: func(what string, x float64) error { return checkBetween(what, x, 0, 1, enterShare) },
	}
	arcsineScale = &scale{
		name: "arcsine of the square root", source: "Freeman & Tukey 1950", to: shareOfArcsine, from: arcsine,
		check: func(what string, x float64) error {
			if x == 0 || x == 1 {
				return nil
			}
			return checkBetween(what, x, 0, 1, enterShare)
		},
	}
)

const enterShare = "enter the proportion as a share, such as 0.125, not a percentage"

// scale returns the measure's scale, nil for a measure analysed as it is.
func (m Measure) scale() *scale {
	switch m {
	case Correlation:
		return fisherScale
	case Proportion:
		return logitScale
	case ArcsineProportion, DoubleArcsineProportion:
		return arcsineScale
	}
	if m.Log() {
		return ratioScale
	}
	return nil
}

// ToReader returns an effect y of the analysis scale as a reader sees it: its
// exponential for a ratio or a rate (+Inf or 0 where that leaves the range of
// numbers), the correlation of a Fisher's z, the proportion of a logit or of an
// arcsine (0 and 1 beyond the arcsine's ends), and y itself otherwise.
func ToReader(m Measure, y float64) float64 {
	if s := m.scale(); s != nil {
		return s.to(y)
	}
	return y
}

// FromReader returns an effect x in the reader's unit on the analysis scale:
// its natural logarithm for a ratio or a rate, Fisher's z of a correlation, the
// logit of a proportion or the arcsine of its square root, x itself otherwise.
// It returns an *InputError if x is not finite, not above 0 for a ratio or a
// rate, not between -1 and 1 for a correlation, or not between 0 and 1 for a
// proportion (both ends included for the arcsine).
func FromReader(m Measure, x float64) (float64, error) { return fromReader(m, "estimate", x) }

func fromReader(m Measure, what string, x float64) (float64, error) {
	s := m.scale()
	switch {
	case s == nil:
		return x, checkFinite(what, x)
	case s == ratioScale:
		if err := checkPositive(what, x, m.aboveZero()); err != nil {
			return 0, err
		}
	default:
		if err := s.check(what, x); err != nil {
			return 0, err
		}
	}
	return s.from(x), nil
}

func (m Measure) aboveZero() string {
	if m == Rate {
		return "a rate is above 0; enter the rate itself, not its logarithm"
	}
	return m.WithArticle() + " is above 0; enter the ratio itself, not its logarithm"
}

// scaled names a measure on its analysis scale.
func (m Measure) scaled() string {
	switch {
	case m.Log():
		return "log " + m.String()
	case m == Correlation:
		return "Fisher's z"
	case m == Proportion:
		return "logit proportion"
	}
	return m.String()
}

// scaleStep records that an estimate was put on the analysis scale; it is empty
// for a measure analysed as it is.
func scaleStep(m Measure, v Value) []Conversion {
	s := m.scale()
	if s == nil {
		return nil
	}
	return []Conversion{{
		What: s.name + " of the " + m.String(), From: []Value{v},
		To: []Value{{"estimate", s.from(v.Value)}}, Source: s.source,
	}}
}

// measuresWithNull returns the measures of which "no effect" has a value.
func measuresWithNull() []Measure {
	var all []Measure
	for i := range MeasureNames() {
		if m := Measure(i); m != Unspecified && m.HasNull() {
			all = append(all, m)
		}
	}
	return all
}

// checkBetween returns an *InputError unless low < x < high.
func checkBetween(what string, x, low, high float64, do string) error {
	if err := checkFinite(what, x); err != nil {
		return err
	}
	if x > low && x < high {
		return nil
	}
	why := "is not between 0 and 1"
	if low < 0 {
		why = "is not between -1 and 1"
	}
	return &InputError{What: what, Value: x, Why: why, Do: do}
}

// logit returns ln(p/(1-p)).
func logit(p float64) float64 { return math.Log(p) - math.Log1p(-p) }

// shareOfLogit returns the proportion whose logit is y.
func shareOfLogit(y float64) float64 {
	if y < 0 {
		e := math.Exp(y)
		return e / (1 + e)
	}
	return 1 / (1 + math.Exp(-y))
}

// arcsine returns the arcsine of √p, exact near both ends.
func arcsine(p float64) float64 { return math.Atan2(math.Sqrt(p), math.Sqrt(1-p)) }

// shareOfArcsine returns sin²y for 0 ≤ y ≤ π/2, and the nearer end beyond.
func shareOfArcsine(y float64) float64 {
	switch {
	case y <= 0:
		return 0
	case y >= math.Pi/2:
		return 1
	}
	s := math.Sin(y)
	return s * s
}
