package bayes

import (
	"errors"
	"fmt"
	"math"

	"steelyard/meta/choice"
	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
)

// EffectPriorKind is a family of prior distributions for the effect under H1.
type EffectPriorKind int

// The families.
const (
	NormalPrior EffectPriorKind = iota
	CauchyPrior
)

var effectPriorNames = choice.Of[EffectPriorKind]("prior for the effect", "normal", "cauchy")

// String returns "normal" or "cauchy".
func (k EffectPriorKind) String() string { return effectPriorNames.String(k) }

// EffectPriorNames returns the names of both families.
func EffectPriorNames() []string { return effectPriorNames.All() }

// ParseEffectPrior returns the family that text names.
func ParseEffectPrior(text string) (EffectPriorKind, error) { return effectPriorNames.Parse(text) }

// MarshalText writes the name of the family.
func (k EffectPriorKind) MarshalText() ([]byte, error) { return []byte(k.String()), nil }

// UnmarshalText reads the name of a family.
func (k *EffectPriorKind) UnmarshalText(text []byte) (err error) {
	*k, err = ParseEffectPrior(string(text))
	return err
}

// Side says on which side of the null a prior allows effects.
type Side int

// Both sides, or only effects above or below the null.
const (
	BothSides Side = iota
	AboveNull
	BelowNull
)

var sideNames = choice.Of[Side]("side of the null", "both", "above", "below")

// String returns "both", "above" or "below".
func (s Side) String() string { return sideNames.String(s) }

// SideNames returns the names of all sides.
func SideNames() []string { return sideNames.All() }

// ParseSide returns the side that text names.
func ParseSide(text string) (Side, error) { return sideNames.Parse(text) }

// MarshalText writes the name of the side.
func (s Side) MarshalText() ([]byte, error) { return []byte(s.String()), nil }

// UnmarshalText reads the name of a side.
func (s *Side) UnmarshalText(text []byte) (err error) {
	*s, err = ParseSide(string(text))
	return err
}

// EffectPrior is a prior distribution for the effect under H1, on the analysis
// scale: normal with mean null + Mean and standard deviation Scale, or Cauchy
// round the null with scale (half width at half height) Scale, where Mean must be
// 0. A Side other than both cuts it off at the null.
type EffectPrior struct {
	Kind        EffectPriorKind
	Mean, Scale float64
	Side        Side
}

// Check returns a *PriorError unless family and side are known, Mean is finite (0
// for the Cauchy) and Scale finite and above 0.
func (p EffectPrior) Check() error {
	switch {
	case p.Kind != NormalPrior && p.Kind != CauchyPrior:
		return &PriorError{fmt.Sprintf("%v is unknown: use one of %v", p.Kind, EffectPriorNames())}
	case p.Side < BothSides || p.Side > BelowNull:
		return &PriorError{fmt.Sprintf("%v is unknown: use one of %v", p.Side, SideNames())}
	case !(p.Scale > 0) || math.IsInf(p.Scale, 1):
		return &PriorError{fmt.Sprintf("scale %v of the prior for the effect is not a finite number above 0: give one on the analysis scale", p.Scale)}
	case math.IsNaN(p.Mean) || math.IsInf(p.Mean, 0):
		return &PriorError{fmt.Sprintf("mean %v of the prior for the effect is not a finite number: give its distance from the null on the analysis scale", p.Mean)}
	case p.Kind == CauchyPrior && p.Mean != 0:
		return &PriorError{fmt.Sprintf("mean %v of a cauchy prior is not 0: it is centred at the null; use a normal prior", p.Mean)}
	}
	return nil
}

// Observation is an estimate with a normal error, and the effect under H0, on the
// analysis scale.
type Observation struct{ Estimate, SE, Null float64 }

// Check returns an *ObservationError unless all three are finite and the standard
// error is above 0.
func (o Observation) Check() error {
	for _, x := range []float64{o.Estimate, o.SE, o.Null, o.Z()} {
		if math.IsNaN(x) || math.IsInf(x, 0) {
			return &ObservationError{fmt.Sprintf("estimate %v, standard error %v and null %v: all must be finite numbers, and not too far apart", o.Estimate, o.SE, o.Null)}
		}
	}
	if !(o.SE > 0) {
		return &ObservationError{fmt.Sprintf("the standard error is %v: it must be above 0", o.SE)}
	}
	return nil
}

