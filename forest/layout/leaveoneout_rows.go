package layout

import (
	"fmt"
	"math"
)

// headItems draws the heads of the columns.
func (l *leaveOneOut) headItems() []Item {
	m, c, h := l.metrics, l.columns, l.heads
	right := l.style.Width - m.margin
	items := []Item{boldLabel(m.margin, h.second, m.head, Start, "Without")}
	spanHead := func(from, to float64, text string) {
		text = fitWord(text, to-from, m.head, true)
		items = append(items,
			boldLabel((from+to)/2, h.first, m.head, Middle, text),
			Line{X1: from, Y1: h.first + 3.2, X2: to, Y2: h.first + 3.2, Width: 0.5, Ink: SpanRule})
	}
	name := "Pooled " + l.in.Scale.Measure
	if m.twoLine {
		const title = "Evidence, effect : none"
		items = append(items, boldLabel(right, h.first, m.head, End, title))
		room := right - Width(title, m.head, true) - 6 - m.margin
		short, _ := cut(name, "", room/1.1, m.head)
		items = append(items, boldLabel(m.margin, h.first, m.head, Start, short))
	} else {
		if full := name + " (" + levelText(l.in.Level) + " interval)"; Width(full, m.head, true) <= c.intervalEnd-c.zone.low {
			name = full
		}
		spanHead(c.zone.low, c.intervalEnd, name)
		spanHead(c.rail.low, c.colon+14, "Evidence ratio, effect : none")
		items = append(items,
			boldLabel(right, h.first, m.head, End, carriesHead),
			label(right, h.second, m.second, End, Soft, "steps"))
		if c.spread {
			items = append(items,
				boldLabel(c.tauEnd, h.first, m.head, End, spreadHead),
				label(c.tauEnd, h.second, m.second, End, Soft, "τ"))
		}
	}
	for _, w := range l.words {
		y := h.second
		if w.line == 1 {
			y = h.highWords
		}
		if w.x+Width(w.text, m.second, false)/2 <= right {
			items = append(items, label(w.x, y, m.second, Middle, Soft, w.text))
		}
	}
	return append(items, Line{X1: m.margin, Y1: h.rule, X2: right, Y2: h.rule, Width: 0.75})
}

// gridItems draws what lies under the marks of n rows.
func (l *leaveOneOut) gridItems(n int, axes float64) []Item {
	m, h, a := l.metrics, l.heads, l.axis
	right := l.style.Width - m.margin
	top := h.rule + allAbove
	items := []Item{Rect{X: m.margin, Y: top, Width: right - m.margin, Height: h.band, Paint: Solid(PooledBand)}}
	if x1, x2 := a.x(clamp(l.in.All.Low, a.low, a.high)), a.x(clamp(l.in.All.High, a.low, a.high)); x2 > x1 {
		items = append(items, Rect{X: x1, Y: top + h.band, Width: x2 - x1, Height: axes - top - h.band, Paint: Solid(IntervalBand)})
	}
	for n := math.Ceil(l.rail.steps.low); n <= l.rail.steps.high; n++ {
		if x := l.rail.x(n); n != 0 {
			items = append(items, Line{X1: x, Y1: h.rule + 0.4, X2: x, Y2: axes, Width: 0.5, Ink: Grid})
		}
	}
	for i := 1; i < n; i++ {
		y := h.rowsTop + float64(i)*m.pitch
		if m.grouped {
			if i%5 != 0 {
				continue
			}
			y += groupGap*float64(i/5-1) + groupGap/2
		}
		items = append(items, Line{X1: m.margin, Y1: y, X2: right, Y2: y, Width: 0.35, Ink: Hairline})
	}
	for _, x := range []float64{a.x(l.in.Scale.Null), l.rail.zero()} {
		items = append(items, Line{X1: x, Y1: h.rule, X2: x, Y2: axes, Width: 0.75})
	}
	return items
}

// centre returns the middle of the i-th row of a page; for rows of two lines the
// middle of the first line.
func (l *leaveOneOut) centre(i int) float64 {
	m := l.metrics
	y := l.heads.rowsTop + float64(i)*m.pitch
	if m.grouped {
		y += groupGap * float64(i/5)
	}
	if m.twoLine {
		return y + 5.65*m.row/7.25
	}
	return y + m.pitch/2
}

// allItems draws the row of all studies and the lines that run from it through
// the other rows.
func (l *leaveOneOut) allItems(axes float64) []Item {
	m, h, a, all := l.metrics, l.heads, l.axis, l.in.All
	y := h.rule + allAbove + h.band/2
	if m.twoLine {
		y = h.rule + allAbove + 6.15*m.row/7.25
	}
	x := a.x(all.Estimate)
	items := diamond(a, all.Estimate, all.Low, all.High, y, allHalf)
	items = append(items, Line{X1: x, Y1: y + allHalf, X2: x, Y2: axes, Width: 0.6, Ink: Estimate, Dash: []float64{2, 2}})
	at := l.rail.x(l.railPlace(all.LnEvidence))
	if l.onRail(all.LnEvidence) {
		items = append(items,
			Line{X1: at, Y1: y, X2: at, Y2: axes, Width: 1, Ink: Evidence},
			omissionMark(at, y, allDisc))
	} else {
		items = append(items, l.beyond(all.LnEvidence, y))
	}
	return append(items, l.rowTexts(l.texts[0], y, true)...)
}

func omissionMark(x, y, radius float64) Disc {
	return Disc{X: x, Y: y, Radius: radius, Paint: Paint{Fill: Evidence, Outline: Paper, OutlineWidth: omissionRim}}
}

