package layout

import (
	"fmt"
	"math"
)

// gridItems draws what lies under the marks: the tint of the pooled row, grid
// lines, hairlines between rows, the bound for none, and the lines of the pooled
// estimate and of no effect.
func (f *forest) gridItems(p pageRange, y levels) []Item {
	m, h := f.metrics, f.heads
	right := f.width - m.margin
	var items []Item
	end := y.rowsEnd + 2
	if y.hasPooled && p.last {
		items = append(items, Rect{X: m.margin, Y: y.rule, Width: right - m.margin, Height: y.bandEnd - y.rule, Paint: Solid(PooledBand)})
		end = y.bandEnd
	}
	for n := 1.0; n <= f.rail.steps.high; n++ {
		x := f.rail.x(n)
		items = append(items, Line{X1: x, Y1: h.rule + 0.4, X2: x, Y2: y.axis, Width: 0.5, Ink: Grid})
	}
	items = append(items, f.hairlines(p, right)...)
	bound := f.rail.x(-mostForNone / lnStep)
	items = append(items, Line{X1: bound, Y1: h.rule + 2, X2: bound, Y2: end, Width: 0.5, Ink: EvidenceNone, Dash: []float64{0.6, 1.8}, Round: true})
	if f.in.Pooled != nil {
		x := f.axis.x(f.in.Pooled.Estimate)
		to := y.rowsEnd
		if p.last {
			to = y.rule + 1
		}
		items = append(items, Line{X1: x, Y1: h.rule + 3, X2: x, Y2: to, Width: 0.6, Ink: Estimate, Dash: []float64{2, 2}})
	}
	null := f.axis.x(f.in.Scale.Null)
	return append(items, Line{X1: null, Y1: h.rule, X2: null, Y2: y.axis, Width: 0.75})
}

// hairlines stand between rows, or every five rows; those of blocks under each row of
// a block but its last.
func (f *forest) hairlines(p pageRange, right float64) []Item {
	m := f.metrics
	tops, _ := f.tops(p)
	entries := f.entries[p.from:p.to]
	var items []Item
	for i := 1; i < len(entries); i++ {
		y := tops[i]
		switch {
		case m.grouped && i%5 != 0, entries[i].kind == headEntry, entries[i-1].kind == headEntry:
			continue
		case m.grouped:
			y -= groupGap / 2
		}
		items = append(items, Line{X1: m.margin, Y1: y, X2: right, Y2: y, Width: 0.35, Ink: Hairline})
	}
	return items
}

// rowItems draws the rows of a page, each as a group.
func (f *forest) rowItems(p pageRange) []Item {
	var items []Item
	heaviest := 0.0
	for _, r := range f.in.Rows {
		heaviest = math.Max(heaviest, r.Weight)
	}
	tops, _ := f.tops(p)
	for at, e := range f.entries[p.from:p.to] {
		y := f.centre(e, tops[at])
		switch e.kind {
		case headEntry:
			items = append(items, f.blockHead(e.index, y))
			continue
		case subtotalEntry:
			items = append(items, f.subtotal(e.index, y))
			continue
		}
		i := e.index
		r, t := f.in.Rows[i], f.rows[i]
		g := Group{ID: fmt.Sprintf("row-%d", i+1)}
		if t.name != t.fullName {
			g.Title = t.fullName
		}
		g.Items = append(g.Items, f.rowTexts(t, y, Paper)...)
		g.Items = append(g.Items, whisker(f.axis, r.Low, r.High, y)...)
		g.Items = append(g.Items, f.square(r, y, heaviest)...)
		g.Items = append(g.Items, f.rail.bar(r.LnEvidence, y, f.metrics.bar, r.Unwanted)...)
		items = append(items, g)
	}
	return items
}

// rowTexts draws the words and numbers of a row; under is what the row lies on.
func (f *forest) rowTexts(t rowText, y float64, under Ink) []Item {
	if f.metrics.twoLine {
		return f.twoLineTexts(t, y, under)
	}
	c, size := f.columns, f.metrics.row
	base := y + baseline(size)
	plain := func(x float64, anchor Anchor, text string) Span {
		return Span{X: x, Anchor: anchor, Text: text, Bold: t.bold}
	}
	row := func(spans ...Span) Text { return Text{Y: base, Size: size, Spans: spans} }
	items := []Item{row(plain(f.metrics.margin+t.indent, Start, t.name))}
	if c.counts.show {
		items = append(items, f.countTexts(t, base)...)
	}
	items = append(items, row(plain(c.estimateEnd, End, t.estimate), plain(c.intervalEnd, End, t.between)))
	if c.showWeight {
		items = append(items, row(plain(c.weightEnd, End, t.weight)))
	}
	return append(items, row(plain(c.oddsLeftEnd, End, t.odds[0]), plain(c.colon, Middle, ":"), plain(c.oddsRight, Start, t.odds[1])))
}

