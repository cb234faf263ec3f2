package layout

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"strings"

	"steelyard/forest/words"
)

// nextTrial is a chart of the next study while it is laid out.
type nextTrial struct {
	in      NextTrialInput // cleaned
	style   Style
	metrics metrics
	titles  titleBlock
	heads   float64 // baseline of the heads
	panel   span    // left and right end
	top     float64 // of the panel, a chance of 1
	height  float64
	axis    axis // of the logarithm of the size
}

// Sizes of a chart of the next study in points.
const (
	nextHeight       = 150 // of the panel
	nextHeightNarrow = 130
	nextLeader       = 14 // from the panel to the labels of the curves
	nextLine         = 1
	nextWantedLine   = 1.8
	nextDisc         = 2.4
	nextUnder        = 12.5 // from the panel to the numbers under it
)

// NextTrial lays out what the next study could change: the chance that the updated
// evidence reaches each step, and that the updated interval excludes no effect, over
// sizes of the study on a logarithmic axis. The size thought of is a dashed upright
// line with a disc on each curve, the wanted chance a dashed level line, with an open
// disc at the smallest size that reaches it.
//
// It returns an error if a size or a chance is out of range, and a *TooNarrowError if
// the panel finds no room.
func NextTrial(in NextTrialInput, style Style) (Document, error) {
	if err := in.validate(); err != nil {
		return Document{}, err
	}
	style, err := style.settled("next-trial", "next-trial chart")
	if err != nil {
		return Document{}, err
	}
	c := &nextTrial{in: in.cleaned(), style: style, metrics: cumulativeMetrics(style)}
	if err := c.arrange(); err != nil {
		return Document{}, err
	}
	return onePage(c.page()), nil
}

// arrange places the panel and its axis.
func (c *nextTrial) arrange() error {
	m := c.metrics
	c.titles = placeTitles(c.in.Title, c.in.Subtitle, 0, c.style, m)
	c.heads = c.titles.bottom + 17
	if c.style.NoTitle {
		c.heads = m.head + 2
	}
	c.top = c.heads + 1.24*m.second + 8
	c.height = nextHeight
	if m.twoLine {
		c.height = nextHeightNarrow
	}
	right := max(Width(nextHead, m.head, true), Width(nextHeadUnder, m.second, false))
	for _, curve := range c.in.Curves {
		right = max(right, Width(curve.Label, m.second, true))
	}
	c.panel = span{m.margin + max(Width("100%", m.second, false), 20) + 4, c.style.Width - m.margin - right - nextLeader}
	if room := c.panel.high - c.panel.low; room < minZone {
		return &TooNarrowError{Chart: "next-trial chart", Width: c.style.Width, Least: c.style.Width + minZone - room}
	}
	ends := span{c.in.Sizes[0], c.in.Sizes[len(c.in.Sizes)-1]}
	c.axis = axis{low: math.Log(ends.low), high: math.Log(ends.high), x0: c.panel.low, x1: c.panel.high, ratio: true}
	c.axis.ticks = nil
	for _, ladder := range ladders[3:] {
		ticks := c.axis.decades(ladder, 1)
		for i, t := range ticks {
			size := math.Exp(c.axis.low + (t.x-c.axis.x0)/(c.axis.x1-c.axis.x0)*(c.axis.high-c.axis.low))
			ticks[i].label = words.People(math.Round(size))
		}
		if fits(ticks, m.second) {
			c.axis.ticks = ticks
			break
		}
	}
	return nil
}

// x is the place of a size, y that of a chance.
func (c *nextTrial) x(size float64) float64 { return c.axis.x(math.Log(size)) }
func (c *nextTrial) y(p float64) float64    { return c.top + (1-p)*c.height }

// holds reports whether a size lies on the axis.
func (c *nextTrial) holds(size float64) bool { return size > 0 && c.axis.holds(math.Log(size)) }

