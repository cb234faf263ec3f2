package sparse

import (
	"fmt"
	"math"

	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
)

// conditionalExact estimates a common odds ratio by conditional maximum
// likelihood given the margins of every table. The total T of the events in the
// treated arms is sufficient, with the convolution of the tables' non-central
// hypergeometric laws. The limits invert both one-sided tests at α/2,
//
//	P(T ≥ t | lower) = α/2,  P(T ≤ t | upper) = α/2,
//
// and the p-value of the mean is that of the limits: twice the smaller of both
// tails at the null. Its statistic is the signed root of the conditional
// likelihood ratio, z² = 2(l_max − l(null)), at which the evidence is taken in
// the normal form; beside few events the exact p-value is larger than that of z.
// The standard error is the root of the inverse conditional information, and
// weights are the tables' shares of that. Heterogeneity is LikelihoodRatio.
//
// Where t is the least or the most the margins allow, the estimate is 0 or
// infinite; the *BoundaryError carries the other limit and the evidence.
//
// Sources: Gart (1970), Biometrika 57:471-475; Mehta, Patel & Gray (1985),
// Journal of the American Statistical Association 80:969-973 (both from memory).
func (m Model) conditionalExact(tables []effect.Table) (*Result, error) {
	c := newConditional(tables)
	if side := toward(tables); side != 0 {
		return nil, c.oneSided(m, side)
	}
	theta, err := c.peak()
	if err != nil {
		return nil, err
	}
	if err = c.convolve(); err != nil {
		return nil, err
	}
	top, se := c.lnL, 1/math.Sqrt(c.information)
	low, high, err := c.limits(theta, se, 1-m.Level)
	if err != nil {
		return nil, err
	}
	lnP, atNull, err := c.lnP(theta, m.Null)
	if err != nil {
		return nil, err
	}
	q, err := c.scatter(top)
	if err != nil {
		return nil, err
	}
	r := m.rooted(theta, se, signedRoot(top-atNull, theta, m.Null), low, high)
	r.Mean.LnP, r.Mean.Q = lnP, q
	r.Weights = c.weights
	r.Heterogeneity = scattered(LikelihoodRatio, q, len(tables))
	return r, nil
}

// conditional is the conditional likelihood of a common odds ratio: the laws of
// the tables and, once convolved, that of their total at one odds ratio.
type conditional struct {
	tables      []margins
	laws        []law
	at          float64 // log odds ratio of the laws
	lnL         float64 // their log-likelihood
	information float64
	weights     []float64 // per table, its part of the information at the estimate
	total       []float64 // law of the total at peakAt, from the total first on
	first       float64
	peakAt      float64
	peakLnL     float64
	observed    float64
}

func newConditional(tables []effect.Table) *conditional {
	c := &conditional{tables: make([]margins, len(tables)), laws: make([]law, len(tables))}
	for i, t := range tables {
		c.tables[i] = marginsOf(t)
		c.observed += t.Events1
	}
	return c
}

// move takes the laws of all tables to a log odds ratio and returns the slope of
// the log-likelihood there.
func (c *conditional) move(theta float64) (slope float64, err error) {
	var gap, lnL, information numeric.Sum
	for i, g := range c.tables {
		l, err := g.at(theta, c.laws[i].share)
		if err != nil {
			return 0, err
		}
		c.laws[i] = l
		gap.Add(g.observed - l.mean)
		lnL.Add(l.lnObserved)
		information.Add(l.variance)
	}
	c.at, c.lnL, c.information = theta, lnL.Value(), information.Value()
	return gap.Value(), nil
}

// widestStep is the longest step in a log odds ratio towards a maximum.
const widestStep = 3

// peakTolerance is the last step towards a maximum, in standard errors.
const peakTolerance = 1e-7

// peak moves to the log odds ratio of the highest likelihood and returns it.
func (c *conditional) peak() (float64, error) {
	var failed error
	theta, err := ascend(func(theta float64) (float64, float64) {
		slope, err := c.move(theta)
		if err != nil {
			failed = err
			return 0, 0
		}
		return slope, -c.information
	}, 0, widestStep, peakTolerance)
	if failed != nil {
		return 0, failed
	}
	if err != nil {
		return 0, fmt.Errorf("common odds ratio: %w", err)
	}
	if _, err = c.move(theta); err != nil {
		return 0, err
	}
	c.weights = make([]float64, len(c.laws))
	for i, l := range c.laws {
		c.weights[i] = l.variance
	}
	return theta, nil
}

// mostProducts is how many products a convolution takes at most: some ten
// seconds' worth.
const mostProducts = 1e10

// convolve sets the law of the total at the present log odds ratio. Sums of
// positive products lose no digits; ends below negligible of the largest are
// left out as in each law.
func (c *conditional) convolve() error {
	c.peakAt, c.peakLnL = c.at, c.lnL
	c.total, c.first = []float64{1}, 0
	products := 0.0
	for _, l := range c.laws {
		products += float64(len(c.total)) * float64(len(l.share))
		if products > mostProducts {
			return &SizeError{Terms: products}
		}
		next := make([]float64, len(c.total)+len(l.share)-1)
		for i, p := range l.share {
			row := next[i : i+len(c.total)]
			for j, q := range c.total {
				row[j] += p * q
			}
		}
		c.first += l.first
		c.trim(next)
	}
	return nil
}

