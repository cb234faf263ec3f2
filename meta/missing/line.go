package missing

import (
	"fmt"
	"math"

	"steelyard/meta/numeric"
)

// line is a weighted straight line, y = level + slope·x, by an orthogonal
// decomposition of the weighted columns 1 and x: x is centred at its weighted
// mean, so that nothing is lost to cancellation.
type line struct {
	level, slope       float64
	levelVar, slopeVar float64 // at a dispersion of 1
	lnDet              float64 // ln of the determinant of XᵀWX
	rss                float64 // weighted sum of squared residuals
	df                 float64
}

// mostAlike is how far predictors may spread, relative to their size, and still
// count as all alike.
const mostAlike = 1e-9

// fitLine fits y on x with weights w. Errors are ErrTooFew below three studies and
// ErrAlike where x does not vary.
func fitLine(y, x, w []float64) (line, error) {
	if len(y) < 3 {
		return line{}, ErrTooFew
	}
	low, high := x[0], x[0]
	for _, v := range x {
		low, high = min(low, v), max(high, v)
	}
	if high-low <= mostAlike*math.Max(math.Abs(low), math.Abs(high)) {
		return line{}, ErrAlike
	}
	centre := heaviest(w)
	total, meanX, meanY := weightedMeans(y, x, w, y[centre], x[centre])
	var sxx, sxy numeric.Sum
	for i := range y {
		dx := x[i] - meanX
		sxx.Add(w[i] * dx * dx)
		sxy.Add(w[i] * dx * (y[i] - meanY))
	}
	if !(sxx.Value() > 0) || math.IsInf(sxx.Value(), 0) {
		return line{}, ErrAlike
	}
	l := line{slope: sxy.Value() / sxx.Value(), slopeVar: 1 / sxx.Value(), df: float64(len(y) - 2)}
	l.level = meanY - l.slope*meanX
	l.levelVar = 1/total + meanX*meanX/sxx.Value()
	l.lnDet = math.Log(total) + math.Log(sxx.Value())
	var rss numeric.Sum
	for i := range y {
		r := y[i] - meanY - l.slope*(x[i]-meanX)
		rss.Add(w[i] * r * r)
	}
	l.rss = rss.Value()
	return l, nil
}

func heaviest(w []float64) int {
	best := 0
	for i := range w {
		if w[i] > w[best] {
			best = i
		}
	}
	return best
}

// weightedMeans returns Σw and the weighted means of x and y, summed as distances
// from given centres.
func weightedMeans(y, x, w []float64, y0, x0 float64) (total, meanX, meanY float64) {
	var sw, sx, sy numeric.Sum
	for i := range y {
		sw.Add(w[i])
		sx.Add(w[i] * (x[i] - x0))
		sy.Add(w[i] * (y[i] - y0))
	}
	return sw.Value(), x0 + sx.Value()/sw.Value(), y0 + sy.Value()/sw.Value()
}

// scatterless reports whether the residuals are rounding errors.
func (l line) scatterless(y, w []float64) bool {
	var size float64
	for i := range y {
		size += w[i] * y[i] * y[i]
	}
	return l.rss <= 1e-24*size || l.rss == 0
}

// largest bounds numbers whose squares are taken.
const largest = 1e150

// check returns an *InputError for a number that cannot be used.
func check(y, s []float64) error {
	if len(y) != len(s) {
		return &InputError{Index: -1, Problem: fmt.Sprintf("%d estimates but %d standard errors: give one of each per study", len(y), len(s))}
	}
	for i := range y {
		switch {
		case math.IsNaN(y[i]) || math.Abs(y[i]) > largest:
			return &InputError{Index: i, Problem: fmt.Sprintf("the estimate %v cannot be used: correct it or leave the study out", y[i])}
		case !(s[i] >= 1/largest && s[i] <= largest):
			return &InputError{Index: i, Problem: fmt.Sprintf("the standard error %v cannot be used: correct it or leave the study out", s[i])}
		}
	}
	return nil
}

// reciprocalSquares returns 1/s².
func reciprocalSquares(s []float64) []float64 {
	w := make([]float64, len(s))
	for i, x := range s {
		w[i] = 1 / (x * x)
	}
	return w
}
