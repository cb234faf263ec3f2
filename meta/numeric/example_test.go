package numeric_test

import (
	"fmt"
	"math"

	"steelyard/meta/numeric"
)

func ExampleStudentCritical() {
	// One degree of freedom: tan(0.475π); two: 0.95·√(2/(0.05·1.95)).
	fmt.Printf("%.3f %.3f %.3f\n",
		numeric.StudentCritical(0.05, 1), numeric.StudentCritical(0.05, 2), numeric.StudentCritical(0.05, math.Inf(1)))
	// Output: 12.706 4.303 1.960
}

func ExampleLogNormalTail() {
	// At z = 20,000 the tail is about exp(-z²/2)/(z√(2π)).
	fmt.Printf("%.4f\n", numeric.LogNormalTail(20000)+2e8)
	fmt.Printf("%.4f\n", -math.Log(20000*math.Sqrt(2*math.Pi)))
	// Output:
	// -10.8224
	// -10.8224
}

func ExampleRoot() {
	x, err := numeric.Root(func(x float64) float64 { return x*x - 2 }, 0, 2, 1e-12)
	fmt.Printf("%.6f %v\n", x, err)
	_, err = numeric.Root(func(x float64) float64 { return x*x + 1 }, 0, 2, 1e-12)
	fmt.Println(err)
	// Output:
	// 1.414214 <nil>
	// root between 0 and 2: no sign change between the ends of the interval; widen it
}

func ExampleIntegrate() {
	value, _, err := numeric.Integrate(func(x float64) float64 { return 1 / (1 + x*x) }, math.Inf(-1), math.Inf(1), 1e-10)
	fmt.Printf("%.6f %v\n", value, err)
	// Output: 3.141593 <nil>
}
