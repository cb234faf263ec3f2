package layout

import (
	"math"
	"math/rand/v2"
	"testing"
)

// TestContourOfCone traces a cone, whose contours are circles: the area within is
// π r², and the higher side lies to the left, so that the area is positive.
func TestContourOfCone(t *testing.T) {
	r := newRaster(80, 60)
	for i := range r.v {
		r.v[i] = math.Max(0, 30-math.Hypot(float64(i%80)+0.5-40, float64(i/80)+0.5-30))
	}
	for _, radius := range []float64{5, 12, 25} {
		loops := r.contours(30 - radius)
		if len(loops) != 1 {
			t.Fatalf("radius %v: %d loops, want 1", radius, len(loops))
		}
		if got, want := signedArea(loops[0]), math.Pi*radius*radius; math.Abs(got/want-1) > 0.02 {
			t.Errorf("radius %v: area %.2f, want %.2f", radius, got, want)
		}
	}
}

// signedArea is the area of a closed figure by the shoelace formula, positive
// where it runs against the clock with y upwards.
func signedArea(loop []Point) float64 {
	sum := 0.0
	for i, p := range loop {
		q := loop[(i+1)%len(loop)]
		sum += p.X*q.Y - q.X*p.Y
	}
	return sum / 2
}

// TestContoursShapes counts loops: at the edge a plateau closes along it, a ring
// has a hole, and two cells that touch at a corner are joined where the mean of
// the four corners reaches the level.
func TestContoursShapes(t *testing.T) {
	grid := func(nx int, v ...float64) raster { return raster{nx: nx, ny: len(v) / nx, v: v} }
	for _, tt := range []struct {
		name  string
		r     raster
		level float64
		areas []float64 // by hand: between 0 and 1 the level 0.5 passes half-way
	}{
		{"one cell", grid(1, 1), 0.5, []float64{0.5}},
		{"plateau", grid(2, 1, 1, 1, 1), 0.5, []float64{3.5}}, // 2 × 2 less a corner of 1/8 four times
		{"ring", grid(3, 1, 1, 1, 1, 0, 1, 1, 1, 1), 0.5, []float64{8.5, -0.5}},
		{"apart", grid(2, 1, 0, 0, 1), 0.6, []float64{0.32, 0.32}}, // diamonds of half-axis 0.4
		{"joined", grid(2, 1, 0, 0, 1), 0.5, []float64{1.5}},       // 0.5 + 0.5 and the square between the middles less two corners: 1 − 2/8 − 2/8
		{"none", grid(1, 1), 2, nil},
	} {
		loops := tt.r.contours(tt.level)
		if len(loops) != len(tt.areas) {
			t.Errorf("%s: %d loops, want %d", tt.name, len(loops), len(tt.areas))
			continue
		}
		for i, loop := range loops {
			if got := signedArea(loop); math.Abs(got-tt.areas[i]) > 1e-12 {
				t.Errorf("%s: loop %d has an area of %v, want %v", tt.name, i, got, tt.areas[i])
			}
		}
	}
}

// TestAlong holds the points on a circle to equal distances and to its length.
func TestAlong(t *testing.T) {
	var loop []Point
	for i := range 400 {
		a := 2 * math.Pi * float64(i) / 400
		loop = append(loop, Point{50 * math.Cos(a), 50 * math.Sin(a)})
	}
	points := along(loop, 3)
	if want := 106; len(points) != want { // 2π·50 / 3 = 104.7, the first one twice
		t.Errorf("%d points, want %d", len(points), want)
	}
	for i := 1; i < len(points); i++ {
		if d := math.Hypot(points[i].X-points[i-1].X, points[i].Y-points[i-1].Y); math.Abs(d-2*math.Pi*50/105) > 0.01 {
			t.Errorf("piece %d is %.3f long, want %.3f", i, d, 2*math.Pi*50/105)
		}
	}
}

// TestBlurredNormal: a Gaussian keeps sum and centre, and adds its variance.
func TestBlurredNormal(t *testing.T) {
	r := newRaster(61, 41)
	r.v[20*61+30] = 8
	out := r.blurred(3, 2)
	sum := 0.0
	for _, v := range out.v {
		sum += v
	}
	sx, sy := out.scatter()
	if math.Abs(sum-8) > 1e-9 || math.Abs(sx-3) > 0.05 || math.Abs(sy-2) > 0.05 {
		t.Errorf("sum %v, scatter %.3f and %.3f, want 8, 3 and 2", sum, sx, sy)
	}
	if at := out.v[20*61+33] / out.v[20*61+30]; math.Abs(at-math.Exp(-0.5)) > 1e-9 {
		t.Errorf("one standard deviation from the centre the density falls to %v, want e^−½", at)
	}
}

func TestThresholds(t *testing.T) {
	density := raster{nx: 4, ny: 1, v: []float64{4, 1, 3, 0}}
	counts := raster{nx: 4, ny: 1, v: []float64{50, 5, 40, 5}}
	got := thresholds(density, counts, 100, []float64{0.5, 0.51, 0.9, 0.95, 0.99})
	for i, want := range []float64{4, 3, 3, 1, 1} { // the densest cells hold 50, 90 and 95
		if got[i] != want {
			t.Errorf("threshold %d is %v, want %v", i, got[i], want)
		}
	}
}

// TestBlocksCover holds the blocks to the cells at or above a level: each once,
// no other.
func TestBlocksCover(t *testing.T) {
	src := rand.New(rand.NewPCG(1, 2))
	for range 200 {
		r := newRaster(1+src.IntN(9), 1+src.IntN(9))
		for i := range r.v {
			r.v[i] = float64(src.IntN(3))
		}
		seen := newRaster(r.nx, r.ny)
		for _, b := range r.blocks(1) {
			for y := b.bottom; y < b.top; y++ {
				for x := b.from; x < b.to; x++ {
					seen.v[y*r.nx+x]++
				}
			}
		}
		for i, v := range r.v {
			want := 0.0
			if v >= 1 {
				want = 1
			}
			if seen.v[i] != want {
				t.Fatalf("cell %d of %+v is covered %v times, want %v", i, r, seen.v[i], want)
			}
		}
	}
}

func TestBlocksMergeRows(t *testing.T) {
	r := raster{nx: 3, ny: 3, v: []float64{1, 1, 0, 1, 1, 0, 0, 1, 1}}
	if got := len(r.blocks(1)); got != 2 {
		t.Errorf("%d blocks, want 2: two rows agree", got)
	}
}

// TestCellsKeepCounts spreads a grid over finer and coarser panels: the counts
// inside stay, in proportion to the area shared.
func TestCellsKeepCounts(t *testing.T) {
	g := SubsetsGrid{Estimate: GridAxis{0, 10, 5}, Steps: GridAxis{-1, 1, 2}, Counts: []int{1, 2, 3, 4, 5, 6, 7, 8, 9, 10}}
	for _, n := range []int{1, 3, 5, 17} {
		_, inside := g.cells(g.Counts, span{0, 10}, span{-1, 1}, n, n+1)
		if math.Abs(inside-55) > 1e-9 {
			t.Errorf("%d cells hold %v, want 55", n, inside)
		}
	}
	r, inside := g.cells(g.Counts, span{1, 3}, span{0, 2}, 2, 1)
	// Of the upper cells over [0, 2) and [2, 4), with 2 and 4, half each lies on the panel.
	if math.Abs(r.v[0]-1) > 1e-12 || math.Abs(r.v[1]-2) > 1e-12 || math.Abs(inside-3) > 1e-12 {
		t.Errorf("cells %v, inside %v, want 1, 2 and 3", r.v, inside)
	}
}
