package words

import (
	"fmt"

	"steelyard/meta"
	"steelyard/meta/bayes"
	"steelyard/meta/synthesis"
)

// Priors names the priors of a posterior: "flat prior for the mean, half-normal prior of
// scale 0.5 for τ".
func Priors(p *synthesis.Posterior) string {
	spread := fmt.Sprintf("%s prior of scale %s for τ", p.Prior.Kind, plain(p.Prior.Scale))
	switch p.Prior.Kind {
	case bayes.Uniform:
		spread = "uniform prior for τ"
	case bayes.LogNormal:
		spread = fmt.Sprintf("log-normal prior for τ, its logarithm with mean %s and standard deviation %s", plain(p.Prior.MeanLog), plain(p.Prior.SDLog))
	}
	text := "flat prior for the mean effect, " + spread
	if p.Exceeded {
		text += ", which the estimate of τ exceeds twice: doubt it"
	}
	return text
}

// ReaderQuantiles returns the median with the limits of a posterior of an effect as a
// reader sees them.
func ReaderQuantiles(o *synthesis.Outcome, q bayes.Quantiles) string {
	return Reader(o, q.Median, meta.Limits{Low: q.Low, High: q.High})
}

// SpreadQuantiles returns the median of τ with its limits.
func SpreadQuantiles(q bayes.Quantiles) string {
	return WithInterval(Tau(q.Median), Tau(q.Low), Tau(q.High))
}

// ProbablyBeyond says how probable an effect below a threshold is, or above it: below where the
// threshold lies below no effect or no other is stated.
func ProbablyBeyond(o *synthesis.Outcome, t synthesis.Beyond) string {
	side, mean, setting := "below", t.Mean.Below, t.Setting.Below
	if t.Value > o.Analysis.Model.Null {
		side, mean, setting = "above", t.Mean.Above, t.Setting.Above
	}
	return fmt.Sprintf("%s %s (%s): mean effect %s, effect in a new setting %s",
		side, ReaderValue(o, t.Value), thresholdNames[t.Name], Probability(mean), Probability(setting))
}

var thresholdNames = map[string]string{"no effect": "no effect", "important": "the important difference"}
