package meta

import (
	"math"
	"math/rand/v2"
	"slices"
)

// bootstrapDraws is the number of draws behind a bootstrap prediction interval.
// At 95 % they place each limit to about half a per cent of the half-width.
const bootstrapDraws = 100_000

// bootstrapStream tells the bootstrap's random numbers from others of one seed.
const bootstrapStream = 0x9e3779b97f4a7c15

// bootstrap returns the parametric-bootstrap prediction limits, the quantiles of
//
//	mean(τ²) + z·τ − t·se(τ²)
//
// over draws of a standard normal z, a Student t on k − 1 degrees of freedom, and
// τ² from its confidence distribution P(Q > observed | τ²); mean and se (that of
// Hartung and Knapp) are taken at each drawn τ². It is the same for the same seed
// and data. The chances for τ² are drawn one from each of equal strata.
//
// Source: Nagashima, Noma & Furukawa (2019), Statistical Methods in Medical
// Research 28:1689-1702.
func (p *Pooler) bootstrap() Limits {
	d := &p.data
	random := rand.New(rand.NewPCG(p.model.Seed, bootstrapStream))
	confidence := newTau2Confidence(d, p.zero)
	draws := make([]float64, bootstrapDraws)
	for i := range draws {
		tau2 := confidence.quantile((float64(i) + random.Float64()) / bootstrapDraws)
		m := d.at(tau2)
		se := math.Sqrt(m.q / (d.df() * m.w))
		draws[i] = m.mean + random.NormFloat64()*math.Sqrt(tau2) - studentDraw(random, d.df())*se
	}
	slices.Sort(draws)
	tail := 0.5 * (1 - p.model.Level)
	return Limits{Low: sortedQuantile(draws, tail), High: sortedQuantile(draws, 1-tail)}
}

// sortedQuantile returns the p quantile of ascending values, straight between
// neighbours.
func sortedQuantile(values []float64, p float64) float64 {
	place := p * float64(len(values)-1)
	below := min(int(place), len(values)-2)
	share := place - float64(below)
	return values[below]*(1-share) + values[below+1]*share
}

// studentDraw returns a draw of Student's t on df ≥ 2 degrees of freedom.
func studentDraw(random *rand.Rand, df float64) float64 {
	return random.NormFloat64() / math.Sqrt(2*gammaDraw(random, df/2)/df)
}

// gammaDraw returns a draw of a gamma variable of shape ≥ 1.
//
// Source: Marsaglia & Tsang (2000), ACM Transactions on Mathematical Software
// 26:363-372.
func gammaDraw(random *rand.Rand, shape float64) float64 {
	d := shape - 1.0/3
	c := 1 / math.Sqrt(9*d)
	for {
		x := random.NormFloat64()
		v := 1 + c*x
		if v <= 0 {
			continue
		}
		v = v * v * v
		if math.Log(1-random.Float64()) < 0.5*x*x+d-d*v+d*math.Log(v) {
			return d * v
		}
	}
}

// tau2Confidence is the confidence distribution of τ², P(Q > observed | τ²),
// tabulated by its logit, which rises from left to right.
type tau2Confidence struct {
	tau2, logit []float64
}

// confidenceStep is the ratio of neighbouring τ² in the table; the logit is close
// to straight in ln τ², so that confidences between them are right to about 1 %.
const confidenceStep = 1.15

// confidenceFloor is the chance of Q ≤ observed below which the table ends: one
// draw in forty runs would fall there. Chances are known to better than its
// thousandth part, which bounds the logit.
const confidenceFloor = 1e-6

// newTau2Confidence tabulates from τ² = 0 up to where P(Q ≤ observed) is
// negligible, in steps from a small part of the typical variance
// (k−1)/(Σw − Σw²/Σw) on.
func newTau2Confidence(d *sample, zero moments) tau2Confidence {
	law := newLawOfQ(d)
	var table tau2Confidence
	add := func(tau2 float64) float64 {
		below := law.below(zero.q, tau2)
		least := 1e-3 * confidenceFloor
		table.tau2 = append(table.tau2, tau2)
		table.logit = append(table.logit, math.Log(max(1-below, least)/max(below, least)))
		return below
	}
	add(0)
	for tau2 := 1e-3 * d.df() / zero.c; add(tau2) > confidenceFloor; tau2 *= confidenceStep {
	}
	return table
}

// quantile returns the τ² whose confidence is u in (0, 1); 0 where the
// confidence is above u from τ² = 0 on.
func (c tau2Confidence) quantile(u float64) float64 {
	want := math.Log(u) - math.Log1p(-u)
	above, _ := slices.BinarySearch(c.logit, want)
	switch above {
	case 0:
		return 0
	case len(c.tau2):
		return c.tau2[above-1]
	}
	share := (want - c.logit[above-1]) / (c.logit[above] - c.logit[above-1])
	if above == 1 {
		return share * c.tau2[1]
	}
	return c.tau2[above-1] * math.Pow(c.tau2[above]/c.tau2[above-1], share)
}
