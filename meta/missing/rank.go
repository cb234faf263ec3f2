package missing

import (
	"math"

	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
)

// Rank is a rank test of whether effects and variances go together.
type Rank struct {
	K        int
	Tau      float64 // Kendall's rank correlation, corrected for ties
	S        float64 // pairs that agree less pairs that disagree
	LnP      float64 // natural log of the two-sided p-value
	Exact    bool    // p from all orders; else by the normal law, corrected for ties
	Tied     bool
	Evidence evidence.Ratio // normal form at the z of the same p
}

// mostExact is the number of studies up to which p is counted over all orders.
const mostExact = 100

// BeggMazumdar returns Kendall's rank correlation between the standardised effects
// (y − mean)/√(v − 1/Σw), mean and w those of a common effect, and the variances v.
// p is exact up to 100 studies without ties, else normal without a correction for
// continuity.
//
// Sources: Begg & Mazumdar (1994), Biometrics 50:1088-1101; variance with ties:
// Kendall (1970), Rank Correlation Methods, ch. 4.
func BeggMazumdar(y, s []float64) (*Rank, error) {
	if err := check(y, s); err != nil {
		return nil, err
	}
	if len(y) < 3 {
		return nil, ErrTooFew
	}
	deviates := standardised(y, s)
	r := &Rank{K: len(y)}
	for i := range y {
		for j := range i {
			r.S += sign(deviates[i]-deviates[j]) * sign(s[i]-s[j])
		}
	}
	tiesY, tiesS := tied(deviates), tied(s)
	n := float64(len(y))
	pairs := n * (n - 1) / 2
	distinct := (pairs - tiesY.pairs) * (pairs - tiesS.pairs)
	if distinct == 0 {
		return nil, ErrAlike
	}
	r.Tau = r.S / math.Sqrt(distinct)
	r.Tied = tiesY.pairs+tiesS.pairs > 0
	if r.Exact = !r.Tied && len(y) <= mostExact; r.Exact {
		r.LnP = lnExactKendall(len(y), r.S)
	} else {
		z := math.Abs(r.S) / math.Sqrt(kendallVariance(n, tiesY, tiesS))
		r.LnP = min(0, math.Ln2+numeric.LogNormalTail(z))
	}
	r.Evidence = evidence.Normal(numeric.NormalFromLogTail(r.LnP - math.Ln2))
	return r, nil
}

// standardised returns the effects' distances from the common-effect mean in the
// standard errors of these distances.
func standardised(y, s []float64) []float64 {
	w := reciprocalSquares(s)
	best := heaviest(w)
	total, _, mean := weightedMeans(y, s, w, y[best], s[best])
	z := make([]float64, len(y))
	for i := range y {
		var rest numeric.Sum
		for j := range w {
			if j != i {
				rest.Add(w[j])
			}
		}
		z[i] = (y[i] - mean) / (s[i] * math.Sqrt(rest.Value()/total))
	}
	return z
}

func sign(x float64) float64 {
	switch {
	case x > 0:
		return 1
	case x < 0:
		return -1
	}
	return 0
}

// ties are the sums over groups of t equal values that the variance of S needs.
type ties struct{ pairs, third, wide float64 } // Σt(t−1)/2, Σt(t−1)(t−2), Σt(t−1)(2t+5)

func tied(values []float64) ties {
	counts := map[float64]float64{}
	for _, v := range values {
		counts[v]++
	}
	var all ties
	for _, t := range counts {
		all.pairs += t * (t - 1) / 2
		all.third += t * (t - 1) * (t - 2)
		all.wide += t * (t - 1) * (2*t + 5)
	}
	return all
}

// kendallVariance is the variance of S under independence with ties in either.
func kendallVariance(n float64, a, b ties) float64 {
	v := (n*(n-1)*(2*n+5) - a.wide - b.wide) / 18
	v += a.third * b.third / (9 * n * (n - 1) * (n - 2))
	return v + 2*a.pairs*b.pairs/(n*(n-1))
}

// lnExactKendall returns ln P(|S| ≥ |s|) over all orders of n values: the number of
// inversions is the sum of independent uniform counts 0 … j, j = 1 … n − 1.
func lnExactKendall(n int, s float64) float64 {
	share := []float64{1}
	for j := 1; j < n; j++ {
		next := make([]float64, len(share)+j)
		window := 0.0
		for i := range next {
			if i < len(share) {
				window += share[i]
			}
			if out := i - j - 1; out >= 0 {
				window -= share[out]
			}
			next[i] = window / float64(j+1)
		}
		for i := range len(next) / 2 { // the window loses digits at its far end; the law is symmetric
			next[len(next)-1-i] = next[i]
		}
		share = next
	}
	least := (float64(n*(n-1)/2) - math.Abs(s)) / 2 // inversions at S = |s|
	var tail numeric.Sum
	for i := 0; float64(i) <= least; i++ {
		tail.Add(share[i])
	}
	return min(0, math.Log(2*tail.Value()))
}
