package layout

import (
	"math"
	"slices"
)

// raster holds one number for each cell of a panel, row by row from below.
type raster struct {
	nx, ny int
	v      []float64
}

func newRaster(nx, ny int) raster { return raster{nx: nx, ny: ny, v: make([]float64, nx*ny)} }

// cells spreads the counts of a grid over the cells of a panel, by the area that
// they share: x runs over estimates, y over steps. It returns with them the count
// that lies on the panel.
func (g SubsetsGrid) cells(counts []int, x, y span, nx, ny int) (r raster, inside float64) {
	r = newRaster(nx, ny)
	across, up := g.Estimate.shares(x, nx), g.Steps.shares(y, ny)
	for i, n := range counts {
		if n == 0 {
			continue
		}
		for _, a := range across[i/g.Steps.Cells] {
			for _, b := range up[i%g.Steps.Cells] {
				part := float64(n) * a.share * b.share
				r.v[b.cell*nx+a.cell] += part
				inside += part
			}
		}
	}
	return r, inside
}

// cellShare is the part of a grid's cell that falls on a cell of the panel.
type cellShare struct {
	cell  int
	share float64
}

// shares says for each cell of the axis on which of n cells over a range it
// falls.
func (a GridAxis) shares(over span, n int) [][]cellShare {
	all := make([][]cellShare, a.Cells)
	width, target := (a.High-a.Low)/float64(a.Cells), (over.high-over.low)/float64(n)
	for i := range all {
		low := (a.Low + float64(i)*width - over.low) / target
		high := low + width/target
		for c := max(0, int(math.Floor(low))); c < n && float64(c) < high; c++ {
			part := math.Min(high, float64(c+1)) - math.Max(low, float64(c))
			if part > 0 {
				all[i] = append(all[i], cellShare{c, part / (high - low)})
			}
		}
	}
	return all
}

// mostBlur bounds the width of smoothing in cells, and narrowBlur is its share of
// what suits a normal distribution, as subsets lie in narrower bands.
const (
	mostBlur   = 8
	narrowBlur = 0.75
)

// smoothed returns the raster under a Gaussian whose standard deviations, in
// cells, follow from the scatter and the number of points: a share of what Scott
// gives for the density of a normal distribution in two dimensions. Beyond the
// edges it counts nothing.
//
// Source: D. W. Scott (1992), Multivariate Density Estimation, Wiley.
func (r raster) smoothed(points float64) raster {
	if points < 1 {
		return r
	}
	sx, sy := r.scatter()
	factor := narrowBlur * math.Pow(points, -1.0/6)
	return r.blurred(clamp(factor*sx, 0.7, mostBlur), clamp(factor*sy, 0.7, mostBlur))
}

// scatter returns the standard deviations across and up, in cells.
func (r raster) scatter() (sx, sy float64) {
	var n, mx, my, xx, yy float64
	for i, v := range r.v {
		x, y := float64(i%r.nx), float64(i/r.nx)
		n, mx, my = n+v, mx+v*x, my+v*y
		xx, yy = xx+v*x*x, yy+v*y*y
	}
	if n == 0 {
		return 0, 0
	}
	return math.Sqrt(math.Max(0, xx/n-mx/n*mx/n)), math.Sqrt(math.Max(0, yy/n-my/n*my/n))
}

func (r raster) blurred(sx, sy float64) raster {
	across := newRaster(r.nx, r.ny)
	kernel := bell(sx)
	reach := len(kernel) / 2
	for i, v := range r.v {
		if v == 0 {
			continue
		}
		x, row := i%r.nx, i-i%r.nx
		for k, w := range kernel {
			if at := x + k - reach; at >= 0 && at < r.nx {
				across.v[row+at] += v * w
			}
		}
	}
	out := newRaster(r.nx, r.ny)
	kernel = bell(sy)
	reach = len(kernel) / 2
	for i, v := range across.v {
		if v == 0 {
			continue
		}
		x, y := i%r.nx, i/r.nx
		for k, w := range kernel {
			if at := y + k - reach; at >= 0 && at < r.ny {
				out.v[at*r.nx+x] += v * w
			}
		}
	}
	return out
}

// bell is a Gaussian of a standard deviation in cells, to three of them on either
// side; its sum is 1.
func bell(sd float64) []float64 {
	reach := int(math.Ceil(3 * sd))
	kernel := make([]float64, 2*reach+1)
	sum := 0.0
	for i := range kernel {
		d := float64(i-reach) / sd
		kernel[i] = math.Exp(-d * d / 2)
		sum += kernel[i]
	}
	for i := range kernel {
		kernel[i] /= sum
	}
	return kernel
}

// thresholds returns for each share the density above which the densest cells
// hold that share of a total; counts are what the cells hold. A share that the
// cells do not reach gives the least density above 0.
func thresholds(density, counts raster, total float64, shares []float64) []float64 {
	order := make([]int, 0, len(density.v))
	for i, v := range density.v {
		if v > 0 {
			order = append(order, i)
		}
	}
	slices.SortFunc(order, func(a, b int) int {
		switch {
		case density.v[a] > density.v[b]:
			return -1
		case density.v[a] < density.v[b]:
			return 1
		}
		return a - b
	})
	found := make([]float64, len(shares))
	for k, share := range shares {
		held := 0.0
		for _, i := range order {
			held += counts.v[i]
			found[k] = density.v[i]
			if held >= share*total-1e-9*total {
				break
			}
		}
	}
	return found
}

// block is a rectangle of cells: columns from to to, rows bottom to top, ends
// not included.
type block struct{ from, to, bottom, top int }

// blocks covers the cells at or above a level by runs along the rows; runs of
// neighbouring rows that agree are one block.
func (r raster) blocks(level float64) []block {
	var done, open []block
	for y := range r.ny {
		var next []block
		for x := 0; x < r.nx; x++ {
			if r.v[y*r.nx+x] < level {
				continue
			}
			run := block{from: x, bottom: y, top: y + 1}
			for x < r.nx && r.v[y*r.nx+x] >= level {
				x++
			}
			run.to = x
			for i, b := range open {
				if b.from == run.from && b.to == run.to {
					run.bottom = b.bottom
					open = slices.Delete(open, i, i+1)
					break
				}
			}
			next = append(next, run)
		}
		done = append(done, open...)
		open = next
	}
	return append(done, open...)
}