// Heads over the chances and over the labels of the curves.
const (
	chanceHead      = "Chance"
	chanceHeadUnder = "that the updated review reaches it"
	nextHead        = "Evidence"
	nextHeadUnder   = "effect : none"
)

// page draws the chart.
func (c *nextTrial) page() Drawing {
	m := c.metrics
	d := Drawing{ID: c.style.ID, Width: c.style.Width, Title: c.in.Title, Description: c.description()}
	d.Items = append(d.Items, c.titles.items(1, 1)...)
	under, labels := c.heads+1.18*m.second, c.panel.high+nextLeader
	d.Items = append(d.Items,
		Group{ID: "heads", Items: []Item{
			boldLabel(m.margin, c.heads, m.head, Start, chanceHead),
			label(m.margin, under, m.second, Start, Soft, chanceHeadUnder),
			boldLabel(labels, c.heads, m.head, Start, nextHead),
			label(labels, under, m.second, Start, Soft, nextHeadUnder)}},
		Group{ID: "axis", Items: c.axisItems()},
		Group{ID: "wanted", Items: c.wantedItems()},
		Group{ID: "planned", Items: c.plannedItems()})
	for i, curve := range c.in.Curves {
		d.Items = append(d.Items, Group{ID: fmt.Sprintf("curve-%d", i+1), Title: curve.Label, Items: c.curveItems(curve)})
	}
	d.Items = append(d.Items, Group{ID: "labels", Items: c.labelItems()})
	bottom := c.y(0) + nextUnder + 1.24*m.second
	notes, height := placeNotes(append(c.notes(), c.in.Notes...), m, c.style.Width, bottom+m.note+12.07)
	d.Items = append(d.Items, Group{ID: "notes", Items: notes})
	d.Height = height
	return d
}

// axisItems draws both axes with their numbers and the level grid.
func (c *nextTrial) axisItems() []Item {
	m := c.metrics
	var items []Item
	for i := range 6 {
		p := float64(i) / 5
		y := c.y(p)
		items = append(items,
			Line{X1: c.panel.low, Y1: y, X2: c.panel.high, Y2: y, Width: 0.5, Ink: Grid},
			Line{X1: c.panel.low - 2.2, Y1: y, X2: c.panel.low, Y2: y, Width: 0.5},
			label(c.panel.low-4, y+uprightText*m.second, m.second, End, Ordinary, fmt.Sprintf("%d%%", 20*i)))
	}
	base := c.y(0)
	items = append(items,
		Line{X1: c.panel.low, Y1: c.top, X2: c.panel.low, Y2: base, Width: 0.5},
		Line{X1: c.panel.low, Y1: base, X2: c.panel.high, Y2: base, Width: 0.5})
	for _, t := range c.axis.ticks {
		items = append(items,
			Line{X1: t.x, Y1: base, X2: t.x, Y2: base + 2.2, Width: 0.5},
			label(t.x, base+nextUnder-2.5, m.second, Middle, Ordinary, t.label))
	}
	return append(items, label((c.panel.low+c.panel.high)/2, base+nextUnder-2.5+1.24*m.second, m.second, Middle, Soft, c.in.Unit))
}

// wantedItems draws the level of the wanted chance.
func (c *nextTrial) wantedItems() []Item {
	y := c.y(c.in.Wanted)
	return []Item{Line{X1: c.panel.low, Y1: y, X2: c.panel.high, Y2: y, Width: 0.75, Dash: []float64{3, 2}}}
}

// plannedItems draws the size thought of, if the axis holds it.
func (c *nextTrial) plannedItems() []Item {
	if !c.holds(c.in.Planned) {
		return nil
	}
	x := c.x(c.in.Planned)
	return []Item{Line{X1: x, Y1: c.top, X2: x, Y2: c.y(0), Width: 0.75, Dash: []float64{3, 2}}}
}

