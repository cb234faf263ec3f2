package bayes_test

import (
	"fmt"
	"math"

	"steelyard/meta/bayes"
)

func ExampleIntegrate() {
	// With τ all but known to be 0 the mean is 0.5 with standard error 0.3/√3, so
	// that z² = 25/3 and by hand ln ER = (25/3 − 1 − ln 2)/2 = 3.320.
	y, s := []float64{0.2, 0.5, 0.8}, []float64{0.3, 0.3, 0.3}
	r, err := bayes.Integrate(y, s, 0, bayes.TauPrior{Kind: bayes.HalfNormal, Scale: 1e-6})
	fmt.Printf("ln ER %.3f, %v\n", r.Effect().Ln(), err)
	// A τ that is free to differ from 0 weakens the evidence.
	r, err = bayes.Integrate(y, s, 0, bayes.TauPrior{Kind: bayes.HalfNormal, Scale: 0.5})
	fmt.Println(r.Effect().Ln() < r.EffectGivenCommon().Ln(), err)
	// Output:
	// ln ER 3.320, <nil>
	// true <nil>
}

func ExampleObservation_Weigh() {
	// By hand, z = 2 and g = 1: −½ ln 2 + ½·4/2 = 0.653.
	o := bayes.Observation{Estimate: 2, SE: 1}
	r, err := o.Weigh(bayes.EffectPrior{Scale: 1})
	fmt.Printf("%.3f %v\n", r.Ln(), err)
	// Only effects above 0: times Φ(√2)/½ = 1.843.
	half, err := o.Weigh(bayes.EffectPrior{Scale: 1, Side: bayes.AboveNull})
	fmt.Printf("%.3f %v\n", math.Exp(half.Ln()-r.Ln()), err)
	// Output:
	// 0.653 <nil>
	// 1.843 <nil>
}

func ExampleScepticismLimit() {
	// By hand: (0.9 − 0.1)²/(4√0.09) = 0.64/1.2.
	limit, err := bayes.ScepticismLimit(0.1, 0.9, 0)
	fmt.Printf("%.4f %v\n", limit, err)
	// Output: 0.5333 <nil>
}
