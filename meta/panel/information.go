package panel

import (
	"fmt"
	"math"

	"steelyard/meta/numeric"
)

// Information is the size of one adequate trial with two equal arms: the optimal
// information size. Nothing is rounded.
type Information struct {
	PerArm float64
	Events float64 // expected in both arms; 0 for means
}

// Total is the number of people in both arms, whole in each.
func (i Information) Total() float64 { return 2 * math.Ceil(i.PerArm*(1-1e-12)) }

// RiskInformation returns the size that tells a risk p1 from p0 with a two-sided
// level and a power:
//
//	n per arm = (z₁+z₂)²·(p0(1−p0)+p1(1−p1))/(p0−p1)²
//
// It returns an *InputError for risks outside 0 to 1 or alike, or a level or power
// outside 0 to 1.
//
// Source: the usual formula of two proportions; as optimal information size Pogue &
// Yusuf (1997), GRADE guidelines 6 (2011).
func RiskInformation(p0, p1, level, power float64) (Information, error) {
	z, err := bothQuantiles(level, power)
	if err != nil {
		return Information{}, err
	}
	if !(p0 > 0 && p0 < 1 && p1 >= 0 && p1 <= 1) || p0 == p1 {
		return Information{}, &InputError{fmt.Sprintf("risks of %v and %v: they must differ and lie between 0 and 1", p0, p1)}
	}
	n := z * z * (p0*(1-p0) + p1*(1-p1)) / ((p0 - p1) * (p0 - p1))
	return Information{PerArm: n, Events: n * (p0 + p1)}, nil
}

// MeanInformation returns the size that tells a difference of delta standard
// deviations from none:
//
//	n per arm = 2(z₁+z₂)²/δ²
//
// It returns an *InputError for a delta of 0, or a level or power outside 0 to 1.
//
// Source: as RiskInformation.
func MeanInformation(delta, level, power float64) (Information, error) {
	z, err := bothQuantiles(level, power)
	if err != nil {
		return Information{}, err
	}
	if !(math.Abs(delta) > 0) || math.IsInf(delta, 0) {
		return Information{}, &InputError{fmt.Sprintf("a difference of %v standard deviations has no information size: give one that is not 0", delta)}
	}
	return Information{PerArm: 2 * z * z / (delta * delta)}, nil
}

// bothQuantiles returns the sum of the normal quantiles of a two-sided level, such as
// 0.05, and of a power, such as 0.8.
func bothQuantiles(level, power float64) (float64, error) {
	if !(level > 0 && level < 1 && power > 0 && power < 1) {
		return 0, &InputError{fmt.Sprintf("a level of %v with a power of %v: both lie between 0 and 1", level, power)}
	}
	// NormalCritical halves its level: a power of 0.8 leaves one tail of 0.2. Below
	// one half the quantile is negative.
	if power >= 0.5 {
		return numeric.NormalCritical(level) + numeric.NormalCritical(2*(1-power)), nil
	}
	return numeric.NormalCritical(level) - numeric.NormalCritical(2*power), nil
}
