package layout

import (
	"fmt"
	"math"
	"strings"

	"steelyard/forest/words"
)

// headItems draws the heads of the columns.
func (c *influence) headItems() []Item {
	m, h := c.metrics, c.heads
	right := c.style.Width - m.margin
	items := []Item{boldLabel(m.margin, h.second, m.head, Start, capital(c.in.plural(1)))}
	for _, g := range c.columns {
		middle := (g.place.low + g.numberEnd) / 2
		items = append(items, boldLabel(middle, h.first, m.head, Middle, g.head), label(middle, h.second, m.second, Middle, Soft, g.under))
		if !m.twoLine {
			items = append(items, Line{X1: g.place.low, Y1: h.spanRule, X2: g.numberEnd, Y2: h.spanRule, Width: 0.5, Ink: SpanRule})
		}
	}
	return append(items, Line{X1: m.margin, Y1: h.rule, X2: right, Y2: h.rule, Width: 0.75})
}

// gridItems draws what lies under the marks: the tint of the pooled row,
// hairlines, the guides, and the zero lines.
func (c *influence) gridItems(p pageRange, axis float64) []Item {
	m, h := c.metrics, c.heads
	right := c.style.Width - m.margin
	items := []Item{Rect{X: m.margin, Y: h.rule, Width: right - m.margin, Height: h.bandEnd - h.rule, Paint: Solid(PooledBand)}}
	for i := 1; i < p.to-p.from; i++ {
		y := c.rowTop(i)
		if m.grouped && i%5 != 0 {
			continue
		}
		if m.grouped {
			y -= groupGap / 2
		}
		items = append(items, Line{X1: m.margin, Y1: y, X2: right, Y2: y, Width: 0.35, Ink: Hairline})
	}
	for _, g := range c.columns {
		upright := func(v, width float64, ink Ink, dash ...float64) {
			x := g.x(v)
			items = append(items, Line{X1: x, Y1: h.bandEnd + 1.5, X2: x, Y2: axis, Width: width, Ink: ink, Dash: dash})
		}
		switch g.kind {
		case residualGauge:
			upright(-usualResidual, 0.6, Soft, 3, 2)
			upright(usualResidual, 0.6, Soft, 3, 2)
		case leverageGauge:
			upright(1/float64(len(c.in.Rows)), 0.6, Soft, 3, 2)
		default:
			for _, t := range g.ticks {
				items = append(items, Line{X1: t.x, Y1: h.bandEnd + 1.5, X2: t.x, Y2: axis, Width: 0.5, Ink: Grid})
			}
		}
	}
	return items
}

// pooledText is the pooled estimate with its interval.
func (c *influence) pooledText() string {
	p, scale := c.in.Pooled, c.in.Scale
	return scale.notation().Estimate(scale.shown(p.Estimate), scale.shown(p.Low), scale.shown(p.High))
}

// pooledItems draws the row of all studies, which says what the columns below
// move.
func (c *influence) pooledItems() []Item {
	m := c.metrics
	y := c.centre(c.heads.rule)
	if !m.twoLine {
		y = (c.heads.rule + c.heads.bandEnd) / 2
	}
	base := y + baseline(m.row)
	items := []Item{boldLabel(m.margin, base, m.row, Start, fitWord(c.pooledName(), c.nameWidth+2, m.row, true))}
	carried := c.columns[len(c.columns)-1]
	if m.twoLine {
		ln := c.in.Pooled.LnEvidence
		items = append(items, boldLabel(m.margin, c.secondLine(y), m.second, Start, c.pooledText()))
		end := c.style.Width - m.margin
		return append(items, boldLabel(end, base, m.row, End, words.Odds(ln)), boldLabel(end, c.secondLine(y), m.second, End, wordText(ln)))
	}
	pull := c.columns[0]
	for _, text := range []string{c.pooledText(), effectText(c.in.Scale, c.in.Pooled.Estimate)} {
		if Width(text, m.row, true) <= pull.numberEnd-m.margin-c.nameWidth-4 {
			items = append(items, boldLabel(pull.numberEnd, base, m.row, End, text))
			break
		}
	}
	for _, g := range c.columns {
		switch g.kind {
		case residualGauge:
			items = append(items, label(g.numberEnd, base, m.row, End, Ordinary, c.beyondText()))
		case leverageGauge:
			items = append(items, label(g.numberEnd, base, m.row, End, Ordinary, "even "+words.Weight(1/float64(len(c.in.Rows)))))
		}
	}
	room := carried.numberEnd - carried.place.low + gaugeBetween - 4
	ln := c.in.Pooled.LnEvidence
	for _, text := range []string{words.Odds(ln) + ", " + strengthText(ln), words.Odds(ln) + ", " + wordText(ln), words.Odds(ln)} {
		if Width(text, m.row, true) <= room {
			return append(items, boldLabel(carried.numberEnd, base, m.row, End, text))
		}
	}
	return items
}

