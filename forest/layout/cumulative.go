package layout

import "math"

// cumulative is a cumulative chart while it is laid out.
type cumulative struct {
	in      CumulativeInput // cleaned
	style   Style
	metrics metrics
	titles  titleBlock
	plot    span      // left and right end of both panels
	beside  float64   // left edge of the texts at the right
	xs      []float64 // of the points
	names   []arrivalLabel
	ladder  ladder
	axis    axis    // of the estimates, upwards
	nameEnd float64 // baseline of the last line of names
	timeAt  float64 // height of the axis of dates
}

// Sizes of a cumulative chart in points.
const (
	ladderStep    = 30    // height of a step
	mostLadder    = 210   // height of the ladder, above which its steps shrink
	ladderFoot    = 0.9   // steps drawn below even odds
	ladderLeast   = 4     // steps drawn above
	estimateSpace = 20    // from the ladder to the panel of estimates
	estimatePanel = 84    // height of the panel of estimates
	besideSpace   = 4.5   // from the panels to the texts at the right
	besideWidth   = 37.84 // least width of the texts at the right on a wide chart
	tailLength    = 7.3   // of the line after the last point
	leaderHeight  = 9     // of the bent lines from names to arrivals
	uprightText   = 0.35  // baseline below the middle, in type sizes
	namesBeyond   = 12    // points above which only those that move the evidence are named
	namedMove     = 0.5   // steps that such a point moves it
	estimateDisc  = 2.2
	evidenceDisc  = 2.4
	discOutline   = 1.1
	finalDisc     = 3
	finalInterval = 1.4
	interval      = 0.9
	discRim       = 0.7
)

// Cumulative lays out how evidence arrived: over dates a ladder of evidence in
// steps, labelled by odds and words, with the line of evidence after each
// arrival, the same line read as probability from a prior at the right, and
// below it the estimates with their intervals.
//
// Points that are not all dated, or that are ordered by something else, stand at
// equal distances. On a narrow chart numbers take the place of names. Evidence
// and intervals beyond their axes end in arrows.
//
// It returns an error naming the point if a number is not finite or beyond what
// an axis can show, or if dates descend, and a *TooNarrowError if the panels find
// no room.
func Cumulative(in CumulativeInput, style Style) (Document, error) {
	if err := in.validate(); err != nil {
		return Document{}, err
	}
	style, err := style.settled("cumulative", "cumulative chart")
	if err != nil {
		return Document{}, err
	}
	c := &cumulative{in: in.cleaned(), style: style, metrics: cumulativeMetrics(style)}
	if err := c.arrange(); err != nil {
		return Document{}, err
	}
	return onePage(c.page()), nil
}

// narrowBelow is the width in points under which charts take their narrow form.
const narrowBelow = 340

// cumulativeMetrics returns the type sizes of a cumulative chart.
func cumulativeMetrics(style Style) metrics {
	m := metrics{row: 7.25, lead: 1.36, margin: 3}
	headShare, secondShare := 0.97, 0.92
	if style.Width < narrowBelow {
		m.twoLine, m.lead, m.margin = true, 1.34, 2.5
		headShare, secondShare = 0.94, 0.9
	}
	if style.TypeSize > 0 {
		m.row = style.TypeSize
	}
	m.head, m.second = max(minType, headShare*m.row), max(minType, secondShare*m.row)
	m.note = m.second
	return m
}

// arrange places panels, points and names.
func (c *cumulative) arrange() error {
	m := c.metrics
	c.titles = placeTitles(c.in.Title, c.in.Subtitle, 0, c.style, m)
	c.ladder = c.newLadder()
	low, high := c.estimateLimits()
	c.axis = axis{low: low, high: high, x0: estimatePanel, ratio: c.in.Scale.Ratio}
	c.axis.setUprightTicks(m.second)
	c.plot.low = m.margin + c.leftWidth() + 4
	right := c.rightWidth()
	c.beside = c.style.Width - m.margin - right
	c.plot.high = c.beside - besideSpace
	if room := c.plot.high - c.plot.low; room < minZone {
		return &TooNarrowError{Chart: "cumulative chart", Width: c.style.Width, Least: c.style.Width + minZone - room}
	}
	c.xs = c.pointPlaces()
	c.names = c.placeNames()
	top := c.titles.bottom + 17
	if c.style.NoTitle {
		top = 2
	}
	c.nameEnd = top + m.second + float64(c.nameLines()-1)*nameLead*m.second
	c.ladder.top = c.changeBase() + 2 + leaderHeight
	c.axis.shift(c.ladder.bottom() + estimateSpace)
	c.timeAt = c.axis.x0 + 2
	return nil
}

// changeBase is the baseline of the changes in steps under the names.
func (c *cumulative) changeBase() float64 { return c.nameEnd + c.metrics.second + 1 }

// leftWidth is the room of the labels at the left of both panels.
func (c *cumulative) leftWidth() float64 {
	size := c.metrics.second
	most := Width("194 : 1", size, false)
	if !c.metrics.twoLine {
		most += 3
	}
	for _, rung := range c.ladder.rungs() {
		most = max(most, Width(rung.odds, size, false), Width(rung.word, size, false))
	}
	for _, t := range c.axis.ticks {
		most = max(most, Width(t.label, size, false))
	}
	for _, side := range []string{c.in.Sides.Lower, c.in.Sides.Higher} {
		most = max(most, min(Width(side, size, false), 1.5*most))
	}
	return most
}

