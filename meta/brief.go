package meta

import (
	"math"

	"steelyard/meta/evidence"
)

// Brief is what Pool gives without the p-value and what else takes time: enough to pick
// out of millions of sets those that Pool should then look at.
type Brief struct {
	Estimate, SE, Low, High float64
	Tau2                    float64
	Evidence                evidence.Ratio
}

// Brief returns the pooled mean effect as Pool does, with the same numbers to the last
// bit and the same errors. It is several times as fast for small sets by DerSimonian and
// Laird's estimator, or with a common effect, and a Wald interval.
func (p *Pooler) Brief(m Model, y, s []float64) (b Brief, err error) {
	if p.quick(&b, &m, y, s) {
		return b, nil
	}
	mean, err := p.Pool(m, y, s)
	return Brief{mean.Estimate, mean.SE, mean.Low, mean.High, mean.Tau2, mean.Evidence}, err
}

// Bounds of what quick takes on: within them nothing overflows, underflows or lies too
// far apart in any of its sums.
const (
	quickSE      = 1e40 // and 1/quickSE: of the standard errors
	quickNull    = 1e100
	quickScatter = 1e100 // of Q
	quickSmall   = 1e-250
)

// quickModel is a model that quick has looked at.
type quickModel struct {
	model    Model
	ready    bool // it is one that quick takes on
	random   bool
	critical float64
}

// quick pools a small set by moments in the unit it is given in. Pool's working units
// are a power of two, so that the same steps give the same bits. It is false where the
// model needs more, and where the numbers are out of the bounds above or not numbers:
// they are Pool's business, as are all errors.
func (p *Pooler) quick(b *Brief, m *Model, y, s []float64) bool {
	if *m != p.brief.model {
		p.brief = quickModelOf(*m, &p.critical)
	}
	k := len(y)
	if !p.brief.ready || k < 2 || k > sumBlock || len(s) != k {
		return false
	}
	best, ok := mostPrecise(s)
	if !ok {
		return false
	}
	centre, w := y[best], p.scratch[:k]
	sums := weighQuick(y, s, w, best, centre, 0)
	scatter := scatterQuick(y, w, centre, sums.mean)
	if !(scatter < quickScatter) || sums.faint() { // NaN where a number is none
		return false
	}
	b.Tau2 = 0
	if p.brief.random {
		if b.Tau2 = max(0, (scatter-float64(k-1))/sums.c); b.Tau2 > 0 {
			if sums = weighQuick(y, s, w, best, centre, b.Tau2); sums.faint() {
				return false
			}
		}
	}
	b.SE = 1 / math.Sqrt(sums.total)
	half := p.brief.critical * b.SE
	b.Estimate, b.Low, b.High = centre+sums.mean, centre+(sums.mean-half), centre+(sums.mean+half)
	b.Evidence = evidence.Normal((sums.mean - (m.Null - centre)) / b.SE)
	return true
}

// mostPrecise returns the first study of the smallest standard error; ok is false where
// one is out of bounds. The bits of numbers above 0 are ordered as the numbers are, and
// those of all others lie above them.
func mostPrecise(s []float64) (best int, ok bool) {
	low, high := math.Float64bits(s[0]), uint64(0)
	for _, x := range s {
		low, high = min(low, math.Float64bits(x)), max(high, math.Float64bits(x))
	}
	for math.Float64bits(s[best]) != low {
		best++
	}
	return best, low > quickLow && high < quickHigh
}

var quickLow, quickHigh = math.Float64bits(1 / quickSE), math.Float64bits(quickSE)

// quickModelOf says whether quick takes a model on.
func quickModelOf(m Model, critical *criticals) quickModel {
	q := quickModel{model: m}
	resolved, err := m.Resolve(2)
	if err != nil || resolved.Interval != Wald || !(math.Abs(m.Null) < quickNull) {
		return q
	}
	q.random = resolved.Effects == RandomEffects
	if q.ready = !q.random || resolved.Tau == DerSimonianLaird; q.ready {
		q.critical = critical.of(m.Level, infinite)
	}
	return q
}

// quickSums are weighted sums of a set about its most precise study, in the unit it is
// given in.
type quickSums struct {
	total float64 // Σw
	mean  float64 // Σwy/Σw less the most precise study's estimate
	c     float64 // Σw − Σw²/Σw
}

// faint reports whether digits of Σwy may have been lost below the smallest number.
func (q quickSums) faint() bool { return !(math.Abs(q.mean*q.total) >= quickSmall) }

// weighQuick fills in the weights 1/(s² + tau2) and returns the sums; the steps are those
// of sample.weigh.
func weighQuick(y, s, weights []float64, best int, centre, tau2 float64) quickSums {
	y, weights = y[:len(s)], weights[:len(s)]
	var rest, squares, wy float64
	for i, se := range s {
		w := 1 / (se*se + tau2)
		weights[i] = w
		if i != best {
			rest += w
			squares += w * w
			wy += w * (y[i] - centre)
		}
	}
	w := weights[best]
	total := w + rest
	return quickSums{total: total, mean: wy / total, c: w*(rest/total) + (rest - squares/total)}
}

// scatterQuick returns Σw(y − mean)², the mean measured from centre.
func scatterQuick(y, weights []float64, centre, mean float64) (sum float64) {
	y = y[:len(weights)]
	for i, w := range weights {
		r := y[i] - centre - mean
		sum += w * r * r
	}
	return sum
}
