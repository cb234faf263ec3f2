package layout

// leftWidth is the room of the labels at the left.
func (c *subsets) leftWidth() float64 { return c.ladder.labelWidth(c.metrics.second) }

// headItems draws the heads over the ladder and over the shares.
func (c *subsets) headItems() []Item {
	m, h := c.metrics, c.heads
	title := "Evidence ratio"
	if m.twoLine {
		title = "Evidence"
	}
	items := []Item{
		boldLabel(m.margin, h.first, m.head, Start, title),
		label(m.margin, h.second, m.second, Start, Soft, "effect : none"),
	}
	if len(c.shares) > 0 {
		items = append(items, boldLabel(c.right, h.first, m.head, Start, "Subsets"),
			label(c.right, h.second, m.second, Start, Soft, "that reach it"))
	}
	return items
}

// uprightLine is a line through the panel with the label above it.
type uprightLine struct {
	x     float64
	label string
	null  bool // the line of no effect
}

// uprightLines returns the lines of no effect and of the important difference
// that lie on the axis, from left to right.
func (c *subsets) uprightLines() []uprightLine {
	var all []uprightLine
	add := func(v float64, text string, null bool) {
		if c.axis.holds(v) && (null || v != c.in.Scale.Null) {
			all = append(all, uprightLine{x: c.axis.x(v), label: text, null: null})
		}
	}
	if z := c.in.Important; z != nil {
		add(z.Low, "important, "+effectText(c.in.Scale, z.Low), false)
	}
	add(c.in.Scale.Null, "no effect", true)
	if z := c.in.Important; z != nil {
		add(z.High, "important, "+effectText(c.in.Scale, z.High), false)
	}
	return all
}

// lineItems draws the lines through the panel and the labels over them, pushed
// apart; a label of an important difference that finds no room is left out.
func (c *subsets) lineItems() []Item {
	size := c.metrics.second
	lines := c.uprightLines()
	var items []Item
	null := -1
	for i, l := range lines {
		line := Line{X1: l.x, Y1: c.ladder.top, X2: l.x, Y2: c.ladder.bottom(), Width: 0.75}
		if l.null {
			null = i
		} else {
			line.Width, line.Dash = 0.6, []float64{3, 2}
		}
		items = append(items, line)
	}
	within := span{c.plot.low, c.plot.high}
	var taken []span
	place := func(l uprightLine) {
		half := Width(l.label, size, false) / 2
		for _, shift := range []float64{0, -half + 3, half - 3, -half - 4, half + 4} {
			at := l.x + shift
			s := span{at - half, at + half}
			clear := s.low >= within.low && s.high <= within.high
			for _, other := range taken {
				clear = clear && (s.high+5 < other.low || other.high+5 < s.low)
			}
			if clear {
				taken = append(taken, s)
				items = append(items, label(at, c.heads.lines, size, Middle, Ordinary, l.label))
				return
			}
		}
	}
	if null >= 0 {
		place(lines[null])
	}
	for i, l := range lines {
		if i != null {
			place(l)
		}
	}
	return items
}

// directionBase is the baseline of the directions under the axis of estimates.
func (c *subsets) directionBase() float64 { return c.ladder.bottom() + 5.7 + 2*c.metrics.second }

// footItems draws the axis of estimates, the directions under it, and at the
// right the shares of subsets by their estimate; it returns the lowest baseline.
func (c *subsets) footItems() (items []Item, bottom float64) {
	m := c.metrics
	const tickLength = 2.2
	y := c.ladder.bottom()
	numbers := y + tickLength + m.second
	bottom = c.directionBase()
	items = append(items, Line{X1: c.plot.low, Y1: y, X2: c.plot.high, Y2: y, Width: 0.5})
	for _, t := range c.axis.ticks {
		items = append(items, Line{X1: t.x, Y1: y, X2: t.x, Y2: y + tickLength, Width: 0.5},
			label(t.x, numbers, m.second, Middle, Ordinary, t.label))
	}
	within := span{m.margin, c.right - 4}
	if c.axis.holds(c.in.Scale.Null) {
		null := c.axis.x(c.in.Scale.Null)
		for _, d := range clearDirections([]direction{
			placeDirection(c.in.Sides.Lower, null, false, within, m.second),
			placeDirection(c.in.Sides.Higher, null, true, within, m.second),
		}, within) {
			if Width(d.text, m.second, false) > m.second { // more than a cut letter
				items = append(items, d.items(bottom, m.second)...)
			}
		}
	}
	name, _ := cut("Pooled "+c.in.Scale.Measure, "", c.plot.high-m.margin, m.head)
	bottom += 1.5 * m.head
	items = append(items, boldLabel((c.plot.low+c.plot.high)/2, bottom, m.head, Middle, name))
	return items, bottom
}