// Z returns the distance of the estimate from the null in standard errors.
func (o Observation) Z() float64 { return (o.Estimate - o.Null) / o.SE }

// Matched returns the observation whose normal likelihood stands for an estimate
// with degrees of freedom: at the z that has the p-value of its t, so that its
// standard error is (estimate − null)/z. It returns the error of
// evidence.Location.Check.
func Matched(l evidence.Location, null float64) (Observation, error) {
	if err := l.Check(); err != nil {
		return Observation{}, err
	}
	o := Observation{Estimate: l.Estimate, SE: l.SE, Null: null}
	if math.IsInf(l.DF, 1) {
		return o, o.Check()
	}
	t := o.Z()
	if math.Abs(t) > 1e-6 {
		o.SE *= t / evidence.MatchedZ(t, l.DF)
	} else { // the limit of t/z
		o.SE *= math.Exp(numeric.LogStudentDensity(0, math.Inf(1)) - numeric.LogStudentDensity(0, l.DF))
	}
	return o, o.Check()
}

// Weigh returns the Bayes factor, as evidence for an effect, of an observation
// under a prior for the effect: its mean likelihood under the prior over that at
// the null. It returns an *ObservationError or a *PriorError for invalid input.
//
// For the normal prior, with z, m and g in standard errors from the null,
//
//	ln ER = −½ ln(1 + g²) + ½(z²g² + 2zm − m²)/(1 + g²)
//
// and with a side, plus ln of the probability of that side after the data less
// the same before. The Cauchy prior is integrated by quadrature. No prior exceeds
// evidence.Bound(o.Z()).
func (o Observation) Weigh(p EffectPrior) (evidence.Ratio, error) {
	if err := errors.Join(o.Check(), p.Check()); err != nil {
		return evidence.Ratio{}, err
	}
	z, m, g := o.Z(), p.Mean/o.SE, p.Scale/o.SE
	if math.IsInf(m, 0) || math.IsInf(g, 1) || g == 0 {
		return evidence.Ratio{}, &PriorError{"the prior and the standard error lie too far apart to be compared: check their units"}
	}
	if p.Side == BelowNull {
		z, m = -z, -m
	}
	var ln float64
	var err error
	switch {
	case p.Kind == NormalPrior && p.Side == BothSides:
		ln = lnNormalFactor(z, m, g)
	case p.Kind == NormalPrior:
		ln = lnHalfNormalFactor(z, m, g)
	case p.Side == BothSides:
		ln, err = lnCauchyFactor(z, g)
	default:
		ln, err = lnHalfCauchyFactor(z, g)
	}
	if err == nil && (math.IsNaN(ln) || math.IsInf(ln, 0)) {
		err = ErrOutOfRange
	}
	if err != nil {
		return evidence.Ratio{}, err
	}
	return evidence.FromLn(ln), nil
}

// Curve returns Weigh for a prior at each of several scales, in their order: how
// wider priors drift towards no effect.
func (o Observation) Curve(p EffectPrior, scales []float64) ([]evidence.Ratio, error) {
	curve := make([]evidence.Ratio, len(scales))
	for i, scale := range scales {
		p.Scale = scale
		var err error
		if curve[i], err = o.Weigh(p); err != nil {
			return nil, err
		}
	}
	return curve, nil
}

// lnNormalFactor returns the Bayes factor under N(m, g²), in standard errors.
func lnNormalFactor(z, m, g float64) float64 {
	h := math.Hypot(1, g)
	w, c := g/h, m/h
	return 0.5*z*w*(z*w) + c*(z/h) - 0.5*c*c - math.Log(h)
}

// lnHalfNormalFactor returns the Bayes factor under N(m, g²) above 0. The powers
// of e in the factor and in both tails cancel; ratios of tail to density stay.
func lnHalfNormalFactor(z, m, g float64) float64 {
	h := math.Hypot(1, g)
	after := z*(g/h) + m/g/h
	return numeric.LogMills(-after) - numeric.LogMills(-m/g) - math.Log(h)
}
