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
	y, v    []float64
	others  []float64 // v, but +Inf for the most precise study, which gives it no weight
	w       []float64 // weights of the latest call of at
	best    int       // the most precise study
	centre  float64   // its estimate as given
	unit    float64   // size of a working unit as given
	spread  float64   // largest less smallest estimate, working units
	largest float64   // largest of v
	equal   bool      // the estimates agree to the last digits
}

// moments are the weighted sums at one τ², with wᵢ = 1/(vᵢ + τ²).
type moments struct {
	tau2 float64
	w    float64 // Σw
	rest float64 // Σw without the most precise study
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
	s = s[:len(y)]
	r := ranges{lowY: y[0], highY: y[0], lowS: s[0], highS: s[0]}
	for i, y := range y {
		r.lowY, r.highY = min(r.lowY, y), max(r.highY, y) // NaN wherever one is NaN
		r.lowS, r.highS = min(r.lowS, s[i]), max(r.highS, s[i])
	}
	if !(r.lowY >= -largest && r.highY <= largest && r.lowS >= 1/largest && r.highS <= largest) {
		return firstUnusable(y, s)
	}
	d.best = 0
	for s[d.best] != r.lowS {
		d.best++
	}
	d.centre, d.unit = y[d.best], powerAbove(r.lowS)
	d.scale(y, s)
	return d.measure(r, y, s)
}

// ranges are the smallest and largest estimate and standard error, as given.
type ranges struct{ lowY, highY, lowS, highS float64 }

// firstUnusable reports the first study that cannot be used.
func firstUnusable(y, s []float64) error {
	for i := range y {
		if problem := unusable(y[i], s[i]); problem != "" {
			return &InputError{Index: i, Problem: problem}
		}
	}
	return nil
}

