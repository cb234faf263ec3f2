package layout

import (
	"fmt"
	"math"
	"strings"
)

// regression is a chart of effects along a covariate while it is laid out.
type regression struct {
	in      RegressionInput // cleaned
	style   Style
	metrics metrics
	titles  titleBlock
	heads   float64 // baseline of the head over the panel
	x, y    axis
	radii   []float64 // of the points
}

// Sizes of a regression chart in points.
const (
	regressionHeight       = 210 // of the panel
	regressionHeightNarrow = 165
	bubbleWide             = 7.5 // largest radius
	bubbleNarrow           = 5.5
	bubbleLeast            = 1.4
	regressionLine         = 1.4
	predictionLine         = 1
	regressionUnder        = 10 // from the panel to the numbers under it
)

// Regression lays out effects along a covariate: a bubble for each study, its area by
// weight, the line of the regression with the band of its interval, and dashed the
// limits of the prediction. Names stand where they find room, those of the heaviest
// first.
//
// It returns an error naming the study or the place of the line if a number is beyond
// what an axis can show, and a *TooNarrowError if the panel finds no room.
func Regression(in RegressionInput, style Style) (Document, error) {
	if err := in.validate(); err != nil {
		return Document{}, err
	}
	style, err := style.settled("regression", "regression chart")
	if err != nil {
		return Document{}, err
	}
	c := &regression{in: in.cleaned(), style: style, metrics: cumulativeMetrics(style)}
	if err := c.arrange(); err != nil {
		return Document{}, err
	}
	return onePage(c.page()), nil
}

// arrange places the panel, its axes and the bubbles.
func (c *regression) arrange() error {
	m := c.metrics
	c.titles = placeTitles(c.in.Title, c.in.Subtitle, 0, c.style, m)
	c.heads = c.titles.bottom + 17
	if c.style.NoTitle {
		c.heads = m.head + 2
	}
	top, height := c.heads+9, float64(regressionHeight)
	if m.twoLine {
		height = regressionHeightNarrow
	}
	low, high := c.effectSpan()
	c.y = axis{low: low, high: high, x0: top + height, x1: top, ratio: c.in.Scale.Ratio}
	c.y.setUprightTicks(m.second)
	left := m.margin + 10
	for _, t := range c.y.ticks {
		left = max(left, m.margin+Width(t.label, m.second, false)+5)
	}
	right := c.style.Width - m.margin - 4
	if room := right - left; room < minZone {
		return &TooNarrowError{Chart: "regression chart", Width: c.style.Width, Least: c.style.Width + minZone - room}
	}
	first, last := c.in.Line[0].X, c.in.Line[len(c.in.Line)-1].X
	for _, p := range c.in.Points {
		first, last = min(first, p.X), max(last, p.X)
	}
	pad := 0.05 * (last - first)
	c.x = axis{low: first - pad, high: last + pad, x0: left, x1: right}
	c.x.setTicks(m.second)
	for i, t := range c.x.ticks {
		c.x.ticks[i].label = plainYear(t.label)
	}
	c.size()
	return nil
}

// plainYear takes the comma out of four digits, which may be years.
func plainYear(label string) string {
	if digits := strings.Trim(label, "−"); len(digits) == 5 && digits[1] == ',' {
		return strings.Replace(label, ",", "", 1)
	}
	return label
}

// effectSpan returns the ends of the effect axis: it holds every estimate, no effect,
// the line with its interval, and the prediction as far as a 400-fold span allows.
func (c *regression) effectSpan() (low, high float64) {
	s := span{low: c.in.Scale.Null, high: c.in.Scale.Null}
	if c.in.NoNull {
		s = span{low: c.in.Points[0].Estimate, high: c.in.Points[0].Estimate}
	}
	for _, p := range c.in.Points {
		s.hold(p.Estimate)
	}
	points := s
	for _, l := range c.in.Line {
		s.hold(l.Estimate)
	}
	most := widestLogSpan
	if !c.in.Scale.Ratio {
		most = 3 * (points.high - points.low)
	}
	most = max(most, s.high-s.low)
	for _, l := range c.in.Line {
		s.stretch(l.Low, l.High, most)
	}
	for _, l := range c.in.Line {
		if l.Prediction != nil {
			s.stretch(l.Prediction.Low, l.Prediction.High, most)
		}
	}
	if least := leastSpan(c.in.Scale, max(math.Abs(s.low), math.Abs(s.high))); s.high-s.low < least {
		middle := (s.low + s.high) / 2
		s.low, s.high = middle-least/2, middle+least/2
	}
	return outward(s.low, s.high, c.in.Scale.Ratio)
}

