package accrual_test

import (
	"context"
	"fmt"
	"math"

	"steelyard/meta"
	"steelyard/meta/accrual"
	"steelyard/meta/effect"
)

func ExampleLooks() {
	// One look at a common effect under no effect: step 1 needs z = 2.08, which has
	// a two-sided tail of 3.8 %.
	q := accrual.Sequence{
		SE:     []float64{0.2, 0.2},
		Groups: [][]int{{0, 1}},
		Model:  meta.Model{Effects: meta.CommonEffect, Level: 0.95},
	}
	r, err := accrual.Looks(context.Background(), q, []accrual.Scenario{{}}, accrual.Draws{N: 10_000, Seed: 1})
	if err != nil {
		fmt.Println(err)
		return
	}
	first := r[0].AnyLook[0]
	fmt.Printf("step %v: within four errors of 0.038: %v\n", first.Steps, math.Abs(first.Value.Value-0.038) < 4*first.Error)
	// Output: step 1: within four errors of 0.038: true
}

func ExampleTrial_Foresee() {
	// One study at the null with standard error 1, and the next as precise: the
	// updated z is N(0, 1), so that the 95 % interval excludes 0 with chance 5 %.
	q := accrual.Trial{Y: []float64{0}, SE: []float64{1}, Model: meta.Model{Effects: meta.CommonEffect, Level: 0.95}}
	o, err := q.Foresee(context.Background(), 1)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("%.4f\n", o.ExcludesNull.Value)
	// Output: 0.0500
}

func ExampleDesign_SE() {
	// 20 of 100 in either arm: √(2/20 + 2/80).
	d := accrual.Design{Measure: effect.OddsRatio, ControlRisk: 0.2}
	se, err := d.SE(100, 100)
	fmt.Printf("%.4f %v\n", se, err)
	// Output: 0.3536 <nil>
}
