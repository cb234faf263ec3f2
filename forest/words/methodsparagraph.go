package words

import (
	"fmt"
	"strings"

	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// MethodsParagraphs returns the methods of an outcome in sentences, written from what
// was run: one paragraph on the pooling, one on the evidence, one on the rest.
func MethodsParagraphs(s *synthesis.Synthesis, o *synthesis.Outcome) []string {
	if o.Result == nil {
		return nil
	}
	all := []string{poolingMethod(s, o)}
	if !o.Analysis.NullMissing {
		all = append(all, evidenceMethod(o))
	}
	if rest := otherMethods(s, o); rest != "" {
		all = append(all, rest)
	}
	return all
}

// poolingMethod says how the mean, its interval, the spread and the prediction were got.
func poolingMethod(s *synthesis.Synthesis, o *synthesis.Outcome) string {
	fit := o.Result.Fit
	measure := Measure(o.Analysis.Measure)
	scale := measure + "s"
	switch {
	case o.Analysis.Measure.Log():
		scale = "logarithms of " + measure + "s"
	case effect.ToReader(o.Analysis.Measure, 0.5) != 0.5:
		scale = "transformed " + measure + "s"
	}
	if fit.Mean.K == 1 {
		return fmt.Sprintf("One %s was found; its %s is given with a %s interval, and nothing is pooled.", Noun(s, 1), measure, Level(fit.Model.Level))
	}
	if fit.Method != "" {
		return fmt.Sprintf("Counts were pooled as they stand, as a %s: %s. Intervals are at %s.", measure, Model(fit), Level(fit.Model.Level))
	}
	var text string
	if fit.Model.Effects == meta.CommonEffect {
		text = fmt.Sprintf("We pooled %s by inverse variance in a common-effect model, with %s intervals by %s.", scale, Level(fit.Model.Level), intervalSource(fit.Model.Interval))
	} else {
		text = fmt.Sprintf("We pooled %s by inverse variance in a random-effects model, with the variance between %s by %s and %s intervals by %s.",
			scale, Noun(s, 2), TauMethod(fit.Model.Tau), Level(fit.Model.Level), intervalSource(fit.Model.Interval))
	}
	text += " Heterogeneity is given as Q and I² (Higgins and Thompson 2002)"
	if fit.Model.Effects == meta.RandomEffects {
		text += ", and as τ with its interval by the Q-profile (Viechtbauer 2007)"
	}
	text += "."
	if fit.Prediction != nil {
		text += " " + predictionSource(fit.Prediction.Method)
	}
	return text
}

func intervalSource(m meta.IntervalMethod) string {
	switch m {
	case meta.HartungKnapp:
		return "the method of Hartung and Knapp (2001)"
	case meta.HartungKnappFloor:
		return "the method of Hartung and Knapp (2001), never narrower than the usual interval (Röver, Knapp and Friede 2015)"
	case meta.ProfileLikelihood:
		return "profile likelihood (Hardy and Thompson 1996)"
	case meta.HenmiCopas:
		return "the method of Henmi and Copas (2010)"
	}
	return "the normal law (Wald)"
}

func predictionSource(m meta.PredictionMethod) string {
	switch m {
	case meta.PredictionOneLess:
		return "The prediction interval uses t on k − 1 degrees of freedom."
	case meta.PredictionBootstrap:
		return "The prediction interval is by the parametric bootstrap (Nagashima, Noma and Furukawa 2019)."
	}
	return "The prediction interval uses t on k − 2 degrees of freedom (Higgins, Thompson and Spiegelhalter 2009)."
}

// evidenceMethod says how the evidence was weighed.
func evidenceMethod(o *synthesis.Outcome) string {
	fit := o.Result.Fit
	text := "The evidence ratio is the empirical Bayes factor for an effect against none (Dudbridge 2024)"
	if !o.Analysis.Weighing.Own() {
		text = fmt.Sprintf("The evidence ratio for an effect against none is %s: %s", strings.TrimPrefix(EvidenceName(o.Analysis.Weighing.Form), "evidence "), Rests(o))
	}
	student := fit.Model.Interval == meta.HartungKnapp || fit.Model.Interval == meta.HartungKnappFloor
	switch {
	case !o.Analysis.Weighing.Own():
	case student && fit.Model.Evidence == evidence.StudentForm && fit.Method == "" && fit.Mean.K > 1:
		text += ", in its form for Student’s t"
	case fit.Method == "" && fit.Mean.K > 1 && student:
		text += ", taken at the z that has the same two-sided p as the interval’s t, so that it agrees with the interval"
	case fit.Method != "":
		text += ", matched to the interval of the method"
	}
	text += ". It is stated as n : 1 and in steps; one step is a factor of 2 + √3 = 3.73. Words: faint below 1 step, fair from 1, firm from 2, heavy from 3, massive from 4."
	if len(o.Result.Regions) > 0 {
		text += " Evidence on a range of effects weighs the range against all other values of the mean effect; the share of settings comes from the prediction distribution."
		if other := RegionForm(o); other != "" {
			text += " " + other
		}
	}
	return text + " Odds after the data are odds before, times the ratio."
}

// otherMethods says what else was done to the numbers.
func otherMethods(s *synthesis.Synthesis, o *synthesis.Outcome) string {
	var all []string
	if o.Analysis.Correction != effect.NoCorrection && o.Counts.Corrected > 0 {
		all = append(all, fmt.Sprintf("%s with a zero cell had the correction %q.", Number(o.Counts.Corrected, "table", "tables"), o.Analysis.Correction))
	}
	if text := Converted(o); text != "" {
		all = append(all, "Converted: "+text+".")
	}
	if len(o.Runs) > 0 {
		all = append(all, fmt.Sprintf("%s planned beforehand; all are shown.", Capital(Number(len(o.Runs), "sensitivity run was", "sensitivity runs were"))))
	}
	if a := o.Accrual; a != nil && len(a.Cumulative) > 0 {
		order := "by date"
		switch {
		case a.Order.By == synthesis.OrderByFile:
			order = "in the order of the sheet"
		case a.Order.By != synthesis.OrderByDate:
			order = "by " + a.Order.By
		}
		ties := "ties entering together"
		if a.Order.Ties == review.TiesFile {
			ties = "ties in the order of the sheet"
		}
		all = append(all, fmt.Sprintf("In the cumulative analysis the %s enter %s, %s, and the model is fitted anew each time; so it is without each %s.", Noun(s, 2), order, ties, Noun(s, 1)))
	}
	return strings.Join(all, " ")
}
