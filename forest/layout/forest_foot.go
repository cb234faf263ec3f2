package layout

import "slices"

// footItems draws both axes at a height, and the directions under them; it
// returns the lowest baseline.
func (f *forest) footItems(y float64) (items []Item, bottom float64) {
	r, m := f.rail, f.metrics
	const tickLength = 2.2
	numbers := y + tickLength + m.second
	items = append(items, Line{X1: r.zero(), Y1: f.heads.rule, X2: r.zero(), Y2: y, Width: 0.75})
	draw := func(from, to float64, ticks []tick, ink Ink) {
		if from < to {
			items = append(items, Line{X1: from, Y1: y, X2: to, Y2: y, Width: 0.5})
		}
		for _, t := range ticks {
			items = append(items, Line{X1: t.x, Y1: y, X2: t.x, Y2: y + tickLength, Width: 0.5})
			if t.label != "" {
				items = append(items, label(t.x, numbers, m.second, Middle, ink, t.label))
			}
		}
	}
	effects, whole, bound := f.axisLabels()
	draw(f.axis.x0, f.axis.x1, effects, Ordinary)
	draw(r.place.low, r.place.high, whole, Ordinary)
	if bound.label != "" {
		draw(0, 0, []tick{bound}, Soft)
	}
	bottom = numbers + m.second + 3.5
	if m.twoLine {
		bottom += 0.5
	}
	return append(items, f.directions(bottom)...), bottom
}

// axisLabels returns the ticks of both axes. Where the last label of the effect
// axis reaches the rail, the label of the bound gives way, and before the rail's
// zero the label of the effect.
func (f *forest) axisLabels() (effects, whole []tick, bound tick) {
	size := f.metrics.second
	half := func(t tick) float64 { return Width(t.label, size, false) / 2 }
	whole, bound = f.rail.labels(size)
	effects = slices.Clone(f.axis.ticks)
	if len(effects) == 0 {
		return effects, whole, bound
	}
	last := &effects[len(effects)-1]
	if last.x+half(*last) > whole[0].x-half(whole[0])-lastApart {
		last.label = ""
	}
	if last.label != "" && last.x+half(*last) > bound.x-half(bound)-lastApart {
		bound.label = ""
	}
	return effects, whole, bound
}

// directions draws the words under both zero lines; what would collide with one
// placed before is dropped. The order of preference is: lower, effect, higher,
// none.
func (f *forest) directions(base float64) []Item {
	m := f.metrics
	null, zero := f.axis.x(f.in.Scale.Null), f.rail.zero()
	within := span{m.margin, f.width - m.margin}
	place := func(text string, zero float64, right bool) direction {
		return placeDirection(text, zero, right, within, m.second)
	}
	effect := "effect"
	if long := "for an effect"; m.twoLine && place(long, zero, true).text == long {
		effect = long
	}
	var items []Item
	for _, d := range clearDirections([]direction{
		place(f.in.Sides.Lower, null, false),
		place(effect, zero, true),
		place(f.in.Sides.Higher, null, true),
		place("none", zero, false),
	}, within) {
		items = append(items, d.items(base, m.second)...)
	}
	return items
}
