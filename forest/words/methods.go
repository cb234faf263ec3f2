package words

import (
	"steelyard/meta"
	"steelyard/meta/evidence"
	"steelyard/meta/review"
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
		return "its own result: there is nothing to pool"
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
