package main

import (
	"math/rand/v2"
)

// sets are many sets of k studies, one after another.
type sets struct {
	k    int
	y, s []float64
}

// newSets draws n sets of k studies, always the same for the same numbers.
func newSets(n, k int) *sets {
	random := rand.New(rand.NewPCG(20, 26))
	d := &sets{k: k}
	for range n {
		mean := 0.3 * random.NormFloat64()
		for range k {
			s := 0.1 + 0.4*random.Float64()
			d.s = append(d.s, s)
			d.y = append(d.y, mean+0.2*random.NormFloat64()+s*random.NormFloat64())
		}
	}
	return d
}
