package words

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"steelyard/meta"
	"steelyard/meta/choice"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/explain"
	"steelyard/meta/synthesis"
)

// Difference words the evidence for effects that differ, between groups or along
// covariates: "12 : 1 for a difference", "1.8 : 1 for none".
func Difference(r evidence.Ratio) string {
	switch {
	case math.Abs(math.Expm1(math.Abs(r.Ln()))) <= even:
		return "1 : 1, for neither"
	case r.Favours() == evidence.Effect:
		return OddsInSentence(r.Ln()) + " for a difference"
	}
	return OddsInSentence(-r.Ln()) + " for none"
}

// FTest returns "F = 4.10 on 2 and 8 df, p = 0.06", or with infinite second degrees
// of freedom "χ² = 8.2 on 2 df, p = 0.02".
func FTest(f, df1, df2, lnP float64) string {
	if math.IsInf(df2, 1) {
		return fmt.Sprintf("χ² = %s on %s df, %s", Linear(df1*f, 2), Count(int(df1)), PValue(lnP))
	}
	df := Linear(df2, 1)
	if df2 == math.Trunc(df2) {
		df = degrees(df2)
	}
	return fmt.Sprintf("F = %s on %s and %s df, %s", Linear(f, 2), Count(int(df1)), df, PValue(lnP))
}

// Contrast says what a difference of two effects is for a measure: "ratio of odds
// ratios" for ratios, else "difference".
func Contrast(m effect.Measure) string {
	if m.Log() {
		name := Measure(m)
		return "ratio of " + strings.TrimSuffix(name, "s") + "s"
	}
	return "difference"
}

// ContrastValue writes a difference on the analysis scale with its limits in the
// reader's unit; of measures whose scale is neither a logarithm nor their own, such as
// correlations, on the analysis scale.
func ContrastValue(o *synthesis.Outcome, d, low, high float64) string {
	if o.Analysis.Measure.Log() {
		return Notation{Ratio: true}.Estimate(math.Exp(d), math.Exp(low), math.Exp(high))
	}
	return Notation{Decimals: Decimals((high - low) / 4)}.Estimate(d, low, high)
}

// Step is by how much of a covariate a coefficient is shown: the largest power of ten
// that its range holds, so that the change is one that the studies differ by.
func Step(c *explain.Covariate) float64 {
	if c.Levels != nil {
		return 1
	}
	return math.Pow10(int(math.Floor(math.Log10(slices.Max(c.Values)-slices.Min(c.Values)) + 1e-9)))
}

// TermStep is the product of the steps of a term's covariates, with how they are
// written: "per 10", "per 10 × 10", blank for categories alone.
func TermStep(d *explain.Design, t explain.Term) (step float64, text string) {
	step = 1
	var parts []string
	for _, name := range strings.Split(t.Name, " × ") {
		for _, c := range d.Covariates {
			if c.Name == name && c.Levels == nil {
				own := Step(c)
				step *= own
				parts = append(parts, plain(own))
			}
		}
	}
	if len(parts) == 0 {
		return 1, ""
	}
	return step, "per " + strings.Join(parts, " × ")
}

// Covariate says how a column was taken: "latitude centred at 33.5", "allocation
// against random".
func Covariate(c *explain.Covariate) string {
	if c.Levels == nil {
		return fmt.Sprintf("%s centred at its mean, %s", c.Name, covariateNumber(c, c.Mean, 2))
	}
	return fmt.Sprintf("%s in categories against %s", c.Name, c.Levels[0])
}

// CovariateValue writes a value of a covariate of numbers: with the digits it has, up
// to three beyond what its range shows.
func CovariateValue(c *explain.Covariate, x float64) string {
	return covariateNumber(c, x, 3)
}

// covariateNumber rounds to some digits below the covariate's step; years have no
// comma.
func covariateNumber(c *explain.Covariate, x float64, digits int) string {
	decimals := digits - int(math.Round(math.Log10(Step(c))))
	text := Linear(x, max(0, min(decimals, 12)))
	if math.Abs(x) < 10000 {
		text = strings.ReplaceAll(text, ",", "")
	}
	if strings.Contains(text, ".") {
		text = strings.TrimRight(strings.TrimRight(text, "0"), ".")
	}
	return text
}

