package words

import (
	"fmt"
	"strings"

	"steelyard/meta"
	"steelyard/meta/bayes"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
	"steelyard/meta/synthesis"
)

// Rests says in one sentence what the evidence of an outcome rests on in a form other
// than the empirical one; blank for that.
func Rests(o *synthesis.Outcome) string {
	w := o.Analysis.Weighing
	switch form := o.FormOf(o.Result.Fit); {
	case form == evidence.StudentForm:
		return "Student-t form: from the t likelihood itself, the standard error being unknown too; heavier at both ends than the form matched to p"
	case form == evidence.IntegratedForm:
		return fmt.Sprintf("posterior Bayes factor, %s and the mean over a flat one, corrected by ½ for using the data twice", TauPrior(w.Tau)) + exceeded(o)
	case form == evidence.AveragedForm:
		return fmt.Sprintf("averaged over τ = 0 and τ > 0, equally probable before; in the second %s", TauPrior(w.Tau)) + exceeded(o)
	case form.UnderPrior():
		text := "Bayes factor, prior for the effect: " + EffectPrior(o.Analysis.Measure, o.Result.Fit.Model.Null, w.Effect)
		if at, err := bayes.Matched(o.Result.Fit.Mean.Location(), o.Result.Fit.Model.Null); err == nil {
			text += fmt.Sprintf("; weighed at z = %s, matched to the interval", Linear(at.Z(), 2))
		}
		return text
	}
	return ""
}

// exceeded warns of a prior for τ that the estimate of τ leaves.
func exceeded(o *synthesis.Outcome) string {
	if d := o.Result.Differing; d != nil && d.Exceeded {
		return ", which the estimate of τ exceeds twice: doubt it"
	}
	return ""
}

// OtherForm gives the evidence in the empirical form beside another that rests on
// priors; blank where there is none.
func OtherForm(o *synthesis.Outcome) string {
	own := o.Result.Empirical
	if own == nil {
		return ""
	}
	return fmt.Sprintf("in the empirical form: %s, %s", Evidence(*own), Strength(*own))
}

// EffectPrior words a prior for the effect: "normal prior for the log risk ratio
// round no effect, standard deviation 0.5: 95% of it from 0.38 to 2.66".
func EffectPrior(m effect.Measure, null float64, p bayes.EffectPrior) string {
	unit := "estimate"
	switch {
	case m.Log():
		unit = "log ratio"
	case m != effect.Unspecified:
		unit = Measure(m)
	}
	reader := func(y float64) string {
		notation := NotationOf(m, p.Scale)
		notation.Decimals = max(notation.Decimals, Decimals(p.Scale))
		return notation.Value(effect.ToReader(m, y))
	}
	where := "round no effect"
	if p.Mean != 0 {
		where = "round " + reader(null+p.Mean)
	}
	if p.Kind == bayes.CauchyPrior {
		return fmt.Sprintf("Cauchy for the %s %s, scale %s: half of it from %s to %s", unit, where, PriorScale(p.Scale), reader(null-p.Scale), reader(null+p.Scale)) + PriorSide(p.Side)
	}
	half := numeric.NormalCritical(0.05) * p.Scale
	return fmt.Sprintf("normal for the %s %s, standard deviation %s: 95%% of it from %s to %s", unit, where, PriorScale(p.Scale), reader(null+p.Mean-half), reader(null+p.Mean+half)) + PriorSide(p.Side)
}

// PriorKind names a family of priors for the effect: "normal", "Cauchy".
func PriorKind(k bayes.EffectPriorKind) string {
	if k == bayes.CauchyPrior {
		return "Cauchy"
	}
	return k.String()
}

// PriorSide says on which side of no effect a prior is cut off; blank for neither.
func PriorSide(s bayes.Side) string {
	switch s {
	case bayes.AboveNull:
		return ", cut to effects above no effect"
	case bayes.BelowNull:
		return ", cut to effects below no effect"
	}
	return ""
}

// ModelOf returns the model and methods behind an outcome's result with the form of
// its evidence; see Model.
func ModelOf(o *synthesis.Outcome) string { return FormText(o, Model(o.Result.Fit)) }

// FormText puts the form of an outcome's evidence in place of the one that belongs to
// its interval, in a text about its methods.
func FormText(o *synthesis.Outcome, text string) string {
	form := o.Analysis.Weighing.Form
	if o.Analysis.Weighing.Own() {
		return text
	}
	text = strings.TrimSuffix(text, ", evidence matched to it")
	text = strings.TrimSuffix(text, ", evidence from the likelihood ratio")
	return text + ", " + formNames[form]
}

var formNames = map[evidence.Form]string{
	evidence.IntegratedForm:  "evidence integrated over τ",
	evidence.AveragedForm:    "evidence averaged over models of τ",
	evidence.NormalPriorForm: "evidence under a normal prior for the effect",
	evidence.CauchyPriorForm: "evidence under a Cauchy prior for the effect",
}

// RegionForm says that regions are weighed in a form of their own; blank where they
// are of the result's form.
func RegionForm(o *synthesis.Outcome) string {
	if len(o.Result.Regions) == 0 || o.Analysis.Weighing.Own() {
		return ""
	}
	return fmt.Sprintf("These ranges are weighed in the empirical form, not with the %s.", formNames[o.Analysis.Weighing.Form])
}

// StudyForm says that each study alone is weighed in a form of its own, for a chart
// that shows both; blank where they have the result's form.
func StudyForm(o *synthesis.Outcome) string {
	if o.Analysis.Weighing.Own() || o.Analysis.NullMissing {
		return ""
	}
	return "Each study alone in the normal form."
}

// OtherEvidence returns the evidence of a fit beside the outcome's result, saying so
// where it is of another form.
func OtherEvidence(o *synthesis.Outcome, fit *meta.Fit) string {
	text := Evidence(fit.Mean.Evidence)
	if !o.Weighs(fit) {
		text += ", in the empirical form"
	}
	return text
}

// EvidenceName names a form of evidence as a noun.
func EvidenceName(form evidence.Form) string {
	switch form {
	case evidence.StudentForm:
		return "Student-t form"
	case evidence.Empirical:
		return "empirical Bayes factor"
	}
	return formNames[form]
}

// NeedsScale says which prior scale an outcome's evidence needs, if any.
func NeedsScale(o *synthesis.Outcome) string {
	w := o.Analysis.Weighing
	switch {
	case w.Form.UnderPrior():
		return fmt.Sprintf("which is that of the stated prior, of scale %s", PriorScale(w.Effect.Scale))
	case w.Form.OverTau():
		return "which needs no scale for the effect but one for τ"
	}
	return "which needs no prior scale"
}
