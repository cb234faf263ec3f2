package effect_test

import (
	"errors"
	"fmt"

	"steelyard/meta/effect"
)

func ExampleFromTable() {
	table := effect.Table{Events1: 0, Total1: 40, Events2: 5, Total2: 38}
	e, steps, err := effect.FromTable(effect.OddsRatio, table, effect.Half)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("odds ratio %.3f, se of its logarithm %.3f\n", effect.ToReader(effect.OddsRatio, e.Y), e.SE)
	for _, step := range steps {
		fmt.Println(step.What)
	}
	// Output:
	// odds ratio 0.075, se of its logarithm 1.495
	// zero-cell correction half, added to events and to non-events
	// log odds ratio and its standard error from a 2×2 table
}

func ExampleFromTable_nothingToCompare() {
	_, _, err := effect.FromTable(effect.RiskRatio, effect.Table{Events1: 0, Total1: 40, Events2: 0, Total2: 38}, effect.Half)
	fmt.Println(errors.Is(err, effect.ErrNothingToCompare))
	// Output: true
}

func ExampleFromArms() {
	treated := effect.Arm{Mean: 12, SD: 3, N: 9}
	control := effect.Arm{Mean: 10, SD: 4, N: 25}
	e, _, err := effect.FromArms(effect.MeanDifference, treated, control)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("%.1f (se %.2f)\n", e.Y, e.SE)
	// Output: 2.0 (se 1.28)
}

func ExampleFromLimits() {
	_, _, err := effect.FromLimits(effect.HazardRatio, 0.88, 0.74, 1.05, 95)
	fmt.Println(err)
	// Output: ci level is not between 0 and 1 (95): give it as a share, such as 0.95 for 95%
}
