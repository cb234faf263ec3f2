package missing

import (
	"math"
	"slices"

	"steelyard/meta"
	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
)

// Selection is a one-step selection model: results with a one-sided p below the
// step are seen always, the others at a relative rate.
type Selection struct {
	Mean      meta.Mean // adjusted; an infinite limit where the data set none
	Rate      float64   // at which results above the step are seen, relative to the others
	LnP       float64   // natural log of the p-value of the likelihood ratio against a rate of 1
	Chi2      float64   // its statistic, on 1 degree of freedom
	Evidence  evidence.Ratio
	Unlikely  int // studies above the step
	Step      float64
	Direction Side // of the results that are sought
}

// OneStep fits the selection model by maximum likelihood:
//
//	Σ [ln φ((y−μ)/σ) − ln σ + ln w − ln(P₁ + r·P₀)],  σ² = s² + τ²,
//
// w the rate r where the one-sided p of y against the model's null, towards the
// direction, lies above the step and 1 else; P₁ and P₀ are the chances of p below
// and above the step. For each μ and τ the rate is the one root of its score, and
// μ and τ are scanned before they are refined, so that no start is needed and the
// highest of several maxima is taken. The interval is that of the profile
// likelihood, the evidence the normal form of its likelihood ratio.
//
// It returns ErrOneSide where all studies lie on one side of the step, and
// ErrNoMaximum where the likelihood rises beyond four times the range of the
// estimates.
//
// Source: Vevea & Hedges (1995), Psychometrika 60:419-435.
func OneStep(m meta.Model, y, s []float64, step float64, direction Side) (*Selection, error) {
	if err := check(y, s); err != nil {
		return nil, err
	}
	if len(y) < 3 {
		return nil, ErrTooFew
	}
	if !(step > 0 && step < 0.5) {
		return nil, &InputError{Index: -1, Problem: "the step lies between 0 and 0.5, such as 0.025"}
	}
	d := newStepped(m, y, s, step, direction)
	if d.unlikely == 0 || d.unlikely == len(y) {
		return nil, ErrOneSide
	}
	mu, deviance, err := lowestOf(d.profile, d.low, d.high, muScan)
	if err != nil {
		return nil, err
	}
	if edge := (d.high - d.low) / muScan; mu < d.low+edge || mu > d.high-edge {
		return nil, ErrNoMaximum
	}
	out := &Selection{Unlikely: d.unlikely, Step: step, Direction: direction}
	tau, _ := d.bestTau(mu)
	rate, _ := d.bestRate(mu, tau)
	out.Rate = math.Exp(rate)
	out.Mean = d.mean(m, mu, tau, deviance)
	_, plain, err := lowestOf(d.unselected, d.low, d.high, muScan)
	if err != nil {
		return nil, err
	}
	out.Chi2 = max(0, plain-deviance)
	out.LnP = min(0, numeric.LogChiSquareTail(out.Chi2, 1))
	out.Evidence = evidence.Normal(math.Sqrt(out.Chi2))
	return out, finite(out.Mean)
}

// The number of places at which the likelihood is looked at before it is refined.
const (
	muScan  = 80
	tauScan = 32
)

// stepped is a set of studies in working units: measured from the null towards the
// direction sought, in units of the median standard error.
type stepped struct {
	y, s      []float64
	above     []bool    // p above the step
	cut       []float64 // estimate at which p is the step
	unlikely  int
	unit      float64
	direction float64
	low, high float64 // range searched for μ
	widest    float64 // and for τ
	rest      []float64
}

func newStepped(m meta.Model, y, s []float64, step float64, direction Side) *stepped {
	sorted := slices.Sorted(slices.Values(s))
	d := &stepped{unit: sorted[len(sorted)/2], direction: 1, rest: make([]float64, len(y))}
	if direction == Lower {
		d.direction = -1
	}
	critical := numeric.NormalCritical(2 * step)
	for i := range y {
		d.y = append(d.y, d.direction*(y[i]-m.Null)/d.unit)
		d.s = append(d.s, s[i]/d.unit)
		d.cut = append(d.cut, critical*d.s[i])
		d.above = append(d.above, d.y[i] <= d.cut[i])
		if d.above[i] {
			d.unlikely++
		}
	}
	lowest, highest := slices.Min(d.y), slices.Max(d.y)
	spread := highest - lowest + 1
	d.low, d.high, d.widest = lowest-4*spread, highest+spread, 8*spread
	return d
}

// lnRatios fills in ln P₀ − ln P₁ and returns Σ of the density's deviance and of
// 2 ln P₁.
func (d *stepped) lnRatios(mu, tau float64) (density, likely float64) {
	var q, p numeric.Sum
	for i := range d.y {
		sigma := math.Hypot(d.s[i], tau)
		z := (d.y[i] - mu) / sigma
		q.Add(z*z + 2*math.Log(sigma))
		at := (d.cut[i] - mu) / sigma
		seen := numeric.LogNormalTail(at)
		d.rest[i] = numeric.LogNormalTail(-at) - seen
		p.Add(2 * seen)
	}
	return q.Value(), p.Value()
}

