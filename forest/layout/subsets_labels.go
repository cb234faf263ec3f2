package layout

import (
	"math"
	"strings"

	"steelyard/forest/words"
)

// area is the room of a text.
type area struct{ left, right, top, bottom float64 }

func areaOf(t Text) area {
	run := t.Runs()[0]
	return area{run.Left, run.Left + run.Width, t.Y - 0.74*t.Size, t.Y + 0.22*t.Size}
}

func (a area) meets(b area) bool {
	return a.left < b.right && b.left < a.right && a.top < b.bottom && b.top < a.bottom
}

func (a area) grown(by float64) area {
	return area{a.left - by, a.right + by, a.top - by, a.bottom + by}
}

func (a area) holds(p Point) bool {
	return a.left <= p.X && p.X <= a.right && a.top <= p.Y && p.Y <= a.bottom
}

// shorter is what a shorter text must save to take the place of a longer one.
const shorter = 8

// labels places the texts inside the panel, each where it covers least.
type labels struct {
	c      *subsets
	xs, ys []float64 // of the lines through the panel
	taken  []area
	items  []Item
}

// placeLabels writes the labels of the result of all studies and of both outlines.
func (c *subsets) placeLabels() []Item {
	p := c.fullPoint()
	l := labels{c: c, taken: []area{{p.X - 5, p.X + 5, p.Y - 5, p.Y + 5}}}
	for _, line := range c.uprightLines() {
		l.xs = append(l.xs, line.x)
	}
	for _, line := range c.ladder.stepLines(c.metrics.second) {
		l.ys = append(l.ys, c.ladder.y(line.steps))
	}
	all := "All " + words.Count(c.in.Full.K)
	name := all + " " + c.in.plural(c.in.Full.K)
	odds := ", " + words.Odds(c.in.Full.LnEvidence)
	l.place([]Point{p}, c.metrics.row, true, nil, name+odds, all+odds, name, all)
	if d := c.density; len(d.with) > 0 {
		room := 0.5 * (c.plot.high - c.plot.low)
		chosen, _ := cut("with "+c.in.Chosen.Name, "", room, c.metrics.second)
		short, _ := cut("with "+strings.TrimRight(c.in.Chosen.Name, " 0123456789"), "", room, c.metrics.second)
		l.place(pointsOn(d.with), c.metrics.second, false, d.without, chosen, short, "with it")
		l.place(pointsOn(d.without), c.metrics.second, false, d.with, "without it")
	}
	return l.items
}

// place writes the first of some texts, or a shorter one that covers much less.
func (l *labels) place(anchors []Point, size float64, bold bool, others [][]Point, texts ...string) {
	var best Text
	least := math.Inf(1)
	for i, text := range texts {
		t := label(0, 0, size, Start, Ordinary, text)
		t.Spans[0].Bold = bold
		if t, cost := l.best(anchors, t, others); cost+shorter*float64(i) < least {
			best, least = t, cost+shorter*float64(i)
		}
	}
	if !math.IsInf(least, 1) {
		l.taken = append(l.taken, areaOf(best).grown(2))
		l.items = append(l.items, onPatch(best, Paper, 1.2)...)
	}
}

// pointsOn returns places along closed lines where a label may stand.
func pointsOn(loops [][]Point) []Point {
	var all []Point
	for _, loop := range loops {
		all = append(all, along(loop, 7)...)
	}
	return all
}

// best tries a text around each anchor and returns it where it costs least;
// others are the lines that it must not seem to name. Without room inside the
// panel the cost is infinite.
func (l *labels) best(anchors []Point, text Text, others [][]Point) (Text, float64) {
	const off = 6
	c := l.c
	inside := area{c.plot.low + 3, c.plot.high - 3, c.ladder.top + 3, c.ladder.bottom() - 3}
	var best Text
	least := math.Inf(1)
	for _, p := range anchors {
		for _, at := range []struct {
			dx, dy float64
			anchor Anchor
		}{{off, 0, Start}, {-off, 0, End}, {off, -off, Start}, {-off, -off, End}, {off, off, Start}, {-off, off, End}, {0, -off - 2, Middle}, {0, off + 2, Middle}} {
			span := text.Spans[0]
			span.X, span.Anchor = p.X+at.dx, at.anchor
			t := Text{Y: p.Y + at.dy + uprightText*text.Size, Size: text.Size, Spans: []Span{span}}
			a := areaOf(t)
			if a.left < inside.left || a.right > inside.right || a.top < inside.top || a.bottom > inside.bottom {
				continue
			}
			if cost, ok := l.cost(a, others); ok && cost < least {
				best, least = t, cost
			}
		}
	}
	return best, least
}

// cost weighs what a text would cover: outlines most, then lines through the
// panel, then the greys, and nearness to others' lines. It reports false over
// another text.
func (l *labels) cost(a area, others [][]Point) (float64, bool) {
	for _, other := range l.taken {
		if a.meets(other) {
			return 0, false
		}
	}
	cost := 0.0
	near := a.grown(1.5)
	for _, loops := range [][][]Point{l.c.density.with, l.c.density.without} {
		for _, loop := range loops {
			for _, p := range loop {
				if near.holds(p) {
					cost += 3
				}
			}
		}
	}
	const apart = 18
	nearest := float64(apart)
	for _, loop := range others {
		for _, p := range loop {
			nearest = math.Min(nearest, a.distance(p))
		}
	}
	cost += 0.7 * (apart - nearest)
	for _, x := range l.xs {
		if near.left < x && x < near.right {
			cost += 12
		}
	}
	for _, y := range l.ys {
		if near.top < y && y < near.bottom {
			cost++
		}
	}
	return cost + l.c.covered(a), true
}

// distance is how far a point lies from the area, 0 inside.
func (a area) distance(p Point) float64 {
	return math.Hypot(math.Max(0, math.Max(a.left-p.X, p.X-a.right)), math.Max(0, math.Max(a.top-p.Y, p.Y-a.bottom)))
}

// covered weighs the dots and greys under a text, darker ones more.
func (c *subsets) covered(a area) float64 {
	cost := 0.0
	for _, d := range c.density.dots {
		if a.grown(2).holds(d.at) {
			cost += 4
		}
	}
	r := c.density.cells
	if len(r.v) == 0 {
		return cost
	}
	width, height := (c.plot.high-c.plot.low)/float64(r.nx), (c.ladder.bottom()-c.ladder.top)/float64(r.ny)
	left, right := int((a.left-c.plot.low)/width), int((a.right-c.plot.low)/width)
	low, high := int((c.ladder.bottom()-a.bottom)/height), int((c.ladder.bottom()-a.top)/height)
	for y := max(0, low); y <= min(high, r.ny-1); y++ {
		for x := max(0, left); x <= min(right, r.nx-1); x++ {
			for _, level := range c.density.levels {
				if r.v[y*r.nx+x] >= level {
					cost += 0.02
				}
			}
		}
	}
	return cost
}
