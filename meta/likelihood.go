package meta

import (
	"fmt"
	"math"

	"steelyard/meta/numeric"
)

// likelihoodKind says what is done with the mean in a likelihood of τ².
type likelihoodKind int

const (
	fullLikelihood       likelihoodKind = iota // the mean at its maximum
	restrictedLikelihood                       // the mean integrated out
	fixedMeanLikelihood                        // the mean held at a given value
)

// likelihood is a log-likelihood of τ² given the data, up to a constant.
type likelihood struct {
	data *sample
	kind likelihoodKind
	mean float64 // of fixedMeanLikelihood
}

// mode is a local maximum of a likelihood.
type mode struct{ tau2, logL float64 }

// Between two values of τ² whose ratio is at most crossingRatio, a change of sign
// of the slope is taken for one maximum; between two whose ratio is at most
// narrowRatio, a stretch of one sign is not divided further but looked through,
// which costs more than a few divisions.
var (
	crossingRatio = math.Exp(1. / 4)
	narrowRatio   = math.Exp(1. / 32)
)

// slope has the sign of the derivative in τ². It is the score divided by ½Σw
// (restricted: by ½(Σw − Σw²/Σw)), so that it is at least -1 and free of units.
func (l likelihood) slope(tau2 float64) float64 { return l.point(tau2).slope }

// straightSlope has the sign of the slope, and is a straight line in τ² where all
// studies are of equal precision.
func (l likelihood) straightSlope(tau2 float64) float64 {
	p := l.point(tau2)
	return 1 - p.weight/p.scatter
}

// slopeAt is the slope at one τ².
type slopeAt struct{ tau2, slope float64 }

// slopePoint is a slope with what it is made of: slope = scatter/weight − 1, both
// of which fall as τ² grows. For P = W − W11ᵀW/(1ᵀW1), scatter is |Py|² and weight
// tr P (restricted), and dP/dτ² = −P².
//
// The rates say how fast they fall: d ln scatter/dτ² = −2·scatterRate and
// d ln weight/dτ² = −weightRate. onlyMaximum rests on them.
type slopePoint struct {
	slopeAt
	scatter, weight         float64
	scatterRate, weightRate float64
}

func (l likelihood) point(tau2 float64) slopePoint {

	d := l.data
	if l.kind == fixedMeanLikelihood {
		return l.pointOf(d.about(l.mean, tau2))
	}
	return l.pointOf(d.at(tau2))
}

// pointOf returns the point of the moments whose weights stand in l.data.w.
func (l likelihood) pointOf(m moments) slopePoint {
	p := slopePoint{scatter: m.s, weight: m.w}
	c := l.data.cubes(m)
	switch l.kind {
	case fullLikelihood:
		p.weightRate, p.scatterRate = c.squares/m.w, c.projected/m.s
	case fixedMeanLikelihood:
		p.weightRate, p.scatterRate = c.squares/m.w, c.scatter/m.s
	case restrictedLikelihood:
		p.weight = m.c
		p.weightRate, p.scatterRate = c.trace/m.c, c.projected/m.s
	}
	p.slopeAt = slopeAt{m.tau2, p.scatter/p.weight - 1}
	return p
}

// value returns the log-likelihood without its constant.
func (l likelihood) value(tau2 float64) float64 {
	var m moments
	if l.kind == fixedMeanLikelihood {
		m = l.data.about(l.mean, tau2)
	} else {
		m = l.data.at(tau2)
	}
	var logs numeric.Sum
	for _, v := range l.data.v {
		logs.Add(math.Log(v + tau2))
	}
	logs.Add(m.q)
	if l.kind == restrictedLikelihood {
		logs.Add(math.Log(m.w))
	}
	return -0.5 * logs.Value()
}

// top returns a τ² from which on the likelihood falls: just over the square of the
// largest distance from the mean. There (wr)² < w for every study; the restricted
// score follows by |y − mean| ≤ spread·(1 − w/Σw).
func (l likelihood) top() float64 {
	reach := l.data.spread
	if l.kind == fixedMeanLikelihood {
		reach = 0
		for _, y := range l.data.y {
			reach = max(reach, math.Abs(y-l.mean))
		}
	}
	return 1.001 * reach * reach
}