// countTexts draws "11 of 41 · 19 of 40", aligned at both "of" and at the dot;
// the pooled row has totals only.
func (f *forest) countTexts(t rowText, base float64) []Item {
	c, size := f.columns.counts, f.metrics.row
	var items []Item
	if t.bold {
		for arm, count := range t.counts {
			if count.Total != "" {
				items = append(items, boldLabel(c.arms[arm].total, base, size, Start, count.Total))
			}
		}
		return items
	}
	text := Text{Y: base, Size: size}
	for arm, count := range t.counts {
		if count.Total == "" {
			continue
		}
		if arm == 1 && len(text.Spans) > 0 {
			text.Spans = append(text.Spans, Span{X: c.dot, Anchor: Middle, Text: "·", Ink: Soft})
		}
		at := c.arms[arm]
		text.Spans = append(text.Spans,
			Span{X: at.eventsEnd, Anchor: End, Text: count.Events},
			Span{X: at.of, Anchor: Middle, Text: "of", Ink: Soft},
			Span{X: at.total, Text: count.Total})
	}
	if len(text.Spans) == 0 {
		return nil
	}
	return []Item{text}
}

// twoLineTexts draws the name with its numbers below, and the odds under the bar.
func (f *forest) twoLineTexts(t rowText, y float64, under Ink) []Item {
	m := f.metrics
	second := f.secondLine(y)
	ink := Soft
	if t.bold {
		ink = Ordinary
	}
	numbers := label(m.margin+t.indent, second, m.second, Start, ink, t.estimate+" "+t.between)
	numbers.Spans[0].Bold = t.bold
	items := []Item{
		Text{Y: y + baseline(m.row), Size: m.row, Spans: []Span{{X: m.margin + t.indent, Text: t.name, Bold: t.bold}}},
		numbers,
	}
	odds := label(f.rail.zero()+2.5, second, m.second, Start, Ordinary, t.odds[0]+" : "+t.odds[1])
	if t.bold {
		odds.Spans[0].Bold = true
		odds.Spans[0].Text = f.withWord(odds.Spans[0])
		odds.Y += 0.6
	}
	return append(items, onPatch(odds, under, 0.8)...)
}

// withWord adds the word of the pooled evidence to its odds, as far as it fits.
func (f *forest) withWord(odds Span) string {
	ln := f.in.Pooled.LnEvidence
	word := wordText(ln)
	if ln < 0 {
		word += " for none"
	}
	for _, text := range []string{odds.Text + ", " + word, odds.Text + ", " + wordText(ln)} {
		if odds.X+Width(text, f.metrics.second, true) <= f.width-f.metrics.margin {
			return text
		}
	}
	return odds.Text
}

// Sizes of the heads of clipped whiskers, bars and diamonds.
const (
	headDepth  = 3.25
	headHeight = 4.2
	headShort  = 2 // a clipped line stops so far before the tip
)

// whisker draws a row's interval without end caps; an end past the axis stops
// in a head.
func whisker(a axis, low, high, y float64) []Item {
	x1, x2 := a.x(clamp(low, a.low, a.high)), a.x(clamp(high, a.low, a.high))
	var heads []Item
	if low < a.low {
		heads = append(heads, head(a.x0, y, -headDepth, headHeight, Estimate))
		x1 = a.x0 + headShort
	}
	if high > a.high {
		heads = append(heads, head(a.x1, y, headDepth, headHeight, Estimate))
		x2 = a.x1 - headShort
	}
	if x2 <= x1 { // the whole interval lies past one end, or has no length
		return heads
	}
	return append([]Item{Line{X1: x1, Y1: y, X2: x2, Y2: y, Width: 0.9, Ink: Estimate}}, heads...)
}

// square draws a row's marker, its area by weight; one outside the axis is left
// out.
func (f *forest) square(r ForestRow, y, heaviest float64) []Item {
	if !f.axis.holds(r.Estimate) {
		return nil
	}
	share := 1.0
	if heaviest > 0 {
		share = r.Weight / heaviest
	}
	side := math.Max(2.1, f.metrics.square*math.Sqrt(share))
	x := f.axis.x(r.Estimate)
	return []Item{Rect{X: x - side/2, Y: y - side/2, Width: side, Height: side, Paint: Solid(Estimate)}}
}
