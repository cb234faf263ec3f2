package meta

import (
	"fmt"
	"math"

	"steelyard/meta/numeric"
)

// largest bounds the magnitude of an estimate and of a standard error, and
// 1/largest bounds the latter from below: their squares stay finite.
const largest = 1e150

// widest bounds how many times the smallest standard error any other standard
// error, any distance between estimates, and the distance to the null may be.
const widest = 1e145

// equalWithin is how far estimates may differ, relative to their magnitude or to
// the smallest standard error, and still count as all equal: the rounding of the
// last digits.
const equalWithin = 1e-15

// sample is a set of studies in working units: estimates measured from that of
// the most precise study, in a unit near its standard error. The unit is a power
// of two, so that scaling loses no digits, and the most precise study, whose
// weight is the largest at every τ², stands at 0, so that neither its residual
// nor its share of the weight suffers from cancellation.
type sample struct {
	y, v   []float64
	w      []float64 // weights of the latest call of at
	best   int       // the most precise study
	centre float64   // its estimate as given
	unit   float64   // size of a working unit as given
	spread float64   // largest less smallest estimate, working units
	equal  bool      // the estimates agree to the last digits
}

// moments are the weighted sums at one τ², with wᵢ = 1/(vᵢ + τ²).
type moments struct {
	tau2 float64
	w    float64 // Σw
	c    float64 // Σw − Σw²/Σw
	mean float64 // Σwy/Σw
	q    float64 // Σw(y − mean)²
	s    float64 // Σw²(y − mean)²
}

// se returns the model's standard error of the mean.
func (m moments) se() float64 { return 1 / math.Sqrt(m.w) }

// load checks the studies and takes them in; y and s are not kept.
func (d *sample) load(y, s []float64) error {
	if len(y) != len(s) {
		return &InputError{Index: -1, Problem: fmt.Sprintf(
			"%d estimates but %d standard errors: give one of each per study", len(y), len(s))}
	}
	if len(y) == 0 {
		return ErrNoStudies
	}
	d.best = 0
	for i := range y {
		if problem := unusable(y[i], s[i]); problem != "" {
			return &InputError{Index: i, Problem: problem}
		}
		if s[i] < s[d.best] {
			d.best = i
		}
	}
	_, exponent := math.Frexp(s[d.best])
	d.centre, d.unit = y[d.best], math.Ldexp(1, exponent)
	return d.scale(y, s)
}

// unusable says what is wrong with an estimate or its standard error, or "".
func unusable(y, s float64) string {
	switch {
	case math.IsNaN(y) || math.IsInf(y, 0):
		return fmt.Sprintf("the estimate %v is not a finite number: correct it or leave the study out", y)
	case math.IsNaN(s) || math.IsInf(s, 0):
		return fmt.Sprintf("the standard error %v is not a finite number: correct it or leave the study out", s)
	case s <= 0:
		return fmt.Sprintf("the standard error %v is not above 0: correct it or leave the study out", s)
	case math.Abs(y) > largest:
		return fmt.Sprintf("the square of the estimate %v exceeds the range of numbers: use a larger unit", y)
	case s > largest:
		return fmt.Sprintf("the square of the standard error %v exceeds the range of numbers: use a larger unit", s)
	case s < 1/largest:
		return fmt.Sprintf("the square of the standard error %v falls below the range of numbers: use a smaller unit", s)
	}
	return ""
}

// scale fills the sample in working units.
func (d *sample) scale(y, s []float64) error {
	d.y, d.v, d.w = resize(d.y, len(y)), resize(d.v, len(y)), resize(d.w, len(y))
	low, high, magnitude := 0.0, 0.0, 0.0
	for i := range y {
		scaled := s[i] / d.unit
		d.y[i], d.v[i] = (y[i]-d.centre)/d.unit, scaled*scaled
		low, high = min(low, d.y[i]), max(high, d.y[i])
		magnitude = max(magnitude, math.Abs(y[i]))
		if scaled > widest {
			return &InputError{Index: i, Problem: fmt.Sprintf(
				"the standard error %v is more than %g times that of study %d: leave one of them out", s[i], widest, d.best+1)}
		}
		if high-low > widest {
			return &InputError{Index: i, Problem: fmt.Sprintf(
				"the estimate %v lies more than %g standard errors of study %d from the others: check both", y[i], widest, d.best+1)}
		}
	}
	d.spread = high - low
	d.equal = d.spread <= equalWithin*max(1, magnitude/d.unit)
	return nil
}

