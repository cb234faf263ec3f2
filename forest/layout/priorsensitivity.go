package layout

import (
	"math"

	"steelyard/forest/words"
)

// priorSensitivity is a prior-sensitivity chart while it is laid out.
type priorSensitivity struct {
	in      PriorSensitivityInput // cleaned
	style   Style
	metrics metrics
	titles  titleBlock
	head    float64 // baseline of the head over the ladder
	plot    span    // left and right end of the panel
	ladder  ladder
	axis    axis // of ln scale
	normal  []Point
	cauchy  []Point
}

// Sizes of a prior-sensitivity chart in points.
const (
	priorFoot     = 0.99 // steps drawn below even odds
	leastFoot     = 0.05 // of those drawn above, so that the numbers of both axes stay apart
	curveWidth    = 1.5
	evidenceWidth = 1.8
	boundWidth    = 0.75
	curveLabelGap = 4 // from a curve to its label
)

// PriorSensitivity lays out whether another prior would change the answer: on a
// ladder of evidence in steps the Bayes factor under a normal and under a Cauchy
// prior against the prior's scale, the bound that no prior can pass, and as a
// level line the empirical Bayes factor, which needs no scale. Curves end where
// they leave the ladder.
//
// It returns an error if a number is not finite, or scales do not ascend, and a
// *TooNarrowError if the panel finds no room.
func PriorSensitivity(in PriorSensitivityInput, style Style) (Document, error) {
	if err := in.validate(); err != nil {
		return Document{}, err
	}
	style, err := style.settled("prior-sensitivity", "prior-sensitivity chart")
	if err != nil {
		return Document{}, err
	}
	c := &priorSensitivity{in: in.cleaned(), style: style, metrics: subsetsMetrics(style)}
	if err := c.arrange(); err != nil {
		return Document{}, err
	}
	return onePage(c.page()), nil
}

// arrange places panel, axes and curves.
func (c *priorSensitivity) arrange() error {
	m := c.metrics
	c.titles = placeTitles(c.in.Title, c.in.Subtitle, 0, c.style, m)
	c.head = c.titles.bottom + 18
	if c.style.NoTitle {
		c.head = 2 + m.head
	}
	steps := span{-priorFoot, ladderLeast}
	for _, ln := range []float64{c.in.LnEvidence, c.in.LnBound} {
		steps.hold(ln / lnStep)
	}
	if steps.low < -priorFoot {
		steps.low = math.Floor(steps.low)
	}
	steps.high = math.Ceil(steps.high)
	steps.low = math.Min(steps.low, -leastFoot*steps.high)
	c.ladder = ladder{steps: steps, step: math.Min(ladderStep, mostLadder/(steps.high-steps.low)), top: c.head + 8}
	first, last := c.in.Scales[0], c.in.Scales[len(c.in.Scales)-1]
	c.plot = span{m.margin + c.ladder.labelWidth(m.second) + 4, c.style.Width - m.margin - 4}
	if room := c.plot.high - c.plot.low; room < minZone {
		return &TooNarrowError{Chart: "prior-sensitivity chart", Width: c.style.Width, Least: c.style.Width + minZone - room}
	}
	c.axis = axis{low: math.Log(first.Scale), high: math.Log(last.Scale), x0: c.plot.low, x1: c.plot.high}
	c.normal = c.path(func(p PriorPoint) float64 { return p.Normal })
	c.cauchy = c.path(func(p PriorPoint) float64 { return p.Cauchy })
	return nil
}

// path returns a curve's points down to the foot of the ladder, where it is cut.
func (c *priorSensitivity) path(ln func(PriorPoint) float64) []Point {
	var all []Point
	before := math.NaN()
	x := func(i int) float64 { return c.axis.x(math.Log(c.in.Curve[i].Scale)) }
	for i, p := range c.in.Curve {
		steps := math.Min(ln(p)/lnStep, c.ladder.steps.high)
		inside, wasInside := steps >= c.ladder.steps.low, before >= c.ladder.steps.low
		if i > 0 && inside != wasInside { // crosses the foot
			share := (c.ladder.steps.low - before) / (steps - before)
			all = append(all, Point{x(i-1) + share*(x(i)-x(i-1)), c.ladder.bottom()})
		}
		if inside {
			all = append(all, Point{x(i), c.ladder.y(steps)})
		}
		before = steps
	}
	return all
}

