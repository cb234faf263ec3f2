package numeric

import (
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// TestSymmetricEigen compares random matrices, some of low rank or with equal
// eigenvalues, with gonum's solver, and checks A·v = λ·v and the lengths of the vectors.
func TestSymmetricEigen(t *testing.T) {
	r := rand.New(rand.NewPCG(8, 5))
	for n := range 9 {
		for kind := range 12 {
			a := make([][]float64, n)
			dense := mat.NewSymDense(max(n, 1), nil)
			column := make([]float64, n)
			for i := range column {
				column[i] = r.NormFloat64()
			}
			for i := range n {
				a[i] = make([]float64, n)
			}
			for i := range n {
				for j := i; j < n; j++ {
					switch kind % 3 {
					case 0:
						a[i][j] = r.NormFloat64() * math.Pow(10, float64(kind-5))
					case 1:
						a[i][j] = column[i] * column[j]
					case 2:
						if a[i][j] = -column[i] * column[j]; i == j {
							a[i][j]++
						}
					}
					dense.SetSym(i, j, a[i][j])
				}
				for j := range i {
					a[i][j] = math.NaN() // is not read
				}
			}
			values, vectors, err := SymmetricEigen(a)
			if err != nil || len(values) != n || len(vectors) != n {
				t.Fatalf("%d×%d, kind %d: %d values, %v", n, n, kind, len(values), err)
			}
			if n == 0 {
				continue
			}
			var eigen mat.EigenSym
			if !eigen.Factorize(dense, true) {
				t.Fatal("no reference")
			}
			want := eigen.Values(nil)
			scale := math.Max(math.Abs(want[0]), math.Abs(want[n-1]))
			for c := range n {
				if math.Abs(values[c]-want[c]) > 1e-13*scale {
					t.Errorf("%d×%d, kind %d: eigenvalue %d is %v, want %v", n, n, kind, c, values[c], want[c])
				}
				length := 0.0
				for i := range n {
					image := 0.0
					for j := range n {
						image += dense.At(i, j) * vectors[c][j]
					}
					if math.Abs(image-values[c]*vectors[c][i]) > 1e-13*scale {
						t.Errorf("%d×%d, kind %d: A·v is %v, λ·v %v", n, n, kind, image, values[c]*vectors[c][i])
					}
					length += vectors[c][i] * vectors[c][i]
				}
				if math.Abs(length-1) > 1e-13 {
					t.Errorf("a vector has length² %v", length)
				}
			}
		}
	}
	if _, _, err := SymmetricEigen([][]float64{{math.NaN(), 1}, {1, 2}}); err == nil {
		t.Error("eigenvalues of numbers that are none")
	}
}
