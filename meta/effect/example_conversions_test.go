package effect_test

import (
	"fmt"

	"steelyard/meta/effect"
)

func ExampleFromQuartiles() {
	a, step, err := effect.FromQuartiles(3, 5, 11, 40)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("mean %.2f, SD %.2f, skewed: %v\n", a.Arm.Mean, a.Arm.SD, a.Skewed)
	fmt.Println(step.What)
	// Output:
	// mean 6.42, SD 6.15, skewed: true
	// mean and standard deviation from a median with quartiles, as if normal
}

func ExampleClusterTable() {
	deff, _, err := effect.DesignEffect(21, 0.05)
	if err != nil {
		fmt.Println(err)
		return
	}
	table, _, err := effect.ClusterTable(effect.Table{Events1: 7, Total1: 40, Events2: 9, Total2: 41}, deff)
	if err != nil {
		fmt.Println(err)
		return
	}
	e, _, err := effect.FromEffectiveTable(effect.RiskRatio, table, effect.Half)
	fmt.Printf("%+v\nrisk ratio %.3f, %v\n", table.Counts(), effect.ToReader(effect.RiskRatio, e.Y), err)
	// Output:
	// {Events1:3.5 Total1:20 Events2:4.5 Total2:20.5}
	// risk ratio 0.797, <nil>
}

func ExampleFromPaired() {
	before, after := effect.Arm{Mean: 7, SD: 2.38, N: 10}, effect.Arm{Mean: 6.5, SD: 2.21, N: 10}
	e, _, err := effect.FromPaired(effect.StandardisedMeanDifference, before, after, 0.68)
	fmt.Printf("%.3f (se %.3f), %v\n", e.Y, e.SE, err)
	// Output: 0.218 (se 0.256), <nil>
}

func ExampleFromHazardP() {
	v, _, err := effect.VarianceFromTotals(200, 310, 310)
	if err != nil {
		fmt.Println(err)
		return
	}
	e, steps, err := effect.FromHazardP(0.003, effect.Lower, v)
	fmt.Printf("hazard ratio %.3f, se of its logarithm %.3f, %v\n", effect.ToReader(effect.HazardRatio, e.Y), e.SE, err)
	for _, step := range steps {
		fmt.Println(step.What)
	}
	// Output:
	// hazard ratio 0.657, se of its logarithm 0.141, <nil>
	// z from a two-sided p-value, direction lower
	// log hazard ratio and its standard error from z and the variance of observed minus expected events
}

func ExampleStouffer() {
	z1, _, _ := effect.SignedZ(0.03, effect.Higher)
	z2, _, _ := effect.SignedZ(0.4, effect.Lower)
	both, _, err := effect.Stouffer([]effect.Signed{{Z: z1, N: 90}, {Z: z2, N: 40}})
	fmt.Printf("z %.2f, ln p %.2f, %v\n", both.Z, both.LnP, err)
	// Output: z 1.34, ln p -1.71, <nil>
}

func ExampleFromReader_null() {
	m := effect.Proportion
	fmt.Println(m.HasNull())
	y, err := effect.FromReader(m, 0.2) // the value that the review states
	fmt.Printf("%.3f %v\n", y, err)
	// Output:
	// false
	// -1.386 <nil>
}
