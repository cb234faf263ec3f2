package words

import (
	"math"
	"testing"
)

func TestOdds(t *testing.T) {
	of := func(x float64) string { return Odds(math.Log(x)) }
	check(t, []row{
		{"style", of(30), "30 : 1"},
		{"style: chart", of(29.2), "29 : 1"},
		{"style", of(1 / 1.5), "1 : 1.5"},
		{"style: chart", of(2.96), "3.0 : 1"},
		{"style: chart", of(1.1), "1.1 : 1"},
		{"style: chart", of(142.3), "142 : 1"},
		{"style: chart", of(1700), "1,700 : 1"},
		{"style", of(20000), "> 10,000 : 1"},
		{"style", OddsInSentence(math.Log(20000)), "over 10,000 : 1"},
		{"style", OddsInSentence(math.Log(1 / 1.5)), "1 : 1.5"},
		{"rule: within 5% of even", of(1), "1 : 1"},
		{"rule: within 5% of even", of(1.049), "1 : 1"},
		{"rule: within 5% of even", of(1 / 1.049), "1 : 1"},
		{"rule: beyond 5% of even", of(1.06), "1.1 : 1"},
		{"rule: below 10 one decimal", of(9.94), "9.9 : 1"},
		{"rule: the value shown decides", of(9.96), "10 : 1"},
		{"rule: 10 to 999 whole", of(999.4), "999 : 1"},
		{"rule: the value shown decides", of(999.6), "1,000 : 1"},
		{"rule: to the hundred", of(2345), "2,300 : 1"},
		{"rule: to the hundred", of(9960), "10,000 : 1"},
		{"rule: beyond", of(10001), "> 10,000 : 1"},
		{"rule: against", of(1 / 2.33), "1 : 2.3"},
		{"rule: beyond, against", of(1e-5), "< 1 : 10,000"},
		{"rule: beyond, against", OddsInSentence(-20), "under 1 : 10,000"},
		{"rule: any size", Odds(2e8), "> 10,000 : 1"},
		{"rule: any size", Odds(math.Inf(-1)), "< 1 : 10,000"},
		{"rule: no number", Odds(math.NaN()), Missing},
		{"rule: no-break in a page", NoBreak("30 : 1"), "30\u00a0:\u00a01"},
	})
}

func TestSteps(t *testing.T) {
	check(t, []row{
		{"style: chart", Steps(2.58), "2.6"},
		{"style: chart", Steps(0.04), "0.0"},
		{"rule: minus", Steps(-0.2), "\u22120.2"},
		{"rule: no negative zero", Steps(-0.04), "0.0"},
		{"rule: far tail", Steps(607.41), "607.4"},
		{"style", StepsChange(0.81), "+0.81"},
		{"style", StepsChange(-1.6), "\u22121.60"},
		{"rule: none has no sign", StepsChange(0), "0.00"},
		{"rule: none has no sign", StepsChange(-0.001), "0.00"},
		{"rule: none has no sign", StepsChange(0.001), "0.00"},
		{"style: one in charts", StepsChangeShort(0.81), "+0.8"},
		{"style: one in charts", StepsChangeShort(-1.6), "\u22121.6"},
	})
}

func TestPValue(t *testing.T) {
	of := func(p float64) string { return PValue(math.Log(p)) }
	check(t, []row{
		{"style", of(0.007), "p = 0.007"},
		{"style", of(0.0005), "p < 0.001"},
		{"style: page", of(0.206), "p = 0.206"},
		{"rule: not below 0.001", of(0.00101), "p = 0.001"},
		{"rule: below 0.001 though it rounds to it", of(0.0009996), "p < 0.001"},
		{"rule: 3 decimals", of(0.04961), "p = 0.050"},
		{"rule: never 1", of(0.9996), "p > 0.999"},
		{"rule: never 1", PValue(0), "p > 0.999"},
		{"rule: rounded above 1", PValue(1e-15), "p > 0.999"},
		{"rule: any size", PValue(-2e8), "p < 0.001"},
		{"rule: any size", PValue(math.Inf(-1)), "p < 0.001"},
		{"rule: no probability", PValue(0.1), Missing},
		{"rule: no number", PValue(math.NaN()), Missing},
	})
}

