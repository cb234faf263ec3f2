package words

import (
	"fmt"
	"math"
	"strings"

	"steelyard/meta"
	"steelyard/meta/bayes"
	"steelyard/meta/dependence"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
	"steelyard/meta/sparse"
	"steelyard/meta/synthesis"
)

// even is how far from 1 odds may lie to be called even.
const even = 0.05

// OutcomeNotation returns how the values of an outcome are written: by the smallest
// standard error as it shows in the reader's unit.
func OutcomeNotation(o *synthesis.Outcome) Notation {
	m := o.Analysis.Measure
	smallest := math.Inf(1)
	for _, study := range o.Studies {
		y, se := study.Estimate.Y, study.Estimate.SE
		if !m.Log() && m != effect.Unspecified {
			se = (effect.ToReader(m, y+se) - effect.ToReader(m, y-se)) / 2
		}
		smallest = min(smallest, se)
	}
	return NotationOf(m, smallest)
}

// Reader returns an estimate on the analysis scale, with its limits, as a reader
// sees it: "0.71 (0.58 to 0.86)".
func Reader(o *synthesis.Outcome, y float64, limits meta.Limits) string {
	m := o.Analysis.Measure
	return OutcomeNotation(o).Estimate(effect.ToReader(m, y), effect.ToReader(m, limits.Low), effect.ToReader(m, limits.High))
}

// ReaderInterval returns limits on the analysis scale as a reader sees them.
func ReaderInterval(o *synthesis.Outcome, limits meta.Limits) string {
	m := o.Analysis.Measure
	return OutcomeNotation(o).Interval(effect.ToReader(m, limits.Low), effect.ToReader(m, limits.High))
}

// ReaderValue returns one value on the analysis scale as a reader sees it.
func ReaderValue(o *synthesis.Outcome, y float64) string {
	return OutcomeNotation(o).Value(effect.ToReader(o.Analysis.Measure, y))
}

// Level returns the level of an interval: "95%", "99.5%".
func Level(level float64) string {
	return strings.TrimSuffix(fmt.Sprintf("%.4g", 100*level), ".0") + "%"
}

// Measure returns a measure's name, "estimate" where none is stated.
func Measure(m effect.Measure) string {
	if m == effect.Unspecified {
		return "estimate"
	}
	return m.String()
}

// Wanted says on which side of the null a wanted effect lies: "below 1 is
// better"; blank where no direction is stated.
func Wanted(o *synthesis.Outcome) string {
	side := wantedSide(o.Analysis.Better)
	if side == "" {
		return ""
	}
	if o.Analysis.NullMissing {
		return o.Analysis.Better.String() + " is better"
	}
	null := effect.ToReader(o.Analysis.Measure, o.Analysis.Model.Null)
	return fmt.Sprintf("%s %s is better", side, plain(null))
}

// plain writes a number with the digits it has.
func plain(x float64) string {
	return strings.Replace(fmt.Sprintf("%.6g", x), "-", "−", 1)
}

// Evidence returns an evidence ratio in words, effect against none: "29 : 1 for an
// effect", "1.5 : 1 for none".
func Evidence(r evidence.Ratio) string {
	switch {
	case math.Abs(math.Expm1(math.Abs(r.Ln()))) <= even:
		return "1 : 1, for neither"
	case r.Favours() == evidence.Effect:
		return OddsInSentence(r.Ln()) + " for an effect"
	}
	return OddsInSentence(-r.Ln()) + " for none"
}

// mostSteps is beyond what a count of steps says anything by its digits.
const mostSteps = 1000

// Strength returns the word and the steps of an evidence ratio, whichever way it
// points: "firm, 2.6 steps". Steps never round up into the next word: "fair, just
// under 2 steps".
func Strength(r evidence.Ratio) string {
	steps := math.Abs(r.Steps())
	rounded := math.Round(10*steps) / 10
	switch {
	case math.Abs(math.Expm1(math.Abs(r.Ln()))) <= even:
		return "even"
	case steps > mostSteps:
		return fmt.Sprintf("%s, over %s steps", r.Word(), Count(mostSteps))
	case rounded == math.Trunc(rounded) && rounded > steps:
		return fmt.Sprintf("%s, just under %s", r.Word(), Number(int(rounded), "step", "steps"))
	case rounded == 1:
		return fmt.Sprintf("%s, %s step", r.Word(), Steps(steps))
	}
	return fmt.Sprintf("%s, %s steps", r.Word(), Steps(steps))
}

