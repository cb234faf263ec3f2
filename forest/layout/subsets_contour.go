package layout

import "math"

// contours returns the closed lines along which a raster passes a level above 0,
// in units of cells: (0.5, 0.5) is the middle of the first cell. Between the
// middles of cells it is linear; beyond the edges it is 0.
//
// The squares between four neighbouring middles are walked one by one ("marching
// squares"): each holds at most two pieces, directed so that the higher side lies
// to the left; a square whose corners alternate goes by the mean of the four.
func (r raster) contours(level float64) [][]Point {
	t := contourTrace{r: r, level: level, width: r.nx + 2}
	t.next = make([]int, 2*t.width*(r.ny+2))
	for i := range t.next {
		t.next[i] = -1
	}
	for y := 0; y <= r.ny; y++ {
		for x := 0; x <= r.nx; x++ {
			t.square(x, y)
		}
	}
	var loops [][]Point
	for start := range t.next {
		var loop []Point
		for edge := start; t.next[edge] >= 0; {
			loop = append(loop, t.point(edge))
			edge, t.next[edge] = t.next[edge], -1
		}
		if len(loop) > 2 {
			loops = append(loops, loop)
		}
	}
	return loops
}

// contourTrace collects the pieces of contours. Its lattice has one more row and
// column on each side than the raster. An edge to the right of the lattice point
// (x, y) has the number 2(y·width + x), the one above it one more.
type contourTrace struct {
	r     raster
	level float64
	width int
	next  []int // from edge to edge; −1: no contour crosses it
}

// value returns the raster at a lattice point.
func (t *contourTrace) value(x, y int) float64 {
	if x < 1 || y < 1 || x > t.r.nx || y > t.r.ny {
		return 0
	}
	return t.r.v[(y-1)*t.r.nx+x-1]
}

// point returns where the level is passed on an edge.
func (t *contourTrace) point(edge int) Point {
	at, upward := edge/2, edge%2
	x, y := at%t.width, at/t.width
	a, b := t.value(x, y), t.value(x+1-upward, y+upward)
	share := (t.level - a) / (b - a)
	p := Point{X: float64(x) - 0.5, Y: float64(y) - 0.5}
	if upward == 1 {
		p.Y += share
	} else {
		p.X += share
	}
	return p
}

// square adds the pieces in the square with its lower left corner at a lattice
// point.
func (t *contourTrace) square(x, y int) {
	corners := [4]float64{t.value(x, y), t.value(x+1, y), t.value(x+1, y+1), t.value(x, y+1)}
	sides, sum := 0, 0.0
	for i, v := range corners {
		sum += v
		if v >= t.level {
			sides |= 1 << i
		}
	}
	below := 2 * (y*t.width + x)
	left, above, right := below+1, below+2*t.width, below+3
	link := func(from, to int) { t.next[from] = to }
	joined := sum/4 >= t.level
	switch sides {
	case 1:
		link(below, left)
	case 2:
		link(right, below)
	case 3:
		link(right, left)
	case 4:
		link(above, right)
	case 6:
		link(above, below)
	case 7:
		link(above, left)
	case 8:
		link(left, above)
	case 9:
		link(below, above)
	case 11:
		link(right, above)
	case 12:
		link(left, right)
	case 13:
		link(below, right)
	case 14:
		link(left, below)
	case 5:
		if joined {
			link(below, right)
			link(above, left)
			return
		}
		link(below, left)
		link(above, right)
	case 10:
		if joined {
			link(left, below)
			link(right, above)
			return
		}
		link(right, below)
		link(left, above)
	}
}

// along returns points on a closed line about a distance apart, the first one
// again at the end.
func along(loop []Point, apart float64) []Point {
	length := 0.0
	for i, p := range loop {
		q := loop[(i+1)%len(loop)]
		length += math.Hypot(q.X-p.X, q.Y-p.Y)
	}
	n := max(3, int(math.Round(length/apart)))
	apart = length / float64(n)
	points := []Point{loop[0]}
	due := apart
	for i, p := range loop {
		q := loop[(i+1)%len(loop)]
		piece := math.Hypot(q.X-p.X, q.Y-p.Y)
		for ; due <= piece && len(points) < n; due += apart {
			share := due / piece
			points = append(points, Point{p.X + share*(q.X-p.X), p.Y + share*(q.Y-p.Y)})
		}
		due -= piece
	}
	return append(points, loop[0])
}

// outlineItems draws a closed line solid, or in dashes.
func outlineItems(loop []Point, dashed bool) []Item {
	const piece, dash, gap = 3, 3.2, 2.1
	apart := float64(piece)
	if dashed {
		apart = (dash + gap) / 2
	}
	points := along(loop, apart)
	var items []Item
	for i := 1; i < len(points); i++ {
		a, b := points[i-1], points[i]
		if dashed {
			// Every second piece, a little longer than the gap between them.
			if i%2 == 0 {
				continue
			}
			grow := (dash - apart) / (2 * apart)
			dx, dy := grow*(b.X-a.X), grow*(b.Y-a.Y)
			a, b = Point{a.X - dx, a.Y - dy}, Point{b.X + dx, b.Y + dy}
		}
		items = append(items, Line{X1: a.X, Y1: a.Y, X2: b.X, Y2: b.Y, Width: 0.9, Round: !dashed})
	}
	return items
}
