package layout

import (
	"cmp"
	"math"
	"slices"
)

// mostBubbleNames bounds the points whose names are tried: beyond, a panel is full.
const mostBubbleNames = 60

// heaviestFirst returns the points' indices by falling weight, so that small bubbles
// lie on large ones.
func heaviestFirst(points []RegressionPoint) []int {
	order := make([]int, len(points))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(a, b int) int { return cmp.Compare(points[b].Weight, points[a].Weight) })
	return order
}

// claim is a rectangle that a text or a mark takes.
type claim struct{ x1, y1, x2, y2 float64 }

func (a claim) meets(b claim) bool {
	return a.x1 < b.x2 && b.x1 < a.x2 && a.y1 < b.y2 && b.y1 < a.y2
}

// nameItems names the bubbles where there is room beside, above or below them: clear
// of other bubbles, of names and of the line of no effect.
func (c *regression) nameItems() []Item {
	size := c.metrics.second
	panel := claim{c.x.x0 + 1, c.y.x1, c.x.x1, c.y.x0 - 1}
	null := c.y.x(c.in.Scale.Null)
	var taken []claim
	if !c.in.NoNull {
		taken = append(taken, claim{c.x.x0, null - 0.8, c.x.x1, null + 0.8})
	}
	for i, p := range c.in.Points {
		x, y, r := c.x.x(p.X), c.y.x(p.Estimate), c.radii[i]
		taken = append(taken, claim{x - r, y - r, x + r, y + r})
	}
	var items []Item
	for rank, i := range heaviestFirst(c.in.Points) {
		if rank == mostBubbleNames {
			break
		}
		p := c.in.Points[i]
		name, _ := cut(p.Name, "", 0.3*c.style.Width, size)
		width := Width(name, size, false)
		x, y, r := c.x.x(p.X), c.y.x(p.Estimate), c.radii[i]
		for _, at := range [][2]float64{
			{x + r + 2, y + uprightText*size},
			{x - r - 2 - width, y + uprightText*size},
			{x - width/2, y - r - 2.5},
			{x - width/2, y + r + 0.8*size + 2},
		} {
			box := claim{at[0], at[1] - 0.78*size, at[0] + width, at[1] + 0.22*size}
			if !c.free(box, panel, taken) {
				continue
			}
			taken = append(taken, claim{box.x1 - 1, box.y1 - 0.5, box.x2 + 1, box.y2 + 0.5})
			items = append(items, label(at[0], at[1], size, Start, Soft, name))
			break
		}
	}
	return items
}

// free reports whether a name's place lies in the panel, clear of what is taken
// and off the lines.
func (c *regression) free(box, panel claim, taken []claim) bool {
	if box.x1 < panel.x1 || box.x2 > panel.x2 || box.y1 < panel.y1 || box.y2 > panel.y2 {
		return false
	}
	for _, other := range taken {
		if box.meets(other) {
			return false
		}
	}
	curves := []func(RegressionLine) float64{func(l RegressionLine) float64 { return l.Estimate }}
	if c.in.Line[0].Prediction != nil {
		curves = append(curves, func(l RegressionLine) float64 { return l.Prediction.Low }, func(l RegressionLine) float64 { return l.Prediction.High })
	}
	return !slices.ContainsFunc(curves, func(of func(RegressionLine) float64) bool { return c.crosses(box, of) })
}

// crosses reports whether a curve passes through a rectangle.
func (c *regression) crosses(box claim, of func(RegressionLine) float64) bool {
	for i := 1; i < len(c.in.Line); i++ {
		a, b := c.in.Line[i-1], c.in.Line[i]
		x1, x2 := c.x.x(a.X), c.x.x(b.X)
		y1, y2 := c.y.x(of(a)), c.y.x(of(b))
		if x1 < box.x2 && box.x1 < x2 && math.Min(y1, y2) < box.y2 && box.y1 < math.Max(y1, y2) {
			return true
		}
	}
	return false
}
