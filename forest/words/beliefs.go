package words

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
	"steelyard/meta/synthesis"
)

// PriorScale returns the scale of a prior with two significant digits: "0.05",
// "0.33", "20".
func PriorScale(x float64) string {
	if !(x > 0) || math.IsInf(x, 1) {
		return Missing
	}
	digits, exponent, _ := strings.Cut(strconv.FormatFloat(x, 'e', 1, 64), "e")
	e, err := strconv.Atoi(exponent)
	if err != nil || e < -6 || e > 14 {
		return strconv.FormatFloat(x, 'g', 2, 64)
	}
	if strings.HasSuffix(digits, ".0") {
		return Linear(x, max(0, -e))
	}
	return Linear(x, max(0, 1-e))
}

// PriorUnit names the scale on which priors for an outcome's effect are widened:
// "log risk ratio", "mean difference".
func PriorUnit(o *synthesis.Outcome) string {
	m := o.Analysis.Measure
	switch {
	case m.Log():
		return "log " + Measure(m)
	case effect.ToReader(m, 0.5) != 0.5:
		return "transformed " + Measure(m)
	}
	return Measure(m)
}

// PriorRange returns the range that holds 95% of a normal prior of some scale
// round the null, as a reader sees it: "0.82 to 1.22". On a linear scale it has
// no more digits than its width is worth.
func PriorRange(o *synthesis.Outcome, scale float64) string {
	half := numeric.NormalCritical(0.05) * scale
	null := o.Result.Fit.Model.Null
	notation := OutcomeNotation(o)
	notation.Decimals = min(notation.Decimals, Decimals(half))
	m := o.Analysis.Measure
	return notation.Interval(effect.ToReader(m, null-half), effect.ToReader(m, null+half))
}

// Scepticism says which effects must be thought plausible for a result to be
// credible, or that no such limit exists.
func Scepticism(o *synthesis.Outcome, b *synthesis.Beliefs) string {
	level := Level(o.Result.Fit.Model.Level)
	if b.Scepticism == nil {
		return fmt.Sprintf("no limit: the %s interval includes %s, so the estimate convinces nobody who starts in doubt", level, ReaderValue(o, o.Result.Fit.Model.Null))
	}
	null, limit := o.Result.Fit.Model.Null, *b.Scepticism
	return fmt.Sprintf("credible to those who think effects beyond %s plausible (%s prior interval of a doubter whom the data just fail to convince; Matthews 2018)",
		ReaderInterval(o, meta.Limits{Low: null - limit, High: null + limit}), level)
}

// PriorBound says what no prior for the effect can pass.
func PriorBound(b *synthesis.Beliefs) string {
	return "no prior for the effect can pass " + OddsInSentence(b.Bound.Ln())
}

// PriorDrift says how the evidence under priors relates to the one that needs
// none, and what they are weighed against.
func PriorDrift(o *synthesis.Outcome, b *synthesis.Beliefs) string {
	mean := o.Result.Fit.Mean
	text := fmt.Sprintf("Evidence, effect : none, under priors for the %s centred on no effect; as they widen, any data drift towards none. The evidence above, %s, %s.",
		PriorUnit(o), OddsInSentence(mean.Evidence.Ln()), strings.TrimPrefix(NeedsScale(o), "which "))
	location := mean.Location()
	switch {
	case o.Analysis.Weighing.Form.OverTau():
		return text + fmt.Sprintf(" The priors and the bound are weighed at z = %s, matched to the interval, that evidence from the studies themselves: it may pass the bound.", Linear(b.At.Z(), 2))
	case math.IsInf(location.DF, 1):
		return text
	case location.Form == evidence.StudentForm:
		return text + fmt.Sprintf(" The priors are weighed at z = %s, matched to the interval; the bound is that of Student's t.", Linear(b.At.Z(), 2))
	}
	return text + fmt.Sprintf(" All is weighed at z = %s, matched to the interval.", Linear(b.At.Z(), 2))
}
