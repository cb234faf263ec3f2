package bayes

import (
	"errors"
	"math"
	"slices"

	"steelyard/meta/numeric"
)

const (
	// negligible is how far, in natural logs, an integrand must lie below its
	// highest peak to be left out.
	negligible = 42
	// surveyStep is the distance between the points at which peaks are looked for.
	surveyStep = 0.1
	// surveyMost caps the number of these points.
	surveyMost = 6000
	// separate is how deep the valley between two peaks must be, in natural logs,
	// for each to be given panels of its own.
	separate = 1
)

// mass is where an integrand exp(f) on the line lies: its height, and panels
// placed round each of its own peaks.
type mass struct {
	height float64
	panels [][2]float64 // ascending, without overlap
}

// survey finds the peaks of exp(f), all of which lie between lo and hi, and the
// range in which it is not negligible. f must fall outside of lo and hi.
func survey(f func(float64) float64, lo, hi float64) (mass, error) {
	peaks, err := peaksOf(f, lo, hi)
	if err != nil {
		return mass{}, err
	}
	m := mass{height: math.Inf(-1)}
	for _, p := range peaks {
		m.height = max(m.height, p.height)
	}
	floor := m.height - negligible
	peaks = slices.DeleteFunc(peaks, func(p peak) bool { return p.height < floor })
	from := edge(f, floor, peaks[0].x, -1)
	for i, p := range peaks {
		m.add(from, p.x)
		if i == len(peaks)-1 {
			m.add(p.x, edge(f, floor, p.x, 1))
			break
		}
		valley, next := p.valley, peaks[i+1].x
		if f(valley) >= floor {
			m.add(p.x, valley)
			from = valley
			continue
		}
		m.add(p.x, crossing(f, floor, p.x, valley))
		from = crossing(f, floor, next, valley)
	}
	return m, nil
}

// add appends the stretch between a peak and the foot of its slope.
func (m *mass) add(a, b float64) {
	if b > a {
		m.panels = append(m.panels, [2]float64{a, b})
	}
}

// lnIntegral returns ln ∫exp(f(x))g(x)dx over the panels, g being positive and
// slow beside exp(f); nil stands for 1. It returns ErrOutOfRange where floating
// point cannot resolve the peaks.
func (m mass) lnIntegral(f, g func(float64) float64) (float64, error) {
	total, doubt, err := m.upTo(f, g, math.Inf(1))
	switch {
	case err != nil:
		return 0, err
	case !(total > 0) || math.IsInf(total, 1) || !(doubt <= max(1e-9, m.rounding())*total):
		return 0, ErrOutOfRange
	}
	return m.height + math.Log(total), nil
}

// rounding is the relative accuracy of exp(f), which is no surer than the
// rounding of f.
func (m mass) rounding() float64 { return 1e-14 * math.Abs(m.height) }

// upTo returns ∫exp(f(x) − height)g(x)dx over x ≤ end with an estimate of its
// error. A panel far down a slope may miss its own tolerance and not matter.
func (m mass) upTo(f, g func(float64) float64, end float64) (value, absErr float64, err error) {
	integrand := func(x float64) float64 {
		y := math.Exp(min(separate, f(x)-m.height)) // above 0 lies only rounding
		if g != nil {
			y *= g(x)
		}
		return y
	}
	tolerance := max(1e-11, m.rounding())
	var total, doubt numeric.Sum
	for _, p := range m.panels {
		if p[0] >= end {
			break
		}
		value, absErr, err := numeric.Integrate(integrand, p[0], min(p[1], end), tolerance)
		if err != nil && !errors.Is(err, numeric.ErrNotConverged) {
			return 0, 0, ErrOutOfRange
		}
		total.Add(value)
		doubt.Add(absErr)
	}
	return total.Value(), doubt.Value(), nil
}

// peak is a local maximum with the lowest point between it and the next one.
type peak struct{ x, height, valley float64 }

// peaksOf returns the local maxima of f between lo and hi, ascending, that are
// separate from each other.
func peaksOf(f func(float64) float64, lo, hi float64) ([]peak, error) {
	n := max(40, min(surveyMost, int((hi-lo)/surveyStep)))
	step := (hi - lo) / float64(n)
	at := func(i int) float64 { return lo + step*float64(i) }
	var peaks []peak
	before, here := math.Inf(-1), f(lo)
	lowest, valley := math.Inf(1), lo
	for i := range n + 1 {
		after := math.Inf(-1)
		if i < n {
			after = f(at(i + 1))
		}
		if math.IsNaN(after) {
			return nil, ErrOutOfRange
		}
		if here < lowest {
			lowest, valley = here, at(i)
		}
		if here > before && here >= after {
			p, err := climb(f, at(i), step, here)
			if err != nil {
				return nil, err
			}
			if peaks = join(peaks, p, lowest, valley); peaks[len(peaks)-1] == p {
				lowest = math.Inf(1)
			}
		}
		before, here = here, after
	}
	if len(peaks) == 0 {
		return nil, ErrOutOfRange
	}
	return peaks, nil
}

// join appends a peak, or keeps the higher of it and the last where the valley
// between them is shallow.
func join(peaks []peak, p peak, lowest, valley float64) []peak {
	if len(peaks) == 0 {
		return append(peaks, p)
	}
	last := &peaks[len(peaks)-1]
	switch {
	case lowest < min(last.height, p.height)-separate:
		last.valley = valley
		return append(peaks, p)
	case p.height > last.height:
		*last = p
	}
	return peaks
}

// climb returns the top of the hill at x, to each side of which f falls within a
// step.
func climb(f func(float64) float64, x, step, height float64) (peak, error) {
	top := peak{x: x, height: height}
	for reach := step; reach > 1e-9*step; reach *= 1e-4 { // each pass looks closer
		centre := top.x
		u, low, err := numeric.Minimum(func(u float64) float64 { return -f(centre + u) }, -reach, reach, 1e-8)
		if err != nil {
			return top, ErrOutOfRange
		}
		if -low > top.height {
			top = peak{x: centre + u, height: -low}
		}
	}
	return top, nil
}

// edge returns a point to one side of a peak, beyond all others, at which f is
// below floor, near where it crosses it.
func edge(f func(float64) float64, floor, x, side float64) float64 {
	reach := surveyStep
	for f(x+side*reach) > floor && reach < 1e4 {
		reach *= 2
	}
	return crossing(f, floor, x, x+side*reach)
}

// crossing returns a point at which f is below floor, near where it crosses
// floor between a peak above it and a point below it.
func crossing(f func(float64) float64, floor, x, below float64) float64 {
	above := x
	for math.Abs(above-below) > 0.05*math.Abs(below-x) {
		middle := 0.5 * (above + below)
		switch {
		case middle == above || middle == below:
			return below
		case f(middle) > floor:
			above = middle
		default:
			below = middle
		}
	}
	return below
}
