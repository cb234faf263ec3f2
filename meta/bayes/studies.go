package bayes

import (
	"math"

	"steelyard/meta"
)

// reach bounds, in working units, every distance and every standard error, and
// with its inverse the scale of a prior.
const reach = 1e100

// studies are estimates in working units: measured from that of the most precise
// study, in a unit near its standard error, so that no digits cancel.
type studies struct {
	y, v   []float64
	null   float64
	centre float64 // the most precise study's estimate as given
	unit   float64 // a power of two
	prior  TauPrior
	lo, hi float64 // ln τ of the smallest and the largest distance of all, with room
}

// newStudies checks and scales the studies.
func newStudies(y, s []float64, null float64, prior TauPrior) (*studies, error) {
	if err := prior.Check(); err != nil {
		return nil, err
	}
	// The common-effect model makes the checks that every model makes.
	var pool meta.Pooler
	if _, err := pool.Pool(meta.Model{Effects: meta.CommonEffect, Level: 0.95, Null: null}, y, s); err != nil {
		return nil, err
	}
	if prior.Kind == Uniform && len(y) < 3 {
		return nil, ErrUniformNeedsThree
	}
	best := 0
	for i := range s {
		if s[i] < s[best] {
			best = i
		}
	}
	_, exponent := math.Frexp(s[best])
	unit := math.Ldexp(1, exponent)
	d := &studies{y: make([]float64, len(y)), v: make([]float64, len(y)), centre: y[best], unit: unit, prior: prior.in(unit)}
	d.null = (null - d.centre) / unit
	smallest, largest := s[best]/unit, math.Abs(d.null)
	for i := range y {
		se := s[i] / unit
		d.y[i], d.v[i] = (y[i]-d.centre)/unit, se*se
		largest = max(largest, se, math.Abs(d.y[i]), math.Abs(d.y[i]-d.null))
	}
	if largest > reach {
		return nil, ErrOutOfRange
	}
	d.lo, d.hi = math.Log(smallest)-3, math.Log(largest)+3
	if turn, ok := d.prior.centre(); ok {
		if math.Abs(turn) > math.Log(reach) {
			return nil, ErrOutOfRange
		}
		d.lo, d.hi = min(d.lo, turn-3), max(d.hi, turn+3)
	}
	return d, nil
}

func (d *studies) k() int { return len(d.y) }

// sums are what the likelihood at one τ is made of.
type sums struct {
	lnC  float64 // Σ −½ ln(2π(v + τ²))
	w    float64 // Σw, w = 1/(v + τ²)
	mean float64 // Σwy/Σw
	q    float64 // Σw(y − mean)²
	q0   float64 // Σw(y − null)²
}

func (d *studies) at(tau float64) sums {
	tau2 := tau * tau
	var m sums
	wy := 0.0
	for i, v := range d.v {
		w := 1 / (v + tau2)
		m.w += w
		wy += w * d.y[i]
		m.lnC -= 0.5 * math.Log(2*math.Pi*(v+tau2))
	}
	m.mean = wy / m.w
	for i, v := range d.v {
		r := d.y[i] - m.mean
		m.q += r * r / (v + tau2)
	}
	off := m.mean - d.null
	m.q0 = m.q + m.w*off*off
	return m
}

// lnPower returns ln of the likelihood to a power, 1 or 2, integrated over the
// mean (free) or taken at the null.
func (m sums) lnPower(power float64, free bool) float64 {
	if !free {
		return power * (m.lnC - 0.5*m.q0)
	}
	return power*(m.lnC-0.5*m.q) + 0.5*math.Log(2*math.Pi/(power*m.w))
}

// integrand returns, as a function of x = ln τ, the log of p(τ)·∫L^power dμ·τ,
// whose last factor is dτ/dx.
func (d *studies) integrand(power float64, free bool) func(x float64) float64 {
	return func(x float64) float64 {
		return d.at(math.Exp(x)).lnPower(power, free) + d.prior.lnDensity(x) + x
	}
}

// lnPosteriorMarginal returns ln PML, the mean of the likelihood over its own
// posterior, with τ integrated out.
func (d *studies) lnPosteriorMarginal(free bool) (float64, error) {
	var ln [2]float64
	for i := range ln {
		f := d.integrand(float64(i+1), free)
		m, err := survey(f, d.lo, d.hi)
		if err != nil {
			return 0, err
		}
		if ln[i], err = m.lnIntegral(f, nil); err != nil {
			return 0, err
		}
	}
	return ln[1] - ln[0], nil
}