// curveItems draws a curve with its disc at the planned size, and on the wanted one
// the smallest size.
func (c *nextTrial) curveItems(curve ChanceCurve) []Item {
	line := Line{Width: nextLine, Ink: Probability, Round: true}
	switch {
	case curve.Interval:
		line.Ink, line.Dash, line.Round = Ordinary, []float64{4, 2}, false
	case curve.Wanted:
		line.Width = nextWantedLine
	}
	var items []Item
	for i := 1; i < len(c.in.Sizes); i++ {
		line.X1, line.Y1 = c.x(c.in.Sizes[i-1]), c.y(curve.Chances[i-1])
		line.X2, line.Y2 = c.x(c.in.Sizes[i]), c.y(curve.Chances[i])
		items = append(items, line)
	}
	if c.holds(c.in.Planned) {
		items = append(items, Disc{X: c.x(c.in.Planned), Y: c.y(curve.Planned), Radius: nextDisc, Paint: Paint{Fill: line.Ink, Outline: Paper, OutlineWidth: discRim}})
	}
	if curve.Wanted && c.holds(c.in.Smallest) {
		items = append(items, Disc{X: c.x(c.in.Smallest), Y: c.y(c.in.Wanted), Radius: nextDisc, Paint: Hollow(Probability, discOutline)})
	}
	return items
}

// labelItems writes what each curve is at its right end, pushed apart, with a leader.
func (c *nextTrial) labelItems() []Item {
	size := c.metrics.second
	curves := slices.Clone(c.in.Curves)
	last := func(curve ChanceCurve) float64 { return curve.Chances[len(curve.Chances)-1] }
	slices.SortStableFunc(curves, func(a, b ChanceCurve) int { return cmp.Compare(last(b), last(a)) })
	wanted, heights := make([]float64, len(curves)), make([]float64, len(curves))
	for i, curve := range curves {
		wanted[i], heights[i] = c.y(last(curve)), size
	}
	need := float64(len(curves)) * (size + 1.5)
	room := span{c.top - size/2, max(c.y(0)+size/2, c.top-size/2+need)}
	var items []Item
	for i, y := range pushApart(wanted, heights, 1.5, room) {
		x := c.panel.high
		t := label(x+nextLeader, y+uprightText*size, size, Start, Ordinary, curves[i].Label)
		t.Spans[0].Bold = curves[i].Wanted
		items = append(items, Line{X1: x, Y1: wanted[i], X2: x + nextLeader - 2, Y2: y, Width: 0.5, Ink: SpanRule}, t)
	}
	return items
}

// notes say how to read the chart.
func (c *nextTrial) notes() []Note {
	text := "solid, the evidence; dashed curve, the interval. "
	var wanted string
	for _, curve := range c.in.Curves {
		if curve.Wanted {
			wanted = curve.Label
		}
	}
	if wanted != "" {
		text += fmt.Sprintf("Heavy: %s, wanted with a chance of %s (dashed level).", wanted, words.Probability(c.in.Wanted))
		if c.holds(c.in.Smallest) {
			text += " Open disc: the smallest size that reaches it."
		}
	}
	planned := words.People(c.in.Planned) + " " + c.in.Unit
	if c.holds(c.in.Planned) {
		return []Note{{Head: "Curves", Text: text + " Dashed upright: " + planned + "."}}
	}
	return []Note{{Head: "Curves", Text: text + " The size given, " + planned + ", is beyond the axis."}}
}

// description carries all numbers of the chart.
func (c *nextTrial) description() string {
	var b strings.Builder
	for _, curve := range c.in.Curves {
		fmt.Fprintf(&b, "%s, chance by %s:", curve.Label, c.in.Unit)
		for i, size := range c.in.Sizes {
			fmt.Fprintf(&b, " %s %s;", words.People(size), words.Probability(curve.Chances[i]))
		}
		fmt.Fprintf(&b, " at the size given, %s, %s. ", words.People(c.in.Planned), words.Probability(curve.Planned))
	}
	for _, n := range append(c.notes(), c.in.Notes...) {
		fmt.Fprintf(&b, "%s: %s ", n.Head, n.Text)
	}
	return strings.TrimSpace(b.String())
}
