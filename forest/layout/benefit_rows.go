package layout

import (
	"math"
	"strings"

	"steelyard/meta/evidence"
)

// headItems draws the heads of the columns.
func (b *benefit) headItems() []Item {
	m, c, h := b.metrics, b.columns, b.heads
	right := b.style.Width - m.margin
	rule := Line{X1: m.margin, Y1: h.rule, X2: right, Y2: h.rule, Width: 0.75}
	items := b.zoneNames()
	items = append(items, b.stepWords()...)
	if m.twoLine {
		odds := fitWord(b.in.Heads[0], right-m.margin, m.head, true)
		measure := fitWord(b.measureHead(false), right-m.margin-Width(odds, m.head, true)-8, m.head, true)
		return append(items,
			boldLabel(m.margin, h.first, m.head, Start, measure),
			boldLabel(right, h.first, m.head, End, odds), rule)
	}
	spanHead := func(from, to float64, text string) {
		items = append(items,
			boldLabel((from+to)/2, h.first, m.head, Middle, fitWord(text, to-from, m.head, true)),
			Line{X1: from, Y1: h.first + 3.2, X2: to, Y2: h.first + 3.2, Width: 0.5, Ink: SpanRule})
	}
	if b.in.Rows[0].Below != "" {
		items = append(items,
			boldLabel(m.margin, h.middle, m.head, Start, "Baseline risk"),
			label(m.margin, h.second, m.second, Start, Soft, fitWord(b.in.Under, c.nameWidth, m.second, false)))
	}
	spanHead(c.zone.low, c.valueEnd, b.measureHead(true))
	spanHead(c.rail.low, c.odds.right, b.in.Heads[0])
	spanHead(c.harm.left, c.harm.right, b.in.Heads[1])
	return append(items, rule)
}

// stepWords are the words between the step lines, from the left as far as they stand
// apart on one line.
func (b *benefit) stepWords() []Item {
	m := b.metrics
	var items []Item
	last := math.Inf(-1)
	for i, name := range evidence.WordNames() {
		x, half := b.rail.x(float64(i)+0.5), Width(name, m.second, false)/2
		if float64(i+1) > b.rail.steps.high || x-half < last+2 || x+half > b.style.Width-m.margin {
			break
		}
		items = append(items, label(x, b.heads.second, m.second, Middle, Soft, name))
		last = x + half
	}
	return items
}

// measureHead names what the axis shows.
func (b *benefit) measureHead(level bool) string {
	text := capital(b.in.Scale.Measure)
	if b.in.PerThousand {
		text = "Difference per 1000"
	}
	if level {
		text += " (" + levelText(b.in.Level) + " interval)"
	}
	return text
}

// zoneNames names benefit, trivial zone and harm over the axis, each where it fits on
// one line or two; with thresholds that differ by row there is no place that holds for
// all, and the notes name them.
func (b *benefit) zoneNames() []Item {
	if !b.in.alike() {
		return nil
	}
	m, h := b.metrics, b.heads
	r := b.in.Rows[0]
	from, to := b.zoneEnds(r)
	var items []Item
	lines := 2
	if m.twoLine {
		lines = 1
	}
	// The right name may run past the axis, up to what stands beside it.
	beside := b.columns.rail.low - 8
	if !m.twoLine {
		beside = b.columns.valueEnd
	}
	name := func(text string, low, high, end float64) {
		const apart = 3
		room := end - low - apart
		if room < apart {
			return
		}
		parts := wrapPlain(text, max(high-low-apart, Width(strings.Fields(text)[0], m.second, false)), m.second, false)
		most := 0.0
		for _, part := range parts {
			most = max(most, Width(part, m.second, false))
		}
		if len(parts) > lines || most > room {
			return
		}
		x := max((low+high)/2, low+(apart+most)/2)
		for i, part := range parts {
			y := h.second - float64(len(parts)-1-i)*(h.second-h.middle)
			items = append(items, label(x, y, m.second, Middle, Soft, part))
		}
	}
	if !math.IsNaN(r.From) {
		name(b.in.Zones[0], b.axis.x0, from, from)
	}
	name("trivial", from, to, to)
	if !math.IsNaN(r.To) {
		name(b.in.Zones[1], to, b.axis.x1, beside)
	}
	return items
}

// zoneEnds returns the places of a row's trivial zone; an end out of reach is that of
// the axis.
func (b *benefit) zoneEnds(r BenefitRow) (from, to float64) {
	from, to = b.axis.x0, b.axis.x1
	if !math.IsNaN(r.From) {
		from = b.axis.x(clamp(r.From, b.axis.low, b.axis.high))
	}
	if !math.IsNaN(r.To) {
		to = b.axis.x(clamp(r.To, b.axis.low, b.axis.high))
	}
	return from, to
}

