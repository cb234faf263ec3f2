package sparse_test

import (
	"errors"
	"fmt"
	"math"

	"steelyard/meta/effect"
	"steelyard/meta/sparse"
)

// By hand: ad/N is 4·95/200 and 2·98/202, bc/N is 96·5/200 and 98·4/202.
func ExampleModel_Fit() {
	tables := []effect.Table{
		{Events1: 4, Total1: 100, Events2: 5, Total2: 100},
		{Events1: 2, Total1: 100, Events2: 4, Total2: 102},
		{Events1: 0, Total1: 50, Events2: 0, Total2: 50},
	}
	r, err := sparse.Model{Method: sparse.MantelHaenszel, Level: 0.95}.Fit(tables)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("odds ratio %.4f from %d tables; without events: %d\n", math.Exp(r.Mean.Estimate), r.Mean.K, r.Tally.NoEvents)
	// Output: odds ratio 0.6613 from 2 tables; without events: 1
}

// An estimate of 0 comes as an error that carries the other limit. By hand: with
// one event in each table and equal arms, P(none treated) = (1/(1+ψ))³ = 0.025.
func ExampleBoundaryError() {
	table := effect.Table{Events1: 0, Total1: 50, Events2: 1, Total2: 50}
	_, err := sparse.Model{Method: sparse.ConditionalExact, Level: 0.95}.Fit([]effect.Table{table, table, table})
	var boundary *sparse.BoundaryError
	if errors.As(err, &boundary) {
		fmt.Printf("odds ratio 0, at most %.4f\n", math.Exp(boundary.OneSided.Limit))
	}
	// Output: odds ratio 0, at most 2.4200
}

// Facts come with their limits; what they mean for a method is in its verdict. By
// hand: Σbc/Σad = (2997·5 + 2996·6)/(3·995 + 4·994) = 4.735.
func ExampleAdvise() {
	a, err := sparse.Advise([]effect.Table{{Events1: 3, Total1: 3000, Events2: 5, Total2: 1000}, {Events1: 4, Total1: 3000, Events2: 6, Total2: 1000}})
	if err != nil {
		fmt.Println(err)
		return
	}
	peto := a.Methods[sparse.Peto]
	fmt.Println("peto:", peto.Apt)
	for _, kind := range peto.Because {
		fmt.Println(a.Fact(kind).Text())
	}
	// Output:
	// peto: inapt
	// The larger arm has 3 times the people of the smaller one (unequal beyond 2).
	// The common odds ratio is 4.74, or 1 over that (large beyond 2).
}
