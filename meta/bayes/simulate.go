package bayes

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"

	"steelyard/meta/numeric"
)

// correctionStream tells these random numbers from others of one seed.
const correctionStream = 0x6c0ec7105

// IntegrateSimulated is Integrate with the corrections of the two models whose τ
// is free simulated, from draws pairs of data sets, at least 100 of them. A
// model's correction is
//
//	E[ln ∫∫L²p − ln ∫∫LL′p]
//
// over pairs of data sets drawn with one τ: from p(τ), or, under a uniform prior,
// the (restricted) maximum-likelihood estimate under that model. The result is the
// same for the same seed. It returns the errors of Integrate, a *PriorError for
// too few draws, and the cause if ctx ends.
func IntegrateSimulated(ctx context.Context, y, s []float64, null float64, prior TauPrior, draws int, seed uint64) (*Integrated, error) {
	if draws < 100 {
		return nil, &PriorError{fmt.Sprintf("%d draws are too few to simulate a correction: use at least 100, such as 20,000", draws)}
	}
	d, err := newStudies(y, s, null, prior)
	if err != nil {
		return nil, err
	}
	r, err := d.integrated(prior, y, s)
	if err != nil {
		return nil, err
	}
	var at [2]float64 // τ without and with an effect, for the uniform
	if prior.Kind == Uniform {
		at[1] = r.Tau / d.unit
		if at[0], err = d.likeliestTau(); err != nil {
			return nil, err
		}
	}
	zero, free, err := d.simulate(ctx, at, draws, seed)
	if err != nil {
		return nil, err
	}
	r.Corrections[NoEffectRandom], r.Corrections[EffectRandom] = zero, free
	return r, nil
}

// likeliestTau returns the τ of the highest likelihood with the mean at the null,
// in working units.
func (d *studies) likeliestTau() (float64, error) {
	f := func(x float64) float64 { return d.at(math.Exp(x)).lnPower(1, false) }
	peaks, err := peaksOf(f, d.lo, d.hi)
	if err != nil {
		return 0, err
	}
	tau, height := 0.0, d.at(0).lnPower(1, false)
	for _, p := range peaks {
		if p.height > height {
			tau, height = math.Exp(p.x), p.height
		}
	}
	return tau, nil
}

// simulate returns the corrections without and with an effect. Both models share
// their random numbers.
func (d *studies) simulate(ctx context.Context, at [2]float64, draws int, seed uint64) (zero, free Correction, err error) {
	random := rand.New(rand.NewPCG(seed, correctionStream))
	grid, err := d.newGrid(max(at[0], at[1]))
	if err != nil {
		return zero, free, err
	}
	k := d.k()
	noise := [2][]float64{make([]float64, k), make([]float64, k)}
	pair := [2][]float64{make([]float64, k), make([]float64, k)}
	fill := func(tau float64) {
		for i, v := range d.v {
			sd := math.Sqrt(v + tau*tau)
			pair[0][i], pair[1][i] = sd*noise[0][i], sd*noise[1][i]
		}
	}
	var zeros, frees average
	for range draws {
		if ctx.Err() != nil {
			return zero, free, context.Cause(ctx)
		}
		tau := at
		if d.prior.Kind != Uniform {
			tau[0] = d.prior.draw(random)
			tau[1] = tau[0]
		}
		for i := range k {
			noise[0][i], noise[1][i] = random.NormFloat64(), random.NormFloat64()
		}
		fill(tau[0])
		grid.take(pair)
		zeros.add(grid.excess(false))
		if tau[1] != tau[0] {
			fill(tau[1])
			grid.take(pair)
		}
		frees.add(grid.excess(true))
	}
	return zeros.correction(), frees.correction(), nil
}

// average is a mean of draws with its standard error.
type average struct {
	n            int
	sum, squares numeric.Sum
}

func (a *average) add(x float64) {
	a.n++
	a.sum.Add(x)
	a.squares.Add(x * x)
}

func (a *average) correction() Correction {
	n := float64(a.n)
	mean := a.sum.Value() / n
	return Correction{Value: mean, Error: math.Sqrt(max(0, a.squares.Value()/n-mean*mean) / (n - 1))}
}

// grid is a fixed rule for integrals over τ, equally spaced in ln τ, with what
// does not depend on the estimates at each node.
type grid struct {
	k        int
	w        []float64 // node by node: w = 1/(v + τ²) of each study
	total    []float64 // Σw
	lnWeight []float64 // ln of C²p(τ) times the width of the node
	at       []pairSums
	ln       [3][]float64 // of L², L′² and LL′ at each node
}