// Test returns the statistic behind an interval and its p-value: "t = −4.04 on 8
// df, p = 0.004".
func Test(m meta.Mean) string {
	statistic := Linear(m.Statistic, 2)
	if inverted := math.Ln2 + numeric.LogNormalTail(math.Abs(m.Statistic)); math.IsInf(m.DF, 1) && math.Abs(inverted-m.LnP) > 1e-6*math.Abs(inverted)+1e-9 {
		return PValue(m.LnP) + ", by inverting the interval" // p is not that of the statistic
	}
	if math.IsInf(m.DF, 1) {
		return fmt.Sprintf("z = %s, %s", statistic, PValue(m.LnP))
	}
	return fmt.Sprintf("t = %s on %s df, %s", statistic, degrees(m.DF), PValue(m.LnP))
}

// degrees writes degrees of freedom, whole ones with commas.
func degrees(df float64) string {
	if df == math.Trunc(df) && df < 1e15 {
		return Count(int(df))
	}
	return strings.TrimRight(strings.TrimRight(Linear(df, 2), "0"), ".")
}

// Scatter words the chi-square form of a fit's heterogeneity as what it compares,
// never as homogeneity: it favours a common effect whenever Q is below 1.69 times
// its degrees of freedom.
func Scatter(fit *meta.Fit) string {
	h := fit.Heterogeneity
	if h.DF < 1 {
		return "not measured: fewer than two tables have an odds of their own to differ in"
	}
	k := Count(h.DF + 1)
	ratio := h.Evidence.Ln()
	statistic := "Q"
	if method, err := sparse.ParseMethod(fit.Method); err == nil && (method == sparse.ConditionalExact || method == sparse.BinomialNormal) {
		statistic = "likelihood ratio χ²"
	}
	test := fmt.Sprintf("%s = %s on %s df, %s", statistic, Linear(h.Q, 2), Count(h.DF), PValue(h.LnP))
	switch {
	case math.Abs(math.Expm1(math.Abs(ratio))) <= even:
		return fmt.Sprintf("%s; %s unrelated effects and one common effect fit alike", test, k)
	case ratio > 0:
		return fmt.Sprintf("%s; %s unrelated effects against one common effect: %s", test, k, OddsInSentence(ratio))
	}
	return fmt.Sprintf("%s; one common effect against %s unrelated ones: %s (no proof that the effects are alike)", test, k, OddsInSentence(-ratio))
}

// Differing words the evidence on heterogeneity with τ integrated over its prior.
func Differing(r *bayes.Integrated) string {
	ratio := r.Heterogeneity()
	ln := ratio.Ln()
	prior := TauPrior(r.Prior)
	if r.Exceeded {
		prior += ", which the estimate of τ exceeds twice: doubt it"
	}
	switch {
	case math.Abs(math.Expm1(math.Abs(ln))) <= even:
		return "even between effects that differ and one common effect; " + prior
	case ln > 0:
		return fmt.Sprintf("%s for effects that differ over one common effect: %s; %s", OddsInSentence(ln), Strength(ratio), prior)
	}
	return fmt.Sprintf("%s for one common effect over effects that differ, up to twofold too much: %s; %s", OddsInSentence(-ln), Strength(ratio), prior)
}

// Spread returns τ with its limits and the share of the scatter that it makes up:
// "τ 0.13 (0 to 0.48); I² 25% (0% to 81%) of the scatter is beyond chance".
func Spread(fit *meta.Fit) string {
	if fit.Clustered != nil {
		return clusteredSpread(fit)
	}
	if fit.Method != "" {
		return tableSpread(fit)
	}
	i2 := fit.Heterogeneity.I2Tau
	return fmt.Sprintf("τ %s; I² %s (%s to %s) by τ, %s by Q",
		WithInterval(Tau(math.Sqrt(fit.Mean.Tau2)), Tau(math.Sqrt(fit.Tau2.Low)), Tau(math.Sqrt(fit.Tau2.High))),
		Percent(i2.Value), Percent(i2.Low), Percent(i2.High), Percent(fit.Heterogeneity.I2Q.Value))
}

// clusteredSpread is Spread where some studies give several estimates: τ is that of
// one estimate, without limits.
func clusteredSpread(fit *meta.Fit) string {
	c := fit.Clustered
	share := Percent(fit.Heterogeneity.I2Tau.Value)
	if c.Way != dependence.ThreeLevel.String() {
		return fmt.Sprintf("τ %s of the working model; I² %s by τ", Tau(math.Sqrt(fit.Mean.Tau2)), share)
	}
	return fmt.Sprintf("τ %s between studies, %s within; %s together, I² %s by τ", Tau(math.Sqrt(c.Between)), Tau(math.Sqrt(c.Within)), Tau(math.Sqrt(fit.Mean.Tau2)), share)
}

