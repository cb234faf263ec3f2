package layout

import "math"

// subsets is a chart of subsets while it is laid out.
type subsets struct {
	in      SubsetsInput // cleaned
	style   Style
	metrics metrics
	titles  titleBlock
	plot    span // left and right end of the panel
	ladder  ladder
	axis    axis
	heads   subsetsHeads
	density density
	right   float64 // left edge of the shares
	shares  []subsetsShare
}

// subsetsHeads are the baselines above the panel.
type subsetsHeads struct{ first, second, lines float64 }

// Sizes of a chart of subsets in points.
const (
	subsetsHeight       = 208 // of the panel
	subsetsHeightNarrow = 168
	subsetsCell         = 2.5 // side of a cell of the panel, about
	subsetsTrim         = 0.0025
	subsetsBeside       = 6   // from the panel to the shares
	farNull             = 6   // times the span of the estimates that the axis may grow to hold no effect
	nearZone            = 1.1 // and to hold an important difference
	fewSubsets          = 127
)

// Subsets lays out the results over all subsets of the studies: evidence in
// steps, on a ladder with its odds and words, against the pooled estimate, as
// greys that grow darker where subsets lie denser. Up to 127 subsets are drawn as
// discs instead. The result of all studies is marked; with a chosen study,
// outlines hold 95% of the subsets with it and of those without it. At the right
// stand the shares of subsets whose evidence reaches each step.
//
// The axes leave out a quarter of a hundredth of the subsets on each side, and
// what lies far from the middle 95%; a note says how many.
//
// It returns an error if a number is not finite or beyond what an axis can show,
// if counts and grid disagree, and a *TooNarrowError if the panel finds no room.
func Subsets(in SubsetsInput, style Style) (Document, error) {
	if err := in.validate(); err != nil {
		return Document{}, err
	}
	style, err := style.settled("subsets", "subsets chart")
	if err != nil {
		return Document{}, err
	}
	c := &subsets{in: in.cleaned(), style: style, metrics: subsetsMetrics(style)}
	if err := c.arrange(); err != nil {
		return Document{}, err
	}
	return onePage(c.page()), nil
}

// subsetsMetrics returns the type sizes of a chart of subsets.
func subsetsMetrics(style Style) metrics {
	m := metrics{row: 7.25, lead: 1.36, margin: 3}
	if style.Width < subsetsNarrowBelow {
		m.twoLine, m.lead, m.margin = true, 1.34, 2.5
	}
	if style.TypeSize > 0 {
		m.row = style.TypeSize
	}
	m.head, m.second = max(minType, 0.96*m.row), max(minType, 0.92*m.row)
	m.note = m.second
	return m
}

// subsetsNarrowBelow is the width under which the chart takes its narrow form.
const subsetsNarrowBelow = 340

// arrange places panel, axes and cells.
func (c *subsets) arrange() error {
	m := c.metrics
	c.titles = placeTitles(c.in.Title, c.in.Subtitle, 0, c.style, m)
	top := c.titles.bottom
	if c.style.NoTitle {
		top = -6
	}
	c.heads = subsetsHeads{first: top + 17}
	c.heads.second = c.heads.first + 1.24*m.second
	c.heads.lines = c.heads.second + 1.5*m.second

	x, y := c.limits()
	height := float64(subsetsHeight)
	if m.twoLine {
		height = subsetsHeightNarrow
	}
	c.ladder = ladder{steps: y, step: height / (y.high - y.low), top: c.heads.lines + 3.5}
	c.shares = c.shareTexts()
	c.right = c.style.Width - m.margin - c.shareWidth()
	c.plot = span{m.margin + c.leftWidth() + 4, c.right - subsetsBeside}
	if room := c.plot.high - c.plot.low; room < minZone {
		return &TooNarrowError{Chart: "subsets chart", Width: c.style.Width, Least: c.style.Width + minZone - room}
	}
	c.axis = axis{low: x.low, high: x.high, x0: c.plot.low, x1: c.plot.high, ratio: c.in.Scale.Ratio}
	c.axis.setTicks(m.second)
	c.density = c.newDensity()
	return nil
}