// beyondText counts the residuals beyond the guides.
func (c *influence) beyondText() string {
	n := 0
	for _, r := range c.in.Rows {
		if r.unusual() {
			n++
		}
	}
	if n == 0 {
		return "none beyond ±2"
	}
	return words.Count(n) + " beyond ±2"
}

// unusual reports whether a row's residual lies beyond the guides.
func (r InfluenceRow) unusual() bool {
	return r.Weights != nil && math.Abs(r.Weights.Residual) > usualResidual
}

// rowItems draws the rows of a page, each as a group.
func (c *influence) rowItems(p pageRange) []Item {
	m := c.metrics
	var items []Item
	for i := p.from; i < p.to; i++ {
		r := c.in.Rows[i]
		y := c.centre(c.rowTop(i - p.from))
		g := Group{ID: fmt.Sprintf("row-%d", i+1)}
		name, short := cut(r.Name, r.tail(), c.nameWidth+0.01, m.row)
		if short {
			g.Title = joinName(r.Name, r.tail())
		}
		g.Items = []Item{label(m.margin, y+baseline(m.row), m.row, Start, Ordinary, name)}
		if m.twoLine && c.in.weighted() {
			g.Items = append(g.Items, label(m.margin, c.secondLine(y), m.second, Start, Soft, r.leverageText()))
		}
		for _, column := range c.columns {
			g.Items = append(g.Items, c.numberItems(column, r, y)...)
			if v, ok := column.kind.value(r); ok {
				g.Items = append(g.Items, column.mark(v, y, m.bar)...)
			}
		}
		items = append(items, g)
	}
	return items
}

func (r InfluenceRow) leverageText() string {
	if r.Weights == nil {
		return "leverage " + words.Missing
	}
	return leverageText(r.Weights.Leverage)
}

func leverageText(h float64) string { return "leverage " + words.PercentFine(h) }

// numberItems writes a row's number on a gauge; a residual beyond the guides is
// bold.
func (c *influence) numberItems(g gauge, r InfluenceRow, y float64) []Item {
	m := c.metrics
	t := label(g.numberEnd, y+baseline(m.row), m.row, End, Ordinary, g.kind.text(r))
	if m.twoLine {
		t = label(g.x(0)+2.5, c.secondLine(y), m.second, Start, Ordinary, g.kind.text(r))
	}
	t.Spans[0].Bold = g.kind == residualGauge && r.unusual()
	if !m.twoLine {
		return []Item{t}
	}
	// A number that is too long for the right half stands on the left, or in the
	// room of the whole gauge.
	width := t.Runs()[0].Width
	room := span{g.place.low - gaugeNarrow/2 + 1, min(g.place.high+gaugeNarrow/2-1, c.style.Width-m.margin)}
	switch at := t.Spans[0].X; {
	case at+width <= room.high:
	case g.x(0)-2.5-width >= room.low:
		t.Spans[0].X, t.Spans[0].Anchor = g.x(0)-2.5, End
	default:
		t.Spans[0].X = max(room.low, room.high-width)
	}
	return onPatch(t, Paper, 0.8)
}

