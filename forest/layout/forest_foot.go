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

// direction is a label under a zero line with the arrow that points away from
// it.
type direction struct {
	text     string
	from, to float64 // both ends, text and arrow
	right    bool    // the arrow points to the right
}

// Sizes of the directions.
const (
	directionSpace = 9    // from the zero line to the text
	arrowLength    = 6.2  // with its head
	arrowHead      = 2.5  // depth
	arrowHalf      = 1.6  // half the height of the head
	directionsGap  = 6    // least space between two directions
	arrowGap       = 0.5  // between text and arrow, in type sizes
	arrowRise      = 0.32 // of the arrow over the baseline, in type sizes
)

// directions draws the words under both zero lines; what would collide with one
// placed before is dropped. The order of preference is: lower, effect, higher,
// none.
func (f *forest) directions(base float64) []Item {
	m := f.metrics
	null, zero := f.axis.x(f.in.Scale.Null), f.rail.zero()
	effect := "effect"
	if long := "for an effect"; m.twoLine && f.direction(long, zero, true).text == long {
		effect = long
	}
	left, right := m.margin, f.width-m.margin
	var placed []direction
	for _, d := range []direction{
		f.direction(f.in.Sides.Lower, null, false),
		f.direction(effect, zero, true),
		f.direction(f.in.Sides.Higher, null, true),
		f.direction("none", zero, false),
	} {
		clear := d.from >= left && d.to <= right
		for _, other := range placed {
			if d.from < other.to+directionsGap && other.from < d.to+directionsGap {
				clear = false
			}
		}
		if clear {
			placed = append(placed, d)
		}
	}
	var items []Item
	for _, d := range placed {
		items = append(items, f.directionItems(d, base)...)
	}
	return items
}

// direction places a label beside a zero line; one that would run off the left
// of the page is cut.
func (f *forest) direction(text string, zero float64, right bool) direction {
	m := f.metrics
	extra := arrowGap*m.second + arrowLength
	room := zero - directionSpace - extra - m.margin
	if right {
		room = f.width - m.margin - zero - directionSpace - extra
	}
	text, _ = cut(text, "", max(0, room), m.second)
	length := Width(text, m.second, false) + extra
	d := direction{text: text, right: right, from: zero - directionSpace - length, to: zero - directionSpace}
	if right {
		d.from, d.to = zero+directionSpace, zero+directionSpace+length
	}
	return d
}

func (f *forest) directionItems(d direction, base float64) []Item {
	size := f.metrics.second
	y := base - arrowRise*size
	if d.right {
		return []Item{
			label(d.from, base, size, Start, Soft, d.text),
			Line{X1: d.to - arrowLength, Y1: y, X2: d.to - 1.1, Y2: y, Width: 0.6, Ink: Soft},
			head(d.to, y, arrowHead, 2*arrowHalf, Soft),
		}
	}
	return []Item{
		label(d.to, base, size, End, Soft, d.text),
		Line{X1: d.from + arrowLength, Y1: y, X2: d.from + 1.1, Y2: y, Width: 0.6, Ink: Soft},
		head(d.from, y, -arrowHead, 2*arrowHalf, Soft),
	}
}
