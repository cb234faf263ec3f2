package numeric

import "math"

// ScannedMinimum returns where f is lowest in [lo, hi], which may have several
// hollows: f is taken at points + 1 places, denser towards lo (their distances from
// it grow with the square of their number), and the lowest is refined between its
// neighbours to within the tolerance of Minimum. The ends count too, and a
// place that rounding alone makes lower does not. An infinite
// value is a place that is not taken.
//
// Errors are those of Minimum.
func ScannedMinimum(f func(float64) float64, lo, hi float64, points int) (x, fx float64, err error) {
	x, fx = lo, f(lo)
	if !(hi > lo) {
		return x, fx, nil
	}
	at := func(i int) float64 { return lo + (hi-lo)*math.Pow(float64(i)/float64(points), 2) }
	best := 0
	for i := 1; i <= points; i++ {
		if v := f(at(i)); v < fx {
			best, x, fx = i, at(i), v
		}
	}
	refined, value, err := Minimum(f, at(max(0, best-1)), at(min(points, best+1)), 1e-10)
	if err != nil {
		return x, fx, err
	}
	if value < fx-1e-13*math.Abs(fx) {
		return refined, value, nil
	}
	return x, fx, nil
}
