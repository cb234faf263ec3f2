package layout

import (
	"math"
	"slices"

	"steelyard/forest/words"
	"steelyard/meta/evidence"
)

// ladder is the upright axis of evidence: steps to heights.
type ladder struct {
	steps span
	step  float64 // height of a step in points
	top   float64 // height of the upper end
}

func (l ladder) y(steps float64) float64 { return l.top + (l.steps.high-steps)*l.step }

func (l ladder) bottom() float64 { return l.y(l.steps.low) }

// holds reports whether a number of steps lies on the ladder.
func (l ladder) holds(steps float64) bool { return l.steps.low <= steps && steps <= l.steps.high }

// newLadder chooses the ends of the ladder by the evidence.
func (c *cumulative) newLadder() ladder {
	s := span{-ladderFoot, ladderLeast}
	for _, p := range c.in.Points {
		s.hold(p.LnEvidence / lnStep)
	}
	if s.low < -ladderFoot {
		s.low = math.Max(-railMost, math.Floor(s.low))
	}
	s.high = math.Min(railMost, math.Ceil(s.high))
	return ladder{steps: s, step: math.Min(ladderStep, mostLadder/(s.high-s.low))}
}

// rung is a whole step of the ladder with its odds, and the word that stands
// between it and the next.
type rung struct {
	steps      float64
	odds, word string
}

// belowEven is the word under even odds.
const belowEven = "none"

func (l ladder) rungs() []rung {
	var all []rung
	names := evidence.WordNames()
	for n := math.Ceil(l.steps.low); n <= l.steps.high; n++ {
		r := rung{steps: n, odds: words.Odds(n * lnStep)}
		if i := int(n); i >= 0 && i < len(names) && n < l.steps.high {
			r.word = names[i]
		}
		all = append(all, r)
	}
	return all
}

// ladderItems draws the axes at both sides, the step lines with their odds, and
// the words between them.
func (c *cumulative) ladderItems() []Item {
	l, size := c.ladder, c.metrics.second
	left, right := c.plot.low, c.plot.high
	items := []Item{Line{X1: left, Y1: l.top, X2: left, Y2: l.bottom(), Width: 0.5}}
	if c.in.Prior > 0 {
		items = append(items, Line{X1: right, Y1: l.top, X2: right, Y2: l.bottom(), Width: 0.5})
	}
	word := func(steps float64, text string) {
		t := label(left-4, l.y(steps)+uprightText*size, size, End, Soft, text)
		t.Spans[0].Italic = true
		items = append(items, t)
	}
	for _, r := range l.rungs() {
		y := l.y(r.steps)
		line := Line{X1: left, Y1: y, X2: right, Y2: y, Width: 0.5, Ink: Grid}
		if r.steps == 0 {
			line.Width, line.Ink = 0.75, Ordinary
		}
		items = append(items, line,
			Line{X1: left - 2.2, Y1: y, X2: left, Y2: y, Width: 0.5},
			label(left-4, y+uprightText*size, size, End, Ordinary, r.odds))
		if r.word != "" {
			word(r.steps+0.5, r.word)
		}
	}
	word(-0.5, belowEven)
	return items
}

// place is the height of a number of steps, within the ladder.
func (l ladder) place(steps float64) float64 {
	return l.y(clamp(steps, l.steps.low, l.steps.high))
}

// evidenceItems draws the line of evidence with its points: it keeps its height
// until the next arrival.
func (c *cumulative) evidenceItems() []Item {
	width, radius := c.lineWidth(), c.discRadius()
	path := c.path()
	last := path[len(path)-1]
	var items []Item
	if c.in.Prior > 0 {
		items = append(items, Line{X1: last.X, Y1: last.Y, X2: c.plot.high, Y2: last.Y, Width: 0.75, Ink: Probability, Dash: []float64{1.5, 1.5}})
	}
	for i := 1; i < len(path); i++ {
		a, b := path[i-1], path[i]
		items = append(items, Line{X1: a.X, Y1: a.Y, X2: b.X, Y2: b.Y, Width: width, Round: true, Ink: Evidence})
	}
	for i, p := range c.in.Points {
		steps := p.LnEvidence / lnStep
		x, y := c.xs[i], c.ladder.place(steps)
		switch {
		case steps > c.ladder.steps.high:
			items = append(items, uprightHead(x, y-1, -headDepth, headHeight, Evidence))
		case steps < c.ladder.steps.low:
			items = append(items, uprightHead(x, y+1, headDepth, headHeight, Evidence))
		case p.K == 1:
			items = append(items, Disc{X: x, Y: y, Radius: radius, Paint: Hollow(Evidence, discOutline)})
		default:
			items = append(items, Disc{X: x, Y: y, Radius: radius, Paint: Paint{Fill: Evidence, Outline: Evidence, OutlineWidth: discOutline}})
		}
	}
	return append(items, c.valueItems(path)...)
}

