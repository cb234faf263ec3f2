package layout

import "steelyard/forest/words"

// omissionText holds the texts of one row.
type omissionText struct {
	name, fullName    string
	estimate, between string // "0.71", "(0.56 to 0.91)"
	tau               string
	odds              [2]string
	carried           string
}

// omissionColumns are the places of the columns in points.
type omissionColumns struct {
	nameWidth   float64
	zone        span // the axis of effects
	estimateEnd float64
	intervalEnd float64
	tauEnd      float64
	spread      bool
	rail        span
	colon       float64
	carriedEnd  float64
}

const (
	leastOmissionZone = 50   // least width of the axis of effects in the narrow form
	railBeforeColon   = 26   // from the rail to the colon of the odds
	colonBefore       = 50   // from the colon to the right edge
	estimateGap       = 3.35 // between an estimate and its interval
	columnGap         = 8    // least space between columns
	spreadToRail      = 14   // from the spread to the rail
	intervalToSpread  = 29   // from the interval's to the spread's right edge
	narrowRailShare   = 0.28 // of the narrow form's width
	carriesHead       = "Carries"
	spreadHead        = "Spread"
)

// write writes the texts of all rows.
func (l *leaveOneOut) write() {
	text := func(o Omission) omissionText {
		t := omissionText{
			estimate: effectText(l.in.Scale, o.Estimate),
			between:  "(" + intervalText(l.in.Scale, o.Low, o.High) + ")",
			odds:     oddsParts(o.LnEvidence),
		}
		if o.Tau >= 0 {
			t.tau = spreadText(o.Tau)
		}
		return t
	}
	all := text(l.in.All)
	all.fullName = "No " + l.in.plural(1) + " left out"
	all.name = all.fullName
	l.texts = []omissionText{all}
	for _, o := range l.in.Rows {
		t := omissionText{}
		if o.Problem == "" {
			t = text(o)
			t.carried = words.StepsChange(l.in.carried(o))
		}
		t.fullName = joinName(o.Name, o.Year)
		l.texts = append(l.texts, t)
	}
}

// spreadText writes τ with two decimals at least, so that the column aligns.
func spreadText(tau float64) string {
	if tau == 0 {
		return "0.00"
	}
	return words.Tau(tau)
}

func (l *leaveOneOut) hasSpread() bool {
	for _, t := range l.texts {
		if t.tau != "" {
			return true
		}
	}
	return false
}

// widest returns the largest width of a text of the rows; that of all studies,
// the first, is bold.
func (l *leaveOneOut) widest(size float64, text func(omissionText) string) float64 {
	most := 0.0
	for i, t := range l.texts {
		most = max(most, Width(text(t), size, i == 0))
	}
	return most
}

// nameRoom is the width of the names, at most 30% of the chart, but for the
// first row.
func (l *leaveOneOut) nameRoom(share float64) float64 {
	names := 0.0
	for _, t := range l.texts[1:] {
		names = max(names, Width(t.fullName, l.metrics.row, false))
	}
	return max(Width(l.texts[0].fullName, l.metrics.row, true), min(names, share*l.style.Width))
}

// wideColumns places the columns of rows of one line, from the right edge
// inwards; the axis of effects takes the rest.
func (l *leaveOneOut) wideColumns(form omissionForm) omissionColumns {
	m, size := l.metrics, l.metrics.row
	c := omissionColumns{spread: form.spread, carriedEnd: l.style.Width - m.margin}
	carried := max(l.widest(size, func(t omissionText) string { return t.carried }), Width(carriesHead, m.head, true))
	left := l.widest(size, func(t omissionText) string { return t.odds[0] })
	right := l.widest(size, func(t omissionText) string { return t.odds[1] })
	gap := 0.3 * size
	c.colon = c.carriedEnd - max(colonBefore*max(1, size/7.5), carried+columnGap+right+gap)
	c.rail.high = c.colon - max(railBeforeColon, gap+left+columnGap)
	c.rail.low = c.rail.high - form.rail
	c.intervalEnd = c.rail.low - spreadToRail
	if c.spread {
		c.tauEnd = c.intervalEnd
		tau := max(l.widest(size, func(t omissionText) string { return t.tau }), Width(spreadHead, m.head, true))
		c.intervalEnd -= max(intervalToSpread, tau+4)
	}
	c.estimateEnd = c.intervalEnd - l.widest(size, func(t omissionText) string { return t.between }) - estimateGap
	c.zone.high = c.estimateEnd - l.widest(size, func(t omissionText) string { return t.estimate }) - columnGap
	c.nameWidth = l.nameRoom(form.names)
	c.zone.low = m.margin + c.nameWidth + zoneBefore + 1
	return c
}

// narrowColumns places the columns of rows of two lines: names with their
// numbers, the axis of effects, and the rail with odds and what is carried under
// the bars.
func (l *leaveOneOut) narrowColumns() omissionColumns {
	m := l.metrics
	c := omissionColumns{carriedEnd: l.style.Width - m.margin}
	under := l.widest(m.second, func(t omissionText) string { return t.odds[0] + " : " + t.odds[1] + t.carried })
	lastLabel := Width(railLabel(l.railSteps().high), m.second, false)
	c.rail.high = c.carriedEnd - max(4, lastLabel/2)
	c.rail.low = c.carriedEnd - max(narrowRailShare*l.style.Width, under+6)
	numbers := l.widest(m.second, func(t omissionText) string { return t.estimate + " " + t.between })
	c.nameWidth = max(numbers, l.nameRoom(nameShare))
	c.zone = span{m.margin + c.nameWidth + zoneBefore - 2, c.rail.low - columnGap}
	return c
}

// cutNames shortens the names that are wider than their column.
func (l *leaveOneOut) cutNames() {
	for i, o := range l.in.Rows {
		l.texts[i+1].name, _ = cut(o.Name, o.Year, l.columns.nameWidth+0.01, l.metrics.row)
	}
}
