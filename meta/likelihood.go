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

// scanSteps is how many points per factor e in τ² the search for maxima takes.
// As a function of ln τ² the slope is made of logistic curves of width 1, so
// that four points per unit follow every turn of it.
const scanSteps = 4

// slope has the sign of the derivative in τ². It is the score divided by ½Σw
// (restricted: by ½(Σw − Σw²/Σw)), so that it is at least -1 and free of units.
func (l likelihood) slope(tau2 float64) float64 {
	switch l.kind {
	case restrictedLikelihood:
		m := l.data.at(tau2)
		return m.s/m.c - 1
	case fixedMeanLikelihood:
		m := l.data.about(l.mean, tau2)
		return m.s/m.w - 1
	}
	m := l.data.at(tau2)
	return m.s/m.w - 1
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
// without their heights. The slope is followed over a grid equal in ln τ²;
// every change of its sign is solved for, and every near touch of 0 looked into.
func (l likelihood) modes(into []mode) ([]mode, error) {
	into = into[:0]
	left := slopeAt{0, l.slope(0)}
	if !(left.slope > 0) {
		into = append(into, mode{})
	}
	smallest, top := l.data.v[l.data.best], l.top()
	if top <= smallest {
		return into, nil // falling from 0 on
	}
	low := 0.01 * smallest // below it the slope is straight to 1 %
	steps := math.Ceil(scanSteps * math.Log(top/low))
	factor := math.Exp(math.Log(top/low) / steps)
	before := left
	for i, tau2 := 0.0, low; i <= steps; i, tau2 = i+1, tau2*factor {
		now := slopeAt{tau2, l.slope(tau2)}
		from, to, found := left, now, left.slope > 0 && now.slope <= 0
		if !found && i > 0 && touches(before, left, now) {
			var err error
			if from, to, found, err = l.hidden(before, now); err != nil {
				return into, err
			}
		}
		if found {
			peak, err := numeric.Root(l.slope, from.tau2, to.tau2, rootTolerance)
			if err != nil {
				return into, fmt.Errorf("maximum of the likelihood of τ²: %w", err)
			}
			into = append(into, mode{tau2: peak})
		}
		before, left = left, now
	}
	return into, nil
}

// slopeAt is the slope at one τ².
type slopeAt struct{ tau2, slope float64 }

// touches reports whether the slope comes so near to 0 at b, without changing
// sign at a, b or c, that it may have crossed 0 and come back in between.
func touches(a, b, c slopeAt) bool {
	if a.slope*b.slope <= 0 || b.slope*c.slope <= 0 {
		return false
	}
	near, fromA, fromC := math.Abs(b.slope), math.Abs(a.slope), math.Abs(c.slope)
	return near < fromA && near < fromC && near <= 2*(max(fromA, fromC)-near)
}

// hidden looks between a and c, where the slope has one sign, for a maximum of
// the likelihood that the grid has stepped over.
func (l likelihood) hidden(a, c slopeAt) (from, to slopeAt, found bool, err error) {
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
// in p.modes with their heights.
func (p *Pooler) highestMode(l likelihood) (float64, error) {
	var err error
	if p.modes, err = l.modes(p.modes); err != nil {
		return 0, err
	}
	if len(p.modes) == 0 {
		return 0, &ModelError{Problem: "the likelihood of τ² has no maximum for these data: use dersimonian-laird"}
	}
	best := 0
	for i := range p.modes {
		p.modes[i].logL = l.value(p.modes[i].tau2)
		if p.modes[i].logL > p.modes[best].logL {
			best = i
		}
	}
	p.height = p.modes[best].logL
	return p.modes[best].tau2, nil
}