// OutsideStudied names the points that lie outside the studies' own range: "latitude 80 (the
// studies: 13 to 55)"; blank if none does.
func OutsideStudied(d *explain.Design, points []explain.Point) string {
	var out []string
	for _, c := range d.Covariates {
		for _, p := range points {
			if c.Levels != nil || choice.Fold(p.Covariate) != choice.Fold(c.Name) {
				continue
			}
			if low, high := slices.Min(c.Values), slices.Max(c.Values); p.Number < low || p.Number > high {
				out = append(out, fmt.Sprintf("%s %s (the studies: %s)", c.Name, CovariateValue(c, p.Number), Interval(CovariateValue(c, low), CovariateValue(c, high))))
			}
		}
	}
	return strings.Join(out, ", ")
}

// RegressionModel returns the methods of a regression, as Model does those of a fit.
func RegressionModel(m meta.Model) string {
	text := "common effect along the covariates"
	if m.Effects == meta.RandomEffects {
		text = "random effects about the covariates, " + TauMethod(m.Tau)
	}
	form := "matched to it"
	if m.Evidence == evidence.StudentForm && m.Interval != meta.Wald {
		form = "in the Student-t form"
	}
	return text + "; " + IntervalMethod(m.Interval) + ", evidence " + form
}

// ExplainLimits says what a comparison of an outcome's studies cannot show, in
// sentences.
func ExplainLimits(s *synthesis.Synthesis, o *synthesis.Outcome) []string {
	e := o.Explain
	many := Noun(s, 2)
	all := []string{
		fmt.Sprintf("The comparison is observational: nobody dealt the %s their covariates, so that anything else that differs between them may be the reason. What holds between %s need not hold between the people within one (aggregation bias).", many, many),
	}
	if !e.Planned {
		all = append(all, "Not stated to have been planned before results were seen (--planned): take it as a hypothesis.")
	}
	if r := e.Regression; r != nil && r.Regression != nil {
		if covariates := len(r.Coefficients) - 1; r.K < mostPerCovariate*covariates {
			all = append(all, fmt.Sprintf("%d %s for %s: fewer than the 10 for each that common practice asks for (Cochrane Handbook, chapter 10), so that chance alone easily shows something, and a real reason easily hides.", r.K, Noun(s, r.K), Number(covariates, "coefficient", "coefficients")))
		}
	}
	if g := e.Subgroups; g != nil && g.Subgroups != nil {
		least := g.Groups[0].Mean.K
		for _, group := range g.Groups {
			least = min(least, group.Mean.K)
		}
		if least < mostPerCovariate {
			text := fmt.Sprintf("The smallest group has %s: subgroups of so few seldom tell a difference from chance", Number(least, Noun(s, 1), Noun(s, 2)))
			if o.Analysis.Model.Effects == meta.RandomEffects && !g.Shared {
				text += ", and their own spreads are hardly known (--shared-tau takes one for all)"
			}
			all = append(all, text+".")
		}
		if alone := countAlone(g.Groups); alone > len(g.Groups)/2 {
			all = append(all, fmt.Sprintf("%d of %d groups have one %s: a column of numbers is better regressed on (--on %q).", alone, len(g.Groups), Noun(s, 1), g.Column))
		}
		all = append(all, "Whether groups differ is answered by the test between them, not by which of them passes a step alone.")
	}
	if most := severalDifferences(e); most > 1 && o.Analysis.Model.Evidence != evidence.StudentForm {
		all = append(all, fmt.Sprintf("Against several differences at once the evidence can reach 2.33 : 1 for each: %s for the %s weighed here together, so that it speaks for none more readily than against a single one.",
			Odds(-evidence.ChiSquare(0, most).Ln()), Count(int(most))))
	}
	return all
}

// severalDifferences is the most differences that a test of the comparison weighs
// together.
func severalDifferences(e *synthesis.Explained) float64 {
	most := 0.
	if g := e.Subgroups; g != nil && g.Subgroups != nil {
		most = g.Test.DF1
	}
	if r := e.Regression; r != nil && r.Regression != nil {
		most = max(most, r.Whole.DF1)
	}
	return most
}

// mostPerCovariate is how many studies common practice asks for each coefficient.
const mostPerCovariate = 10

// countAlone counts the groups of one study.
func countAlone(groups []explain.Subgroup) int {
	alone := 0
	for _, g := range groups {
		if g.Mean.K == 1 {
			alone++
		}
	}
	return alone
}
