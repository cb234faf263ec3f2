package meta

import (
	"math"
	"math/bits"

	"steelyard/meta/evidence"
)

// subsetSums pools subsets from the sums of w, w², wy and wy² at τ² = 0 over
// those of their studies in the lower and in the upper half, both looked up in
// tables: each sum is one addition, and no rounding piles up from one subset to
// the next. It is only read once made.
type subsetSums struct {
	low, high []partialSums
	half      int       // studies in the lower half
	y, v      []float64 // working units, from the common mean of all studies
	null      float64
	centre    float64 // of y, as given
	unit      float64
	random    bool
	knapp     bool
	least     float64 // factor on the variance is at least this: 1 with the floor
	form      evidence.Form
	matched   []*matchedCurve // by degrees of freedom
}

// partialSums are the sums over some studies.
type partialSums struct{ w, ww, wy, wyy float64 }

const (
	// scatterKept is the share of Σwy² that Q must keep for its digits to be trusted,
	// and weightKept that of Σw which Σw − Σw²/Σw must keep.
	scatterKept = 1e-4
	weightKept  = 1e-3
)

// newSubsetSums returns the sums for a Refit whose method they serve, else nil.
func newSubsetSums(r Refit) *subsetSums {
	p, ok := r.(*Pairs)
	if !ok || p.K() < 2 {
		return nil
	}
	m, err := p.model.Resolve(p.K())
	if err != nil {
		return nil
	}
	random := m.Effects == RandomEffects
	if (random && m.Tau != DerSimonianLaird) || m.Interval == ProfileLikelihood || m.Interval == HenmiCopas {
		return nil
	}
	var d sample
	if d.load(p.y, p.s) != nil {
		return nil
	}
	mean := d.at(0).mean
	f := &subsetSums{
		v: d.v, centre: d.centre, unit: d.unit, half: p.K() / 2, random: random, form: m.Evidence,
		knapp: m.Interval == HartungKnapp || m.Interval == HartungKnappFloor,
	}
	if m.Interval == HartungKnappFloor {
		f.least = 1
	}
	f.null = (m.Null-d.centre)/d.unit - mean
	for _, y := range d.y {
		f.y = append(f.y, y-mean)
	}
	f.centre = d.place(mean)
	f.low, f.high = f.table(0, f.half), f.table(f.half, p.K())
	if f.knapp && f.form == evidence.Empirical {
		f.matched = make([]*matchedCurve, p.K())
		for df := 1; df < p.K(); df++ {
			f.matched[df] = newMatchedCurve(float64(df))
		}
	}
	return f
}

// table returns the sums over every subset of the studies from … to−1.
func (f *subsetSums) table(from, to int) []partialSums {
	sums := make([]partialSums, 1<<(to-from))
	for mask := uint(1); mask < uint(len(sums)); mask++ {
		i := from + bits.TrailingZeros(mask)
		w, y := 1/f.v[i], f.y[i]
		p := sums[mask&(mask-1)]
		sums[mask] = partialSums{p.w + w, p.ww + w*w, p.wy + w*y, p.wyy + w*y*y}
	}
	return sums
}

// pool returns the result for the studies whose bits are set; false where too
// many digits would cancel and the subset must be refitted.
func (f *subsetSums) pool(mask uint32) (subsetPoint, bool) {
	low, high := f.low[mask&(1<<f.half-1)], f.high[mask>>f.half]
	w, wy, wyy := low.w+high.w, low.wy+high.wy, low.wyy+high.wyy
	mean := wy / w
	n := bits.OnesCount32(mask)
	if n == 1 {
		return f.point(mean, 1/w, 0)
	}
	q, df := wyy-wy*mean, float64(n-1)
	if !(q > scatterKept*wyy) {
		return subsetPoint{}, false
	}
	if f.random && q > df {
		c := w - (low.ww+high.ww)/w
		if c < weightKept*w {
			return subsetPoint{}, false
		}
		var ok bool
		if mean, w, q, ok = f.spread(mask, (q-df)/c, mean); !ok {
			return subsetPoint{}, false
		}
	}
	if !f.knapp {
		return f.point(mean, 1/w, 0)
	}
	return f.point(mean, max(f.least, q/df)/w, n-1)
}

