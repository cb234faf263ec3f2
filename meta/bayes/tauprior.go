package bayes

import (
	"fmt"
	"math"
	"math/rand/v2"

	"steelyard/meta/choice"
)

// TauPriorKind is a family of prior distributions for the spread τ.
type TauPriorKind int

// The families. Uniform is flat over all τ ≥ 0.
const (
	Uniform TauPriorKind = iota
	HalfNormal
	HalfCauchy
	LogNormal
)

var tauPriorNames = choice.Of[TauPriorKind]("prior for τ", "uniform", "half-normal", "half-cauchy", "log-normal")

// String returns the family's name, such as "half-normal".
func (k TauPriorKind) String() string { return tauPriorNames.String(k) }

// TauPriorNames returns the names of all families.
func TauPriorNames() []string { return tauPriorNames.All() }

// ParseTauPrior returns the family that text names.
func ParseTauPrior(text string) (TauPriorKind, error) { return tauPriorNames.Parse(text) }

// MarshalText writes the name of the family.
func (k TauPriorKind) MarshalText() ([]byte, error) { return []byte(k.String()), nil }

// UnmarshalText reads the name of a family.
func (k *TauPriorKind) UnmarshalText(text []byte) (err error) {
	*k, err = ParseTauPrior(string(text))
	return err
}

// TauPrior is a prior distribution for τ. Scale, in the unit of the estimates,
// belongs to the half-normal and the half-Cauchy; MeanLog and SDLog, of ln τ, to
// the log-normal. A half-normal scale of 0.5 suits log ratios and standardised
// differences. Published log-normal priors are for τ²: half their mean and standard
// deviation are those of ln τ. The empirical priors of Turner et al. (2012) and of
// Rhodes et al. (2015) have no names here, as their tables were not at hand to copy.
//
// Source: Röver et al. (2021), Research Synthesis Methods 12:448-474.
type TauPrior struct {
	Kind           TauPriorKind
	Scale          float64
	MeanLog, SDLog float64
}

// widestLogNormal is the largest SDLog taken; more would say that τ is unknown to
// within powers of ten by the score.
const widestLogNormal = 10.0

// Check returns a *PriorError unless the family is known, the Scale finite and
// above 0, MeanLog finite, and SDLog above 0 and at most 10.
func (p TauPrior) Check() error {
	switch p.Kind {
	case Uniform:
		return nil
	case HalfNormal, HalfCauchy:
		if !(p.Scale > 0) || math.IsInf(p.Scale, 1) {
			return &PriorError{fmt.Sprintf("scale %v of the %v prior for τ is not a finite number above 0: give one in the unit of the estimates, such as 0.5", p.Scale, p.Kind)}
		}
		return nil
	case LogNormal:
		if !(p.SDLog > 0 && p.SDLog <= widestLogNormal) || math.IsNaN(p.MeanLog) || math.IsInf(p.MeanLog, 0) {
			return &PriorError{fmt.Sprintf("mean %v and standard deviation %v of ln τ are not a finite number and one above 0 and at most %v: correct them",
				p.MeanLog, p.SDLog, widestLogNormal)}
		}
		return nil
	}
	return &PriorError{fmt.Sprintf("%v is unknown: use one of %v", p.Kind, TauPriorNames())}
}

// Exceeded reports whether an estimate of τ lies where the prior puts little: at
// more than twice its scale, for the log-normal two standard deviations of ln τ
// above the mean. The evidence then rests on the prior, which should be doubted.
// A uniform prior is never exceeded.
func (p TauPrior) Exceeded(tau float64) bool {
	switch p.Kind {
	case HalfNormal, HalfCauchy:
		return tau > 2*p.Scale
	case LogNormal:
		return tau > 0 && math.Log(tau) > p.MeanLog+2*p.SDLog
	}
	return false
}

// in returns the prior with τ counted in another unit.
func (p TauPrior) in(unit float64) TauPrior {
	p.Scale /= unit
	p.MeanLog -= math.Log(unit)
	return p
}

// lnDensity returns ln p(τ) at x = ln τ; 0 for the uniform.
func (p TauPrior) lnDensity(x float64) float64 {
	switch p.Kind {
	case HalfNormal:
		r := math.Exp(x) / p.Scale
		return 0.5*math.Log(2/math.Pi) - math.Log(p.Scale) - 0.5*r*r
	case HalfCauchy:
		r := math.Exp(x) / p.Scale
		return math.Log(2/math.Pi) - math.Log(p.Scale) - 2*math.Log(math.Hypot(1, r))
	case LogNormal:
		r := (x - p.MeanLog) / p.SDLog
		return -0.5*math.Log(2*math.Pi) - math.Log(p.SDLog) - 0.5*r*r - x
	}
	return 0
}

// centre returns ln τ where the prior turns, and whether it does.
func (p TauPrior) centre() (float64, bool) {
	switch p.Kind {
	case HalfNormal, HalfCauchy:
		return math.Log(p.Scale), true
	case LogNormal:
		return p.MeanLog, true
	}
	return 0, false
}

// farthest bounds draws from a prior, in scales or standard deviations of ln τ:
// beyond lies less than a millionth part.
const (
	farthestCauchy    = 1e6
	farthestLogNormal = 8
)

// draw returns a τ drawn from a proper prior.
func (p TauPrior) draw(random *rand.Rand) float64 {
	switch p.Kind {
	case HalfNormal:
		return p.Scale * math.Abs(random.NormFloat64())
	case HalfCauchy:
		return p.Scale * min(farthestCauchy, math.Tan(0.5*math.Pi*random.Float64()))
	}
	z := max(-farthestLogNormal, min(farthestLogNormal, random.NormFloat64()))
	return math.Exp(p.MeanLog + p.SDLog*z)
}
