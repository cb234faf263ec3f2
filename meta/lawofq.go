package meta

import (
	"math"
	"math/cmplx"
)

// lawOfQ is the distribution of Cochran's Q when the effects scatter with
// variance τ²: a weighted sum of χ² variables with one degree of freedom each,
// the weights being those of the quadratic form Σw(y − mean)² in independent
// normal estimates with variances v + τ², w = 1/v.
type lawOfQ struct {
	w, share []float64 // w, and w/Σw
}

func newLawOfQ(d *sample) lawOfQ {
	law := lawOfQ{w: make([]float64, d.k()), share: make([]float64, d.k())}
	total := d.at(0).w
	for i, w := range d.w {
		law.w[i], law.share[i] = w, w/total
	}
	return law
}

// contourNodes is the number of points on the contour of below; half of them
// mirror the other half. The error falls as 2.85 to the power −contourNodes for a
// transform that decays slowly, more slowly for many studies.
const contourNodes = 48

// below returns P(Q ≤ q | τ²) to about 1e-9 by inverting the Laplace transform
// E exp(−sQ)/s along a parabola that wraps the negative real axis, where all its
// singularities lie.
//
// Source of the parabola: Trefethen, Weideman & Schmelzer (2006), BIT Numerical
// Mathematics 46:653-670.
func (l lawOfQ) below(q, tau2 float64) float64 {
	if !(q > 0) {
		return 0
	}
	const n = contourNodes
	sum := 0.0
	for j := range n / 2 {
		theta := math.Pi * float64(2*j+1) / n
		z := complex(n*(0.1309-0.1194*theta*theta), n*0.25*theta)
		slope := complex(-n*2*0.1194*theta, n*0.25)
		// (1/2πi)∫ e^z F(z/q)/z dz, midpoint rule of width 2π/n, two mirrored halves.
		term := cmplx.Exp(z+l.lnTransform(z/complex(q, 0), tau2)) / z * slope
		sum += 2 * imag(term) / n
	}
	return min(1, max(0, sum))
}

// lnTransform returns ln E exp(−sQ) for s off the negative real axis. With
// d = 1 + wτ² the determinant lemma gives
//
//	E exp(−sQ) = [Π(1 + 2sd) · Σ(w/Σw)/(1 + 2sd)]^(−½).
func (l lawOfQ) lnTransform(s complex128, tau2 float64) complex128 {
	var logs, mean complex128
	for i, w := range l.w {
		factor := 1 + 2*s*complex(1+w*tau2, 0)
		logs += cmplx.Log(factor)
		mean += complex(l.share[i], 0) / factor
	}
	return -0.5 * (logs + cmplx.Log(mean))
}