// tableSpread is Spread for counts, which have no sampling variances that τ² could
// be a share beside.
func tableSpread(fit *meta.Fit) string {
	limits := "; no upper limit"
	if !math.IsInf(fit.Tau2.High, 1) {
		limits = fmt.Sprintf(" (%s)", Interval(Tau(math.Sqrt(fit.Tau2.Low)), Tau(math.Sqrt(fit.Tau2.High))))
	}
	text := "τ " + Tau(math.Sqrt(fit.Mean.Tau2)) + limits
	if h := fit.Heterogeneity; h.DF > 0 {
		text += fmt.Sprintf("; I² %s by the heterogeneity beside a common effect", Percent(h.I2Q.Value))
	}
	return text
}

// Doubter says for whom the evidence is not enough: "a doubter who starts below 40%
// stays below 95%".
func Doubter(b synthesis.Belief) string {
	if b.Prior < 0.001 {
		return fmt.Sprintf("even a doubter who starts at 0.1%% ends above %s", Percent(b.Posterior))
	}
	return fmt.Sprintf("a doubter who starts below %s stays below %s", Probability(b.Prior), Percent(b.Posterior))
}

// RegionRange says which effects a region holds: "0.80 or less", "between 0.80
// and 1.25", "1.25 or more".
func RegionRange(o *synthesis.Outcome, r synthesis.Region) string {
	switch {
	case math.IsInf(r.Low, -1):
		return ReaderValue(o, r.High) + " or less"
	case math.IsInf(r.High, 1):
		return ReaderValue(o, r.Low) + " or more"
	}
	return fmt.Sprintf("between %s and %s", ReaderValue(o, r.Low), ReaderValue(o, r.High))
}

// RegionEvidence weighs a region against all other effects.
func RegionEvidence(r synthesis.Region) string {
	switch {
	case math.Abs(math.Expm1(math.Abs(r.Evidence.Ln()))) <= even:
		return "1 : 1, neither for nor against"
	case r.Evidence.Ln() > 0:
		return OddsInSentence(r.Evidence.Ln()) + " for it"
	}
	return OddsInSentence(-r.Evidence.Ln()) + " against it"
}

// NotWeighed says why an outcome without a null has no evidence.
func NotWeighed(o *synthesis.Outcome) string {
	return fmt.Sprintf("not weighed: the measure, %s, has no value of no effect; state one with --null", Measure(o.Analysis.Measure))
}

// Answer returns a pooled mean of an outcome with its evidence: "0.71 (0.58 to
// 0.86), 29 : 1 for an effect".
func Answer(o *synthesis.Outcome, m meta.Mean) string {
	text := Reader(o, m.Estimate, meta.Limits{Low: m.Low, High: m.High})
	if o.Analysis.NullMissing {
		return text
	}
	return text + ", " + Evidence(m.Evidence)
}

// mostNamed is how many studies a sentence names.
const mostNamed = 5

// Converted names the converted studies of an outcome with what each rests on:
// "A (zero-cell correction), B (mean and SD worked out from a median)".
func Converted(o *synthesis.Outcome) string {
	var named []string
	for i := range o.Studies {
		if s := &o.Studies[i]; s.Converted() {
			named = append(named, fmt.Sprintf("%s (%s)", s.Source.Name, strings.Join(s.Assumptions, "; ")))
		}
	}
	if more := len(named) - mostNamed; more > 0 {
		named = append(named[:mostNamed], fmt.Sprintf("%d more", more))
	}
	return strings.Join(named, ", ")
}

// PCombined returns what p-values say together: "12 : 1 for an effect; z = −2.60, p =
// 0.009".
func PCombined(c synthesis.Combined) string {
	return fmt.Sprintf("%s; z = %s, %s", Evidence(c.Evidence), Linear(c.Z, 2), PValue(c.LnP))
}

// HighRisk counts the pooled studies whose risk of bias is called high.
func HighRisk(o *synthesis.Outcome) int {
	n := 0
	for i := range o.Studies {
		if o.Studies[i].HighRisk() {
			n++
		}
	}
	return n
}

// BiasRemark is the line that stands beside the evidence while studies at high
// risk of bias are pooled; blank otherwise.
func BiasRemark(o *synthesis.Outcome) string {
	if HighRisk(o) == 0 {
		return ""
	}
	return "bias is not in this number"
}

// TauPrior says over which prior the spread was integrated: "τ integrated over a
// half-normal prior of scale 0.5".
func TauPrior(p bayes.TauPrior) string {
	if p.Kind == bayes.Uniform {
		return "τ integrated over a uniform prior"
	}
	if p.Kind == bayes.LogNormal {
		return fmt.Sprintf("τ integrated over a log-normal prior, ln τ with mean %s and standard deviation %s", plain(p.MeanLog), plain(p.SDLog))
	}
	return fmt.Sprintf("τ integrated over a %s prior of scale %s", p.Kind, plain(p.Scale))
}
