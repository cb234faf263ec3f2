package words

import (
	"math"
	"strings"
)

// Odds returns odds in the short form of charts, from their natural logarithm,
// so that any size works: "29 : 1", and "1 : 1.5" for odds below even. Within
// 5% of even they are "1 : 1"; below 10 they have one decimal, up to 999 they
// are whole, up to 10,000 in hundreds; beyond, "> 10,000 : 1", or
// "< 1 : 10,000", for no model is worth more digits.
func Odds(ln float64) string { return odds(ln, "> ", "< ") }

// OddsInSentence returns odds as Odds does, with "over 10,000 : 1" and "under
// 1 : 10,000" at the ends.
func OddsInSentence(ln float64) string { return odds(ln, "over ", "under ") }

func odds(ln float64, over, under string) string {
	if math.IsNaN(ln) {
		return Missing
	}
	size := math.Abs(ln)
	switch {
	case size <= math.Log(1.05):
		return "1 : 1"
	case size > math.Log(1e4) && ln > 0:
		return over + "10,000 : 1"
	case size > math.Log(1e4):
		return under + "1 : 10,000"
	case ln > 0:
		return oddsSize(math.Exp(size)) + " : 1"
	}
	return "1 : " + oddsSize(math.Exp(size))
}

// oddsSize returns odds from 1 to 10,000 to the digits that they are worth.
func oddsSize(x float64) string {
	switch {
	case rounded(x, 1) < 10:
		return Linear(x, 1)
	case x < 1000:
		return Linear(x, 0)
	}
	return Linear(100*math.Round(x/100), 0)
}

// NoBreak returns text in which no line breaks at a blank: odds in a page must
// not be torn apart.
func NoBreak(text string) string { return strings.ReplaceAll(text, " ", "\u00a0") }

// Steps returns evidence in steps with one decimal: "2.6", "−0.2".
func Steps(steps float64) string { return Linear(steps, 1) }

// StepsChange returns a difference in steps with its sign and two decimals:
// "+0.81", "−1.60"; no difference has no sign.
func StepsChange(steps float64) string { return signed(steps, 2, "+") }

// StepsChangeShort is StepsChange with one decimal, for charts: "+0.8".
func StepsChangeShort(steps float64) string { return signed(steps, 1, "+") }

// PValue returns a p-value from its natural logarithm: "p = 0.007", below 0.001
// "p < 0.001", and where three decimals would make it 1, "p > 0.999".
func PValue(lnP float64) string {
	// A logarithm just above 0 is a p of 1 that was rounded on the way.
	if math.IsNaN(lnP) || lnP > 1e-9 {
		return Missing
	}
	p := math.Exp(lnP)
	switch {
	case p < 0.001:
		return "p < 0.001"
	case rounded(p, 3) >= 1:
		return "p > 0.999"
	}
	return "p = " + Linear(p, 3)
}

// Percent returns a share as a whole percentage: 0.29 is "29%".
func Percent(share float64) string { return percent(share, 0) }

// PercentFine returns a share as a percentage with one decimal, as weights in
// text are written: 0.064 is "6.4%".
func PercentFine(share float64) string { return percent(share, 1) }

// Weight returns a share as a percentage with one decimal and no sign, for a
// column with the sign in its head: 0.064 is "6.4".
func Weight(share float64) string { return Linear(100*share, 1) }

func percent(share float64, decimals int) string {
	text := Linear(100*share, decimals)
	if text == Missing {
		return text
	}
	return text + "%"
}

// Probability returns a probability as a whole percentage, with one decimal
// above 98.5% and below 1.5%, and never as certain: "88%", "99.2%", "> 99.9%",
// "< 0.1%".
func Probability(p float64) string {
	if math.IsNaN(p) || p < 0 || p > 1 {
		return Missing
	}
	switch {
	case rounded(100*p, 1) >= 100:
		return "> 99.9%"
	case rounded(100*p, 1) == 0:
		return "< 0.1%"
	case p > 0.985 || p < 0.015:
		return PercentFine(p)
	}
	return Percent(p)
}

// ProbabilityFrom returns a probability with the prior that it started from,
// which always go together: "88%, from 20%".
func ProbabilityFrom(p, prior float64) string {
	return Probability(p) + ", from " + Probability(prior)
}