// path is the line of evidence, corner by corner.
func (c *cumulative) path() []Point {
	var path []Point
	for i, p := range c.in.Points {
		y := c.ladder.place(p.LnEvidence / lnStep)
		if i > 0 {
			path = append(path, Point{c.xs[i], path[len(path)-1].Y})
		}
		path = append(path, Point{c.xs[i], y})
	}
	last := path[len(path)-1]
	return append(path, Point{math.Min(last.X+tailLength, (last.X+c.plot.high)/2), last.Y})
}

// Lines and discs grow finer where points stand close.
func (c *cumulative) discRadius() float64 {
	return clamp(0.4*c.spacing(), 1, evidenceDisc)
}

func (c *cumulative) lineWidth() float64 { return clamp(0.28*c.spacing(), 1, 1.6) }

// spacing is the mean distance between points.
func (c *cumulative) spacing() float64 {
	return (c.plot.high - c.plot.low) / float64(len(c.in.Points))
}

// uprightHead is the filled head of what goes past an upright axis: its tip, the
// signed depth from its base down to the tip, and its width.
func uprightHead(x, tip, depth, width float64, ink Ink) Polygon {
	return Polygon{Points: []Point{{x, tip}, {x - width/2, tip - depth}, {x + width/2, tip - depth}}, Paint: Solid(ink)}
}

// valueItems writes the odds and the word of the last point beside it, where
// neither the line nor a disc runs through them.
func (c *cumulative) valueItems(path []Point) []Item {
	var best Text
	for i, t := range c.valuePlaces(path[len(path)-2], len(path) > 3 && path[len(path)-3].Y < path[len(path)-2].Y) {
		if i == 0 {
			best = t
		}
		if c.clearOfLine(t, path) {
			best = t
			break
		}
	}
	return onPatch(best, Paper, 1.2)
}

// valuePlaces returns where the value of a point may stand within the ladder, the
// nearest first: to its left, or at the right end of the panel; above it, or below
// it where the line fell to it.
func (c *cumulative) valuePlaces(at Point, fell bool) []Text {
	const gap, further = 4.5, 4
	size, text := c.metrics.row, c.valueText()
	width, capital := Width(text, size, true), 0.72*size
	end := span{c.plot.low + 2 + width, c.plot.high - 3}
	var places []Text
	for offset := gap; offset < c.ladder.bottom()-c.ladder.top; offset += further {
		bases := []float64{at.Y - offset, at.Y + offset + capital}
		if fell {
			slices.Reverse(bases)
		}
		for _, base := range bases {
			if base-capital < c.ladder.top || base > c.ladder.bottom() {
				continue
			}
			for _, x := range []float64{at.X - 5, end.high} {
				places = append(places, boldLabel(clamp(x, end.low, end.high), base, size, End, text))
			}
		}
	}
	return places
}

// valueText is the odds of the last point with their word, as far as that fits.
func (c *cumulative) valueText() string {
	ln := c.last().LnEvidence
	odds := words.Odds(ln)
	text := odds + ", " + wordText(ln)
	if ln < 0 {
		text += " for none"
	}
	if Width(text, c.metrics.row, true) > c.plot.high-c.plot.low-4 {
		return odds
	}
	return text
}

// clearOfLine reports whether a text stands free of the line of evidence and of
// that of even odds.
func (c *cumulative) clearOfLine(t Text, path []Point) bool {
	run := t.Runs()[0]
	pad := c.discRadius() + discOutline + 0.4
	x1, x2 := run.Left-pad, run.Left+run.Width+pad
	y1, y2 := t.Y-0.72*t.Size-pad, t.Y+0.21*t.Size+pad
	if last := path[len(path)-2].X; run.Left+run.Width < last {
		x2 -= pad // the last point stands beside the text
	}
	if even := c.ladder.y(0); y1 <= even && even <= y2 {
		return false
	}
	for i := 1; i < len(path); i++ {
		a, b := path[i-1], path[i]
		if math.Min(a.X, b.X) <= x2 && math.Max(a.X, b.X) >= x1 && math.Min(a.Y, b.Y) <= y2 && math.Max(a.Y, b.Y) >= y1 {
			return false
		}
	}
	return true
}
