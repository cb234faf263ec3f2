package layout

import (
	"fmt"
	"math"
	"slices"

	"steelyard/forest/words"
	"steelyard/meta/review"
)

// Shares of the panels' width that stay free before the first and after the last
// point.
const (
	padBefore = 0.0608
	padAfter  = 0.0532
	sameDate  = 4 // distance in points of entries of one date that do not enter together
)

// yearOf places a date on an axis of years: the middle of what is known of it.
func yearOf(d review.Date) float64 {
	year := float64(d.Year)
	switch {
	case d.Month == 0:
		return year + 0.5
	case d.Day == 0:
		return year + (float64(d.Month)-0.5)/12
	}
	return year + (float64(d.Month)-1+(float64(d.Day)-0.5)/31)/12
}

// years returns the points' dates as years. One whose month is not known stands
// at the middle of its year, but not after the next; those without a date follow
// the last one at equal distances.
func (c *cumulative) years() []float64 {
	years := make([]float64, len(c.in.Points))
	dated := c.in.dated()
	for i := dated - 1; i >= 0; i-- {
		years[i] = yearOf(c.in.Points[i].Date)
		if i < dated-1 {
			years[i] = math.Min(years[i], years[i+1])
		}
	}
	const undatedShare = 0.06
	apart := math.Max(undatedShare*(years[dated-1]-years[0]), 0.25)
	for i := dated; i < len(years); i++ {
		years[i] = years[i-1] + apart
	}
	return years
}

// shares returns where each point stands between the first, 0, and the last, 1.
func (c *cumulative) shares() []float64 {
	k := len(c.in.Points)
	shares := make([]float64, k)
	at := func(i int) float64 { return float64(i) }
	if c.in.dated() > 0 {
		years := c.years()
		at = func(i int) float64 { return years[i] }
	}
	for i := range shares {
		shares[i] = 0.5
		if length := at(k-1) - at(0); length > 0 {
			shares[i] = (at(i) - at(0)) / length
		}
	}
	return shares
}

// inner is the part of the panels' width between the first and the last point.
func (c *cumulative) inner() span {
	width := c.plot.high - c.plot.low
	return span{c.plot.low + padBefore*width, c.plot.high - padAfter*width}
}

// pointPlaces returns the x of each point. Entries of one date that do not enter
// together stand side by side.
func (c *cumulative) pointPlaces() []float64 {
	inner := c.inner()
	shares := c.shares()
	xs := make([]float64, len(shares))
	for i := 0; i < len(xs); {
		end := i + 1
		for end < len(xs) && shares[end] == shares[i] {
			end++
		}
		apart := math.Min(sameDate, c.spacing())
		for j := i; j < end; j++ {
			x := inner.low + shares[j]*(inner.high-inner.low) + apart*(float64(j-i)-float64(end-i-1)/2)
			if j > 0 {
				x = math.Max(x, xs[j-1])
			}
			xs[j] = clamp(x, c.plot.low+sameDate/2, c.plot.high-sameDate/2)
		}
		i = end
	}
	return xs
}

// timeItems draws the axis under both panels, with years or, where the order is
// not by date, the labels of the points; it returns the lowest baseline.
func (c *cumulative) timeItems() (items []Item, bottom float64) {
	m, y := c.metrics, c.timeAt
	const long, short = 2.6, 1.4
	base := y + long + m.second
	items = append(items, Line{X1: c.plot.low, Y1: y, X2: c.plot.high, Y2: y, Width: 0.5})
	for _, t := range c.timeTicks() {
		length := short
		if t.label != "" {
			length = long
			items = append(items, label(t.x, base, m.second, Middle, Ordinary, t.label))
		}
		items = append(items, Line{X1: t.x, Y1: y, X2: t.x, Y2: y + length, Width: 0.5})
	}
	if c.in.dated() > 0 {
		return items, base
	}
	base += 1.3 * m.second
	caption, _ := cut(c.orderCaption(), "", c.plot.high-c.plot.low, m.second)
	return append(items, label((c.plot.low+c.plot.high)/2, base, m.second, Middle, Soft, caption)), base
}

func (c *cumulative) orderCaption() string {
	if c.in.Order == "" {
		return c.in.plural(2) + " so far"
	}
	return c.in.Order
}

func (c *cumulative) timeTicks() []tick {
	switch {
	case c.in.dated() == 0:
		return c.orderTicks()
	case c.years()[0] == c.years()[len(c.in.Points)-1]:
		d := c.in.Points[0].Date
		return []tick{{x: (c.inner().low + c.inner().high) / 2, label: words.Date(d.Year, d.Month, d.Day)}}
	}
	return c.withUndated(c.calendarTicks())
}

