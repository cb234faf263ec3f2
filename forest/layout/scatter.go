package layout

import (
	"math"
	"slices"
)

// scatter is a panel of discs with an axis below it and one at its left, as the
// charts of small studies share it.
type scatter struct {
	style   Style
	metrics metrics
	titles  titleBlock
	head    float64 // baseline of the head over the left axis
	plot    span    // left and right end of the panel
	top     float64
	bottom  float64
	across  axis
	up      axis // its places are heights on the page
	dots    []placed
}

// placed is one study in the panel.
type placed struct {
	name string
	x, y float64 // values on the axes
	at   Point   // its place; at the edge if it lies beyond
	away Point   // direction in which it lies beyond; zero inside
}

// Sizes of the charts with discs in points.
const (
	scatterHeight       = 196
	scatterHeightNarrow = 158
	scatterDisc         = 2.6
	scatterDiscMany     = 1.7
	manyDiscs           = 60
	scatterRim          = 0.8
	namesWide           = 8
	namesNarrow         = 4
	nameApart           = 5 // from a disc to its name
)

// newScatter places the titles and the height of the panel; frame places its sides.
func newScatter(style Style, title, subtitle string) scatter {
	s := scatter{style: style, metrics: subsetsMetrics(style)}
	s.titles = placeTitles(title, subtitle, 0, style, s.metrics)
	s.head = s.titles.bottom + 21
	if style.NoTitle {
		s.head = 2 + s.metrics.head
	}
	height := float64(scatterHeight)
	if s.metrics.twoLine {
		height = scatterHeightNarrow
	}
	s.top = s.head + 6.5
	s.bottom = s.top + height
	return s
}

// frame places the sides of the panel, with room for numbers at the left and
// right; it returns a *TooNarrowError if it finds too little.
func (s *scatter) frame(chart string, left, right float64) error {
	s.plot = span{s.metrics.margin + left, s.style.Width - s.metrics.margin - right}
	if room := s.plot.high - s.plot.low; room < minZone {
		return &TooNarrowError{Chart: chart, Width: s.style.Width, Least: s.style.Width + minZone - room}
	}
	return nil
}

// numbersRoom is the room of an upright axis' numbers with their ticks.
func numbersRoom(a axis, size float64) float64 {
	most := 0.0
	for _, t := range a.ticks {
		most = max(most, Width(t.label, size, false))
	}
	return most + 4.5
}

// put adds a study; one beyond the axes is moved to the edge.
func (s *scatter) put(name string, x, y float64) {
	d := placed{name: name, x: x, y: y}
	at := Point{s.across.x(x), s.up.x(y)}
	d.at = Point{clamp(at.X, s.plot.low, s.plot.high), clamp(at.Y, s.top, s.bottom)}
	d.away = Point{at.X - d.at.X, at.Y - d.at.Y}
	s.dots = append(s.dots, d)
}

// beyond counts the studies outside the panel.
func (s *scatter) beyond() int {
	n := 0
	for _, d := range s.dots {
		if d.away != (Point{}) {
			n++
		}
	}
	return n
}

func (s *scatter) radius() float64 {
	if len(s.dots) > manyDiscs {
		return scatterDiscMany
	}
	return scatterDisc
}

// discItems draws the studies: a disc with a paper rim, or at the edge a head that
// points to where the study lies.
func (s *scatter) discItems() []Item {
	var items []Item
	for _, d := range s.dots {
		switch {
		case d.away.X != 0:
			items = append(items, head(d.at.X, clamp(d.at.Y, s.top+2.2, s.bottom-2.2), math.Copysign(3.2, d.away.X), 4.2, Estimate))
		case d.away.Y != 0:
			deep := math.Copysign(3.2, d.away.Y)
			items = append(items, Polygon{Points: []Point{d.at, {d.at.X - 2.1, d.at.Y - deep}, {d.at.X + 2.1, d.at.Y - deep}}, Paint: Solid(Estimate)})
		default:
			items = append(items, Disc{X: d.at.X, Y: d.at.Y, Radius: s.radius(), Paint: Paint{Fill: Estimate, Outline: Paper, OutlineWidth: scatterRim}})
		}
	}
	return items
}

// nameItems writes the names of the first studies of an order that find room beside
// their disc, clear of all discs, of each other and of texts that stand already.
func (s *scatter) nameItems(order []int, taken []area) []Item {
	most := namesWide
	if s.metrics.twoLine {
		most = namesNarrow
	}
	size := s.metrics.second
	inside := area{s.plot.low + 2, s.plot.high - 2, s.top + 2, s.bottom - 2}
	obstacles := slices.Clone(taken)
	for _, d := range s.dots {
		r := s.radius() + scatterRim
		obstacles = append(obstacles, area{d.at.X - r, d.at.X + r, d.at.Y - r, d.at.Y + r})
	}
	var items []Item
	for _, i := range order {
		if len(items) == most {
			break
		}
		d := s.dots[i]
		name, _ := cut(d.name, "", 0.4*(s.plot.high-s.plot.low), size)
		if t, ok := beside(d.at, name, size, inside, obstacles); ok {
			obstacles = append(obstacles, areaOf(t).grown(1))
			items = append(items, t)
		}
	}
	return items
}