// powerAbove returns the least power of two above a normal number x > 0.
func powerAbove(x float64) float64 {
	const exponent = 0x7ff << 52
	return 2 * math.Float64frombits(math.Float64bits(x)&exponent)
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
func (d *sample) scale(y, s []float64) {
	k := len(y)
	d.y, d.v, d.w, d.others = resize(d.y, k), resize(d.v, k), resize(d.w, k), resize(d.others, k)
	ys, vs, others, s := d.y[:k], d.v[:k], d.others[:k], s[:k]
	centre, perUnit := d.centre, 1/d.unit // exact, as the unit is a power of two
	for i, given := range y {
		scaled := s[i] * perUnit
		v := scaled * scaled
		ys[i], vs[i], others[i] = (given-centre)*perUnit, v, v
	}
	others[d.best] = infinite
}

// measure notes how far the studies lie from one another, and refuses those that
// lie too far.
func (d *sample) measure(r ranges, y, s []float64) error {
	perUnit := 1 / d.unit
	d.spread = (r.highY-d.centre)*perUnit - (r.lowY-d.centre)*perUnit
	d.largest = r.highS * perUnit * (r.highS * perUnit)
	d.equal = d.spread <= equalWithin*max(1, max(-r.lowY, r.highY)*perUnit)
	if d.spread > widest || r.highS*perUnit > widest {
		return d.tooWide(y, s)
	}
	return nil
}

// tooWide names the first study too far from the most precise one, or too
// imprecise beside it, to be compared with it.
func (d *sample) tooWide(y, s []float64) error {
	low, high := 0.0, 0.0
	for i := range y {
		low, high = min(low, d.y[i]), max(high, d.y[i])
		if s[i]/d.unit > widest {
			return &InputError{Index: i, Problem: fmt.Sprintf(
				"the standard error %v is more than %g times that of study %d: leave one of them out", s[i], widest, d.best+1)}
		}
		if high-low > widest {
			return &InputError{Index: i, Problem: fmt.Sprintf(
				"the estimate %v lies more than %g standard errors of study %d from the others: check both", y[i], widest, d.best+1)}
		}
	}
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

// sumBlock is how many terms are added plainly; the sums of blocks are added with
// compensation, so that no digits are lost however many studies there are.
const sumBlock = 128

// at returns the moments at tau2 and leaves the weights in d.w. All pooling spends
// its time here and in what it calls.
func (d *sample) at(tau2 float64) moments {
	m := d.weigh(tau2)
	d.scatterAbout(&m)
	return m
}

// weigh is at without the sums of squares about the mean.
func (d *sample) weigh(tau2 float64) moments {
	// Without the most precise study, which has y = 0:
	rest, squares, wy := d.weighBlock(tau2, 0, min(sumBlock, len(d.w)))
	if len(d.w) > sumBlock {
		all := [3]numeric.Sum{}
		for from := 0; from < len(d.w); from += sumBlock {
			rest, squares, wy = d.weighBlock(tau2, from, min(from+sumBlock, len(d.w)))
			all[0], all[1], all[2] = all[0].Plus(rest), all[1].Plus(squares), all[2].Plus(wy)
		}
		rest, squares, wy = all[0].Value(), all[1].Value(), all[2].Value()
	}
	best := 1 / (d.v[d.best] + tau2)
	d.w[d.best] = best
	w := best + rest
	// No weight of the rest is above Σw/2, so that nothing cancels in c.
	return moments{tau2: tau2, w: w, rest: rest, c: best*(rest/w) + (rest - squares/w), mean: wy / w}
}

// weighBlock fills in the weights of the studies from and up to to, and returns
// Σw, Σw² and Σwy without the most precise study.
func (d *sample) weighBlock(tau2 float64, from, to int) (w, ww, wy float64) {
	weights := d.w[from:to]
	v, y := d.others[from:to][:len(weights)], d.y[from:to][:len(weights)]
	for i := range weights {
		x := 1 / (v[i] + tau2)
		weights[i] = x
		w += x
		ww += x * x
		wy += x * y[i]
	}
	return w, ww, wy
}

// scatterAbout fills in the weighted squares about the mean, with the weights that
// stand in d.w.
func (d *sample) scatterAbout(m *moments) {
	m.q, m.s = d.scatterBlock(m.mean, 0, min(sumBlock, len(d.w)))
	if len(d.w) > sumBlock {
		var q, s numeric.Sum
		for from := 0; from < len(d.w); from += sumBlock {
			m.q, m.s = d.scatterBlock(m.mean, from, min(from+sumBlock, len(d.w)))
			q, s = q.Plus(m.q), s.Plus(m.s)
		}
		m.q, m.s = q.Value(), s.Value()
	}
}

// scatterBlock returns Σw(y − mean)² and Σw²(y − mean)² of the studies from and up
// to to.
func (d *sample) scatterBlock(mean float64, from, to int) (q, s float64) {
	weights := d.w[from:to]
	y := d.y[from:to][:len(weights)]
	for i, w := range weights {
		r := y[i] - mean
		wr := w * r
		q += wr * r
		s += wr * wr
	}
	return q, s
}

// about returns Σw, Σw(y − mu)² and Σw²(y − mu)² at tau2 about a given mean.
func (d *sample) about(mu, tau2 float64) moments {
	m := d.weigh(tau2)
	m.mean = mu
	d.scatterAbout(&m)
	return m
}

// cubes are sums of the second and third order in w, for P = W − W11ᵀW/Σw.
type cubes struct {
	squares   float64 // Σw²
	trace     float64 // tr P²
	scatter   float64 // Σw³(y − mean)²
	projected float64 // yᵀP³y
}

// cubes returns the sums that belong to m, whose weights stand in d.w.
func (d *sample) cubes(m moments) cubes {
	best := d.w[d.best]
	d.w[d.best] = 0 // for sums without the most precise study
	all := d.cubeBlock(m.mean, 0, min(sumBlock, len(d.w)))
	if len(d.w) > sumBlock {
		var sums [4]numeric.Sum
		for from := 0; from < len(d.w); from += sumBlock {
			part := d.cubeBlock(m.mean, from, min(from+sumBlock, len(d.w)))
			for i, x := range part {
				sums[i] = sums[i].Plus(x)
			}
		}
		for i, sum := range sums {
			all[i] = sum.Value()
		}
	}
	d.w[d.best] = best
	w2, w3, s1, s2 := all[0], all[1], all[2], all[3]
	share, rest := best/m.w, m.rest/m.w // rest is 1 − share to full precision
	bestWR := -best * m.mean
	return cubes{
		squares:   best*best + w2,
		trace:     best*best*rest*rest + w2 - 2*w3/m.w + 2*share*share*w2 + w2/m.w*(w2/m.w),
		scatter:   best*bestWR*bestWR + s2,
		projected: best*bestWR*bestWR*rest + s2 - s1*s1/m.w - 2*s1*share*bestWR,
	}
}

// cubeBlock returns Σw², Σw³, Σw²(y − mean) and Σw³(y − mean)² of the studies from
// and up to to.
func (d *sample) cubeBlock(mean float64, from, to int) [4]float64 {
	weights := d.w[from:to]
	y := d.y[from:to][:len(weights)]
	var w2, w3, wwr, scatter float64
	for i, w := range weights {
		wr := w * (y[i] - mean)
		w2 += w * w
		w3 += w * w * w
		wwr += w * wr
		scatter += w * wr * wr
	}
	return [4]float64{w2, w3, wwr, scatter}
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