// trim keeps of the probabilities those that are not negligible at the ends.
func (c *conditional) trim(p []float64) {
	largest := 0.0
	for _, x := range p {
		largest = max(largest, x)
	}
	from, to := 0, len(p)
	for p[from] < negligible*largest {
		from++
	}
	for p[to-1] < negligible*largest {
		to--
	}
	c.first += float64(from)
	c.total = p[from:to]
}

// lnTail returns, at log odds ratio theta, ln P(T ≥ t) if theta lies below the
// estimate and ln P(T ≤ t) if it lies above, and ln P(T = t). With g the
// estimate,
//
//	P(T = s | θ) = P(T = t | θ) · P(s|g)/P(t|g) · e^((θ−g)(s−t)),
//
// where the last factor falls away from t throughout the tail that is asked for:
// what the law at g leaves out matters less in it than at g.
func (c *conditional) lnTail(theta float64) (lnTail, lnPoint float64, err error) {
	if _, err = c.move(theta); err != nil {
		return 0, 0, err
	}
	t := int(c.observed - c.first)
	lnPoint = math.Log(c.total[t]) + c.lnL - c.peakLnL
	tilt := math.Exp(-math.Abs(theta - c.peakAt))
	step := 1
	if theta > c.peakAt {
		step = -1
	}
	var sum numeric.Sum
	for s, factor := t, 1.0; s >= 0 && s < len(c.total); s, factor = s+step, factor*tilt {
		sum.Add(c.total[s] / c.total[t] * factor)
	}
	return min(0, lnPoint+math.Log(sum.Value())), lnPoint, nil
}

// limits returns the exact limits of the log odds ratio, each at alpha/2. They
// are looked for by their distance from the estimate theta, whose standard error
// is se.
func (c *conditional) limits(theta, se, alpha float64) (low, high float64, err error) {
	low, err = c.limit(theta, -1, se, math.Log(alpha/2))
	if err != nil {
		return 0, 0, err
	}
	high, err = c.limit(theta, 1, se, math.Log(alpha/2))
	return low, high, err
}

// limitTolerance is relative to the distance between limit and estimate.
const limitTolerance = 1e-12

func (c *conditional) limit(theta, side, reach, want float64) (float64, error) {
	var failed error
	over := func(gap float64) float64 {
		tail, _, err := c.lnTail(theta + side*gap)
		if err != nil {
			failed = err
			return math.NaN()
		}
		return tail - want
	}
	near, far := 0.0, reach
	for over(far) > 0 && far < 256 {
		near, far = far, 2*far
	}
	if failed == nil && near == 0 && over(near) <= 0 {
		return theta, nil // a level so low that the point itself is in both tails
	}
	gap, err := numeric.Root(over, near, far, limitTolerance)
	if failed != nil {
		return 0, failed
	}
	if err != nil {
		return 0, fmt.Errorf("exact limit of the odds ratio: %w", err)
	}
	return theta + side*gap, nil
}

// lnP returns the log of the exact two-sided p-value and the log-likelihood at
// the null.
func (c *conditional) lnP(theta, null float64) (lnP, lnL float64, err error) {
	tail, point, err := c.lnTail(null)
	if err != nil {
		return 0, 0, err
	}
	other := 1 - math.Exp(tail) + math.Exp(point)
	if other > 0 {
		tail = min(tail, math.Log(other))
	}
	return min(0, math.Ln2+tail), c.lnL, nil
}

// scatter returns twice the log of the likelihood ratio of an odds ratio for
// each table against the common one, whose log-likelihood is top. A table at an
// end of its range is certain under its own.
func (c *conditional) scatter(top float64) (float64, error) {
	sum := numeric.Sum{}
	sum.Add(-top)
	for _, g := range c.tables {
		if g.observed == g.low || g.observed == g.high {
			continue
		}
		own := conditional{tables: []margins{g}, laws: make([]law, 1), observed: g.observed}
		if _, err := own.peak(); err != nil {
			return 0, err
		}
		sum.Add(own.lnL)
	}
	return 2 * max(0, sum.Value()), nil
}

// oneSided returns the error of an estimate at 0 (side −1) or infinity (side 1).
// The probability of what was observed is then the tail itself, and tends to 1
// towards the estimate.
func (c *conditional) oneSided(m Model, side int) error {
	var failed error
	lnL := func(theta float64) float64 {
		if _, err := c.move(theta); err != nil {
			failed = err
			return math.NaN()
		}
		return c.lnL
	}
	want, away := math.Log((1-m.Level)/2), float64(-side)
	limit, err := crossing(func(theta float64) float64 { return lnL(theta) - want }, away)
	atNull := lnL(m.Null)
	if failed != nil {
		return failed
	}
	if err != nil {
		return fmt.Errorf("exact limit of the odds ratio: %w", err)
	}
	z := signedRoot(-atNull, float64(side), 0)
	return &BoundaryError{Toward: side, OneSided: &OneSided{
		Limit: limit, Statistic: z, LnP: min(0, math.Ln2+atNull), Evidence: evidence.Normal(z),
	}}
}

// crossing returns where f, which falls in the direction away (1 or −1) from
// above 0 to below, is 0.
func crossing(f func(float64) float64, away float64) (float64, error) {
	above, below := 0.0, 0.0
	for step := 1.0; f(above) <= 0 && step < 256; step *= 2 {
		above -= away * step
	}
	for step := 1.0; f(below) > 0 && step < 256; step *= 2 {
		below += away * step
	}
	return numeric.Root(f, above, below, limitTolerance)
}
