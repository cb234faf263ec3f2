package numeric

import "math"

// Sum adds numbers with compensation: the error of the total does not grow with
// the number of terms. The zero value is an empty sum.
//
// Source: Neumaier (1974), Zeitschrift für Angewandte Mathematik und Mechanik
// 54:39-51.
type Sum struct {
	total, lost float64
}

// Add adds x.
func (s *Sum) Add(x float64) {
	t := s.total + x
	if math.Abs(s.total) >= math.Abs(x) {
		s.lost += float64(s.total-t) + x
	} else {
		s.lost += float64(x-t) + s.total
	}
	s.total = t
}

// Plus returns the sum with x added, for hot loops: a sum that is only assigned
// stays in registers. The bits are those of Add: the error of an addition is a
// floating-point number, and both find it exactly.
//
// Source: Knuth (1998), The Art of Computer Programming, vol. 2, 4.2.2, theorem B.
func (s Sum) Plus(x float64) Sum {
	t := s.total + x
	added := t - s.total
	return Sum{t, s.lost + ((s.total - (t - added)) + (x - added))}
}

// Value returns the sum of all that was added. Once the plain total is
// infinite or NaN, that is the value.
func (s Sum) Value() float64 {
	if math.IsInf(s.total, 0) || math.IsNaN(s.total) {
		return s.total
	}
	return s.total + s.lost
}