// bestRate returns the ln of the rate at which the likelihood of μ and τ is
// highest, and the deviance there: the root of Σ rP₀/(P₁ + rP₀) = number above the
// step, of which there is one.
func (d *stepped) bestRate(mu, tau float64) (lnRate, deviance float64) {
	density, likely := d.lnRatios(mu, tau)
	reach := math.Log(float64(len(d.y))) + 5
	excess := func(lnRate float64) float64 {
		sum := -float64(d.unlikely)
		for _, r := range d.rest {
			sum += 1 / (1 + math.Exp(-lnRate-r))
		}
		return sum
	}
	lnRate, err := numeric.Root(excess, -slices.Max(d.rest)-reach, -slices.Min(d.rest)+reach, 1e-13)
	if err != nil {
		return 0, math.Inf(1)
	}
	return lnRate, density + likely + d.penalty(lnRate)
}

// penalty is −2 times what the rate adds to the log likelihood, beside 2 Σ ln P₁.
func (d *stepped) penalty(lnRate float64) float64 {
	sum := -2 * float64(d.unlikely) * lnRate
	for _, r := range d.rest {
		x := lnRate + r
		sum += 2 * (max(0, x) + math.Log1p(math.Exp(-math.Abs(x))))
	}
	return sum
}

// bestTau returns the τ at which the likelihood of μ is highest, and the deviance.
func (d *stepped) bestTau(mu float64) (tau, deviance float64) {
	tau, deviance, err := numeric.ScannedMinimum(func(tau float64) float64 { _, dev := d.bestRate(mu, tau); return dev }, 0, d.widest, tauScan)
	if err != nil {
		return 0, math.Inf(1)
	}
	return tau, deviance
}

// profile is the deviance of μ with τ and the rate at their best.
func (d *stepped) profile(mu float64) float64 {
	_, deviance := d.bestTau(mu)
	return deviance
}

// unselected is the deviance of μ with τ at its best and a rate of 1.
func (d *stepped) unselected(mu float64) float64 {
	_, deviance, err := numeric.ScannedMinimum(func(tau float64) float64 {
		density, _ := d.lnRatios(mu, tau)
		return density
	}, 0, d.widest, tauScan)
	if err != nil {
		return math.Inf(1)
	}
	return deviance
}

// lowestOf returns the lowest of an even scan, refined between its neighbours.
func lowestOf(f func(float64) float64, low, high float64, points int) (x, fx float64, err error) {
	step := (high - low) / float64(points)
	best := 0
	fx = math.Inf(1)
	for i := 0; i <= points; i++ {
		if v := f(low + step*float64(i)); v < fx {
			best, fx = i, v
		}
	}
	from, to := low+step*float64(max(0, best-1)), low+step*float64(min(points, best+1))
	return numeric.Minimum(f, from, to, 1e-10)
}

// mean returns the estimate in given units with its profile-likelihood interval.
func (d *stepped) mean(m meta.Model, mu, tau, deviance float64) meta.Mean {
	critical := numeric.NormalCritical(1 - m.Level)
	near := d.limit(mu, deviance+critical*critical, -1)
	far := d.limit(mu, deviance+critical*critical, 1)
	z := math.Copysign(math.Sqrt(max(0, d.profile(0)-deviance)), d.direction*mu)
	out := meta.Mean{K: len(d.y), DF: math.Inf(1), Tau2: tau * tau * d.unit * d.unit, Statistic: z}
	place := func(x float64) float64 { return m.Null + d.direction*x*d.unit }
	out.Estimate, out.Low, out.High = place(mu), place(near), place(far)
	if d.direction < 0 {
		out.Low, out.High = out.High, out.Low
	}
	out.LnP = min(0, math.Ln2+numeric.LogNormalTail(math.Abs(z)))
	out.Evidence = evidence.Normal(z)
	out.SE = (out.Estimate - m.Null) / z
	if width := (out.High - out.Low) / (2 * critical); !(out.SE > 0) || math.Abs(z) < 1e-6 {
		out.SE = width
	}
	if math.IsInf(out.SE, 0) {
		out.SE = math.Max(math.Abs(out.Low-out.Estimate), math.Abs(out.High-out.Estimate))
	}
	return out.Located(evidence.Location{Estimate: out.Estimate, SE: out.SE, DF: math.Inf(1)})
}

// farthest is how many median standard errors from the estimate a limit is looked
// for.
const farthest = 1e4

// limit returns where the profile first passes a deviance on one side of μ;
// infinite if it does not within reach.
func (d *stepped) limit(mu, deviance, side float64) float64 {
	inside := mu
	for reach := 0.05; reach < farthest; reach *= 1.5 {
		x := mu + side*reach
		if d.profile(x) > deviance {
			limit, err := numeric.Root(func(x float64) float64 { return d.profile(x) - deviance }, math.Min(inside, x), math.Max(inside, x), 1e-9)
			if err != nil {
				return x
			}
			return limit
		}
		inside = x
	}
	return side * math.Inf(1)
}
