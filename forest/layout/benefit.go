package layout

import (
	"math"
	"strings"
)

// benefit is a chart of benefit, trivial effect and harm while it is laid out.
type benefit struct {
	in      BenefitInput // cleaned
	style   Style
	metrics metrics
	titles  titleBlock
	columns benefitColumns
	axis    axis
	rail    rail
	heads   benefitHeads
}

// benefitColumns are the places of the columns in points. The narrow form has no
// columns of texts: they stand under the marks.
type benefitColumns struct {
	nameWidth float64
	zone      span
	valueEnd  float64
	rail      span
	odds      oddsColumn // of the rail
	harm      oddsColumn // the last column
}

// oddsColumn is a column of odds, aligned at the colon.
type oddsColumn struct{ left, colon, right float64 }

// benefitHeads are the heights above the rows.
type benefitHeads struct {
	first, middle, second float64 // baselines
	rule                  float64
}

// Sizes of a benefit chart in points.
const (
	benefitPitch      = 22
	benefitPad        = 3    // above the first and below the last row
	benefitHalf       = 4.6  // half the height of a diamond
	benefitBar        = 7    // height of a bar
	benefitRail       = 102  // width of the rail in the wide form
	benefitRailStart  = -1.0 // in steps
	benefitNames      = 65   // least width of the names
	benefitNamesShare = 0.22
	benefitValueGap   = 12 // between the axis of effects and its numbers
	benefitColumnGap  = 11
	benefitNarrow     = 4.7 // pitch of the narrow form, in type sizes
	leastBenefitZone  = 70
)

// Benefit lays out whether the effect is large enough to matter: for each baseline risk
// the difference with its interval against the trivial zone, and on a rail the evidence
// for an important benefit over a trivial effect. It returns an error naming the row if
// a number is not finite or beyond what an axis can show, and a *TooNarrowError if the
// width cannot hold the rows.
func Benefit(in BenefitInput, style Style) (Document, error) {
	if err := in.validate(); err != nil {
		return Document{}, err
	}
	style, err := style.settled("benefit-trivial-harm", "benefit chart")
	if err != nil {
		return Document{}, err
	}
	b := &benefit{in: in.cleaned(), style: style}
	if err := b.arrange(); err != nil {
		return Document{}, err
	}
	return onePage(b.page()), nil
}

// arrange chooses the form, sizes, columns and axes.
func (b *benefit) arrange() error {
	b.metrics = wideMetrics(len(b.in.Rows), b.style.TypeSize)
	b.columns = b.wideColumns()
	if b.columns.zone.high-b.columns.zone.low < minZone {
		b.metrics = narrowMetrics(b.style.TypeSize)
		b.columns = b.narrowColumns()
		if short := leastBenefitZone - (b.columns.zone.high - b.columns.zone.low); short > 0 {
			return &TooNarrowError{Chart: "benefit chart", Width: b.style.Width, Least: b.style.Width + 2*short}
		}
	}
	low, high := b.limits()
	b.axis = axis{low: low, high: high, x0: b.columns.zone.low, x1: b.columns.zone.high, ratio: b.in.Scale.Ratio && !b.in.PerThousand}
	b.axis.setTicks(b.metrics.second)
	if b.in.PerThousand { // the directions below say which side is fewer
		for i := range b.axis.ticks {
			b.axis.ticks[i].label = strings.TrimPrefix(b.axis.ticks[i].label, "−")
		}
	}
	var ln []float64
	for _, r := range b.in.Rows {
		if !math.IsNaN(r.Benefit) {
			ln = append(ln, r.Benefit)
		}
	}
	steps := railSpan(benefitRailStart, ln)
	steps.low = math.Floor(steps.low)
	b.rail = rail{steps: steps, place: b.columns.rail}
	b.placeHeads()
	return nil
}

// limits returns the ends of the axis: it holds no effect, the estimates with their
// intervals, and the thresholds with room beyond them.
func (b *benefit) limits() (low, high float64) {
	null := b.in.null()
	s := span{null, null}
	const beyond = 1.5
	for _, r := range b.in.Rows {
		s.hold(r.Estimate)
		for _, v := range []float64{r.From, r.To} {
			if !math.IsNaN(v) {
				s.hold(null + beyond*(v-null))
			}
		}
	}
	ends := s
	for _, r := range b.in.Rows {
		ends.hold(r.Low)
		ends.hold(r.High)
	}
	ratio := b.in.Scale.Ratio && !b.in.PerThousand
	most := math.Inf(1)
	if ratio {
		most = max(widestLogSpan, s.high-s.low)
	}
	s.stretch(ends.low, ends.high, most)
	if least := leastSpan(b.in.Scale, max(math.Abs(s.low), math.Abs(s.high))); s.high-s.low < least {
		s = span{s.low - least/2, s.high + least/2}
	}
	low, high = outward(s.low, s.high, ratio)
	if b.in.PerThousand { // no difference is larger than everybody
		low, high = max(low, -1000), min(high, 1000)
	}
	return low, high
}

// widest returns the largest width of a text of the rows.
func (b *benefit) widest(size float64, bold bool, text func(BenefitRow) string) float64 {
	most := 0.0
	for _, r := range b.in.Rows {
		most = max(most, Width(text(r), size, bold))
	}
	return most
}

