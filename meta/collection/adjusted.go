package collection

import (
	"math"
	"slices"
)

// Adjusted returns the logs of the adjusted p-values of Benjamini and Hochberg, in
// the order of lnP, the logs of the p-values: the least rate of false discoveries at
// which a set would be among the discoveries,
//
//	min over j ≥ i of p(j)·n/j, at most 1,  p(1) ≤ p(2) ≤ …
//
// It holds for independent sets and for those with positive dependence.
//
// Source: Benjamini & Hochberg (1995), Journal of the Royal Statistical Society B
// 57:289-300; adjusted p-values: Yekutieli & Benjamini (1999), Journal of
// Statistical Planning and Inference 82:171-196.
func Adjusted(lnP []float64) []float64 {
	n := len(lnP)
	order := make([]int32, n)
	for i := range order {
		order[i] = int32(i)
	}
	slices.SortFunc(order, func(a, b int32) int {
		switch {
		case lnP[a] < lnP[b]:
			return -1
		case lnP[a] > lnP[b]:
			return 1
		}
		return 0
	})
	adjusted := make([]float64, n)
	least := 0.0
	for rank := n; rank >= 1; rank-- {
		i := order[rank-1]
		least = min(least, lnP[i]+math.Log(float64(n)/float64(rank)))
		adjusted[i] = least
	}
	return adjusted
}