// besideLines returns small areas that follow the lines among some items, so that no text
// is laid over them.
func besideLines(items []Item) (all []area) {
	const step, half = 3, 1
	for _, it := range items {
		l, ok := it.(Line)
		if !ok {
			continue
		}
		n := 1 + math.Ceil(math.Hypot(l.X2-l.X1, l.Y2-l.Y1)/step)
		for i := 0.0; i <= n; i++ {
			x, y := l.X1+i/n*(l.X2-l.X1), l.Y1+i/n*(l.Y2-l.Y1)
			all = append(all, area{x - half, x + half, y - half, y + half})
		}
	}
	return all
}

// beside places a text at one of six places around a point, or reports that none is
// clear.
func beside(p Point, text string, size float64, inside area, obstacles []area) (Text, bool) {
	for _, at := range []struct {
		dx, dy float64
		anchor Anchor
	}{{nameApart, 0, Start}, {-nameApart, 0, End}, {nameApart, -4.5, Start}, {-nameApart, -4.5, End}, {nameApart, 4.5, Start}, {-nameApart, 4.5, End}} {
		t := label(p.X+at.dx, p.Y+at.dy+baseline(size), size, at.anchor, Ordinary, text)
		a := areaOf(t)
		clear := a.left >= inside.left && a.right <= inside.right && a.top >= inside.top && a.bottom <= inside.bottom
		for _, o := range obstacles {
			clear = clear && !a.meets(o)
		}
		if clear {
			return t, true
		}
	}
	return Text{}, false
}

// axisItems draws both axes with their numbers; it returns the baseline of the
// numbers below.
func (s *scatter) axisItems() (items []Item, numbers float64) {
	const tickLength = 2.2
	size := s.metrics.second
	numbers = s.bottom + tickLength + 1 + size
	items = append(items,
		Line{X1: s.plot.low, Y1: s.top, X2: s.plot.low, Y2: s.bottom, Width: 0.5},
		Line{X1: s.plot.low, Y1: s.bottom, X2: s.plot.high, Y2: s.bottom, Width: 0.5})
	for _, t := range s.up.ticks {
		items = append(items, Line{X1: s.plot.low - tickLength, Y1: t.x, X2: s.plot.low, Y2: t.x, Width: 0.5},
			label(s.plot.low-4, t.x+baseline(size), size, End, Ordinary, t.label))
	}
	for _, t := range s.across.ticks {
		items = append(items, Line{X1: t.x, Y1: s.bottom, X2: t.x, Y2: s.bottom + tickLength, Width: 0.5})
		if t.x+Width(t.label, size, false)/2 < s.style.Width-1 {
			items = append(items, label(t.x, numbers, size, Middle, Ordinary, t.label))
		}
	}
	return items, numbers
}

// directionItems draws the directions under the line of no effect, a line below the
// numbers; it returns their baseline.
func (s *scatter) directionItems(sides Sides, null, numbers float64) (items []Item, base float64) {
	size := s.metrics.second
	base = numbers + 3.4 + size
	within := span{s.metrics.margin, s.style.Width - s.metrics.margin}
	for _, d := range clearDirections([]direction{
		placeDirection(sides.Lower, null, false, within, size),
		placeDirection(sides.Higher, null, true, within, size),
	}, within) {
		if Width(d.text, size, false) > size {
			items = append(items, d.items(base, size)...)
		}
	}
	return items, base
}

// headItem is the head over the left axis: what it shows, and of what.
func (s *scatter) headItem(what, of string) Item {
	m := s.metrics
	t := boldLabel(m.margin, s.head, m.head, Start, what)
	if room := s.style.Width - 2*m.margin - Width(what+"  ", m.head, true); Width(of, m.head, false) <= room {
		t.Spans = append(t.Spans, Span{Text: "  " + of, Ink: Soft, Follow: true})
	}
	return t
}

// drawing puts the parts of the chart on one page above its notes.
func (s *scatter) drawing(title, description string, groups []Item, notes []Note, lowest float64) Drawing {
	d := Drawing{ID: s.style.ID, Width: s.style.Width, Title: title, Description: description}
	d.Items = append(append(d.Items, s.titles.items(1, 1)...), groups...)
	texts, height := placeNotes(notes, s.metrics, s.style.Width, lowest+s.metrics.note+7)
	d.Items = append(d.Items, Group{ID: "notes", Items: texts})
	d.Height = height
	return d
}

// farthestFirst orders the studies by a measure of how far they lie off.
func farthestFirst(n int, far func(i int) float64) []int {
	order := make([]int, n)
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(i, j int) int {
		switch a, b := far(i), far(j); {
		case a > b:
			return -1
		case a < b:
			return 1
		}
		return 0
	})
	return order
}

// quantile returns the value that a share of positive values does not exceed.
func quantile(values []float64, share float64) float64 {
	sorted := slices.Sorted(slices.Values(values))
	return sorted[int(share*float64(len(sorted)-1)+0.5)]
}
