package explain

import "math"

// triangle is an upper triangular matrix of p columns, row by row.
type triangle struct {
	p int
	r []float64
}

func newTriangle(p int) triangle { return triangle{p, make([]float64, p*p)} }

func (t triangle) at(i, j int) float64 { return t.r[i*t.p+j] }

// factor turns the columns a[0..n) of length k into R by Householder's reflections
// (Golub & Van Loan, Matrix Computations, 4th ed., section 5.2): column j holds R
// down to the diagonal of the first p, and the columns beyond p what the same
// reflections make of them.
func factor(a [][]float64, p int) {
	for j := 0; j < p; j++ {
		col := a[j]
		norm := 0.0
		for _, x := range col[j:] {
			norm = math.Hypot(norm, x)
		}
		if norm == 0 {
			continue
		}
		alpha := -math.Copysign(norm, col[j])
		col[j] -= alpha
		scale := 0.0
		for _, x := range col[j:] {
			scale += x * x
		}
		for _, other := range a[j+1:] {
			dot := 0.0
			for i := j; i < len(col); i++ {
				dot += col[i] * other[i]
			}
			dot *= 2 / scale
			for i := j; i < len(col); i++ {
				other[i] -= dot * col[i]
			}
		}
		col[j] = alpha
		clear(col[j+1:])
	}
}

// take copies R out of factored columns.
func (t triangle) take(a [][]float64) {
	for i := 0; i < t.p; i++ {
		for j := i; j < t.p; j++ {
			t.r[i*t.p+j] = a[j][i]
		}
	}
}

// solve overwrites b with R⁻¹b.
func (t triangle) solve(b []float64) {
	for i := t.p - 1; i >= 0; i-- {
		for j := i + 1; j < t.p; j++ {
			b[i] -= t.at(i, j) * b[j]
		}
		b[i] /= t.at(i, i)
	}
}

// solveTransposed overwrites b with R⁻ᵀb.
func (t triangle) solveTransposed(b []float64) {
	for i := 0; i < t.p; i++ {
		for j := 0; j < i; j++ {
			b[i] -= t.at(j, i) * b[j]
		}
		b[i] /= t.at(i, i)
	}
}

// inverse returns R⁻¹.
func (t triangle) inverse() triangle {
	inverse := newTriangle(t.p)
	column := make([]float64, t.p)
	for j := 0; j < t.p; j++ {
		clear(column)
		column[j] = 1
		t.solve(column)
		for i := 0; i <= j; i++ {
			inverse.r[i*t.p+j] = column[i]
		}
	}
	return inverse
}