// oddsAt places a column of odds that ends at a right edge.
func (b *benefit) oddsAt(right, least float64, value func(BenefitRow) float64, texts ...float64) oddsColumn {
	size := b.metrics.row
	leftPart, rightPart := 0.0, 0.0
	for _, r := range b.in.Rows {
		text := oddsText(value(r))
		leftPart = max(leftPart, Width(text[0], size, true))
		rightPart = max(rightPart, Width(text[1], size, true))
	}
	half := 0.3 * size
	c := oddsColumn{right: right, colon: right - max(least, rightPart+half)}
	c.left = c.colon - half - leftPart
	for _, width := range texts {
		c.left = min(c.left, right-width)
	}
	return c
}

// outOfReach stands where a baseline cannot have so large an effect.
const outOfReach = "out of reach"

// oddsText are the odds left and right of the colon; blank where out of reach.
func oddsText(ln float64) [2]string {
	if math.IsNaN(ln) {
		return [2]string{}
	}
	return oddsParts(ln)
}

// hasUnreachable reports whether a value of the rows is out of reach.
func (b *benefit) hasUnreachable(value func(BenefitRow) float64) bool {
	for _, r := range b.in.Rows {
		if math.IsNaN(value(r)) {
			return true
		}
	}
	return false
}

func benefitOf(r BenefitRow) float64 { return r.Benefit }
func harmOf(r BenefitRow) float64    { return r.Harm }

// wideColumns places the columns from the right edge inwards.
func (b *benefit) wideColumns() benefitColumns {
	m := b.metrics
	u := m.row / 7.5
	reach := func(value func(BenefitRow) float64) float64 {
		if b.hasUnreachable(value) {
			return Width(outOfReach, m.second, false)
		}
		return 0
	}
	var c benefitColumns
	c.harm = b.oddsAt(b.style.Width-m.margin, 11.42*u, harmOf, Width(b.in.Heads[1], m.head, true), reach(harmOf))
	settings := b.widest(m.second, false, func(r BenefitRow) string { return r.Settings })
	c.odds = b.oddsAt(c.harm.left-benefitColumnGap, 16*u, benefitOf, settings, reach(benefitOf))
	c.rail.high = c.odds.left - 12
	c.rail.low = c.rail.high - benefitRail
	c.valueEnd = c.rail.low - 14
	values := max(b.widest(m.row, true, func(r BenefitRow) string { return r.Value }), b.widest(m.second, false, func(r BenefitRow) string { return r.Interval }))
	c.zone.high = c.valueEnd - values - benefitValueGap
	names := max(b.widest(m.row, true, func(r BenefitRow) string { return r.Name }), b.widest(m.second, false, func(r BenefitRow) string { return r.Below }),
		Width(b.in.Under, m.second, false))
	c.nameWidth = min(benefitNamesShare*b.style.Width, max(benefitNames, names))
	c.zone.low = m.margin + c.nameWidth + zoneBefore
	return c
}

// narrowColumns places the axis and the rail side by side; texts stand under the marks.
func (b *benefit) narrowColumns() benefitColumns {
	m := b.metrics
	var c benefitColumns
	right := b.style.Width - m.margin
	c.rail = span{b.style.Width * 0.64, right - 4}
	c.zone = span{m.margin + 5, c.rail.low - 18}
	c.nameWidth = right - m.margin
	c.valueEnd = c.rail.low - 4
	return c
}

// placeHeads places everything above the rows.
func (b *benefit) placeHeads() {
	m := b.metrics
	b.titles = placeTitles(b.in.Title, b.in.Subtitle, 0, b.style, m)
	h := &b.heads
	if m.twoLine {
		u := m.row / 7.25
		h.first = b.titles.bottom + 16.4*u
		h.middle, h.second = h.first, h.first+9.6*u
		h.rule = h.second + 4.5*u
		return
	}
	u := max(1, m.row/7.5)
	h.first = b.titles.bottom + 22.5*u
	h.middle, h.second = h.first+11.85*u, h.first+20*u
	h.rule = h.second + 4.5*u
}

// pitch is the height of a row.
func (b *benefit) pitch() float64 {
	if b.metrics.twoLine {
		return benefitNarrow * b.metrics.row
	}
	return benefitPitch * max(1, b.metrics.row/7.5)
}

// top is the upper edge of a row.
func (b *benefit) top(i int) float64 { return b.heads.rule + benefitPad + float64(i)*b.pitch() }

// mark is the height of the marks of a row.
func (b *benefit) mark(i int) float64 {
	if b.metrics.twoLine {
		return b.top(i) + 2.45*b.metrics.row
	}
	return b.top(i) + b.pitch()/2
}

// bottom is the height of the axes.
func (b *benefit) bottom() float64 { return b.top(len(b.in.Rows)) + benefitPad }

// page draws the chart.
func (b *benefit) page() Drawing {
	d := Drawing{ID: b.style.ID, Width: b.style.Width, Title: b.in.Title, Description: b.description()}
	d.Items = append(d.Items, b.titles.items(1, 1)...)
	d.Items = append(d.Items,
		Group{ID: "heads", Items: b.headItems()},
		Group{ID: "grid", Items: b.gridItems()},
		Group{ID: "rows", Items: b.rowItems()})
	foot, bottom := b.footItems()
	d.Items = append(d.Items, Group{ID: "axes", Items: foot})
	items, height := placeNotes(b.notes(), b.metrics, b.style.Width, bottom+b.metrics.note+6)
	d.Items = append(d.Items, Group{ID: "notes", Items: items})
	d.Height = height
	return d
}