func TestPercent(t *testing.T) {
	check(t, []row{
		{"style: chart", Percent(0.294), "29%"},
		{"rule: whole", Percent(0), "0%"},
		{"rule: whole", Percent(1), "100%"},
		{"rule: minus", Percent(-0.05), "\u22125%"},
		{"rule: no number", Percent(math.NaN()), Missing},
		{"style: chart", PercentFine(0.064), "6.4%"},
		{"style: sign in the head", Weight(0.129), "12.9"},
		{"rule: one decimal", Weight(1), "100.0"},
	})
}

func TestProbability(t *testing.T) {
	check(t, []row{
		{"style", Probability(0.88), "88%"},
		{"style", ProbabilityFrom(0.88, 0.2), "88%, from 20%"},
		{"style", Probability(0.99999), "> 99.9%"},
		{"rule: one decimal above 98.5%", Probability(0.9861), "98.6%"},
		{"rule: whole up to 98.5%", Probability(0.9849), "98%"},
		{"rule: one decimal below 1.5%", Probability(0.0149), "1.5%"},
		{"rule: whole from 1.5%", Probability(0.0151), "2%"},
		{"rule: largest", Probability(0.9994), "99.9%"},
		{"rule: never certain", Probability(1), "> 99.9%"},
		{"rule: smallest", Probability(0.0006), "0.1%"},
		{"rule: never impossible", Probability(0.0004), "< 0.1%"},
		{"rule: never impossible", Probability(0), "< 0.1%"},
		{"rule: no probability", Probability(1.2), Missing},
		{"rule: no number", Probability(math.NaN()), Missing},
	})
}

func TestAbsolute(t *testing.T) {
	check(t, []row{
		{"style", Absolute(-82, -122, -33), "82 fewer (33 to 122 fewer)"},
		{"style", AbsoluteInterval(-12, 30), "12 fewer to 30 more"},
		{"style: chart", Absolute(-44.2, -62.3, -20.6), "44 fewer (21 to 62 fewer)"},
		{"rule: more", Absolute(20, 5, 41), "20 more (5 to 41 more)"},
		{"rule: across zero, lower end first", Absolute(-9, -30, 12), "9 fewer (30 fewer to 12 more)"},
		{"rule: limits in any order", Absolute(-82, -33, -122), "82 fewer (33 to 122 fewer)"},
		{"rule: none", Absolute(0.2, -12, 30), "0 (12 fewer to 30 more)"},
		{"rule: a limit shown as none", Absolute(-15, -30, 0.3), "15 fewer (0 to 30 fewer)"},
		{"rule: a limit shown as none", Absolute(10, -0.3, 30), "10 more (0 to 30 more)"},
		{"rule: thousands", Absolute(-1000, -1000, -999.6), "1,000 fewer (1,000 to 1,000 fewer)"},
		{"rule: no number", Absolute(math.NaN(), 1, math.NaN()), Missing + " (" + Missing + ")"},
	})
}

func TestNumberNeeded(t *testing.T) {
	// Risks in variables: 1/(0.3−0.2) is then 10.000000000000002.
	a, b := 0.3, 0.2
	check(t, []row{
		{"style", NumberNeeded(12.2, 8.2, 30.3), "13 (9 to 31)"},
		// GRADE guidelines 6, J Clin Epidemiol 2011;64:1283-1293 [seen]: 1.3%
		// (0.6 to 2.0) is 77 (50 to 167).
		{"published", NumberNeeded(1/0.013, 1/0.006, 1/0.02), "77 (50 to 167)"},
		{"rule: rounding errors are not rounded up", NumberNeeded(1/(a-b), 5, 20), "10 (5 to 20)"},
		{"rule: no number", NumberNeeded(math.NaN(), 1, 2), Missing + " (1 to 2)"},
	})
}