// mark draws a value on a gauge: a bar from zero, hollow where evidence was held
// back, or the disc of a residual. What lies past an end stops there in a head.
func (g gauge) mark(v, y, height float64) []Item {
	ink := Estimate
	if g.kind == carriedGauge {
		ink = Evidence
	}
	past := v > g.ends.high || v < g.ends.low
	x, back := g.x(v), 3.75
	if v < 0 {
		back = -back
	}
	if g.kind == residualGauge {
		if past {
			return []Item{head(x, y, back, height, ink)}
		}
		return []Item{
			Line{X1: g.x(0), Y1: y, X2: x, Y2: y, Width: 0.9, Ink: ink},
			Disc{X: x, Y: y, Radius: residualDisc, Paint: Paint{Fill: ink, Outline: Paper, OutlineWidth: 0.7}},
		}
	}
	var items []Item
	if past {
		items = append(items, head(x, y, back, height, ink))
		x -= back
	}
	zero := g.x(0)
	body := Rect{X: math.Min(zero, x), Y: y - height/2, Width: math.Abs(x - zero), Height: height, Paint: Solid(ink)}
	if g.kind == carriedGauge && v < 0 {
		const line = 0.9
		body = Rect{X: body.X + line/2, Y: body.Y + line/2, Width: math.Max(0.2, body.Width-line), Height: height - line, Paint: Hollow(ink, line)}
	}
	return append([]Item{body}, items...)
}

// footItems draws the axes at a height with their zero lines, which lie over the
// marks, and the directions under them; it returns the lowest baseline.
func (c *influence) footItems(y float64) (items []Item, bottom float64) {
	m := c.metrics
	const tickLength = 2.2
	bottom = y + tickLength + m.second
	var directions []Item
	for _, g := range c.columns {
		zero := g.x(0)
		items = append(items,
			Line{X1: zero, Y1: c.heads.bandEnd + 1.5, X2: zero, Y2: y, Width: 0.75},
			Line{X1: g.place.low, Y1: y, X2: g.place.high, Y2: y, Width: 0.5})
		for _, t := range g.ticks {
			items = append(items, Line{X1: t.x, Y1: y, X2: t.x, Y2: y + tickLength, Width: 0.5})
			if t.label != "" {
				items = append(items, label(t.x, bottom, m.second, Middle, Ordinary, t.label))
			}
		}
		directions = append(directions, c.directionItems(g, bottom+m.second+3.5)...)
	}
	if len(directions) > 0 {
		bottom += m.second + 3.5
	}
	return append(items, directions...), bottom
}

// directionItems writes under a gauge where its two sides lead: in the outcome's
// words, their first word, or the plainest, whichever fit on both sides.
func (c *influence) directionItems(g gauge, base float64) []Item {
	sides := c.in.Sides
	var pairs [][2]string
	switch g.kind {
	case pullGauge, residualGauge:
		pairs = [][2]string{{sides.Lower, sides.Higher}, {firstWord(sides.Lower), firstWord(sides.Higher)}, {"lower", "higher"}}
	case carriedGauge:
		pairs = [][2]string{{"held back", "carries"}, {"back", "carries"}}
	}
	within := span{g.place.low - gaugeNarrow/2 + 1, g.numberEnd + gaugeNarrow/2 - 1}
	if !c.metrics.twoLine {
		within = span{g.place.low - gaugeBetween/2 + 2, g.numberEnd + gaugeBetween/2 - 2}
	}
	within.high = min(within.high, c.style.Width-c.metrics.margin)
	for _, pair := range pairs {
		left := placeDirection(pair[0], g.x(0), false, within, c.metrics.second)
		right := placeDirection(pair[1], g.x(0), true, within, c.metrics.second)
		both := []direction{left, right}
		if left.text == pair[0] && right.text == pair[1] && len(clearDirections(both, within)) == 2 {
			return append(left.items(base, c.metrics.second), right.items(base, c.metrics.second)...)
		}
	}
	return nil
}

func firstWord(text string) string {
	first, _, _ := strings.Cut(text, " ")
	return first
}
