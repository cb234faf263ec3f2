package layout

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"steelyard/forest/words"
)

// arrivalLabel stands over an arrival: names, or numbers on a narrow chart, and
// the change in steps.
type arrivalLabel struct {
	point  int
	lines  []string
	change string
	width  float64
	x      float64 // its middle
}

const (
	nameLead  = 1.12 // from name to name of a stack, in type sizes
	nameWhole = 120  // most width of a name in points where there is room
	nameMost  = 62   // where there is not
	nameGap   = 5.6  // least space between labels
	mostStack = 3    // names over one arrival
)

// change is how many steps a point moves the evidence; the first moves it from
// even odds.
func (c *cumulative) change(i int) float64 {
	ln := c.in.Points[i].LnEvidence
	if i > 0 {
		ln -= c.in.Points[i-1].LnEvidence
	}
	return ln / lnStep
}

// placeNames chooses the arrivals that are labelled and places their labels: over
// the arrivals, pushed apart as little as possible.
func (c *cumulative) placeNames() []arrivalLabel {
	m := c.metrics
	from := m.margin + max(Width(c.evidenceHead(), m.head, true), Width(evidenceUnder, m.second, false)) + 8
	if m.twoLine {
		from -= 4
	}
	room := span{from, c.plot.high}
	names := c.labels(nameWhole)
	need := func() float64 {
		sum := -nameGap
		for _, n := range names {
			sum += n.width + nameGap
		}
		return sum
	}
	if need() > room.high-room.low {
		names = c.labels(nameMost)
	}
	for len(names) > 0 && need() > room.high-room.low {
		least := 0
		for i, n := range names {
			if math.Abs(c.change(n.point)) < math.Abs(c.change(names[least].point)) {
				least = i
			}
		}
		names = slices.Delete(names, least, least+1)
	}
	wanted, widths := make([]float64, len(names)), make([]float64, len(names))
	for i, n := range names {
		wanted[i], widths[i] = c.xs[n.point], n.width
	}
	for i, x := range pushApart(wanted, widths, nameGap, room) {
		names[i].x = x
	}
	return names
}

// labels returns the labels of the arrivals that deserve one, names at most so
// wide.
func (c *cumulative) labels(most float64) []arrivalLabel {
	var all []arrivalLabel
	for i := range c.in.Points {
		if len(c.in.Points) <= namesBeyond || math.Abs(c.change(i)) >= namedMove {
			all = append(all, c.newLabel(i, most))
		}
	}
	return all
}

func (c *cumulative) newLabel(i int, most float64) arrivalLabel {
	size := c.metrics.second
	n := arrivalLabel{point: i, change: words.StepsChangeShort(c.change(i))}
	entered := c.in.Points[i].Entered
	if c.metrics.twoLine {
		n.lines = []string{c.numbers(i)}
	} else {
		for _, a := range entered {
			short, _ := cut(a.Name, "", most, size)
			if a.Name == "" {
				short, _ = cut(a.Year, "", most, size)
			}
			n.lines = append(n.lines, short)
		}
		if len(n.lines) > mostStack {
			n.lines = append(n.lines[:mostStack-1], fmt.Sprintf("and %d more", len(entered)-mostStack+1))
		}
	}
	n.width = Width(n.change, size, false)
	for _, line := range n.lines {
		n.width = max(n.width, Width(line, size, false))
	}
	return n
}

// numbers are the places of a point's studies in the order of arrival: "3", or
// "3–5" where several enter together.
func (c *cumulative) numbers(i int) string {
	p := c.in.Points[i]
	if len(p.Entered) == 1 {
		return words.Count(p.K)
	}
	return words.Count(p.K-len(p.Entered)+1) + "–" + words.Count(p.K)
}

func (c *cumulative) nameLines() int {
	most := 1
	for _, n := range c.names {
		most = max(most, len(n.lines))
	}
	return most
}

// pushApart returns middles of labels of these widths that keep a gap, stay
// within a room that holds them all, and lie as near as possible to the wanted
// ones, by least squares: the pooling of adjacent violators (Ayer, Brunk, Ewing,
// Reid & Silverman 1955, Annals of Mathematical Statistics 26:641-647).
func pushApart(wanted, widths []float64, gap float64, room span) []float64 {
	type block struct {
		mean  float64
		count int
	}
	var blocks []block
	offsets := make([]float64, len(wanted))
	for i := range wanted {
		if i > 0 {
			offsets[i] = offsets[i-1] + (widths[i-1]+widths[i])/2 + gap
		}
		blocks = append(blocks, block{wanted[i] - offsets[i], 1})
		for n := len(blocks); n > 1 && blocks[n-2].mean > blocks[n-1].mean; n-- {
			a, b := blocks[n-2], blocks[n-1]
			count := a.count + b.count
			blocks[n-2] = block{(a.mean*float64(a.count) + b.mean*float64(b.count)) / float64(count), count}
			blocks = blocks[:n-1]
		}
	}
	places := make([]float64, 0, len(wanted))
	if len(wanted) == 0 {
		return places
	}
	last := len(wanted) - 1
	low, high := room.low+widths[0]/2, room.high-widths[last]/2-offsets[last]
	for _, b := range blocks {
		for range b.count {
			places = append(places, clamp(b.mean, low, high)+offsets[len(places)])
		}
	}
	return places
}

// arrivalItems draws the labels, and through both panels a line at each arrival,
// or at the labelled ones where there are many.
func (c *cumulative) arrivalItems() []Item {
	size, top := c.metrics.second, c.ladder.top
	var lines, labels []Item
	down := func(x float64) {
		lines = append(lines, Line{X1: x, Y1: top, X2: x, Y2: c.axis.x0, Width: 0.5, Ink: Grid})
	}
	every := c.spacing() >= 6
	if every {
		for _, x := range c.xs {
			down(x)
		}
	}
	for _, n := range c.names {
		x := c.xs[n.point]
		if !every {
			down(x)
		}
		g := Group{Title: c.fullNames(n.point)}
		for i, line := range n.lines {
			base := c.nameEnd - float64(len(n.lines)-1-i)*nameLead*size
			g.Items = append(g.Items, label(n.x, base, size, Middle, Ordinary, line))
		}
		from := c.changeBase() + 2
		g.Items = append(g.Items,
			label(n.x, c.changeBase(), size, Middle, Soft, n.change),
			Line{X1: n.x, Y1: from, X2: x, Y2: top, Width: 0.5, Ink: SpanRule})
		labels = append(labels, g)
	}
	return append(lines, labels...)
}

// fullNames are the names of a point's studies with their years.
func (c *cumulative) fullNames(i int) string {
	var all []string
	for _, a := range c.in.Points[i].Entered {
		all = append(all, joinName(a.Name, a.Year))
	}
	return strings.Join(all, ", ")
}
