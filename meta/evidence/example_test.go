package evidence_test

import (
	"fmt"
	"math"

	"steelyard/meta/evidence"
)

func ExampleNormal() {
	// By hand: (2² - 1 - ln 2)/2 = 1.153; e^1.153 = 3.17; 1.153/1.317 = 0.88 steps.
	r := evidence.Normal(2)
	fmt.Printf("ln ER %.3f, %.2f : 1 for %v, %.2f steps, %v\n", r.Ln(), r.Odds(), r.Favours(), r.Steps(), r.Word())
	// Output: ln ER 1.153, 3.17 : 1 for effect, 0.88 steps, faint
}

func ExampleMatched() {
	// With 2 degrees of freedom t = 4.303 has p = 0.05, as z = 1.960 has:
	// (1.960² - 1 - ln 2)/2 = 1.074.
	fmt.Printf("%.3f\n", evidence.Matched(4.3026527, 2).Ln())
	fmt.Printf("%.3f\n", evidence.Normal(1.9599640).Ln())
	// Output:
	// 1.074
	// 1.074
}

func ExamplePosterior() {
	// Odds before 1 : 3, evidence 9 : 1, odds after 9 : 3.
	fmt.Printf("%.2f\n", evidence.Posterior(0.25, evidence.FromLn(math.Log(9))))
	// Output: 0.75
}

func ExampleDoubtersPrior() {
	// Evidence of 19 : 1 brings even odds to 0.95.
	fmt.Printf("%.2f\n", evidence.DoubtersPrior(evidence.FromLn(math.Log(19)), 0.95))
	// Output: 0.50
}

func ExampleLocation_Region() {
	// An estimate exactly at 0 says nothing about direction.
	l := evidence.Location{Estimate: 0, SE: 0.25, DF: math.Inf(1)}
	positive := evidence.Region{{Low: 0, High: math.Inf(1)}}
	r, err := l.Region(positive, positive.Complement())
	fmt.Printf("%.2f steps, %v\n", math.Abs(r.Steps()), err)
	// Two standard errors above, it lies above 0 with Φ(2) = 0.977 of the posterior.
	l.Estimate = 0.5
	fmt.Printf("%.3f\n", l.Posterior(positive))
	// By hand: ln M is ln(Φ(2√2)/Φ(2)) = 0.0207 above 0 and ln(Φ(-2√2)/Φ(-2)) =
	// -2.2749 below; the corrections are 0.4553 and 0.2081.
	r, err = l.Region(positive, positive.Complement())
	fmt.Printf("ln ER %.3f = %.3f, %v\n", r.Ln(), 0.0207+2.2749-(0.4553-0.2081), err)
	// Output:
	// 0.00 steps, <nil>
	// 0.977
	// ln ER 2.048 = 2.048, <nil>
}