// page draws the chart.
func (c *priorSensitivity) page() Drawing {
	m := c.metrics
	d := Drawing{ID: c.style.ID, Width: c.style.Width, Title: c.in.Title, Description: c.description()}
	if d.Title == "" {
		d.Title = "Would another prior change the answer?"
	}
	d.Items = append(d.Items, c.titles.items(1, 1)...)
	head := boldLabel(m.margin, c.head, m.head, Start, "Evidence ratio")
	head.Spans = append(head.Spans, Span{Text: "  " + evidenceUnder, Ink: Soft, Follow: true})
	d.Items = append(d.Items,
		Group{ID: "head", Items: []Item{head}},
		Group{ID: "ladder", Items: c.ladder.items(c.plot, m.second)},
		Group{ID: "curves", Items: c.curveItems()},
		Group{ID: "labels", Items: c.labelItems()})
	axis, bottom := c.axisItems()
	d.Items = append(d.Items, Group{ID: "axis", Items: axis})
	notes, height := placeNotes(c.in.Notes, m, c.style.Width, bottom+m.note+6)
	d.Items = append(d.Items, Group{ID: "notes", Items: notes})
	d.Height = height
	return d
}

// curveItems draws bound, curves and level line.
func (c *priorSensitivity) curveItems() []Item {
	level := func(ln, width float64, ink Ink, dash []float64) Line {
		y := c.ladder.place(ln / lnStep)
		return Line{X1: c.plot.low, Y1: y, X2: c.plot.high, Y2: y, Width: width, Ink: ink, Dash: dash}
	}
	items := []Item{level(c.in.LnBound, boundWidth, Ordinary, []float64{4, 2})}
	items = append(items, Group{ID: "normal", Items: stroked(c.normal, curveWidth, PriorBased, true)})
	var dashes []Item
	for _, dash := range dashed(c.cauchy, 3.5, 1.8) {
		dashes = append(dashes, stroked(dash, curveWidth, PriorBased, false)...)
	}
	return append(items, Group{ID: "cauchy", Items: dashes}, level(c.in.LnEvidence, evidenceWidth, Evidence, nil))
}

// stroked joins points by lines; round ends hide the joints.
func stroked(path []Point, width float64, ink Ink, round bool) []Item {
	var items []Item
	for i := 1; i < len(path); i++ {
		a, b := path[i-1], path[i]
		items = append(items, Line{X1: a.X, Y1: a.Y, X2: b.X, Y2: b.Y, Width: width, Ink: ink, Round: round})
	}
	return items
}

// dashed cuts a path into dashes with gaps between them, both measured along it.
func dashed(path []Point, dash, gap float64) [][]Point {
	if len(path) == 0 {
		return nil
	}
	var all [][]Point
	now, left, drawn := []Point{path[0]}, dash, true
	for i := 1; i < len(path); i++ {
		a, b := path[i-1], path[i]
		length := math.Hypot(b.X-a.X, b.Y-a.Y)
		for length > left {
			share := left / length
			a = Point{a.X + share*(b.X-a.X), a.Y + share*(b.Y-a.Y)}
			length -= left
			if drawn {
				all = append(all, append(now, a))
			}
			now, left, drawn = []Point{a}, gap, !drawn
			if drawn {
				left = dash
			}
		}
		left -= length
		now = append(now, b)
	}
	if drawn && len(now) > 1 {
		all = append(all, now)
	}
	return all
}

// axisItems draws the axis of scales, the ranges under it and its name; it
// returns the lowest baseline.
func (c *priorSensitivity) axisItems() (items []Item, bottom float64) {
	const tickLength = 2.2
	m, y := c.metrics, c.ladder.bottom()
	numbers := y + tickLength + m.second
	items = append(items, Line{X1: c.plot.low, Y1: y, X2: c.plot.high, Y2: y, Width: 0.5})
	bottom = numbers
	lastNumber, lastRange := math.Inf(-1), c.plot.low-labelGap
	within := c.style.Width - m.margin
	for _, s := range c.in.Scales {
		x := c.axis.x(math.Log(s.Scale))
		text := words.PriorScale(s.Scale)
		half := Width(text, m.second, false) / 2
		if x-half < lastNumber+labelGap || x+half > within+2 {
			continue
		}
		lastNumber = x + half
		items = append(items, Line{X1: x, Y1: y, X2: x, Y2: y + tickLength, Width: 0.5}, label(x, numbers, m.second, Middle, Ordinary, text))
		half = Width(s.Range, m.second, false) / 2
		if s.Range == "" || x-half < lastRange+labelGap || x+half > c.plot.high {
			continue
		}
		lastRange = x + half
		bottom = numbers + 1.3*m.second
		items = append(items, label(x, bottom, m.second, Middle, Soft, s.Range))
	}
	name := "Scale of the prior, " + c.in.ScaleName
	if bottom > numbers {
		name += " (grey: 95% of its " + c.in.RangeName + ")"
	}
	middle := (c.plot.low + c.plot.high) / 2
	room := 2 * math.Min(middle-m.margin, c.style.Width-m.margin-middle)
	bottom += 0.45 * m.second
	for _, line := range wrapPlain(name, room, m.second, false) {
		bottom += 1.3 * m.second
		items = append(items, label(middle, bottom, m.second, Middle, Ordinary, line))
	}
	return items, bottom
}
