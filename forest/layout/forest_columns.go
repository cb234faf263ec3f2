package layout

import "strings"

// rowText holds the texts of one row, so that columns can be measured before
// anything is placed.
type rowText struct {
	name, fullName    string
	counts            [2]Count
	estimate, between string // "0.56", "(0.31 to 1.03)"
	weight            string
	odds              [2]string // left and right of the colon
	bold              bool
	indent            float64 // of the name, within a block
}

// columns are the places of the columns in points. A column that was dropped has
// show false.
type columns struct {
	nameWidth   float64
	counts      countColumns
	zone        span // the effect axis
	estimateEnd float64
	intervalEnd float64
	weightEnd   float64
	showWeight  bool
	rail        span
	oddsLeftEnd float64
	colon       float64
	oddsRight   float64 // left edge of what stands right of the colon
}

// countColumns are the places of "11 of 41 · 19 of 40".
type countColumns struct {
	show             bool
	left, dot, right float64
	arms             [2]armColumn
}

// armColumn is the place of "11 of 41".
type armColumn struct{ eventsEnd, of, total float64 }

const (
	minZone      = 85   // least width of the effect axis
	railWidth    = 100  // of the wide form
	nameShare    = 0.30 // most of the chart's width that names may take
	countsBefore = 11   // space left of the counts
	zoneBefore   = 9    // space left of the effect axis
	zoneAfter    = 7
	weightSpace  = 29 // from the interval's to the weight's right edge
	railBefore   = 10
	oddsBefore   = 8
)

// widest returns the largest width of a text of the rows at the row size.
func widest(rows []rowText, size float64, text func(rowText) string) float64 {
	most := 0.0
	for _, r := range rows {
		most = max(most, Width(text(r), size, r.bold))
	}
	return most
}

// wideColumns places the columns of rows of one line, with or without the two
// that can be dropped. The zone takes what is left; the caller judges it.
func wideColumns(f *forest, rows []rowText, counts, weight bool) columns {
	m, size := f.metrics, f.metrics.row
	right := f.width - m.margin
	c := columns{showWeight: weight}
	gap := 0.3 * size
	colonHalf := Width(":", size, true) / 2
	c.oddsRight = right - widest(rows, size, func(r rowText) string { return r.odds[1] })
	c.colon = c.oddsRight - gap
	c.oddsLeftEnd = c.colon - gap
	left := c.oddsLeftEnd - max(colonHalf, widest(rows, size, func(r rowText) string { return r.odds[0] }))
	c.rail = span{left - oddsBefore - railWidth, left - oddsBefore}
	c.weightEnd = c.rail.low - railBefore
	c.intervalEnd = c.weightEnd
	if weight {
		c.intervalEnd -= weightSpace
	}
	between := widest(rows, size, func(r rowText) string { return r.between })
	estimate := widest(rows, size, func(r rowText) string { return r.estimate })
	for _, r := range f.afterRows() {
		between, estimate = max(between, Width(r.between, size, false)), max(estimate, Width(r.estimate, size, false))
	}
	c.estimateEnd = c.intervalEnd - between - 4
	c.zone.high = c.estimateEnd - estimate - zoneAfter
	c.nameWidth = min(f.widestName(rows, size), nameShare*f.width-zoneBefore)
	c.zone.low = m.margin + c.nameWidth + zoneBefore + 1
	if counts {
		c.counts = placeCounts(f, rows, m.margin+c.nameWidth+countsBefore)
		c.zone.low = c.counts.right + zoneBefore
	}
	c.zone.low = max(c.zone.low, m.margin+f.labelWidth(f.width)+zoneBefore)
	return c
}

// placeCounts places the counts from a left edge on.
func placeCounts(f *forest, rows []rowText, left float64) countColumns {
	size := f.metrics.row
	gap := 0.3 * size
	of := Width("of", size, false)
	half := func(arm int) (width, events float64) {
		events = widest(rows, size, func(r rowText) string { return r.counts[arm].Events })
		totals := widest(rows, size, func(r rowText) string { return r.counts[arm].Total })
		return events + gap + of + gap + totals, events
	}
	wide0, _ := half(0)
	wide1, events1 := half(1)
	side := 2 * gap // between a half and the dot
	room := func(arm int, data float64) float64 {
		return max(data+side, min(Width(f.armName(arm), f.metrics.second, false)+4, 60))
	}
	c := countColumns{show: true, left: left}
	c.dot = left + room(0, wide0)
	c.right = c.dot + room(1, wide1)
	place := func(eventsEnd float64) armColumn {
		return armColumn{eventsEnd: eventsEnd, of: eventsEnd + gap + of/2, total: eventsEnd + gap + of + gap}
	}
	totals0 := widest(rows, size, func(r rowText) string { return r.counts[0].Total })
	c.arms[0] = place(c.dot - side - totals0 - gap - of - gap)
	c.arms[1] = place(c.dot + side + events1)
	return c
}

// narrowColumns places the columns of rows of two lines on a chart of a width:
// names with their numbers, effect axis, rail with the odds under the bars. It
// reports false if effect axis and rail do not find room.
func narrowColumns(f *forest, rows []rowText, width float64) (columns, bool) {
	const stepLeast = 8
	m := f.metrics
	c := columns{}
	lastLabel := Width(railLabel(f.railSteps.high), m.second, false)
	c.rail.high = width - m.margin - lastLabel/2
	numbers := f.labelWidth(width)
	for _, r := range rows {
		numbers = max(numbers, r.indent+Width(r.estimate+" "+r.between, m.second, r.bold))
	}
	c.nameWidth = max(numbers, min(f.widestName(rows, m.row), nameShare*width))
	c.zone.low = m.margin + c.nameWidth + 3
	room := c.rail.high - c.zone.low - zoneBefore
	zone := max(minZone, 0.53*room)
	c.zone.high = c.zone.low + zone
	c.rail.low = c.zone.high + zoneBefore
	return c, room-zone >= stepLeast*(f.railSteps.high-f.railSteps.low)
}

// cut shortens a name to a width by "…" before the year, and reports whether it
// had to.
func cut(name, tail string, width, size float64) (string, bool) {
	full := joinName(name, tail)
	if Width(full, size, false) <= width {
		return full, false
	}
	runes := []rune(name)
	for n := len(runes) - 1; n > 0; n-- {
		short := shortened(runes, n)
		if Width(joinName(short, tail), size, false) <= width {
			return joinName(short, tail), true
		}
	}
	return joinName("…", tail), true
}

// shortened returns the first n characters with "…", back to the end of a word
// if that costs at most a quarter of them.
func shortened(name []rune, n int) string {
	short := string(name[:n])
	if at := strings.LastIndexByte(short, ' '); at >= len(short)*3/4 && name[n] != ' ' {
		short = short[:at]
	}
	return strings.TrimRight(short, " ,;-–(&") + "…"
}

func joinName(name, tail string) string {
	if name == "" || tail == "" {
		return name + tail
	}
	return name + " " + tail
}
