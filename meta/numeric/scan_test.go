package numeric

import (
	"math"
	"testing"
)

// TestScannedMinimum: of two hollows the deeper one, whichever comes first; an end
// where f falls towards it; closed forms.
func TestScannedMinimum(t *testing.T) {
	wells := func(deep float64) func(float64) float64 {
		return func(x float64) float64 {
			return math.Min((x-1)*(x-1), 4*(x-8)*(x-8)-deep)
		}
	}
	for _, c := range []struct {
		f          func(float64) float64
		x, fx      float64
		lo, hi     float64
		wantWithin float64
	}{
		{wells(1), 8, -1, 0, 10, 1e-7},
		{wells(-1), 1, 0, 0, 10, 1e-7},
		{func(x float64) float64 { return x }, 0, 0, 0, 5, 0},
		{func(x float64) float64 { return -x }, 5, -5, 0, 5, 1e-8},
		{func(x float64) float64 { return x }, 3, 3, 3, 3, 0},
	} {
		x, fx, err := ScannedMinimum(c.f, c.lo, c.hi, 40)
		if err != nil || math.Abs(x-c.x) > c.wantWithin || math.Abs(fx-c.fx) > 1e-7 {
			t.Errorf("%v, %v, %v; want %v, %v", x, fx, err, c.x, c.fx)
		}
	}
	if _, _, err := ScannedMinimum(func(float64) float64 { return math.NaN() }, 0, 1, 10); err == nil {
		t.Error("NaN was taken")
	}
}