// modes appends all local maxima in τ² ≥ 0 to into[:0], in ascending order,
// without their heights. Where a few points prove that there is one only, it is
// found by Newton's steps; else all are looked for. zero is the point at 0.
func (l likelihood) modes(into []mode, zero slopePoint) ([]mode, error) {
	into = into[:0]
	if tau2, ok := l.onlyMaximum(zero); ok {
		return append(into, mode{tau2: tau2}), nil
	}
	return l.scan(into, zero)
}

// scan appends all local maxima in ascending order, wherever they may lie.
func (l likelihood) scan(into []mode, zero slopePoint) ([]mode, error) {
	if !(zero.slope > 0) {
		into = append(into, mode{})
	}
	smallest, top := l.data.v[l.data.best], l.top()
	if top <= smallest {
		return into, nil // falling from 0 on
	}
	low := l.point(0.01 * smallest) // below it the slope is straight to 1 %
	var err error
	if zero.slope > 0 && low.slope <= 0 {
		if into, err = l.peak(into, zero.slopeAt, low.slopeAt); err != nil {
			return into, err
		}
	}
	return l.search(into, low, l.point(top))
}

// search appends the maxima between two points: none where the slope surely keeps
// its sign, one where it surely falls; other stretches are divided.
func (l likelihood) search(into []mode, left, right slopePoint) ([]mode, error) {
	const margin = 1 + 1e-8 // over rounding
	if margin*left.scatter < right.weight || right.scatter > margin*left.weight {
		return into, nil // scatter and weight fall
	}
	crosses := left.slope > 0 && right.slope <= 0
	if !crosses && (left.slope <= 0 && left.staysBelow(right.reachBack(left)) || right.slope > 0 && l.risesBetween(left, right, 0)) {
		return into, nil
	}
	ratio := right.tau2 / left.tau2
	if crosses && (ratio <= crossingRatio || left.fallsTo(right)) {
		return l.peak(into, left.slopeAt, right.slopeAt)
	}
	if ratio <= narrowRatio {
		from, to, found, err := l.hidden(left.slopeAt, right.slopeAt)
		if err != nil || !found {
			return into, err
		}
		return l.peak(into, from, to)
	}
	middle := l.point(math.Sqrt(left.tau2) * math.Sqrt(right.tau2))
	into, err := l.search(into, left, middle)
	if err != nil {
		return into, err
	}
	return l.search(into, middle, right)
}

// peak appends the maximum where the slope changes its sign.
func (l likelihood) peak(into []mode, from, to slopeAt) ([]mode, error) {
	tau2, err := numeric.Root(l.straightSlope, from.tau2, to.tau2, rootTolerance)
	if err != nil {
		return into, fmt.Errorf("maximum of the likelihood of τ²: %w", err)
	}
	return append(into, mode{tau2: tau2}), nil
}

// hidden looks between a and c, where the slope has one sign, for a maximum of
// the likelihood between them.
func (l likelihood) hidden(a, c slopeAt) (from, to slopeAt, found bool, err error) {
	if (a.slope > 0) != (c.slope > 0) {
		return a, c, false, nil
	}
	sign := math.Copysign(1, a.slope)
	x, height, err := numeric.Minimum(func(t float64) float64 { return sign * l.slope(t) }, a.tau2, c.tau2, 1e-8)
	if err != nil {
		return a, c, false, fmt.Errorf("slope of the likelihood of τ²: %w", err)
	}
	if height >= 0 {
		return a, c, false, nil
	}
	turn := slopeAt{x, sign * height}
	if sign > 0 {
		return a, turn, true, nil
	}
	return turn, c, true, nil
}

// highestMode returns the τ² of the highest of all local maxima, which are left
// in p.modes; zero is the point at 0.
func (p *Pooler) highestMode(l likelihood, zero slopePoint) (float64, error) {
	var err error
	if p.modes, err = l.modes(p.modes, zero); err != nil {
		return 0, err
	}
	switch len(p.modes) {
	case 0:
		return 0, &ModelError{Problem: "the likelihood of τ² has no maximum for these data: use dersimonian-laird"}
	case 1:
		return p.modes[0].tau2, nil
	}
	return p.compareModes(l), nil
}

// compareModes fills in the heights of p.modes, the maxima of l, and returns the
// τ² of the highest.
func (p *Pooler) compareModes(l likelihood) float64 {
	best := 0
	for i := range p.modes {
		p.modes[i].logL = l.value(p.modes[i].tau2)
		if p.modes[i].logL > p.modes[best].logL {
			best = i
		}
	}
	p.height = p.modes[best].logL
	return p.modes[best].tau2
}