// pairSums are Σwy and Σwy² of two data sets.
type pairSums struct{ wy, wyy [2]float64 }

const (
	// gridFine is the distance of nodes in ln τ for one study; the peaks narrow with
	// √k.
	gridFine = 0.5
	// gridMost caps the nodes times the studies.
	gridMost = 1 << 24
)

// newGrid places nodes from so far below the smallest distance that what lies
// lower is a ten-thousandth part, to far above the largest that a τ can draw.
func (d *studies) newGrid(tau float64) (*grid, error) {
	step := gridFine / math.Sqrt(float64(max(d.k(), 4)))
	smallest, largest := math.Inf(1), tau*tau
	for _, v := range d.v {
		smallest = min(smallest, v)
		largest = max(largest, v)
	}
	lo, hi := 0.5*math.Log(smallest), 0.5*math.Log(largest)
	switch p := d.prior; p.Kind {
	case HalfNormal:
		lo, hi = min(lo, math.Log(p.Scale)), max(hi, math.Log(p.Scale))
	case HalfCauchy:
		lo, hi = min(lo, math.Log(p.Scale)), max(hi, math.Log(p.Scale*farthestCauchy))
	case LogNormal:
		step = min(step, p.SDLog/3)
		lo, hi = p.MeanLog-(farthestLogNormal+2)*p.SDLog, p.MeanLog+(farthestLogNormal+1)*p.SDLog
	}
	if d.prior.Kind != LogNormal {
		lo, hi = lo-math.Log(1e4), hi+math.Log(300)
	}
	n := (hi - lo) / step
	if !(n*float64(d.k()) < gridMost) {
		return nil, ErrOutOfRange
	}
	g := &grid{k: d.k()}
	for j := range int(n) + 2 {
		x := lo + step*float64(j)
		m := d.at(math.Exp(x))
		g.total = append(g.total, m.w)
		g.lnWeight = append(g.lnWeight, 2*m.lnC+d.prior.lnDensity(x)+x+math.Log(step))
		for _, v := range d.v {
			g.w = append(g.w, 1/(v+math.Exp(2*x)))
		}
	}
	g.at = make([]pairSums, len(g.total))
	for i := range g.ln {
		g.ln[i] = make([]float64, len(g.total))
	}
	return g, nil
}

// take computes the sums of a pair of data sets, which lie round a null of 0.
func (g *grid) take(pair [2][]float64) {
	a, b := pair[0][:g.k], pair[1][:g.k]
	for j := range g.at {
		var s pairSums
		for i, w := range g.w[j*g.k : (j+1)*g.k] {
			wa, wb := w*a[i], w*b[i]
			s.wy[0] += wa
			s.wy[1] += wb
			s.wyy[0] += wa * a[i]
			s.wyy[1] += wb * b[i]
		}
		g.at[j] = s
	}
}

// excess returns ½(ln ∫∫L²p + ln ∫∫L′²p) − ln ∫∫LL′p for the pair taken: the mean
// over both orders of the pair. With means m and m′ the product LL′ integrates
// over a free mean as L² does, times exp(−Σw(m − m′)²/4).
func (g *grid) excess(free bool) float64 {
	for j, s := range g.at {
		base, qa, qb := g.lnWeight[j], s.wyy[0], s.wyy[1]
		apart := 0.0
		if free {
			w := g.total[j]
			base -= 0.5 * math.Log(w)
			qa -= s.wy[0] * s.wy[0] / w
			qb -= s.wy[1] * s.wy[1] / w
			off := s.wy[0] - s.wy[1]
			apart = 0.25 * off * off / w
		}
		g.ln[0][j] = base - qa
		g.ln[1][j] = base - qb
		g.ln[2][j] = base - 0.5*(qa+qb) - apart
	}
	return 0.5*(lnTotal(g.ln[0])+lnTotal(g.ln[1])) - lnTotal(g.ln[2])
}

// lnTotal returns ln Σexp(x).
func lnTotal(x []float64) float64 {
	top := math.Inf(-1)
	for _, v := range x {
		top = max(top, v)
	}
	total := 0.0
	for _, v := range x {
		if v > top-negligible {
			total += math.Exp(v - top)
		}
	}
	return top + math.Log(total)
}
