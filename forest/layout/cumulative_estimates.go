package layout

// estimateItems draws the panel below the ladder: the estimate and its interval
// after each arrival.
func (c *cumulative) estimateItems() []Item {
	m, a := c.metrics, c.axis
	left, right := c.plot.low, c.plot.high
	items := c.estimateHead()
	items = append(items, Line{X1: left, Y1: a.x1, X2: left, Y2: a.x0, Width: 0.5})
	null := a.x(c.in.Scale.Null)
	for _, t := range a.ticks {
		items = append(items,
			Line{X1: left - 2.2, Y1: t.x, X2: left, Y2: t.x, Width: 0.5},
			label(left-4, t.x+uprightText*m.second, m.second, End, Ordinary, t.label))
		if t.x != null {
			items = append(items, Line{X1: left, Y1: t.x, X2: right, Y2: t.x, Width: 0.35, Ink: Grid})
		}
	}
	items = append(items, Line{X1: left, Y1: null, X2: right, Y2: null, Width: 0.75})
	items = append(items, c.sideItems(null)...)
	for i := range c.in.Points {
		items = append(items, c.intervalItems(i)...)
	}
	last := c.last()
	y := clamp(a.x(last.Estimate), a.x1+m.row, a.x0-m.row)
	return append(items,
		boldLabel(c.beside, y-0.27*m.row, m.row, Start, effectText(c.in.Scale, last.Estimate)),
		label(c.beside, y+0.9*m.row, m.second, Start, Soft, intervalText(c.in.Scale, last.Low, last.High)))
}

// estimateHead names the measure over its panel.
func (c *cumulative) estimateHead() []Item {
	m := c.metrics
	base := c.axis.x1 - 6
	rest := "so far, " + levelText(c.in.Level) + " interval"
	room := c.style.Width - 2*m.margin - Width(rest, m.second, false) - 4
	name, _ := cut(capital(c.in.Scale.Measure), "", room/1.1, m.head)
	head := boldLabel(m.margin, base, m.head, Start, name)
	at := m.margin + Width(name, m.head, true) + 3.7
	return append([]Item{head}, onPatch(label(at, base, m.second, Start, Soft, rest), Paper, 1)...)
}

// sideItems writes the words for both directions halfway between the line of no
// effect and the labels beside it, where they find room.
func (c *cumulative) sideItems(null float64) []Item {
	m, a := c.metrics, c.axis
	room := c.plot.low - 4 - m.margin
	var above, below float64 // distances to the nearest labels
	for _, t := range a.ticks {
		if up := null - t.x; up > 0.01 && (above == 0 || up < above) {
			above = up
		}
		if down := t.x - null; down > 0.01 && (below == 0 || down < below) {
			below = down
		}
	}
	var items []Item
	side := func(distance, sign float64, text string) {
		if distance < 2.3*m.second {
			return
		}
		t := label(c.plot.low-4, null+sign*distance/2+uprightText*m.second, m.second, End, Soft, fitWord(text, room, m.second, false))
		t.Spans[0].Italic = true
		items = append(items, t)
	}
	side(above, -1, c.in.Sides.Higher)
	side(below, 1, c.in.Sides.Lower)
	return items
}

// intervalItems draws a point's estimate with its interval; what goes past the
// axis stops in a head.
func (c *cumulative) intervalItems(i int) []Item {
	p, a, x := c.in.Points[i], c.axis, c.xs[i]
	width, radius := interval, min(estimateDisc, c.discRadius())
	if c.spacing() < 4 {
		width = 0.6
	}
	if i == len(c.in.Points)-1 {
		width, radius = finalInterval, finalDisc
	}
	y1, y2 := a.x(clamp(p.Low, a.low, a.high)), a.x(clamp(p.High, a.low, a.high))
	const short = 2.5 // a clipped line stops so far before the tip
	var heads []Item
	if p.Low < a.low {
		heads = append(heads, uprightHead(x, a.x0, headDepth, headHeight, Estimate))
		y1 = a.x0 - short
	}
	if p.High > a.high {
		heads = append(heads, uprightHead(x, a.x1, -headDepth, headHeight, Estimate))
		y2 = a.x1 + short
	}
	var items []Item
	if y1 > y2 {
		items = append(items, Line{X1: x, Y1: y1, X2: x, Y2: y2, Width: width, Ink: Estimate})
	}
	items = append(items, heads...)
	if a.holds(p.Estimate) {
		items = append(items, Disc{X: x, Y: a.x(p.Estimate), Radius: radius, Paint: Paint{Fill: Estimate, Outline: Paper, OutlineWidth: discRim}})
	}
	return items
}
