package layout

import (
	"math"

	"steelyard/meta/evidence"
)

// rail is the axis of evidence: steps to places.
type rail struct {
	steps span // ends in steps
	place span // ends in points
}

// Ends of a rail in steps: it starts at railStart, or further left if a bar needs
// it, and ends at a whole number from railLeast to railMost.
const (
	railStart = -0.8
	railLeast = 4
	railMost  = 6
	railWords = 20 // least width of a step for words on one line; half of it for two lines
)

func (r rail) x(steps float64) float64 {
	return r.place.low + (steps-r.steps.low)/(r.steps.high-r.steps.low)*(r.place.high-r.place.low)
}

func (r rail) zero() float64 { return r.x(0) }

// step is the width of one step in points.
func (r rail) step() float64 { return r.x(1) - r.x(0) }

// railSpan returns the ends of the rail for bars of these ln evidence ratios.
func railSpan(start float64, ln []float64) span {
	s := span{start, railLeast}
	for _, v := range ln {
		s.hold(v / lnStep)
	}
	if s.low < start {
		s.low = math.Max(-railMost, math.Floor(s.low*5)/5)
	}
	s.high = math.Min(railMost, math.Ceil(s.high))
	return s
}

// railLabel writes the left side of the odds at a number of steps, 0 or more.
func railLabel(steps float64) string { return oddsParts(steps * lnStep)[0] }

// Least spaces between the labels of the rail: to the last, and among the rest.
const (
	lastApart   = 2.6
	othersApart = 2
)

// labels returns the ticks of the rail and that of the most there can be for
// none. A label that comes within 2.6 pt of the last is dropped; if the others
// are too close, every second one stays.
func (r rail) labels(size float64) (whole []tick, bound tick) {
	half := func(t tick) float64 { return Width(t.label, size, false) / 2 }
	apart := func(a, b tick) float64 { return b.x - half(b) - a.x - half(a) }
	last := tick{x: r.x(r.steps.high), label: railLabel(r.steps.high)}
	for every := 1; every <= 2; every++ {
		whole = nil
		before, crowded := tick{x: math.Inf(-1)}, false
		for n := 0; n < int(r.steps.high); n++ {
			t := tick{x: r.x(float64(n)), label: railLabel(float64(n))}
			if n%every != 0 || apart(t, last) < lastApart {
				t.label = ""
			} else {
				crowded = crowded || apart(before, t) < othersApart
				before = t
			}
			whole = append(whole, t)
		}
		whole = append(whole, last)
		if !crowded {
			break
		}
	}
	bound = tick{x: r.x(-mostForNone / lnStep), label: railLabel(mostForNone / lnStep)}
	if apart(bound, whole[0]) < lastApart {
		bound.label = ""
	}
	return whole, bound
}

// bar draws evidence on the rail: to the right for an effect, hollow if the
// effect is not the wanted one, to the left in grey for none. A bar past an end
// stops there in a head.
func (r rail) bar(ln, y, height float64, unwanted bool) []Item {
	steps := ln / lnStep
	zero := r.zero()
	to := r.x(math.Max(r.steps.low, math.Min(r.steps.high, steps)))
	ink := Evidence
	if steps < 0 {
		ink = EvidenceNone
	}
	var items []Item
	if steps > r.steps.high || steps < r.steps.low {
		tip, back := to, 3.75
		if steps < 0 {
			back = -back
		}
		to = tip - back
		items = append(items, head(tip, y, back, height, ink))
	}
	body := Rect{X: math.Min(zero, to), Y: y - height/2, Width: math.Abs(to - zero), Height: height, Paint: Solid(ink)}
	if unwanted && steps >= 0 {
		const line = 0.9
		body = Rect{X: body.X + line/2, Y: body.Y + line/2, Width: math.Max(0.2, body.Width-line), Height: height - line, Paint: Hollow(ink, line)}
	}
	return append([]Item{body}, items...)
}

// head is the filled head of what goes past an axis: its tip, the signed depth
// back to its base, and its height.
func head(tip, y, back, height float64, ink Ink) Polygon {
	return Polygon{Points: []Point{{tip, y}, {tip - back, y - height/2}, {tip - back, y + height/2}}, Paint: Solid(ink)}
}

// word is one of the words between the step lines, with its place.
type word struct {
	x    float64
	line int // 0 is the lower line
	text string
}

// words returns the words of the steps that fit over the rail: on one line, on
// two staggered lines, or none.
func (r rail) words(size float64) (words []word, lines int) {
	names := evidence.WordNames()
	for i, name := range names {
		from, to := float64(i), float64(i+1)
		if i == len(names)-1 {
			to = math.Max(to, r.steps.high)
		}
		if to > r.steps.high {
			break
		}
		words = append(words, word{x: (r.x(from) + r.x(to)) / 2, text: name})
	}
	switch {
	case clearWords(words, size):
		return words, 1
	case r.step() < railWords/2:
		return nil, 0
	}
	for i := range words {
		words[i].line = i % 2
	}
	if !clearWords(words, size) {
		return nil, 0
	}
	return words, 2
}

// clearWords reports whether words on the same line stand apart.
func clearWords(words []word, size float64) bool {
	for i, a := range words {
		for _, b := range words[i+1:] {
			if a.line == b.line && b.x-a.x < (Width(a.text, size, false)+Width(b.text, size, false))/2+2 {
				return false
			}
		}
	}
	return true
}
