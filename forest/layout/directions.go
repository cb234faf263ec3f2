package layout

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

// placeDirection places a label beside a zero line, within a range of x; one
// that would run out of it is cut.
func placeDirection(text string, zero float64, right bool, within span, size float64) direction {
	extra := arrowGap*size + arrowLength
	room := zero - directionSpace - extra - within.low
	if right {
		room = within.high - zero - directionSpace - extra
	}
	text, _ = cut(text, "", max(0, room), size)
	length := Width(text, size, false) + extra
	d := direction{text: text, right: right, from: zero - directionSpace - length, to: zero - directionSpace}
	if right {
		d.from, d.to = zero+directionSpace, zero+directionSpace+length
	}
	return d
}

// clearDirections drops the directions that run out of a range of x or collide
// with one before them.
func clearDirections(all []direction, within span) []direction {
	var placed []direction
	for _, d := range all {
		clear := d.from >= within.low && d.to <= within.high
		for _, other := range placed {
			if d.from < other.to+directionsGap && other.from < d.to+directionsGap {
				clear = false
			}
		}
		if clear {
			placed = append(placed, d)
		}
	}
	return placed
}

// items draws a direction on a baseline.
func (d direction) items(base, size float64) []Item {
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
