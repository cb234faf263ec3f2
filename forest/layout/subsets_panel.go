package layout

import "math"

// density is what lies on the panel: cells, and the outlines of the subsets with
// and without the chosen study, in points.
type density struct {
	cells         raster
	levels        []float64 // ascending, one for each grey
	with, without [][]Point
	dots          []dot // in place of cells where subsets are few
	shown         float64
}

// dot is a cell of the grid that holds subsets, with and without the chosen
// study, or of any where none is chosen.
type dot struct {
	at            Point
	with, without bool
}

// greyShares are the shares of subsets that the greys hold, from the lightest to
// the darkest, and greyInks those greys.
var (
	greyShares = [...]float64{0.99, 0.95, 0.9, 0.75, 0.5, 0.25}
	greyInks   = [...]Ink{FunnelFaint, FunnelFair, FunnelFirm, FunnelHeavy, FunnelMassive, SpanRule}
)

const (
	outlineShare = 0.95
	leastOutline = 30 // perimeter in points; smaller islands and holes are left out
	dotRadius    = 1.8
	seam         = 0.35 // by which greys reach under the next row, so that no line shows between them
)

// newDensity spreads the counts over the panel.
func (c *subsets) newDensity() density {
	var d density
	g := c.in.Grid
	x, y := span{c.axis.low, c.axis.high}, c.ladder.steps
	nx := int(math.Round((c.plot.high - c.plot.low) / subsetsCell))
	ny := int(math.Round((c.ladder.bottom() - c.ladder.top) / subsetsCell))
	counts, inside := g.cells(g.Counts, x, y, nx, ny)
	total := float64(c.in.pooled())
	d.shown = inside / total
	if c.in.pooled() <= fewSubsets {
		d.dots = c.dots()
		return d
	}
	d.cells = counts.smoothed(total)
	d.levels = thresholds(d.cells, counts, total, greyShares[:])
	if c.in.Chosen == nil {
		return d
	}
	with, insideWith := g.cells(c.in.Chosen.With, x, y, nx, ny)
	without := newRaster(nx, ny)
	for i, v := range counts.v {
		without.v[i] = math.Max(0, v-with.v[i])
	}
	d.with = c.outline(with, insideWith)
	d.without = c.outline(without, inside-insideWith)
	return d
}

// outline returns the closed lines around 95% of a raster's points, in points of
// the page.
func (c *subsets) outline(counts raster, total float64) [][]Point {
	if total <= 0 {
		return nil
	}
	smooth := counts.smoothed(total)
	level := thresholds(smooth, counts, total, []float64{outlineShare})[0]
	if level <= 0 {
		return nil
	}
	loops := smooth.contours(level)
	kept := loops[:0]
	for _, loop := range loops {
		for i, p := range loop {
			loop[i] = c.cellPoint(p, counts.nx, counts.ny)
		}
		if perimeter(loop) >= leastOutline {
			kept = append(kept, loop)
		}
	}
	return kept
}

// cellPoint turns a place in cells into one on the page.
func (c *subsets) cellPoint(p Point, nx, ny int) Point {
	bottom := c.ladder.bottom()
	x := c.plot.low + p.X/float64(nx)*(c.plot.high-c.plot.low)
	y := bottom - p.Y/float64(ny)*(bottom-c.ladder.top)
	return Point{clamp(x, c.plot.low, c.plot.high), clamp(y, c.ladder.top, bottom)}
}

func perimeter(loop []Point) float64 {
	sum := 0.0
	for i, p := range loop {
		q := loop[(i+1)%len(loop)]
		sum += math.Hypot(q.X-p.X, q.Y-p.Y)
	}
	return sum
}

// dots returns the cells of the grid that hold subsets.
func (c *subsets) dots() []dot {
	g := c.in.Grid
	var all []dot
	for i, n := range g.Counts {
		if n == 0 {
			continue
		}
		estimate := g.Estimate.Low + (float64(i/g.Steps.Cells)+0.5)*(g.Estimate.High-g.Estimate.Low)/float64(g.Estimate.Cells)
		steps := g.Steps.Low + (float64(i%g.Steps.Cells)+0.5)*(g.Steps.High-g.Steps.Low)/float64(g.Steps.Cells)
		if !c.axis.holds(estimate) || !c.ladder.holds(steps) {
			continue
		}
		d := dot{at: Point{c.axis.x(estimate), c.ladder.y(steps)}, with: true}
		if c.in.Chosen != nil {
			d.with, d.without = c.in.Chosen.With[i] > 0, c.in.Chosen.With[i] < n
		}
		all = append(all, d)
	}
	return all
}

// densityItems draws the greys, each over the lighter ones, or the discs of few
// subsets.
func (c *subsets) densityItems() []Item {
	var items []Item
	for _, d := range c.density.dots {
		x, y := d.at.X, d.at.Y
		switch {
		case d.with && d.without:
			items = append(items, Disc{X: x, Y: y, Radius: dotRadius + 0.9, Paint: Hollow(Soft, 0.7)}, Disc{X: x, Y: y, Radius: dotRadius - 0.3, Paint: Solid(Soft)})
		case d.with:
			items = append(items, Disc{X: x, Y: y, Radius: dotRadius, Paint: Solid(Soft)})
		default:
			items = append(items, Disc{X: x, Y: y, Radius: dotRadius, Paint: Hollow(Soft, 0.7)})
		}
	}
	r := c.density.cells
	for k, level := range c.density.levels {
		for _, b := range r.blocks(level) {
			from, to := c.cellPoint(Point{float64(b.from), float64(b.top)}, r.nx, r.ny), c.cellPoint(Point{float64(b.to), float64(b.bottom)}, r.nx, r.ny)
			items = append(items, Rect{X: from.X, Y: from.Y, Width: to.X - from.X, Height: math.Min(to.Y+seam, c.ladder.bottom()) - from.Y, Paint: Solid(greyInks[k])})
		}
	}
	return items
}

// outlines draws the lines around the subsets with the chosen study, solid, and
// without it, dashed.
func (c *subsets) outlines() []Item {
	var items []Item
	for _, loop := range c.density.without {
		items = append(items, outlineItems(loop, true)...)
	}
	for _, loop := range c.density.with {
		items = append(items, outlineItems(loop, false)...)
	}
	return items
}

// fullPoint is the place of the result of all studies.
func (c *subsets) fullPoint() Point {
	return Point{c.axis.x(c.in.Full.Estimate), c.ladder.y(c.in.Full.LnEvidence / lnStep)}
}

// fullItems marks the result of all studies.
func (c *subsets) fullItems() []Item {
	p := c.fullPoint()
	return []Item{Disc{X: p.X, Y: p.Y, Radius: 3.4, Paint: Paint{Fill: Evidence, Outline: Paper, OutlineWidth: 0.9}}}
}
