package layout

import (
	"fmt"
	"math"
)

// leaveOneOut is a leave-one-out chart while it is laid out.
type leaveOneOut struct {
	in      LeaveOneOutInput // cleaned and sorted
	style   Style
	metrics metrics
	titles  titleBlock
	texts   []omissionText // of all studies, then of the rows
	columns omissionColumns
	axis    axis
	rail    rail
	words   []word
	heads   omissionHeads
	pages   int
}

// omissionHeads are the heights above the rows.
type omissionHeads struct {
	first, second float64 // baselines of the heads
	highWords     float64 // baseline of the upper line of staggered words
	rule          float64
	band          float64 // height of the tinted row of all studies
	rowsTop       float64
}

// Sizes of a leave-one-out chart in points.
const (
	allAbove      = 0.5 // from the head rule to the tinted row
	allBelow      = 4.5 // from the tinted row to the first row
	axisBelow     = 5   // from the last row to the axes
	allHalf       = 4.6 // half the height of the diamond
	allDisc       = 3.4
	omissionDisc  = 3
	omissionPoint = 2.4
	omissionRim   = 0.8
	omissionLine  = 0.9 // outline of a hollow bar
	axisPad       = 0.075
)

// LeaveOneOut lays out what each study carries: the result of all studies, and
// for each study that of the others, sorted by the evidence that goes with it.
// Bars run from the evidence of all studies to the evidence without one: solid
// where the study carries evidence for an effect, hollow where it held the
// evidence back.
//
// More than 48 rows, or a height over 230 mm, go on to further pages with the
// same axes and the row of all studies on each. It returns an error naming the
// row if a number is not finite or beyond what an axis can show, and a
// *TooNarrowError if the width cannot hold the rows.
func LeaveOneOut(in LeaveOneOutInput, style Style) (Document, error) {
	if err := in.validate(); err != nil {
		return Document{}, err
	}
	style, err := style.settled("leave-one-out", "leave-one-out chart")
	if err != nil {
		return Document{}, err
	}
	l := &leaveOneOut{in: in.cleaned(), style: style}
	if err := l.arrange(); err != nil {
		return Document{}, err
	}
	doc := Document{Pages: l.paginate()}
	doc.Missing = missing(doc.Pages)
	return doc, nil
}

// wideForms are the forms of rows of one line, the best first.
var wideForms = []omissionForm{
	{spread: true, rail: 128, names: nameShare},
	{spread: true, rail: 100, names: nameShare},
	{spread: true, rail: 100, names: 0.22},
	{spread: false, rail: 100, names: 0.22},
	{spread: false, rail: 84, names: 0.2},
}

// omissionForm says what rows of one line show: the column of the spread or not,
// the width of the rail, and the share of the chart's width that names may take.
type omissionForm struct {
	spread      bool
	rail, names float64
}

// arrange chooses sizes, columns and axes: rows of one line if a form of them
// leaves the axis of effects its room, or else rows of two.
func (l *leaveOneOut) arrange() error {
	l.write()
	l.metrics = wideMetrics(len(l.in.Rows), l.style.TypeSize)
	placed := false
	for _, form := range wideForms {
		form.spread = form.spread && l.hasSpread()
		if l.columns = l.wideColumns(form); l.columns.zone.high-l.columns.zone.low >= minZone {
			placed = true
			break
		}
	}
	if !placed {
		if err := l.arrangeNarrow(); err != nil {
			return err
		}
	}
	l.cutNames()
	low, high := l.effectLimits()
	l.axis = axis{low: low, high: high, x0: l.columns.zone.low, x1: l.columns.zone.high, ratio: l.in.Scale.Ratio}
	l.axis.setTicks(l.metrics.second)
	l.rail = rail{steps: l.railSteps(), place: l.columns.rail}
	l.placeHeads()
	return nil
}

// arrangeNarrow places rows of two lines, in smaller type down to the least in
// print if the width asks for it.
func (l *leaveOneOut) arrangeNarrow() error {
	l.metrics = narrowMetrics(l.style.TypeSize)
	for {
		l.columns = l.narrowColumns()
		short := leastOmissionZone - (l.columns.zone.high - l.columns.zone.low)
		if short <= 0 {
			return nil
		}
		if l.metrics.row <= minType {
			return &TooNarrowError{Chart: "leave-one-out chart", Width: l.style.Width, Least: l.style.Width + short}
		}
		l.metrics = narrowMetrics(max(minType, l.metrics.row-0.25))
	}
}

// railSteps returns the ends of the rail: from even odds on, or from further left
// if there is evidence for none.
func (l *leaveOneOut) railSteps() span {
	all := []float64{l.in.All.LnEvidence}
	start := 0.0
	for _, o := range l.in.Rows {
		if o.Problem == "" {
			all = append(all, o.LnEvidence)
		}
	}
	for _, ln := range all {
		if ln < 0 {
			start = railStart
		}
	}
	s := railSpan(start, all)
	if r := l.columns.rail; r.high-r.low >= wideForms[0].rail {
		s.high = max(s.high, railLeast+1) // room for the word massive
	}
	return s
}