// limits returns the ends of both axes. They hold the subsets but for a few on
// each side and the result of all studies; the axis of estimates also no effect
// and the important difference, unless these lie far off.
func (c *subsets) limits() (x, y span) {
	g := c.in.Grid
	across, up := make([]float64, g.Estimate.Cells), make([]float64, g.Steps.Cells)
	for i, n := range g.Counts {
		across[i/g.Steps.Cells] += float64(n)
		up[i%g.Steps.Cells] += float64(n)
	}
	x, y = g.Estimate.middle(across), g.Steps.middle(up)
	full := c.in.Full
	x.hold(full.Estimate)
	y.hold(full.LnEvidence / lnStep)
	widest := farNull * (x.high - x.low)
	offer := func(v, most float64) {
		wider := x
		if wider.hold(v); wider.high-wider.low <= most {
			x = wider
		}
	}
	offer(c.in.Scale.Null, widest)
	if z := c.in.Important; z != nil {
		offer(z.Low, nearZone*(x.high-x.low))
		offer(z.High, nearZone*(x.high-x.low))
	}
	if room := 0.08 * (x.high - x.low); x.low <= c.in.Scale.Null && c.in.Scale.Null <= x.high {
		x.hold(c.in.Scale.Null - room)
		x.hold(c.in.Scale.Null + room)
	}
	if least := leastSpan(c.in.Scale, math.Max(math.Abs(x.low), math.Abs(x.high))); x.high-x.low < least {
		middle := (x.low + x.high) / 2
		x = span{middle - least/2, middle + least/2}
	}
	x.low, x.high = outward(x.low, x.high, c.in.Scale.Ratio)
	return x, ladderEnds(y)
}

// ladderEnds returns the ends of a ladder that shows a span of steps: from just
// under even odds to four steps, further where the span does; a span far from
// even odds has the ladder to itself.
func ladderEnds(y span) span {
	s := span{-0.9, 4}
	switch {
	case y.low > 8:
		s.low = math.Floor(y.low - 0.05*(y.high-y.low))
	case y.low < s.low:
		s.low = math.Floor(y.low)
	}
	switch {
	case y.high < -8:
		s.high = math.Ceil(y.high)
	case y.high > s.high:
		s.high = math.Ceil(y.high)
	}
	if s.high-s.low < 4 {
		s.high = s.low + 4
	}
	return s
}

// middle returns the range that the axis shows of counts along it: all but a small
// share at each end, and on either side of the middle 95% no more than its length.
func (a GridAxis) middle(counts []float64) span {
	all, core := a.trimmed(counts, subsetsTrim), a.trimmed(counts, (1-outlineShare)/2)
	length := core.high - core.low
	return span{math.Max(all.low, core.low-length), math.Min(all.high, core.high+length)}
}

// trimmed returns the range that leaves out at most a share of the counts at each
// end.
func (a GridAxis) trimmed(counts []float64, share float64) span {
	total := 0.0
	for _, n := range counts {
		total += n
	}
	width := (a.High - a.Low) / float64(a.Cells)
	first, last := 0, len(counts)-1
	for held := counts[first]; held <= share*total; held += counts[first] {
		first++
	}
	for held := counts[last]; held <= share*total; held += counts[last] {
		last--
	}
	return span{a.Low + float64(first)*width, a.Low + float64(last+1)*width}
}

// page draws the chart.
func (c *subsets) page() Drawing {
	d := Drawing{ID: c.style.ID, Width: c.style.Width, Title: c.in.Title, Description: c.description()}
	if d.Title == "" {
		d.Title = "Results over the subsets of the " + c.in.plural(2)
	}
	labels := c.placeLabels()
	foot, bottom := c.footItems()
	d.Items = append(d.Items, c.titles.items(1, 1)...)
	d.Items = append(d.Items,
		Group{ID: "density", Items: c.densityItems()},
		Group{ID: "ladder", Items: c.ladder.items(c.plot, c.metrics.second)},
		Group{ID: "heads", Items: c.headItems()},
		Group{ID: "lines", Items: c.lineItems()},
		Group{ID: "outlines", Items: c.outlines()},
		Group{ID: "full", Items: c.fullItems()},
		Group{ID: "labels", Items: labels},
		Group{ID: "shares", Items: c.shareItems()},
		Group{ID: "axes", Items: foot})
	notes, height := placeNotes(c.notes(), c.metrics, c.style.Width, bottom+c.metrics.note+7)
	d.Items = append(d.Items, Group{ID: "notes", Items: notes})
	d.Height = height
	return d
}
