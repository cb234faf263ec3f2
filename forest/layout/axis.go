package layout

import (
	"math"
	"slices"

	"steelyard/forest/words"
)

// axis maps values of the analysis scale to x.
type axis struct {
	low, high float64 // ends, analysis scale
	x0, x1    float64 // their places in points
	ratio     bool
	ticks     []tick
}

// tick is a labelled place on an axis.
type tick struct {
	x     float64
	label string
}

// x returns the place of v, which may lie beyond the ends.
func (a axis) x(v float64) float64 {
	return a.x0 + (v-a.low)/(a.high-a.low)*(a.x1-a.x0)
}

// shift moves an axis with its ticks.
func (a *axis) shift(by float64) {
	a.x0, a.x1 = a.x0+by, a.x1+by
	for i := range a.ticks {
		a.ticks[i].x += by
	}
}

// holds reports whether v lies on the axis.
func (a axis) holds(v float64) bool { return a.low <= v && v <= a.high }

// Ladders of tick values within a decade, densest first.
var ladders = [][]float64{
	{1, 1.1, 1.2, 1.3, 1.4, 1.5, 1.6, 1.7, 1.8, 1.9, 2, 2.5, 3, 3.5, 4, 4.5, 5, 6, 7, 8, 9},
	{1, 1.2, 1.5, 2, 2.5, 3, 4, 5, 6, 7, 8},
	{1, 1.5, 2, 3, 5, 7},
	{1, 2, 5},
	{1, 3},
	{1},
}

// labelGap is the least space between the labels of an axis.
const labelGap = 4

// maxTicks bounds the work on one axis; more labels than this never fit.
const maxTicks = 200

// setTicks chooses the densest labels that keep labelGap apart at a type size.
func (a *axis) setTicks(size float64) {
	a.choose(func(ticks []tick) bool { return fits(ticks, size) })
}

// setUprightTicks chooses the densest labels that stand twice a type size apart
// on an axis that runs upwards.
func (a *axis) setUprightTicks(size float64) {
	a.choose(func(ticks []tick) bool {
		for i := 1; i < len(ticks); i++ {
			if math.Abs(ticks[i].x-ticks[i-1].x) < 2*size {
				return false
			}
		}
		return true
	})
}

// choose takes the densest labels that fit.
func (a *axis) choose(fit func([]tick) bool) {
	for _, candidate := range a.candidates() {
		if fit(candidate) {
			a.ticks = candidate
			return
		}
	}
	a.ticks = nil
}

func (a *axis) candidates() [][]tick {
	if !a.ratio {
		return a.linearCandidates(a.low, a.high, func(v float64) float64 { return v })
	}
	var all [][]tick
	low, high := math.Exp(a.low), math.Exp(a.high)
	if high < 1.6*low {
		all = a.linearCandidates(low, high, math.Log)
	}
	for _, ladder := range ladders {
		all = append(all, a.decades(ladder, 1))
	}
	for _, every := range []int{2, 3, 4, 6, 10, 20} {
		all = append(all, a.decades(ladders[len(ladders)-1], every))
	}
	return all
}

// decades returns the ticks mantissa × 10ⁿ on the axis for every so many n.
func (a *axis) decades(ladder []float64, every int) []tick {
	var ticks []tick
	first := int(math.Floor(a.low / math.Ln10))
	last := int(math.Ceil(a.high / math.Ln10))
	for n := first; n <= last; n++ {
		if n%every != 0 {
			continue
		}
		for _, m := range ladder {
			v := math.Log(m) + float64(n)*math.Ln10
			if slack := 1e-9; v >= a.low-slack && v <= a.high+slack {
				ticks = append(ticks, tick{x: a.x(v), label: powerLabel(m, n)})
			}
		}
	}
	return ticks
}

// powerLabel writes m × 10ⁿ, m with at most one decimal.
func powerLabel(m float64, n int) string {
	decimals := 0
	if m != math.Trunc(m) {
		decimals = 1
	}
	return words.Linear(m*math.Pow10(n), max(0, decimals-n))
}

// linearCandidates returns ticks at multiples of 1, 2 and 5 × 10ⁿ between two
// values of the shown scale, densest first; place turns a value into the
// analysis scale.
func (a *axis) linearCandidates(low, high float64, place func(float64) float64) [][]tick {
	var all [][]tick
	span := high - low
	exponent := int(math.Floor(math.Log10(span))) - 2
	for range 4 {
		for _, m := range []float64{1, 2, 5} {
			step := m * math.Pow10(exponent)
			if span/step > maxTicks {
				continue
			}
			var ticks []tick
			for i := math.Ceil(low/step - 1e-9); i*step <= high+1e-9*step; i++ {
				ticks = append(ticks, tick{x: a.x(place(i * step)), label: words.Linear(i*step, max(0, -exponent))})
			}
			all = append(all, ticks)
		}
		exponent++
	}
	return all
}

// fits reports whether labels stand labelGap apart.
func fits(ticks []tick, size float64) bool {
	for i := 1; i < len(ticks); i++ {
		need := (Width(ticks[i-1].label, size, false)+Width(ticks[i].label, size, false))/2 + labelGap
		if ticks[i].x-ticks[i-1].x < need {
			return false
		}
	}
	return true
}

// outward widens a span to round values, which is where an axis ends.
func outward(low, high float64, ratio bool) (float64, float64) {
	pad := 0.02 * (high - low)
	low, high = low-pad, high+pad
	if !ratio {
		step := roundStep((high - low) / 8)
		return math.Floor(low/step) * step, math.Ceil(high/step) * step
	}
	lowRatio, highRatio := math.Exp(low), math.Exp(high)
	if highRatio < 1.6*lowRatio {
		step := roundStep((highRatio - lowRatio) / 8)
		if l := math.Floor(lowRatio/step) * step; l > 0 {
			low = math.Log(l)
		}
		return low, math.Log(math.Ceil(highRatio/step) * step)
	}
	ladder := ladders[2]
	if highRatio < 4*lowRatio {
		ladder = ladders[0]
	}
	return roundLog(low, ladder, false), roundLog(high, ladder, true)
}

// roundStep returns the smallest of 1, 2, 5 × 10ⁿ that is at least v.
func roundStep(v float64) float64 {
	power := math.Pow10(int(math.Floor(math.Log10(v))))
	for _, m := range []float64{1, 2, 5} {
		if m*power >= v {
			return m * power
		}
	}
	return 10 * power
}

// roundLog returns the log of the nearest ladder value × 10ⁿ at or beyond v.
func roundLog(v float64, ladder []float64, up bool) float64 {
	n := math.Floor(v / math.Ln10)
	var marks []float64
	for _, m := range append(slices.Clone(ladder), 10) {
		marks = append(marks, math.Log(m)+n*math.Ln10)
	}
	if up {
		for _, mark := range marks {
			if mark >= v-1e-12 {
				return mark
			}
		}
		return marks[len(marks)-1]
	}
	for _, mark := range slices.Backward(marks) {
		if mark <= v+1e-12 {
			return mark
		}
	}
	return marks[0]
}
