package evidence

import (
	"math"

	"steelyard/meta/numeric"
)

// narrow is the width, times the distance from the estimate, below which a strip
// is taken by its middle and width: its ends as floating-point numbers would no
// longer carry the width.
const narrow = 1e-4

// strip is an interval of a region in standard errors from the estimate. The
// width is kept apart because high - low can lose it.
type strip struct{ low, high, width float64 }

// mid is the middle of a narrow strip.
func (s strip) mid() float64 { return s.low + 0.5*(s.high-s.low) }

// narrow says whether the strip is taken by its middle and width.
func (s strip) narrow() bool {
	return s.width*max(1, math.Abs(s.low), math.Abs(s.high)) < narrow
}

// strips is a region in standard errors from the estimate.
type strips []strip

// standardised returns the region in standard errors from the estimate.
func (l Location) standardised(r Region) strips {
	s := make(strips, len(r))
	for i, x := range r {
		s[i] = strip{
			low:   (x.Low - l.Estimate) / l.SE,
			high:  (x.High - l.Estimate) / l.SE,
			width: (x.High - x.Low) / l.SE,
		}
	}
	return s
}

// matched returns the region in standard errors from the estimate with every
// limit b replaced by the normal quantile of its Student-t probability; the same
// limits when the error is normal.
func (l Location) matched(r Region) strips {
	s := l.standardised(r)
	if math.IsInf(l.DF, 1) {
		return s
	}
	for i, x := range s {
		low, high := MatchedZ(x.low, l.DF), MatchedZ(x.high, l.DF)
		width := high - low
		if x.narrow() {
			slope := numeric.LogStudentDensity(x.mid(), l.DF) - numeric.LogStudentDensity(MatchedZ(x.mid(), l.DF), math.Inf(1))
			width = x.width * math.Exp(slope)
		}
		s[i] = strip{low: low, high: high, width: width}
	}
	return s
}

// nearest returns the point of the region nearest to the estimate; the lower of
// two that are equally near.
func (s strips) nearest() float64 {
	best := math.Inf(1)
	for _, x := range s {
		switch {
		case x.low > 0 && x.low < math.Abs(best):
			best = x.low
		case x.high < 0 && -x.high < math.Abs(best):
			best = x.high
		case x.low <= 0 && x.high >= 0:
			return 0
		}
	}
	return best
}

// lnNormal returns ln Σ[Φ(c(high-x)) - Φ(c(low-x))] over the strips.
func (s strips) lnNormal(c, x float64) float64 {
	total := math.Inf(-1)
	for _, p := range s {
		total = addLn(total, lnNormalStrip(strip{low: c * (p.low - x), high: c * (p.high - x), width: c * p.width}))
	}
	return total
}

func lnNormalStrip(p strip) float64 {
	if p.narrow() {
		return numeric.LogNormalStrip(p.mid(), p.width)
	}
	return numeric.LogNormalBetween(p.low, p.high)
}

// lnStudent returns ln Σ[F(c·high) - F(c·low)] over the strips, F being Student's
// t distribution function.
func (s strips) lnStudent(c, df float64) float64 {
	total := math.Inf(-1)
	for _, p := range s {
		q := strip{low: c * p.low, high: c * p.high, width: c * p.width}
		if q.narrow() {
			total = addLn(total, numeric.LogStudentStrip(q.mid(), q.width, df))
		} else {
			total = addLn(total, numeric.LogStudentBetween(q.low, q.high, df))
		}
	}
	return total
}

// addLn returns ln(exp(a) + exp(b)).
func addLn(a, b float64) float64 {
	if a < b {
		a, b = b, a
	}
	if math.IsInf(b, -1) {
		return a
	}
	return a + math.Log1p(math.Exp(b-a))
}