// size gives the bubbles their radii, the area by weight.
func (c *regression) size() {
	most, heaviest := bubbleWide, 0.0
	if c.metrics.twoLine {
		most = bubbleNarrow
	}
	for _, p := range c.in.Points {
		heaviest = max(heaviest, p.Weight)
	}
	for _, p := range c.in.Points {
		share := 1.0
		if heaviest > 0 {
			share = p.Weight / heaviest
		}
		c.radii = append(c.radii, max(bubbleLeast, most*math.Sqrt(share)))
	}
}

// page draws the chart.
func (c *regression) page() Drawing {
	m := c.metrics
	d := Drawing{ID: c.style.ID, Width: c.style.Width, Title: c.in.Title, Description: c.description()}
	if d.Title == "" {
		d.Title = "Regression chart"
	}
	name := fitWord(capital(c.in.Scale.Measure), c.style.Width-2*m.margin, m.head, true)
	d.Items = append(d.Items, c.titles.items(1, 1)...)
	d.Items = append(d.Items,
		Group{ID: "heads", Items: []Item{boldLabel(m.margin, c.heads, m.head, Start, name)}},
		Group{ID: "band", Items: c.bandItems()},
		Group{ID: "axes", Items: c.axisItems()},
		Group{ID: "prediction", Items: c.predictionItems()},
		Group{ID: "line", Items: c.lineItems()})
	bubbles := Group{ID: noun(c.in.Study, 2)}
	for _, i := range heaviestFirst(c.in.Points) {
		p := c.in.Points[i]
		bubbles.Items = append(bubbles.Items, Group{
			ID: fmt.Sprintf("point-%d", i+1), Title: p.Name,
			Items: []Item{Disc{X: c.x.x(p.X), Y: c.y.x(p.Estimate), Radius: c.radii[i], Paint: Paint{Fill: Estimate, Outline: Paper, OutlineWidth: discRim}}},
		})
	}
	d.Items = append(d.Items, bubbles, Group{ID: "names", Items: c.nameItems()})
	bottom := c.y.x0 + regressionUnder + 2.48*m.second
	notes, height := placeNotes(append([]Note{{Head: "Key", Text: c.key()}}, c.in.Notes...), m, c.style.Width, bottom+m.note+2)
	d.Items = append(d.Items, Group{ID: "notes", Items: notes})
	d.Height = height
	return d
}

// axisItems draws the grid, both axes and the line of no effect.
func (c *regression) axisItems() []Item {
	m := c.metrics
	left, right, base := c.x.x0, c.x.x1, c.y.x0
	null := c.y.x(c.in.Scale.Null)
	var items []Item
	for _, t := range c.y.ticks {
		if t.x != null {
			items = append(items, Line{X1: left, Y1: t.x, X2: right, Y2: t.x, Width: 0.35, Ink: Grid})
		}
		items = append(items,
			Line{X1: left - 2.2, Y1: t.x, X2: left, Y2: t.x, Width: 0.5},
			label(left-4, t.x+uprightText*m.second, m.second, End, Ordinary, t.label))
	}
	items = append(items,
		Line{X1: left, Y1: c.y.x1, X2: left, Y2: base, Width: 0.5},
		Line{X1: left, Y1: base, X2: right, Y2: base, Width: 0.5})
	if !c.in.NoNull {
		items = append(items, Line{X1: left, Y1: null, X2: right, Y2: null, Width: 0.75})
	}
	for _, t := range c.x.ticks {
		items = append(items, Line{X1: t.x, Y1: base, X2: t.x, Y2: base + 2.2, Width: 0.5},
			label(t.x, base+regressionUnder, m.second, Middle, Ordinary, t.label))
	}
	name := fitWord(c.in.Covariate, right-left, m.head, true)
	return append(items, boldLabel((left+right)/2, base+regressionUnder+1.35*m.second, m.head, Middle, name))
}

