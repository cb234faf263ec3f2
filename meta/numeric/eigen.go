package numeric

import (
	"errors"
	"math"
	"slices"
)

// mostSweeps bounds the sweeps of Jacobi's method; about ten are needed.
const mostSweeps = 60

// SymmetricEigen returns the eigenvalues of a symmetric matrix, ascending, and its
// orthonormal eigenvectors: vectors[c] belongs to values[c]. Only the upper triangle of a
// square matrix is read. The error says that no convergence was reached, as with numbers
// that are not finite. By Jacobi's method (Golub and Van Loan 2013, section 8.5), which
// is exact enough and short for the matrices of a study's rows.
func SymmetricEigen(matrix [][]float64) (values []float64, vectors [][]float64, err error) {
	n := len(matrix)
	a, v := make([][]float64, n), make([][]float64, n)
	for i := range n {
		a[i], v[i] = make([]float64, n), make([]float64, n)
		v[i][i] = 1
		for j := range n {
			a[i][j] = matrix[min(i, j)][max(i, j)]
		}
	}
	for range mostSweeps {
		if diagonal(a) {
			return sortedEigen(a, v)
		}
		for p := range n {
			for q := p + 1; q < n; q++ {
				rotate(a, v, p, q)
			}
		}
	}
	return nil, nil, errors.New("the eigenvalues of a matrix were not found")
}

// diagonal reports whether what is beside the diagonal adds nothing to it.
func diagonal(a [][]float64) bool {
	beside, along := 0.0, 0.0
	for i := range a {
		along += a[i][i] * a[i][i]
		for j := range i {
			beside += a[i][j] * a[i][j]
		}
	}
	return beside <= 1e-34*along
}

// rotate turns the axes p and q so that the element between them becomes zero, and the
// eigenvectors, the rows of v, with them.
func rotate(a, v [][]float64, p, q int) {
	if a[p][q] == 0 {
		return
	}
	half := (a[q][q] - a[p][p]) / (2 * a[p][q])
	t := math.Copysign(1, half) / (math.Abs(half) + math.Hypot(1, half))
	c := 1 / math.Hypot(1, t)
	s := t * c
	for k := range a {
		a[k][p], a[k][q] = c*a[k][p]-s*a[k][q], s*a[k][p]+c*a[k][q]
	}
	for k := range a {
		a[p][k], a[q][k] = c*a[p][k]-s*a[q][k], s*a[p][k]+c*a[q][k]
		v[p][k], v[q][k] = c*v[p][k]-s*v[q][k], s*v[p][k]+c*v[q][k]
	}
	a[p][q], a[q][p] = 0, 0
}

func sortedEigen(a, v [][]float64) (values []float64, vectors [][]float64, err error) {
	order := make([]int, len(a))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(i, j int) int {
		switch {
		case a[i][i] < a[j][j]:
			return -1
		case a[i][i] > a[j][j]:
			return 1
		}
		return 0
	})
	for _, i := range order {
		values, vectors = append(values, a[i][i]), append(vectors, v[i])
	}
	return values, vectors, nil
}