// gridItems draws the trivial zones, the thresholds, no effect and the step lines.
func (b *benefit) gridItems() []Item {
	var items []Item
	zone := func(r BenefitRow, top, bottom float64) {
		from, to := b.zoneEnds(r)
		items = append(items, Rect{X: from, Y: top, Width: to - from, Height: bottom - top, Paint: Solid(TrivialZone)})
		for _, end := range []struct{ value, x float64 }{{r.From, from}, {r.To, to}} {
			if !math.IsNaN(end.value) {
				items = append(items, Line{X1: end.x, Y1: top, X2: end.x, Y2: bottom, Width: 0.6, Dash: []float64{3, 2}})
			}
		}
	}
	null := b.axis.x(b.in.null())
	bands := [][2]float64{{b.heads.rule, b.bottom()}}
	if b.metrics.twoLine { // between the lines of text
		bands = nil
		for i := range b.in.Rows {
			bands = append(bands, [2]float64{b.mark(i) - 7, b.mark(i) + 6.5})
		}
	}
	for i, r := range b.in.Rows {
		switch {
		case b.metrics.twoLine:
			zone(r, bands[i][0], bands[i][1])
		case !b.in.alike():
			zone(r, b.top(i)+1, b.top(i)+b.pitch()-1)
		case i == 0:
			zone(r, b.heads.rule, b.bottom())
		}
	}
	for _, band := range bands {
		items = append(items, Line{X1: null, Y1: band[0], X2: null, Y2: band[1], Width: 0.75})
		for n := b.rail.steps.low; n <= b.rail.steps.high; n++ {
			if n != 0 {
				x := b.rail.x(n)
				items = append(items, Line{X1: x, Y1: band[0], X2: x, Y2: band[1], Width: 0.5, Ink: Grid})
			}
		}
	}
	for i := range b.in.Rows[1:] {
		y := b.top(i + 1)
		items = append(items, Line{X1: b.metrics.margin, Y1: y, X2: b.style.Width - b.metrics.margin, Y2: y, Width: 0.35, Ink: Hairline})
	}
	return items
}

// rowItems draws every row, and the line of even odds over the bars.
func (b *benefit) rowItems() []Item {
	var items []Item
	for i, r := range b.in.Rows {
		y := b.mark(i)
		row := diamond(b.axis, r.Estimate, r.Low, r.High, y, benefitHalf)
		if !math.IsNaN(r.Benefit) {
			row = append(row, b.rail.bar(r.Benefit, y, benefitBar, false)...)
		}
		zero := b.rail.zero()
		row = append(row, Line{X1: zero, Y1: y - 6.5, X2: zero, Y2: y + 6.5, Width: 0.75})
		if b.metrics.twoLine {
			row = append(row, b.narrowTexts(r, b.top(i), y)...)
		} else {
			row = append(row, b.wideTexts(r, y)...)
		}
		items = append(items, Group{ID: rowID(i), Title: joinName(r.Name, r.Below), Items: row})
	}
	if !b.metrics.twoLine {
		zero := b.rail.zero()
		items = append(items, Line{X1: zero, Y1: b.heads.rule, X2: zero, Y2: b.bottom(), Width: 0.75})
	}
	return items
}

// wideTexts are the texts of a row of the wide form, on two lines.
func (b *benefit) wideTexts(r BenefitRow, y float64) []Item {
	m, c := b.metrics, b.columns
	u := max(1, m.row/7.5)
	high, low, middle := y-1.85*u, y+7.55*u, y+baseline(m.row)
	name := high
	if r.Below == "" {
		name = middle
	}
	items := []Item{boldLabel(m.margin, name, m.row, Start, b.fit(r.Name, c.nameWidth, m.row, true))}
	if r.Below != "" {
		items = append(items, label(m.margin, low, m.second, Start, Soft, b.fit(r.Below, c.nameWidth, m.second, false)))
	}
	items = append(items,
		boldLabel(c.valueEnd, high, m.row, End, r.Value),
		label(c.valueEnd, low, m.second, End, Soft, r.Interval))
	oddsLine := high
	if r.Settings == "" {
		oddsLine = middle
	} else {
		items = append(items, label(c.odds.right, low, m.second, End, Soft, r.Settings))
	}
	items = append(items, c.odds.items(r.Benefit, oddsLine, m, true)...)
	return append(items, c.harm.items(r.Harm, middle, m, false)...)
}

// fit cuts a text to a width, back to the end of a word where that costs little.
func (b *benefit) fit(text string, width, size float64, bold bool) string {
	if Width(text, size, bold) <= width {
		return text
	}
	for n := len([]rune(text)) - 1; n > 0; n-- {
		if short := shortened([]rune(text), n); Width(short, size, bold) <= width {
			return short
		}
	}
	return "…"
}

// items draws odds at a column's colon, or that they are out of reach.
func (c oddsColumn) items(ln, y float64, m metrics, bold bool) []Item {
	if math.IsNaN(ln) {
		return []Item{label(c.right, y, m.second, End, Soft, outOfReach)}
	}
	parts := oddsText(ln)
	half := 0.3 * m.row
	return []Item{Text{Y: y, Size: m.row, Spans: []Span{
		{X: c.colon - half, Anchor: End, Text: parts[0], Bold: bold},
		{X: c.colon, Anchor: Middle, Text: ":", Bold: bold},
		{X: c.colon + half, Text: parts[1], Bold: bold},
	}}}
}

// narrowTexts are the texts of a row of the narrow form: the baseline over the marks,
// the numbers under them.
func (b *benefit) narrowTexts(r BenefitRow, top, y float64) []Item {
	m, c := b.metrics, b.columns
	over, under := top+1.05*m.row, y+1.75*m.row
	name := b.fit(r.Name, 0.6*c.nameWidth, m.row, true)
	head := Text{Y: over, Size: m.row, Spans: []Span{{X: m.margin, Text: name, Bold: true}}}
	if r.Below != "" {
		room := c.nameWidth - Width(name+"  ", m.row, true)
		head.Spans = append(head.Spans, Span{Text: "  " + b.fit(r.Below, room, m.row, false), Ink: Soft, Follow: true})
	}
	odds := outOfReach
	if !math.IsNaN(r.Benefit) {
		parts := oddsText(r.Benefit)
		odds = parts[0] + " : " + parts[1]
	}
	right := b.style.Width - m.margin
	at := min(b.rail.zero()+2.5, right-Width(odds, m.row, true))
	value := r.Value + " (" + r.Interval + ")"
	return []Item{head,
		label(m.margin, under, m.row, Start, Ordinary, b.fit(value, at-m.margin-6, m.row, false)),
		boldLabel(at, under, m.row, Start, odds)}
}
