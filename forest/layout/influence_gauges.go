package layout

import (
	"math"
	"strings"

	"steelyard/forest/words"
)

// gauge is one column of an influence chart: a small axis with the numbers
// beside it, or under its marks in rows of two lines.
type gauge struct {
	kind        gaugeKind
	head, under string // the two lines of its heading
	ends        span   // of the axis, in its own unit
	place       span   // of the axis, in points
	numberEnd   float64
	numbers     float64 // width of the widest number
	ticks       []tick
}

// gaugeKind says what a gauge shows.
type gaugeKind int

const (
	pullGauge gaugeKind = iota
	residualGauge
	leverageGauge
	carriedGauge
)

// usualResidual is the size of a studentised residual that is passed by chance
// about once in twenty.
const usualResidual = 2

// mostGauge is where the axes of pull and residual end at most; larger values
// end in an arrow.
const mostGauge = 6

// x returns the place of a value, within the axis.
func (g gauge) x(v float64) float64 {
	v = clamp(v, g.ends.low, g.ends.high)
	return g.place.low + (v-g.ends.low)/(g.ends.high-g.ends.low)*(g.place.high-g.place.low)
}

// value returns what a row has on the gauge.
func (k gaugeKind) value(r InfluenceRow) (v float64, ok bool) {
	switch {
	case r.Problem != "":
		return 0, false
	case k == pullGauge:
		return r.Pull, true
	case k == carriedGauge:
		return r.Carried, true
	case r.Weights == nil:
		return 0, false
	case k == residualGauge:
		return r.Weights.Residual, true
	}
	return r.Weights.Leverage, true
}

// text writes a row's value, a dash where it has none.
func (k gaugeKind) text(r InfluenceRow) string {
	v, ok := k.value(r)
	switch {
	case !ok:
		return words.Missing
	case k == leverageGauge:
		return words.Weight(v)
	}
	return changeText(v)
}

// changeText writes a change with its sign and two decimals, from 100 without,
// and a very large one as a bound.
func changeText(v float64) string {
	const most = 9999
	switch {
	case v > most:
		return "> +9,999"
	case v < -most:
		return "< −9,999"
	}
	if math.Abs(v) >= 100 {
		return strings.TrimSuffix(words.StepsChange(math.Round(v)), ".00")
	}
	return words.StepsChange(v)
}

// gauges returns the gauges of a chart with their axes' ends. Without room
// leverage goes, for narrow charts it stands under the names.
func (c *influence) gauges(leverage bool) []gauge {
	kinds := []gaugeKind{pullGauge, carriedGauge}
	if c.in.weighted() {
		kinds = []gaugeKind{pullGauge, residualGauge, carriedGauge}
		if leverage {
			kinds = []gaugeKind{pullGauge, residualGauge, leverageGauge, carriedGauge}
		}
	}
	heads := [...][2]string{
		pullGauge:     {"Pull on the estimate", "standard errors"},
		residualGauge: {"Distance from the rest", "studentised deleted residual"},
		leverageGauge: {"Leverage", "%"},
		carriedGauge:  {"Evidence it carries", "steps"},
	}
	if c.metrics.twoLine {
		heads = [...][2]string{
			pullGauge:     {"Pull", "std errors"},
			residualGauge: {"Distance", "residual"},
			leverageGauge: {},
			carriedGauge:  {"Carries", "steps"},
		}
	}
	var all []gauge
	for _, kind := range kinds {
		g := gauge{kind: kind, head: heads[kind][0], under: heads[kind][1], ends: c.gaugeEnds(kind)}
		for _, r := range c.in.Rows {
			g.numbers = max(g.numbers, Width(kind.text(r), c.metrics.row, true))
		}
		all = append(all, g)
	}
	return all
}

// gaugeEnds returns the ends of a gauge's axis. Those of pull and distance lie as
// far to the left as to the right.
func (c *influence) gaugeEnds(kind gaugeKind) span {
	s := span{}
	for _, r := range c.in.Rows {
		if v, ok := kind.value(r); ok {
			s.hold(v)
		}
	}
	most := math.Max(-s.low, s.high)
	switch kind {
	case pullGauge:
		end := roundUp(most, 0.5, 1, 1.5, 2, 3, 4, 5, mostGauge)
		return span{-end, end}
	case residualGauge:
		end := roundUp(most, 3, 4, 5, mostGauge)
		return span{-end, end}
	case leverageGauge:
		return span{0, roundUp(math.Max(most, 1.25/float64(len(c.in.Rows))), 0.02, 0.05, 0.1, 0.15, 0.2, 0.3, 0.4, 0.5, 0.6, 0.8, 1)}
	}
	step := carriedStep(s)
	ends := span{math.Floor(2*s.low/step) * step / 2, math.Ceil(2*s.high/step) * step / 2}
	switch { // with a label besides 0, and some room on both sides of it
	case ends.high < step && ends.low > -step && s.high >= -s.low:
		ends.high = step
	case ends.high < step && ends.low > -step:
		ends.low = -step
	}
	return span{clamp(ends.low, -mostGauge, -step/2), clamp(ends.high, step/2, mostGauge)}
}

// roundUp returns the first of some ascending values that is at least v, or the
// last.
func roundUp(v float64, values ...float64) float64 {
	for _, value := range values {
		if value >= v-1e-12 {
			return value
		}
	}
	return values[len(values)-1]
}

// residualNames are the second lines over the residuals, the fullest first.
var residualNames = []string{"studentised deleted residual", "deleted residual", "residual"}

// carriedStep is the distance of the labels on the axis of evidence carried.
func carriedStep(ends span) float64 {
	switch size := ends.high - ends.low; {
	case size > 6:
		return 3
	case size > 4:
		return 2
	case size > 1.2:
		return 1
	}
	return 0.5
}

// setTicks labels the axis: zero, and both ends, the guides of the residual, or
// whole steps.
func (g *gauge) setTicks(size float64) {
	var values []float64
	percent := false
	switch g.kind {
	case pullGauge:
		values = []float64{g.ends.low, 0, g.ends.high}
	case residualGauge:
		values = []float64{-usualResidual, 0, usualResidual}
	case leverageGauge:
		values, percent = []float64{0, g.ends.high}, true
		if middle := 50 * g.ends.high; math.Abs(middle-math.Round(middle)) < 1e-9 {
			values = []float64{0, g.ends.high / 2, g.ends.high}
		}
	case carriedGauge:
		step := carriedStep(g.ends)
		for n := math.Ceil(g.ends.low/step - 1e-9); n*step <= g.ends.high+1e-9; n++ {
			values = append(values, n*step)
		}
	}
	for _, v := range values {
		text := tickText(v)
		if percent {
			text = words.Linear(100*v, 0)
		}
		g.ticks = append(g.ticks, tick{x: g.x(v), label: text})
	}
	if !fits(g.ticks, size) {
		for i := range g.ticks {
			if v := values[i]; v != 0 && v != g.ends.low && v != g.ends.high {
				g.ticks[i].label = ""
			}
		}
	}
}

func tickText(v float64) string {
	if v == math.Trunc(v) {
		return words.Linear(v, 0)
	}
	return words.Linear(v, 1)
}
