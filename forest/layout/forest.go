package layout

import (
	"fmt"
	"math"
)

// forest is a forest chart while it is laid out.
type forest struct {
	in        ForestInput // cleaned
	style     Style
	width     float64
	metrics   metrics
	columns   columns
	axis      axis
	rail      rail
	railSteps span
	rows      []rowText
	entries   []entry // what stands below one another: rows, and the heads and subtotals of blocks
	subtotals []rowText
	pooled    *rowText
	heads     headings
	titles    titleBlock
	pages     int
}

// Forest lays out a forest chart with the rail of evidence beside it: names,
// counts, effects on an axis and in numbers, weights, and for each row a bar of
// evidence in steps, to the right for an effect and to the left for none.
//
// Rows of one line are used where the width allows an effect axis of 85 pt,
// first without the counts, then without the weights; narrower charts put the
// numbers under the names. More than 48 rows, or a height over 230 mm, go on to
// further pages with the same axes; the pooled block stands on the last.
//
// It returns an error naming the row if a number is not finite or beyond what
// an axis can show, and a *TooNarrowError if the width cannot hold the rows.
func Forest(in ForestInput, style ForestStyle) (Document, error) {
	if err := in.validate(); err != nil {
		return Document{}, err
	}
	style, err := style.settled("forest", "forest chart")
	if err != nil {
		return Document{}, err
	}
	f := &forest{in: in.cleaned(), style: style, width: style.Width}
	if err := f.arrange(); err != nil {
		return Document{}, err
	}
	doc := Document{Pages: f.paginate()}
	doc.Missing = missing(doc.Pages)
	return doc, nil
}

// cleaned returns a copy whose texts may stand in a drawing.
func (in *ForestInput) cleaned() ForestInput {
	out := *in
	out.Title, out.Subtitle, out.Study = Clean(in.Title), Clean(in.Subtitle), Clean(in.Study)
	out.Scale, out.Sides, out.Notes = in.Scale.cleaned(), in.Sides.cleaned(), cleanNotes(in.Notes)
	out.Rows = make([]ForestRow, len(in.Rows))
	for i, r := range in.Rows {
		r.Name, r.Year = Clean(r.Name), Clean(r.Year)
		for arm, c := range r.Counts {
			r.Counts[arm] = Count{Events: Clean(c.Events), Total: Clean(c.Total)}
		}
		out.Rows[i] = r
	}
	out.Blocks = cleanBlocks(in.Blocks)
	return out
}

// arrange chooses sizes, columns and axes.
func (f *forest) arrange() error {
	f.texts()
	f.entries = f.in.entries()
	f.railSteps = railSpan(railStart, f.allEvidence())
	if !f.arrangeWide() {
		if err := f.arrangeNarrow(); err != nil {
			return err
		}
	}
	f.cutNames()
	low, high := axisLimits(&f.in)
	f.axis = axis{low: low, high: high, x0: f.columns.zone.low, x1: f.columns.zone.high, ratio: f.in.Scale.Ratio}
	f.axis.setTicks(f.metrics.second)
	f.rail = rail{steps: f.railSteps, place: f.columns.rail}
	f.heads = f.placeHeads()
	return nil
}

// arrangeWide tries rows of one line, dropping the counts, then the weights. The
// sizes are those of the whole chart on one page, or of pages.
func (f *forest) arrangeWide() bool {
	f.metrics = wideMetrics(len(f.entries), f.style.TypeSize)
	f.metrics.blocks(f.in.Blocks)
	counts := f.hasCounts()
	for _, try := range []struct{ counts, weight bool }{{true, true}, {false, true}, {false, false}} {
		if try.counts && !counts {
			continue
		}
		f.columns = wideColumns(f, f.measured(), try.counts, try.weight)
		if f.columns.zone.high-f.columns.zone.low >= minZone {
			return true
		}
	}
	return false
}

// arrangeNarrow places rows of two lines, in smaller type down to the least in
// print if the width asks for it.
func (f *forest) arrangeNarrow() error {
	f.metrics = narrowMetrics(f.style.TypeSize)
	f.metrics.blocks(f.in.Blocks)
	for {
		c, ok := narrowColumns(f, f.measured(), f.width)
		if ok {
			f.columns = c
			return nil
		}
		if f.metrics.row <= minType {
			break
		}
		f.metrics = narrowMetrics(max(minType, f.metrics.row-0.25))
		f.metrics.blocks(f.in.Blocks)
	}
	least := f.width
	for ok := false; !ok; least++ {
		_, ok = narrowColumns(f, f.measured(), least+1)
	}
	return &TooNarrowError{Chart: "forest chart", Width: f.width, Least: least}
}

func (f *forest) hasCounts() bool {
	for _, r := range f.in.Rows {
		if r.Counts[0].Total != "" || r.Counts[1].Total != "" {
			return true
		}
	}
	return false
}

// measured returns the texts of all rows, the pooled one last.
func (f *forest) measured() []rowText {
	all := append(f.rows[:len(f.rows):len(f.rows)], f.subtotals...)
	if f.pooled == nil {
		return all
	}
	return append(all, *f.pooled)
}

