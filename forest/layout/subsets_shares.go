package layout

import (
	"math"

	"steelyard/forest/words"
	"steelyard/meta/evidence"
)

// subsetsShare is a share of subsets at the right of the panel.
type subsetsShare struct {
	y           float64 // baseline
	share, text string
}

// shareTexts returns the shares beside the labelled lines of the ladder, and under
// them those by the estimate.
func (c *subsets) shareTexts() []subsetsShare {
	l, size := c.ladder, c.metrics.second
	var all []subsetsShare
	add := func(steps, share float64, text string) {
		y := l.y(steps) + uprightText*size
		clear := l.holds(steps)
		for _, other := range all {
			clear = clear && math.Abs(other.y-y) >= 1.15*size
		}
		if clear {
			all = append(all, subsetsShare{y, shareText(share), text})
		}
	}
	s, every := c.in.Shares, int(math.Min(c.ladder.labelEvery(c.metrics.second), mostSteps))
	add(0, s.Reach[0], "for an effect")
	for i, name := range evidence.WordNames() {
		if i > 0 && i%every == 0 {
			add(float64(i), s.Reach[i], "reach "+name)
		}
	}
	add(math.Max(-0.5, l.steps.low), 1-s.Reach[0], "for none")
	return append(all, c.sideTexts()...)
}

// sideTexts returns the shares of subsets on the side of no effect where the
// result of all studies lies, and beyond the important difference there.
func (c *subsets) sideTexts() []subsetsShare {
	m, s := c.metrics, c.in.Shares
	y, next := c.directionBase(), 1.5*m.head
	side, null, zone, beyond := "below ", s.BelowNull, s.BelowZone, 0.0
	if c.in.Important != nil {
		beyond = c.in.Important.Low
	}
	if c.in.Full.Estimate > c.in.Scale.Null {
		side, null, zone = "above ", s.AboveNull, s.AboveZone
		if c.in.Important != nil {
			beyond = c.in.Important.High
		}
	}
	all := []subsetsShare{{y, shareText(null), side + nullText(c.in.Scale)}}
	if c.in.Important != nil && beyond != c.in.Scale.Null {
		all = append(all, subsetsShare{y + next, shareText(zone), side + effectText(c.in.Scale, beyond)})
	}
	return all
}

// nullText writes the value of no effect, whole ones without decimals.
func nullText(scale EffectScale) string {
	if v := scale.shown(scale.Null); v == math.Trunc(v) {
		return words.Linear(v, 0)
	}
	return effectText(scale, scale.Null)
}

// shareText writes a share as a whole percentage that tells some from none and
// nearly all from all.
func shareText(share float64) string {
	const slack = 1e-12 // of sums that should be 0 or 1
	switch {
	case share > slack && share < 0.005:
		return "< 1%"
	case share < 1-slack && share > 0.995:
		return "> 99%"
	}
	return words.Percent(share)
}

// percentEnd is the room of the percentages.
func (c *subsets) percentEnd() float64 {
	most := 0.0
	for _, s := range c.shares {
		most = max(most, Width(s.share, c.metrics.second, true))
	}
	return most
}

func (c *subsets) shareWidth() float64 {
	most := 0.0
	for _, s := range c.shares {
		most = max(most, Width(s.text, c.metrics.second, false))
	}
	return max(c.percentEnd()+0.3*c.metrics.second+most, Width("that reach it", c.metrics.second, false))
}

// shareItems writes the shares at the right, percentages aligned, each beside the
// line that it tells of.
func (c *subsets) shareItems() []Item {
	size := c.metrics.second
	end := c.right + c.percentEnd()
	var items []Item
	for _, s := range c.shares {
		items = append(items, Text{Y: s.y, Size: size, Spans: []Span{
			{X: end, Anchor: End, Text: s.share, Bold: true}, {X: end + 0.3*size, Text: s.text, Ink: Soft}}})
	}
	return items
}
