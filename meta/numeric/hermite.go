package numeric

import (
	"math"
	"slices"
	"sync"
)

// hermiteMost is the largest rule: the polynomials stay within the range of a
// float64 up to there with room to spare.
const hermiteMost = 200

// hermiteRules caches the rules by size; they never change.
var hermiteRules sync.Map // of int to hermiteRule

type hermiteRule struct{ nodes, weights []float64 }

// Hermite returns the n-point Gauss-Hermite rule in the probabilists' form,
//
//	E f(U) ≈ Σ weights[i]·f(nodes[i]),  U ~ N(0, 1),
//
// exact for polynomials up to degree 2n-1; nodes ascend, weights sum to 1. The
// slices are the caller's own. It returns nil unless 1 ≤ n ≤ 200.
//
// Source: Abramowitz & Stegun (1964), 25.4.46, rescaled.
func Hermite(n int) (nodes, weights []float64) {
	if n < 1 || n > hermiteMost {
		return nil, nil
	}
	found, ok := hermiteRules.Load(n)
	if !ok {
		found, _ = hermiteRules.LoadOrStore(n, newHermiteRule(n))
	}
	rule := found.(hermiteRule)
	return slices.Clone(rule.nodes), slices.Clone(rule.weights)
}

// newHermiteRule finds the roots of each polynomial that are not negative
// between those of the one before, of which there is one in each gap, and
// mirrors the last ones.
func newHermiteRule(n int) hermiteRule {
	roots := []float64{0}
	for m := 2; m <= n; m++ {
		ends := append(roots, math.Sqrt(4*float64(m)+2))
		roots = make([]float64, 0, m/2+1)
		if m%2 == 1 {
			roots = append(roots, 0)
		}
		for i := 1; i < len(ends); i++ {
			roots = append(roots, hermiteRoot(m, ends[i-1], ends[i]))
		}
	}
	rule := hermiteRule{nodes: make([]float64, n), weights: make([]float64, n)}
	for i, x := range roots {
		at := n - len(roots) + i
		_, before := hermitePolynomials(n, x)
		w := 1 / (float64(n) * before * before)
		rule.nodes[at], rule.weights[at] = x, w
		rule.nodes[n-1-at], rule.weights[n-1-at] = -x, w
	}
	if n%2 == 1 {
		rule.nodes[n/2] = 0
	}
	return rule
}

// hermiteRoot returns the root of the polynomial of degree m between lo and hi:
// bisection to a near value, then Newton's steps.
func hermiteRoot(m int, lo, hi float64) float64 {
	atLow, _ := hermitePolynomials(m, lo)
	for range 20 {
		mid := 0.5 * (lo + hi)
		if at, _ := hermitePolynomials(m, mid); (at > 0) == (atLow > 0) {
			lo = mid
		} else {
			hi = mid
		}
	}
	x := 0.5 * (lo + hi)
	for range 4 {
		at, before := hermitePolynomials(m, x)
		x -= at / (math.Sqrt(float64(m)) * before)
	}
	return x
}

// hermitePolynomials returns the orthonormal Hermite polynomials of degree n and
// n-1 at x.
func hermitePolynomials(n int, x float64) (value, before float64) {
	value = 1
	for k := range n {
		value, before = (x*value-math.Sqrt(float64(k))*before)/math.Sqrt(float64(k+1)), value
	}
	return value, before
}
