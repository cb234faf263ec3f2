package words

import (
	"fmt"

	"steelyard/meta"
	"steelyard/meta/dependence"
	"steelyard/meta/evidence"
	"steelyard/meta/review"
	"steelyard/meta/sparse"
	"steelyard/meta/synthesis"
)

// TauMethod returns an estimator's usual name.
func TauMethod(t meta.TauMethod) string {
	return map[meta.TauMethod]string{
		meta.DerSimonianLaird:        "DerSimonian–Laird",
		meta.TwoStepDerSimonianLaird: "two-step DerSimonian–Laird",
		meta.HedgesOlkin:             "Hedges–Olkin",
		meta.HunterSchmidt:           "Hunter–Schmidt",
		meta.SidikJonkman:            "Sidik–Jonkman",
		meta.PauleMandel:             "Paule–Mandel",
		meta.MaximumLikelihood:       "maximum likelihood",
		meta.RestrictedML:            "restricted maximum likelihood",
	}[t]
}

// IntervalMethod returns an interval method's usual name.
func IntervalMethod(m meta.IntervalMethod) string {
	return map[meta.IntervalMethod]string{
		meta.Wald:              "Wald interval",
		meta.HartungKnapp:      "Hartung–Knapp interval without floor",
		meta.HartungKnappFloor: "Hartung–Knapp interval",
		meta.ProfileLikelihood: "profile-likelihood interval",
		meta.HenmiCopas:        "Henmi–Copas interval",
	}[m]
}

// Model returns the model and methods of a fit: "random effects, restricted
// maximum likelihood; Hartung–Knapp interval, evidence matched to it"; for a
// single study "its own result: there is nothing to pool".
func Model(fit *meta.Fit) string {
	if fit.Mean.K == 1 {
		if method, err := sparse.ParseMethod(fit.Method); err == nil {
			return fmt.Sprintf("its own result by %s: there is nothing to pool", method)
		}
		return "its own result: there is nothing to pool"
	}
	if fit.Clustered != nil {
		return clusteredModel(fit)
	}
	if text := tableModel(fit); text != "" {
		return text
	}
	model := "common effect"
	if fit.Model.Effects == meta.RandomEffects {
		model = "random effects, " + TauMethod(fit.Model.Tau)
	}
	student := fit.Model.Interval == meta.HartungKnapp || fit.Model.Interval == meta.HartungKnappFloor
	if fit.Model.Evidence == evidence.StudentForm && student {
		return model + "; " + IntervalMethod(fit.Model.Interval) + ", evidence in the Student-t form"
	}
	return model + "; " + IntervalMethod(fit.Model.Interval) + ", evidence matched to it"
}

// clusteredModel is Model for a fit that allows for several estimates from one study.
func clusteredModel(fit *meta.Fit) string {
	c := fit.Clustered
	text := fmt.Sprintf("random effects between and within studies (three levels), restricted maximum likelihood; t interval on %d df, one fewer than studies", c.Clusters-1)
	if c.Way == dependence.Robust.String() {
		model := "common effect"
		if fit.Model.Effects == meta.RandomEffects {
			model = "random effects, " + TauMethod(fit.Model.Tau)
		}
		text = model + "; bias-reduced robust variance for estimates from one study, t interval on Satterthwaite's df"
	}
	if fit.Model.Evidence == evidence.StudentForm {
		return text + ", evidence in the Student-t form"
	}
	return text + ", evidence matched to it"
}

// tableModel is Model for a fit by a method for 2×2 tables; blank for another.
func tableModel(fit *meta.Fit) string {
	switch method, err := sparse.ParseMethod(fit.Method); {
	case err != nil:
		return ""
	case method == sparse.MantelHaenszel:
		return "common effect by Mantel–Haenszel; Wald interval, evidence matched to it"
	case method == sparse.Peto:
		return "common effect by Peto's observed minus expected events; Wald interval, evidence matched to it"
	case method == sparse.ConditionalExact:
		return "common effect by exact conditional likelihood; exact interval, evidence from the likelihood ratio"
	case fit.Model.Effects == meta.RandomEffects:
		return "random effects by the binomial–normal model, maximum likelihood; profile-likelihood interval, evidence matched to it"
	}
	return "common effect by the binomial model with an intercept for each study; profile-likelihood interval, evidence matched to it"
}

// Method returns a pooling method's name with its effects: "inverse variance,
// random effects", "Peto, common effect".
func Method(m review.Method, effects meta.Effects) string {
	name := map[review.Method]string{
		review.InverseVariance: "inverse variance", review.MantelHaenszel: "Mantel–Haenszel", review.Peto: "Peto",
		review.ConditionalExact: "conditional exact", review.BinomialNormal: "binomial–normal",
	}[m]
	if method, isTables := m.Tables(); isTables && !method.Random() {
		return name
	}
	return name + ", " + effects.String()
}

// Noun returns what the sheet calls its rows, for n of them: "trial" where its
// column of names says so, else "study".
func Noun(s *synthesis.Synthesis, n int) string {
	one, many := "study", "studies"
	if s.Trials {
		one, many = "trial", "trials"
	}
	if n == 1 {
		return one
	}
	return many
}

// wantedSide returns the side of the null on which a wanted effect lies.
func wantedSide(b review.Better) string {
	switch b {
	case review.BetterLower:
		return "below"
	case review.BetterHigher:
		return "above"
	}
	return ""
}
