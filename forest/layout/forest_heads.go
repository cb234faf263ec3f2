package layout

// headings are the baselines and rules above the rows.
type headings struct {
	first     float64 // baseline of the bold heads
	spanRule  float64
	highWords float64 // baseline of the upper line of staggered words
	second    float64 // baseline of the second heads
	rule      float64
	rowsTop   float64
	words     []word
}

// placeHeads places everything above the rows. Without a title the heads move
// up.
func (f *forest) placeHeads() headings {
	m := f.metrics
	h := headings{}
	u := max(1, m.row/7.5)
	if m.twoLine {
		u = m.row / 7.25
	}
	var lines int
	h.words, lines = f.rail.words(m.second)
	f.titles = placeTitles(f.in.Title, f.in.Subtitle, pageMark, f.style, m)
	at := f.titles.bottom
	if m.twoLine {
		h.first = at + 16.38*u
		h.highWords, h.second = h.first+8.5*u, h.first+15.65*u
		if lines < 2 && len(f.measureLines()) < 2 {
			h.second = h.first + 9*u
		}
		h.rule, h.rowsTop = h.second+4*u, h.second+6*u
		return h
	}
	h.first = at + 18.5*u
	h.spanRule = h.first + 3.2
	h.second = h.first + 12*u
	if lines == 2 {
		h.highWords = h.second - 0.5
		h.second = h.highWords + 1.09*m.second
	}
	h.rule = h.second + 4.5*u
	h.rowsTop = h.rule + 3
	return h
}

// headItems draws the heads of the columns.
func (f *forest) headItems() []Item {
	m, c, h := f.metrics, f.columns, f.heads
	right := f.width - m.margin
	items := []Item{boldLabel(m.margin, h.second, m.head, Start, capital(f.in.plural(1)))}
	if m.twoLine {
		for i, line := range f.measureLines() {
			y := h.second - float64(len(f.measureLines())-1-i)*1.09*m.head
			items = append(items, boldLabel((c.zone.low+c.zone.high)/2, y, m.head, Middle, line))
		}
		items = append(items, boldLabel(right, h.first, m.head, End, "Evidence, effect : none"))
	} else {
		items = append(items, f.countHeads()...)
		items = append(items, f.measureHead()...)
		if c.showWeight {
			items = append(items,
				boldLabel(c.weightEnd, h.first, m.head, End, "Weight"),
				label(c.weightEnd, h.second, m.second, End, Soft, "%"))
		}
		const title = "Evidence ratio, effect : none"
		from := min(f.rail.zero(), right-Width(title, m.head, true))
		items = append(items, f.spanHead(from, right, title)...)
	}
	for _, w := range h.words {
		y := h.second
		if w.line == 1 {
			y = h.highWords
		}
		items = append(items, label(w.x, y, m.second, Middle, Soft, w.text))
	}
	return append(items, Line{X1: m.margin, Y1: h.rule, X2: right, Y2: h.rule, Width: 0.75})
}

// spanHead is a bold head centred over a thin rule.
func (f *forest) spanHead(from, to float64, text string) []Item {
	return []Item{
		boldLabel((from+to)/2, f.heads.first, f.metrics.head, Middle, text),
		Line{X1: from, Y1: f.heads.spanRule, X2: to, Y2: f.heads.spanRule, Width: 0.5, Ink: SpanRule},
	}
}

// measureHead is the head over effect axis, estimate and interval; a long name
// of a measure leaves the word on the interval to the line below.
func (f *forest) measureHead() []Item {
	c, size := f.columns, f.metrics.head
	name := capital(f.in.Scale.Measure)
	interval := f.level() + " interval"
	room := c.intervalEnd - c.zone.low
	if full := name + " (" + interval + ")"; Width(full, size, true) <= room {
		return f.spanHead(c.zone.low, c.intervalEnd, full)
	}
	short, _ := cut(name, "", room/1.1, size)
	return append(f.spanHead(c.zone.low, c.intervalEnd, short),
		label(c.intervalEnd, f.heads.second, f.metrics.second, End, Soft, interval))
}

// measureLines is the name of the measure over the effect axis of the narrow
// form, on at most two lines.
func (f *forest) measureLines() []string {
	width := f.columns.zone.high - f.columns.zone.low + 8
	lines := wrapPlain(capital(f.in.Scale.Measure), width, f.metrics.head, true)
	if len(lines) > 2 {
		lines = []string{lines[0], fitWord(lines[1]+"…", width, f.metrics.head, true)}
	}
	return lines
}

// countHeads are the head over the counts and the names of the arms.
func (f *forest) countHeads() []Item {
	c, m := f.columns.counts, f.metrics
	if !c.show {
		return nil
	}
	title := fitWord(f.in.Sides.Counts, c.right-c.left+8, m.head, true)
	items := f.spanHead(c.left, c.right, title)
	for arm, edges := range [2]span{{c.left, c.dot}, {c.dot, c.right}} {
		name, _ := cut(f.armName(arm), "", edges.high-edges.low-2, m.second)
		if name != "" {
			items = append(items, label((edges.low+edges.high)/2, f.heads.second, m.second, Middle, Soft, name))
		}
	}
	return items
}