// spread returns mean, Σw and Q at a τ² above 0, summed about a mean near by.
func (f *subsetSums) spread(mask uint32, tau2, near float64) (mean, w, q float64, ok bool) {
	var wr, wrr float64
	for rest := mask; rest != 0; rest &= rest - 1 {
		i := bits.TrailingZeros32(rest)
		a, r := 1/(f.v[i]+tau2), f.y[i]-near
		w += a
		wr += a * r
		wrr += a * r * r
	}
	shift := wr / w
	q = wrr - wr*shift
	return near + shift, w, q, q > scatterKept*wrr
}

// point returns the result at a mean with its variance: normal, or Student-t with
// df > 0 degrees of freedom; false if it is out of range.
func (f *subsetSums) point(mean, variance float64, df int) (subsetPoint, bool) {
	t := (mean - f.null) / math.Sqrt(variance)
	p := subsetPoint{estimate: f.centre + mean*f.unit, statistic: t}
	switch {
	case df == 0:
		p.ln = evidence.Normal(t).Ln()
	case f.form == evidence.StudentForm:
		p.ln = evidence.Student(t, float64(df)).Ln()
	default:
		p.ln = f.matched[df].ln(t)
	}
	return p, math.Abs(p.ln) <= math.MaxFloat64
}

// matchedCurve is the matched evidence of Student's t at one number of degrees of
// freedom, as polynomials in x = √((df − ½) ln(1 + t²/df)), which is close to the
// normal statistic z of equal p: z − x is followed within 1e-11.
type matchedCurve struct {
	df     float64
	panels [matchedPanels][matchedTerms]float64 // Chebyshev coefficients
}

const (
	matchedPanels = 16 // of matchedWidth: to x = 16, beyond which the curve is left
	matchedWidth  = 1
	matchedTerms  = 14
)

func newMatchedCurve(df float64) *matchedCurve {
	c := &matchedCurve{df: df}
	for panel := range c.panels {
		var values [matchedTerms]float64
		for j := range values {
			x := matchedWidth * (float64(panel) + 0.5 + 0.5*chebyshevNode(j))
			values[j] = evidence.MatchedZ(c.statistic(x), df) - x
		}
		c.panels[panel] = chebyshev(values)
	}
	return c
}

// statistic returns the t of an x.
func (c *matchedCurve) statistic(x float64) float64 {
	return math.Sqrt(c.df * math.Expm1(x*x/(c.df-0.5)))
}

// ln returns the log of the matched evidence of t.
func (c *matchedCurve) ln(t float64) float64 {
	x := math.Sqrt((c.df - 0.5) * math.Log1p(t*t/c.df))
	panel := int(x / matchedWidth)
	if !(x < matchedPanels*matchedWidth) {
		return evidence.Matched(t, c.df).Ln()
	}
	u := 2*(x/matchedWidth-float64(panel)) - 1
	a := &c.panels[panel]
	var b1, b2 float64 // Clenshaw's recursion
	for j := matchedTerms - 1; j > 0; j-- {
		b1, b2 = a[j]+2*u*b1-b2, b1
	}
	return evidence.Normal(x + a[0] + u*b1 - b2).Ln()
}

// chebyshevNode returns the j-th node on (−1, 1).
func chebyshevNode(j int) float64 {
	return math.Cos(math.Pi * (float64(j) + 0.5) / matchedTerms)
}

// chebyshev returns the coefficients of the polynomial through the values at the
// nodes.
func chebyshev(values [matchedTerms]float64) [matchedTerms]float64 {
	var a [matchedTerms]float64
	for n := range a {
		for j, value := range values {
			a[n] += value * math.Cos(math.Pi*float64(n)*(float64(j)+0.5)/matchedTerms)
		}
		a[n] *= 2. / matchedTerms
	}
	a[0] /= 2
	return a
}