// onRail reports whether evidence has its place on the rail.
func (l *leaveOneOut) onRail(ln float64) bool {
	return l.rail.steps.low <= ln/lnStep && ln/lnStep <= l.rail.steps.high
}

func (l *leaveOneOut) railPlace(ln float64) float64 {
	return clamp(ln/lnStep, l.rail.steps.low, l.rail.steps.high)
}

// beyond is the head at the end of the rail of evidence that goes past it.
func (l *leaveOneOut) beyond(ln, y float64) Item {
	depth := 3.75
	if ln < 0 {
		depth = -depth
	}
	return head(l.rail.x(l.railPlace(ln)), y, depth, l.metrics.bar, Evidence)
}

// rowItems draws the rows of a page, each as a group.
func (l *leaveOneOut) rowItems(p pageRange) []Item {
	var items []Item
	for i := p.from; i < p.to; i++ {
		y := l.centre(i - p.from)
		o, t := l.in.Rows[i], l.texts[i+1]
		g := Group{ID: fmt.Sprintf("row-%d", i+1)}
		if t.name != t.fullName {
			g.Title = t.fullName
		}
		if o.Problem != "" {
			g.Items = l.problemItems(o, t, y)
		} else {
			g.Items = append(g.Items, whisker(l.axis, o.Low, o.High, y)...)
			if l.axis.holds(o.Estimate) {
				g.Items = append(g.Items, Disc{X: l.axis.x(o.Estimate), Y: y, Radius: omissionPoint, Paint: Paint{Fill: Estimate, Outline: Paper, OutlineWidth: discRim}})
			}
			g.Items = append(g.Items, l.bar(o, y)...)
			g.Items = append(g.Items, l.rowTexts(t, y, false)...)
		}
		items = append(items, g)
	}
	return items
}

// problemItems says in the row why there is no result.
func (l *leaveOneOut) problemItems(o Omission, t omissionText, y float64) []Item {
	m, c := l.metrics, l.columns
	base := y + baseline(m.row)
	text, _ := cut("no result: "+o.Problem, "", c.carriedEnd-c.zone.low, m.second)
	return append([]Item{label(m.margin, base, m.row, Start, Ordinary, t.name)},
		onPatch(label(c.zone.low, base, m.second, Start, Soft, text), Paper, 1)...)
}

// bar draws what a study carries: from the evidence of all studies to that
// without it. What goes past the rail ends in a head there.
func (l *leaveOneOut) bar(o Omission, y float64) []Item {
	from, to := l.rail.x(l.railPlace(l.in.All.LnEvidence)), l.rail.x(l.railPlace(o.LnEvidence))
	x, width, height := math.Min(from, to), math.Abs(from-to), l.metrics.bar
	var items []Item
	switch {
	case o.LnEvidence <= l.in.All.LnEvidence:
		items = append(items, Rect{X: x, Y: y - height/2, Width: width, Height: height, Paint: Solid(Evidence)})
	case width > omissionLine:
		items = append(items, Rect{X: x + omissionLine/2, Y: y - height/2 + omissionLine/2, Width: width - omissionLine, Height: height - omissionLine,
			Paint: Hollow(Evidence, omissionLine)})
	}
	if !l.onRail(o.LnEvidence) {
		return append(items, l.beyond(o.LnEvidence, y))
	}
	return append(items, omissionMark(to, y, min(omissionDisc, 0.3*l.metrics.pitch)))
}

// rowTexts draws the words and numbers of a row.
func (l *leaveOneOut) rowTexts(t omissionText, y float64, bold bool) []Item {
	m, c := l.metrics, l.columns
	base := y + baseline(m.row)
	text := func(x float64, anchor Anchor, text string) Span {
		return Span{X: x, Anchor: anchor, Text: text, Bold: bold}
	}
	row := func(spans ...Span) Text { return Text{Y: base, Size: m.row, Spans: spans} }
	items := []Item{row(text(m.margin, Start, t.name))}
	if m.twoLine {
		return append(items, l.secondLine(t, y, bold)...)
	}
	gap := 0.3 * m.row
	items = append(items, row(text(c.estimateEnd, End, t.estimate), text(c.intervalEnd, End, t.between)))
	if c.spread && t.tau != "" {
		items = append(items, row(text(c.tauEnd, End, t.tau)))
	}
	items = append(items, row(text(c.colon-gap, End, t.odds[0]), text(c.colon, Middle, ":"), text(c.colon+gap, Start, t.odds[1])))
	if t.carried != "" {
		items = append(items, row(text(c.carriedEnd, End, t.carried)))
	}
	return items
}

// secondLine draws the numbers under the name, and under the bar the odds and
// what is carried.
func (l *leaveOneOut) secondLine(t omissionText, y float64, bold bool) []Item {
	m, c := l.metrics, l.columns
	base := y + baseline(m.row) + 1.08*m.row
	ink, under := Soft, Paper
	if bold {
		ink, under = Ordinary, PooledBand
	}
	write := func(x float64, anchor Anchor, ink Ink, text string) Text {
		t := label(x, base, m.second, anchor, ink, text)
		t.Spans[0].Bold = bold
		return t
	}
	items := []Item{write(m.margin, Start, ink, t.estimate+" "+t.between)}
	odds, x := t.odds[0]+" : "+t.odds[1], l.rail.zero()+2.5
	if x+Width(odds, m.second, bold)+Width(t.carried, m.second, bold) > c.carriedEnd-3 {
		x = c.rail.low + 2
	}
	items = append(items, onPatch(write(x, Start, Ordinary, odds), under, 0.8)...)
	if t.carried != "" {
		items = append(items, onPatch(write(c.carriedEnd, End, Ordinary, t.carried), under, 0)...)
	}
	return items
}
