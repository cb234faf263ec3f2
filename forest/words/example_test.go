package words_test

import (
	"fmt"
	"math"

	"steelyard/forest/words"
	"steelyard/meta/effect"
)

func ExampleNotation_Estimate() {
	n := words.NotationOf(effect.RiskRatio, 0.1)
	fmt.Println(n.Estimate(0.714, 0.5831, 0.859))
	fmt.Println(n.Estimate(0.30, 0.0731, 12.6))
	// Output:
	// 0.71 (0.58 to 0.86)
	// 0.30 (0.073 to 12.6)
}

func ExampleOdds() {
	fmt.Println(words.Odds(math.Log(29)))
	fmt.Println(words.Odds(-math.Log(1.5)))
	fmt.Println(words.Odds(800))
	// Output:
	// 29 : 1
	// 1 : 1.5
	// > 10,000 : 1
}