// within bounds a height to the panel.
func (c *regression) within(v float64) float64 { return c.y.x(clamp(v, c.y.low, c.y.high)) }

// bandItems draws the interval of the line as a tint.
func (c *regression) bandItems() []Item {
	var points []Point
	for _, l := range c.in.Line {
		points = append(points, Point{c.x.x(l.X), c.within(l.High)})
	}
	for i := len(c.in.Line) - 1; i >= 0; i-- {
		l := c.in.Line[i]
		points = append(points, Point{c.x.x(l.X), c.within(l.Low)})
	}
	return []Item{Polygon{Points: points, Paint: Solid(IntervalBand)}}
}

// lineItems draws the expected effect.
func (c *regression) lineItems() []Item {
	return c.curve(Line{Width: regressionLine, Ink: Estimate, Round: true}, func(l RegressionLine) float64 { return l.Estimate })
}

// predictionItems draws both limits of the prediction.
func (c *regression) predictionItems() []Item {
	if c.in.Line[0].Prediction == nil {
		return nil
	}
	line := Line{Width: predictionLine, Ink: Prediction, Dash: []float64{4, 2}}
	return append(c.curve(line, func(l RegressionLine) float64 { return l.Prediction.Low }),
		c.curve(line, func(l RegressionLine) float64 { return l.Prediction.High })...)
}

// curve draws a line through the places where it lies in the panel. A dashed one is
// drawn from every other place on, so that its dashes do not begin anew too often.
func (c *regression) curve(line Line, of func(RegressionLine) float64) []Item {
	every := 1
	if line.Dash != nil {
		every = max(1, (len(c.in.Line)-1)/8)
	}
	var items []Item
	for i := 0; i+1 < len(c.in.Line); i += every {
		to := min(i+every, len(c.in.Line)-1)
		a, b := c.in.Line[i], c.in.Line[to]
		if !c.y.holds(of(a)) || !c.y.holds(of(b)) {
			continue
		}
		line.X1, line.Y1, line.X2, line.Y2 = c.x.x(a.X), c.y.x(of(a)), c.x.x(b.X), c.y.x(of(b))
		items = append(items, line)
	}
	return items
}

// key says what the marks mean.
func (c *regression) key() string {
	text := "bubble, one " + noun(c.in.Study, 1) + ", area by weight; line, effect expected along " + c.in.Covariate + ", with its " + levelText(c.in.Level) + " interval (tint)"
	if c.in.Line[0].Prediction != nil {
		text += "; dashed, " + levelText(c.in.Level) + " prediction for one " + noun(c.in.Study, 1) + "’s true effect"
	}
	return text + "."
}

// description tells the chart's numbers in words.
func (c *regression) description() string {
	var b strings.Builder
	for i, l := range []RegressionLine{c.in.Line[0], c.in.Line[len(c.in.Line)-1]} {
		if i > 0 {
			b.WriteString("; ")
		}
		n := c.in.Scale.notation()
		fmt.Fprintf(&b, "%s expected at %s %.6g: %s", c.in.Scale.Measure, c.in.Covariate, l.X,
			n.Estimate(c.in.Scale.shown(l.Estimate), c.in.Scale.shown(l.Low), c.in.Scale.shown(l.High)))
		if l.Prediction != nil {
			fmt.Fprintf(&b, ", predicted %s", intervalText(c.in.Scale, l.Prediction.Low, l.Prediction.High))
		}
	}
	b.WriteString(". " + capital(noun(c.in.Study, 2)) + ": ")
	for i, p := range c.in.Points {
		if i > 0 {
			b.WriteString("; ")
		}
		fmt.Fprintf(&b, "%s, at %.6g, %s", p.Name, p.X, effectText(c.in.Scale, p.Estimate))
	}
	b.WriteString(". ")
	for _, n := range append([]Note{{Head: "Key", Text: c.key()}}, c.in.Notes...) {
		fmt.Fprintf(&b, "%s: %s ", n.Head, n.Text)
	}
	return strings.TrimSpace(b.String())
}