func (f *forest) allEvidence() []float64 {
	var all []float64
	for _, r := range f.in.Rows {
		all = append(all, r.LnEvidence)
	}
	for _, b := range f.in.Blocks {
		if b.Pooled != nil {
			all = append(all, b.Pooled.LnEvidence)
		}
	}
	if f.in.Pooled != nil {
		all = append(all, f.in.Pooled.LnEvidence)
	}
	return all
}

// paginate draws the pages: all rows on one if they fit, or else pages of at
// most 40 rows.
func (f *forest) paginate() []Drawing {
	k := len(f.entries)
	per := k
	if k > 48 && !f.metrics.twoLine {
		per = 40
	}
	f.pages = 1
	for ; per > 5; per = (per - 1) / 5 * 5 {
		page := f.page(pageRange{number: 1, from: 0, to: per, last: true})
		if page.Height <= maxPageHeight && per == k {
			return []Drawing{page}
		}
		if page.Height <= maxPageHeight {
			break
		}
	}
	ranges := f.pageRanges(per)
	f.pages = len(ranges)
	var pages []Drawing
	for _, p := range ranges {
		pages = append(pages, f.page(p))
	}
	return pages
}

// pageRange is the part of the entries that stands on a page.
type pageRange struct {
	number   int // from 1
	from, to int
	last     bool
}

// page draws one page.
func (f *forest) page(p pageRange) Drawing {
	d := Drawing{ID: f.style.ID, Width: f.width, Title: f.in.Title, Description: f.description(p)}
	if p.number > 1 {
		d.ID += fmt.Sprintf("-%d", p.number)
	}
	if d.Title == "" {
		d.Title = "Forest chart"
	}
	y := f.vertical(p)
	d.Items = append(d.Items, f.titles.items(p.number, f.pages)...)
	d.Items = append(d.Items,
		Group{ID: "heads", Items: f.headItems()},
		Group{ID: "grid", Items: f.gridItems(p, y)},
		Group{ID: f.in.plural(2), Items: f.rowItems(p)})
	if p.last {
		d.Items = append(d.Items, Group{ID: "pooled", Items: f.pooledItems(y)})
	}
	foot, bottom := f.footItems(y.axis)
	d.Items = append(d.Items, Group{ID: "axes", Items: foot})
	notes, height := f.noteItems(p, bottom)
	d.Items = append(d.Items, Group{ID: "notes", Items: notes})
	d.Height = height
	return d
}

// levels are the heights of a page's parts under its rows.
type levels struct {
	rowsEnd   float64
	rule      float64   // above the pooled row
	bandEnd   float64   // below it
	pooled    float64   // centre of the pooled row
	after     []float64 // centres of the rows under it
	axis      float64
	hasPooled bool
}

// vertical returns the heights of a page's parts.
func (f *forest) vertical(p pageRange) levels {
	m := f.metrics
	_, rowsEnd := f.tops(p)
	y := levels{rowsEnd: rowsEnd}
	y.axis = y.rowsEnd + 6
	if !p.last {
		return y
	}
	ruleAfter, band, toCentre, toNext, next, toAxis := 5.0, 15.0, 7.5, 14.5, 13.5, 12.5
	if m.twoLine {
		u := m.row / 7.25
		ruleAfter, band, toCentre, toNext, next, toAxis = 3*u, m.pitch+u, 6.15*u, m.pitch+u, m.pitch-u, 20.28*u
	}
	y.rule, y.bandEnd = y.rowsEnd+ruleAfter, y.rowsEnd+ruleAfter+band
	y.pooled, y.hasPooled = y.rule+toCentre, f.pooled != nil
	at, gap := y.pooled, toNext
	if !y.hasPooled {
		at, gap = y.rowsEnd, 0.7*m.row+2
		y.axis = y.rowsEnd + 6
	} else if len(f.afterRows()) == 0 && f.railLines() == 0 {
		y.axis = y.bandEnd + 4
	}
	for range max(len(f.afterRows()), f.railLines()) {
		at += gap
		gap = next
		y.after = append(y.after, at)
		y.axis = at + toAxis
	}
	return y
}

// secondLine is the baseline of the second line of a row with this centre.
func (f *forest) secondLine(centre float64) float64 {
	return centre + baseline(f.metrics.row) + 1.08*f.metrics.row
}

// label is a text with one span.
func label(x, y, size float64, anchor Anchor, ink Ink, text string) Text {
	return Text{Y: y, Size: size, Spans: []Span{{X: x, Anchor: anchor, Text: text, Ink: ink}}}
}

// boldLabel is a label in bold.
func boldLabel(x, y, size float64, anchor Anchor, text string) Text {
	t := label(x, y, size, anchor, Ordinary, text)
	t.Spans[0].Bold = true
	return t
}

// onPatch returns a text on a patch of paper or tint, which keeps it clear of
// grid lines.
func onPatch(t Text, under Ink, pad float64) []Item {
	run := t.Runs()[0]
	patch := Rect{X: run.Left - pad, Y: t.Y - 0.78*t.Size, Width: run.Width + 2*pad, Height: 0.98 * t.Size, Paint: Solid(under)}
	return []Item{patch, t}
}

func clamp(v, low, high float64) float64 { return math.Max(low, math.Min(high, v)) }