// withUndated ends the calendar at the last date and labels what stands after it.
func (c *cumulative) withUndated(ticks []tick) []tick {
	dated, k := c.in.dated(), len(c.xs)
	if dated == k {
		return ticks
	}
	after := tick{x: (c.xs[dated] + c.xs[k-1]) / 2, label: "no date"}
	size := c.metrics.second
	from := math.Min(c.xs[dated], after.x-Width(after.label, size, false)/2) - labelGap
	var kept []tick
	for _, t := range ticks {
		if t.x > c.xs[dated]-2 {
			continue
		}
		if t.x+Width(t.label, size, false)/2 > from {
			t.label = ""
		}
		kept = append(kept, t)
	}
	return append(kept, after)
}

// orderTicks labels as many of the points as find room.
func (c *cumulative) orderTicks() []tick {
	const most = 60
	for every := 1; ; every++ {
		var ticks, labelled []tick
		for i, p := range c.in.Points {
			t := tick{x: c.xs[i]}
			if i%every == 0 {
				t.label = p.Label
				if t.label == "" {
					t.label = words.Count(p.K)
				}
				t.label, _ = cut(t.label, "", most, c.metrics.second)
				labelled = append(labelled, t)
			}
			ticks = append(ticks, t)
		}
		if fits(labelled, c.metrics.second) || every >= len(c.in.Points) {
			return ticks
		}
	}
}

// calendarTicks returns a tick at the start of each year, or month, and labels at
// the densest round ones that stand well apart.
func (c *cumulative) calendarTicks() []tick {
	const apart = 12 // space between labels
	years, inner := c.years(), c.inner()
	scale := (inner.high - inner.low) / (years[len(years)-1] - years[0]) // points per year
	place := func(month int) float64 { return inner.low + (float64(month)/12-years[0])*scale }
	first := int(math.Ceil((years[0] + (c.plot.low-inner.low)/scale) * 12))
	last := int(math.Floor((years[0] + (c.plot.high-inner.low)/scale) * 12))
	for _, step := range []int{1, 3, 6, 12, 24, 60, 120, 240, 600, 1200, 2400, 12000} { // months
		if step < 12 && !c.monthsKnown() {
			continue
		}
		name := "2000"
		if step < 12 {
			name = "2000-00"
		}
		if float64(step)/12*scale < Width(name, c.metrics.second, false)+apart {
			continue
		}
		if ticks := monthTicks(first, last, step, place, c.metrics.second, c.plot); labelled(ticks) {
			return ticks
		}
		break
	}
	return c.endTicks()
}

func labelled(ticks []tick) bool {
	return slices.ContainsFunc(ticks, func(t tick) bool { return t.label != "" })
}

func (c *cumulative) monthsKnown() bool {
	return slices.ContainsFunc(c.in.Points, func(p CumulativePoint) bool { return p.Date.Month > 0 })
}

// endTicks labels the first and, if there is room, the last date: between them no
// month or round year begins.
func (c *cumulative) endTicks() []tick {
	date := func(i int) tick {
		d := c.in.Points[i].Date
		return tick{x: c.xs[i], label: words.Date(d.Year, d.Month, d.Day)}
	}
	ticks := []tick{date(0), date(c.in.dated() - 1)}
	if !fits(ticks, c.metrics.second) {
		return ticks[:1]
	}
	return ticks
}

// monthTicks labels every so many months from one to another, counted from year
// 0, and puts a short tick at each half, fifth or twelfth of them.
func monthTicks(first, last, step int, place func(int) float64, size float64, within span) []tick {
	short := map[int]int{1: 1, 3: 1, 6: 3, 12: 6, 24: 12, 60: 12, 120: 60, 240: 120, 600: 120, 1200: 600, 2400: 1200, 12000: 2400}[step]
	var ticks []tick
	for month := first; month <= last; month++ {
		if month%short != 0 || month < 12 {
			continue
		}
		t := tick{x: place(month)}
		if month%step == 0 {
			text := fmt.Sprintf("%04d", month/12)
			if step < 12 {
				text = fmt.Sprintf("%04d-%02d", month/12, month%12+1)
			}
			if half := Width(text, size, false) / 2; t.x-half >= within.low-half/2 && t.x+half <= within.high+half {
				t.label = text
			}
		}
		ticks = append(ticks, t)
	}
	return ticks
}