// resize returns a slice of length n, reusing the room of s.
func resize(s []float64, n int) []float64 {
	if cap(s) < n {
		return make([]float64, n)
	}
	return s[:n]
}

// k returns the number of studies.
func (d *sample) k() int { return len(d.y) }

// df returns k − 1.
func (d *sample) df() float64 { return float64(len(d.y) - 1) }

// at returns the moments at tau2 and leaves the weights in d.w. All pooling spends
// its time here.
func (d *sample) at(tau2 float64) moments {
	var rest, wy numeric.Sum
	weights, ys := d.w[:len(d.v)], d.y[:len(d.v)]
	for i, v := range d.v {
		w := 1 / (v + tau2)
		weights[i] = w
		if i != d.best {
			rest, wy = rest.Plus(w), wy.Plus(w*ys[i])
		}
	}
	largestWeight := weights[d.best]
	m := moments{tau2: tau2, w: largestWeight + rest.Value()}
	m.mean = wy.Value() / m.w
	var c, q, s numeric.Sum
	c = c.Plus(largestWeight * (rest.Value() / m.w))
	inverse := 1 / m.w
	for i, w := range weights {
		r := ys[i] - m.mean
		wr := w * r
		q, s = q.Plus(wr*r), s.Plus(wr*wr)
		if i != d.best {
			c = c.Plus(w * (1 - w*inverse))
		}
	}
	m.c, m.q, m.s = c.Value(), q.Value(), s.Value()
	return m
}

// quick returns w, mean, c and s at tau2 from plain sums in one pass, right to
// 1e-9; false where more digits would cancel, which takes thousands of studies: the
// most precise one stands apart with at least a fair share of the weight.
func (d *sample) quick(tau2 float64) (moments, bool) {
	var rest, ww, wy, wwy, wwyy float64 // the most precise study has y = 0
	ys := d.y[:len(d.v)]
	for i, v := range d.v {
		if i != d.best {
			w := 1 / (v + tau2)
			u := w * ys[i]
			rest += w
			ww += w * w
			wy += u
			wwy += w * u
			wwyy += u * u
		}
	}
	best := 1 / (d.v[d.best] + tau2)
	m := moments{tau2: tau2, w: best + rest}
	m.mean = wy / m.w
	m.c = best*(rest/m.w) + (rest - ww/m.w) // no w of the rest is above Σw/2
	m.s = wwyy - m.mean*(2*wwy-m.mean*(ww+best*best))
	return m, m.s > 1e-4*wwyy
}

// about returns Σw, Σw(y − mu)² and Σw²(y − mu)² at tau2 about a given mean.
func (d *sample) about(mu, tau2 float64) moments {
	var total, q, s numeric.Sum
	for i, v := range d.v {
		w := 1 / (v + tau2)
		r := d.y[i] - mu
		wr := w * r
		total.Add(w)
		q.Add(wr * r)
		s.Add(wr * wr)
	}
	return moments{tau2: tau2, w: total.Value(), mean: mu, q: q.Value(), s: s.Value()}
}

// scatter returns Σ(y − ȳ)², unweighted.
func (d *sample) scatter() float64 {
	var sum numeric.Sum
	for _, y := range d.y {
		sum.Add(y)
	}
	mean := sum.Value() / float64(d.k())
	var squares numeric.Sum
	for _, y := range d.y {
		squares.Add((y - mean) * (y - mean))
	}
	return squares.Value()
}

// meanVariance returns Σv/k.
func (d *sample) meanVariance() float64 {
	var sum numeric.Sum
	for _, v := range d.v {
		sum.Add(v)
	}
	return sum.Value() / float64(d.k())
}
