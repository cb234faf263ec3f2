package layout

// pooledItems draws the block under the last row: the pooled row, the prediction
// interval, the spread, and beside the rail the strength of the evidence in
// words.
func (f *forest) pooledItems(y levels) []Item {
	m := f.metrics
	right := f.width - m.margin
	var items []Item
	if y.hasPooled {
		p := f.in.Pooled
		items = append(items, Line{X1: m.margin, Y1: y.rule, X2: right, Y2: y.rule, Width: 0.5})
		items = append(items, f.rowTexts(*f.pooled, y.pooled, PooledBand)...)
		items = append(items, diamond(f.axis, p.Estimate, p.Low, p.High, y.pooled, f.diamondHalf())...)
		items = append(items, f.rail.bar(p.LnEvidence, y.pooled, m.pooledBar, p.Unwanted)...)
	}
	for i, r := range f.afterRows() {
		items = append(items, f.afterItems(r, y.after[i])...)
	}
	return append(items, f.strengthItems(y)...)
}

func (f *forest) diamondHalf() float64 {
	if f.metrics.twoLine {
		return 4.6
	}
	return min(5, 0.45*f.metrics.pitch+0.6)
}

// afterItems draws one row under the pooled row.
func (f *forest) afterItems(r afterRow, y float64) []Item {
	m, c := f.metrics, f.columns
	base := y + baseline(m.row)
	room := c.zone.low - m.margin - 2
	name, _ := cut(r.label, "", room, m.row)
	items := []Item{label(m.margin, base, m.row, Start, Ordinary, name)}
	if r.prediction != nil {
		items = append(items, f.predictionBar(*r.prediction, y)...)
	}
	if m.twoLine {
		below, _ := cut(r.below, "", room, m.second)
		return append(items, label(m.margin, f.secondLine(y), m.second, Start, Soft, below))
	}
	var spans []Span
	if r.estimate != "" {
		spans = append(spans, Span{X: c.estimateEnd, Anchor: End, Text: r.estimate})
	}
	if r.between != "" {
		spans = append(spans, Span{X: c.intervalEnd, Anchor: End, Text: r.between})
	}
	if len(spans) > 0 {
		items = append(items, Text{Y: base, Size: m.row, Spans: spans})
	}
	return items
}

// diamond draws the pooled effect from limit to limit; a side past the axis
// stops in a head.
func diamond(a axis, estimate, low, high, y, half float64) []Item {
	x, left, right := a.x(estimate), a.x(low), a.x(high)
	leftHalf, rightHalf := 0.0, 0.0
	var heads []Item
	if low < a.low {
		at := min(x, a.x0+headDepth)
		leftHalf = half * (at - left) / (x - left)
		heads = append(heads, head(a.x0, y, a.x0-at, max(headHeight, 2*leftHalf), Estimate))
		left = at
	}
	if high > a.high {
		at := max(x, a.x1-headDepth)
		rightHalf = half * (right - at) / (right - x)
		heads = append(heads, head(a.x1, y, a.x1-at, max(headHeight, 2*rightHalf), Estimate))
		right = at
	}
	points := []Point{{left, y - leftHalf}, {x, y - half}, {right, y - rightHalf}}
	if rightHalf > 0 {
		points = append(points, Point{right, y + rightHalf})
	}
	points = append(points, Point{x, y + half})
	if leftHalf > 0 {
		points = append(points, Point{left, y + leftHalf})
	}
	return append([]Item{Polygon{Points: points, Paint: Solid(Estimate)}}, heads...)
}

// predictionBar draws the prediction interval: a pale bar with ticks at its
// ends, or heads where it goes past the axis.
func (f *forest) predictionBar(p ForestPrediction, y float64) []Item {
	const height, tickHeight = 3.2, 6.8
	a := f.axis
	x1, x2 := a.x(clamp(p.Low, a.low, a.high)), a.x(clamp(p.High, a.low, a.high))
	var ends []Item
	endTick := func(x float64) {
		ends = append(ends, Line{X1: x, Y1: y - tickHeight/2, X2: x, Y2: y + tickHeight/2, Width: 0.75})
	}
	if p.Low < a.low {
		ends = append(ends, head(a.x0, y, -headDepth, headHeight, Prediction))
		x1 = a.x0 + headShort
	} else {
		endTick(x1)
	}
	if p.High > a.high {
		ends = append(ends, head(a.x1, y, headDepth, headHeight, Prediction))
		x2 = a.x1 - headShort
	} else {
		endTick(x2)
	}
	bar := Rect{X: x1, Y: y - height/2, Width: max(0, x2-x1), Height: height, Paint: Solid(Prediction)}
	return append([]Item{bar}, ends...)
}

const biasText = "bias is not in this number"

// strengthItems draws, beside the rail and under the pooled bar, the word and
// the steps, and the line on bias.
func (f *forest) strengthItems(y levels) []Item {
	m := f.metrics
	if len(y.after) == 0 {
		return nil
	}
	if m.twoLine && f.pooled != nil {
		return f.narrowBias(y.after[0])
	}
	x := f.rail.zero() + 4
	var items []Item
	at := 0
	if ln, ok := f.shownEvidence(); ok {
		items = append(items, onPatch(f.within(boldLabel(x, y.after[0]+baseline(m.row), m.row, Start, strengthText(ln))), Paper, 1.5)...)
		at = 1
	}
	switch {
	case f.in.BiasOpen && m.twoLine:
		items = append(items, f.narrowBias(y.after[at])...)
	case f.in.BiasOpen:
		items = append(items, onPatch(f.within(label(x, y.after[at]+baseline(m.row), m.second, Start, Soft, biasText)), Paper, 1.5)...)
	}
	return items
}

// shownEvidence is the evidence whose strength is put into words: the pooled, or
// that of a single row.
func (f *forest) shownEvidence() (ln float64, ok bool) {
	switch {
	case f.in.Pooled != nil:
		return f.in.Pooled.LnEvidence, true
	case len(f.in.Rows) == 1:
		return f.in.Rows[0].LnEvidence, true
	}
	return 0, false
}

// within moves a text at the rail to the left until it ends on the page.
func (f *forest) within(t Text) Text {
	run := t.Runs()[0]
	if over := run.Left + run.Width - (f.width - f.metrics.margin); over > 0 {
		t.Spans[0].X -= over
	}
	return t
}

// narrowBias breaks the line on bias in two where the chart is narrow.
func (f *forest) narrowBias(y float64) []Item {
	if !f.in.BiasOpen {
		return nil
	}
	m := f.metrics
	x := f.rail.zero() + 2.5
	var items []Item
	for i, line := range []string{"bias is not in", "this number"} {
		base := y + baseline(m.row)
		if i == 1 {
			base = f.secondLine(y)
		}
		items = append(items, onPatch(f.within(label(x, base, m.second, Start, Soft, line)), Paper, 0.8)...)
	}
	return items
}