// rightWidth is the room of the texts at the right of both panels.
func (c *cumulative) rightWidth() float64 {
	m := c.metrics
	last := c.last()
	most := max(Width(intervalText(c.in.Scale, last.Low, last.High), m.second, false), Width(effectText(c.in.Scale, last.Estimate), m.row, true))
	if c.in.Prior > 0 {
		most = max(most, Width(probabilityHead, m.head, true), Width(probabilityUnder, m.second, false),
			Width(c.priorLabel(), m.second, false), 1+Width("> 99.9%", m.row, true))
	}
	if !m.twoLine {
		most = max(most, besideWidth)
	}
	return most
}

// last is the point of all studies.
func (c *cumulative) last() CumulativePoint { return c.in.Points[len(c.in.Points)-1] }

// estimateLimits returns the ends of the axis of estimates. It holds no effect
// and the last interval, then the estimates, then the other intervals but for
// those over four times as wide as the middle one.
func (c *cumulative) estimateLimits() (low, high float64) {
	rows := make([]ForestRow, len(c.in.Points))
	for i, p := range c.in.Points {
		rows[i] = ForestRow{Estimate: p.Estimate, Low: p.Low, High: p.High}
	}
	typical := typicalWidth(rows)
	most, widest := logSpan, widestLogSpan
	if !c.in.Scale.Ratio {
		most, widest = 8*typical, 12*typical
	}
	last := c.last()
	s := span{low: c.in.Scale.Null, high: c.in.Scale.Null}
	s.hold(last.Estimate)
	s.stretch(last.Low, last.High, max(widest, s.high-s.low))
	most = max(most, s.high-s.low)
	for _, v := range nearestFirst(rows, last.Estimate) {
		wider := s
		if wider.hold(v); wider.high-wider.low <= most {
			s = wider
		}
	}
	left, right := math.Inf(1), math.Inf(-1)
	for _, r := range rows {
		if r.High-r.Low <= 4*typical {
			left, right = math.Min(left, r.Low), math.Max(right, r.High)
		}
	}
	s.stretch(left, right, most)
	return uprightEnds(s, c.in.Scale)
}

// uprightEnds ends an axis a tenth beyond labelled values, so that the outermost
// labels stand inside it.
func uprightEnds(s span, scale EffectScale) (low, high float64) {
	if least := leastSpan(scale, math.Max(math.Abs(s.low), math.Abs(s.high))); s.high-s.low < least {
		middle := (s.low + s.high) / 2
		s = span{middle - least/2, middle + least/2}
	}
	if !scale.Ratio || s.high-s.low < math.Log(2.5) || s.high-s.low > 2*math.Ln10 {
		return outward(s.low, s.high, scale.Ratio)
	}
	below, above := math.Log(0.9), math.Log(1.1)
	return roundLog(s.low-below, ladders[2], false) + below, roundLog(s.high-above, ladders[2], true) + above
}

// page draws the chart.
func (c *cumulative) page() Drawing {
	d := Drawing{ID: c.style.ID, Width: c.style.Width, Title: c.in.Title, Description: c.description()}
	if d.Title == "" {
		d.Title = "Evidence as the " + c.in.plural(2) + " arrived"
	}
	d.Items = append(d.Items, c.titles.items(1, 1)...)
	d.Items = append(d.Items,
		Group{ID: "heads", Items: c.headItems()},
		Group{ID: "arrivals", Items: c.arrivalItems()},
		Group{ID: "ladder", Items: c.ladderItems()},
		Group{ID: "evidence", Items: c.evidenceItems()},
		Group{ID: "probability", Items: c.probabilityItems()},
		Group{ID: "estimates", Items: c.estimateItems()})
	times, bottom := c.timeItems()
	d.Items = append(d.Items, Group{ID: "axis", Items: times})
	notes, height := placeNotes(c.notes(), c.metrics, c.style.Width, bottom+c.metrics.note+12.07)
	d.Items = append(d.Items, Group{ID: "notes", Items: notes})
	d.Height = height
	return d
}

// Heads over the scale of probability.
const (
	probabilityHead  = "Probability"
	probabilityUnder = "of an effect"
)

// headItems draws the heads over both scales and over the estimates.
func (c *cumulative) headItems() []Item {
	m := c.metrics
	under := c.nameEnd + 1.18*m.second
	items := []Item{
		boldLabel(m.margin, c.nameEnd, m.head, Start, c.evidenceHead()),
		label(m.margin, under, m.second, Start, Soft, evidenceUnder),
	}
	if c.in.Prior > 0 {
		items = append(items,
			boldLabel(c.beside, c.nameEnd, m.head, Start, probabilityHead),
			label(c.beside, under, m.second, Start, Soft, probabilityUnder))
	}
	return items
}

const evidenceUnder = "effect : none"

func (c *cumulative) evidenceHead() string {
	if c.metrics.twoLine {
		return "Evidence"
	}
	return "Evidence ratio"
}