// effectLimits returns the ends of the axis of effects, which holds no effect and
// the result of all studies, then the other estimates and intervals as far as the
// span allows.
func (l *leaveOneOut) effectLimits() (low, high float64) {
	var rows []ForestRow
	for _, o := range l.in.Rows {
		if o.Problem == "" {
			rows = append(rows, ForestRow{Estimate: o.Estimate, Low: o.Low, High: o.High})
		}
	}
	all, scale := l.in.All, l.in.Scale
	if len(rows) == 0 {
		rows = []ForestRow{{Estimate: all.Estimate, Low: all.Low, High: all.High}}
	}
	typical := typicalWidth(rows)
	most, widest := logSpan, widestLogSpan
	if !scale.Ratio {
		most, widest = 8*typical, 12*typical
	}
	s := span{low: scale.Null, high: scale.Null}
	s.hold(all.Estimate)
	s.stretch(all.Low, all.High, max(widest, s.high-s.low))
	most = max(most, s.high-s.low)
	for _, v := range nearestFirst(rows, all.Estimate) {
		wider := s
		if wider.hold(v); wider.high-wider.low <= most {
			s = wider
		}
	}
	ends := s
	for _, r := range rows {
		ends.hold(r.Low)
		ends.hold(r.High)
	}
	s.stretch(ends.low, ends.high, most)
	least := leastSpan(scale, max(math.Abs(s.low), math.Abs(s.high)))
	if s.high-s.low < least {
		middle := (s.low + s.high) / 2
		s = span{middle - least/2, middle + least/2}
	}
	pad := axisPad * (s.high - s.low)
	return s.low - pad, s.high + pad
}

// placeHeads places everything above the rows.
func (l *leaveOneOut) placeHeads() {
	m := l.metrics
	l.titles = placeTitles(l.in.Title, l.in.Subtitle, pageMark, l.style, m)
	var lines int
	l.words, lines = l.rail.words(m.second)
	h := &l.heads
	u := max(1, m.row/7.5)
	if m.twoLine {
		u = m.row / 7.25
	}
	h.first = l.titles.bottom + 18.5*u
	h.second = h.first + 12*u
	if m.twoLine {
		h.first = l.titles.bottom + 16.38*u
		h.second = h.first + 9*u
	}
	h.highWords = h.second
	if lines == 2 {
		h.second += 1.09*m.second - 0.5
	}
	h.rule = h.second + 4.5*u
	h.band = max(15, 2*m.row)
	if m.twoLine {
		h.band = m.pitch + u
	}
	h.rowsTop = h.rule + allAbove + h.band + allBelow
}

// paginate draws the pages: all rows on one if they fit, or else pages of at
// most 40 rows.
func (l *leaveOneOut) paginate() []Drawing {
	k := len(l.in.Rows)
	per := k
	if k > 48 && !l.metrics.twoLine {
		per = 40
	}
	l.pages = 1
	const tightest = 1.45 // pitch in type sizes
	for l.page(pageRange{number: 1, to: per, last: true}).Height > maxPageHeight && !l.metrics.twoLine && l.metrics.pitch-0.25 >= tightest*l.metrics.row {
		l.metrics.pitch -= 0.25
	}
	for ; per > 5; per = (per - 1) / 5 * 5 {
		page := l.page(pageRange{number: 1, to: per, last: true})
		if page.Height <= maxPageHeight {
			if per == k {
				return []Drawing{page}
			}
			break
		}
	}
	l.pages = (k + per - 1) / per
	var pages []Drawing
	for from := 0; from < k; from += per {
		to := min(from+per, k)
		pages = append(pages, l.page(pageRange{number: len(pages) + 1, from: from, to: to, last: to == k}))
	}
	return pages
}

// page draws one page.
func (l *leaveOneOut) page(p pageRange) Drawing {
	m := l.metrics
	d := Drawing{ID: l.style.ID, Width: l.style.Width, Title: l.in.Title, Description: l.description(p)}
	if p.number > 1 {
		d.ID += fmt.Sprintf("-%d", p.number)
	}
	if d.Title == "" {
		d.Title = "What each " + l.in.plural(1) + " carries"
	}
	n := p.to - p.from
	axes := l.heads.rowsTop + float64(n)*m.pitch + axisBelow
	if m.grouped {
		axes += groupGap * float64((n-1)/5)
	}
	d.Items = append(d.Items, l.titles.items(p.number, l.pages)...)
	d.Items = append(d.Items,
		Group{ID: "heads", Items: l.headItems()},
		Group{ID: "grid", Items: l.gridItems(n, axes)},
		Group{ID: "all", Items: l.allItems(axes)},
		Group{ID: l.in.plural(2), Items: l.rowItems(p)})
	foot, bottom := l.footItems(axes)
	d.Items = append(d.Items, Group{ID: "axes", Items: foot})
	notes := l.notes()
	if !p.last {
		notes = []Note{{Text: "Continued on the next page."}}
	}
	items, height := placeNotes(notes, m, l.style.Width, bottom+m.note+6)
	d.Items = append(d.Items, Group{ID: "notes", Items: items})
	d.Height = height
	return d
}
