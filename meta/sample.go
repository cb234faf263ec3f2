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

// at returns the moments at tau2 and leaves the weights in d.w.
func (d *sample) at(tau2 float64) moments {
	var rest, wy numeric.Sum
	for i, v := range d.v {
		w := 1 / (v + tau2)
		d.w[i] = w
		if i != d.best {
			rest.Add(w)
			wy.Add(w * d.y[i])
		}
	}
	largestWeight := d.w[d.best]
	m := moments{tau2: tau2, w: largestWeight + rest.Value()}
	m.mean = wy.Value() / m.w
	var c, q, s numeric.Sum
	c.Add(largestWeight * (rest.Value() / m.w))
	for i, w := range d.w {
		r := d.y[i] - m.mean
		wr := w * r
		q.Add(wr * r)
		s.Add(wr * wr)
		if i != d.best {
			c.Add(w * (1 - w/m.w))
		}
	}
	m.c, m.q, m.s = c.Value(), q.Value(), s.Value()
	return m
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
