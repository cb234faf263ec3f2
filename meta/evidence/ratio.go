package evidence

import (
	"math"

	"steelyard/meta/choice"
)

// StepBase is the factor of one step on the scale of evidence: the odds at which
// a logistic belief curve bends most.
//
// Source: Dudbridge (2024), PLoS ONE 19(2):e0297874.
const StepBase = 2 + 1.7320508075688772935274463415058723669428

// LnStep is ln(2+√3).
const LnStep = 1.3169578969248167086250463473079684440270

// Ratio is an evidence ratio of H1 (an effect) over H0 (none), or of one region
// over another. The zero value is a ratio of 1: the data favour neither.
type Ratio struct{ ln float64 }

// FromLn returns the ratio whose natural logarithm is ln.
func FromLn(ln float64) Ratio { return Ratio{ln: ln} }

// Ln returns the natural logarithm of the ratio.
func (r Ratio) Ln() float64 { return r.ln }

// Odds returns the ratio itself, which may overflow to +Inf or underflow to 0
// where the logarithm does not.
func (r Ratio) Odds() float64 { return math.Exp(r.ln) }

// Steps returns the evidence in steps: ln ratio / ln(2+√3), negative when it
// favours H0.
func (r Ratio) Steps() float64 { return r.ln / LnStep }

// Favours returns the hypothesis that the data favour; a ratio of exactly 1 is
// counted for no effect.
func (r Ratio) Favours() Hypothesis {
	if r.ln > 0 {
		return Effect
	}
	return NoEffect
}

// Word returns the word for the strength of the evidence, whichever hypothesis
// it favours.
func (r Ratio) Word() Word {
	switch steps := math.Abs(r.Steps()); {
	case steps >= 4:
		return Massive
	case steps >= 3:
		return Heavy
	case steps >= 2:
		return Firm
	case steps >= 1:
		return Fair
	}
	return Faint
}

// Inverse returns the evidence of H0 over H1, or of the second region over the
// first.
func (r Ratio) Inverse() Ratio { return Ratio{ln: -r.ln} }

// Hypothesis is one of the two that are weighed.
type Hypothesis int

// The hypotheses: H0 and H1.
const (
	NoEffect Hypothesis = iota
	Effect
)

var hypothesisNames = choice.Of[Hypothesis]("hypothesis", "no effect", "effect")

// String returns "no effect" or "effect".
func (h Hypothesis) String() string { return hypothesisNames.String(h) }

// HypothesisNames returns the names of both hypotheses.
func HypothesisNames() []string { return hypothesisNames.All() }

// ParseHypothesis returns the hypothesis that text names.
func ParseHypothesis(text string) (Hypothesis, error) { return hypothesisNames.Parse(text) }

// MarshalText writes the name of the hypothesis.
func (h Hypothesis) MarshalText() ([]byte, error) { return []byte(h.String()), nil }

// UnmarshalText reads the name of a hypothesis.
func (h *Hypothesis) UnmarshalText(text []byte) (err error) {
	*h, err = ParseHypothesis(string(text))
	return err
}

// Word names the strength of evidence by the number of whole steps. The words
// are not ratings of certainty.
type Word int

// The words: below 1 step, from 1 (3.7 : 1), from 2 (13.9 : 1), from 3 (52 : 1),
// from 4 (194 : 1).
const (
	Faint Word = iota
	Fair
	Firm
	Heavy
	Massive
)

var wordNames = choice.Of[Word]("word for evidence", "faint", "fair", "firm", "heavy", "massive")

// String returns the word.
func (w Word) String() string { return wordNames.String(w) }

// WordNames returns all words, weakest first.
func WordNames() []string { return wordNames.All() }

// ParseWord returns the word that text names.
func ParseWord(text string) (Word, error) { return wordNames.Parse(text) }

// MarshalText writes the word.
func (w Word) MarshalText() ([]byte, error) { return []byte(w.String()), nil }

// UnmarshalText reads a word.
func (w *Word) UnmarshalText(text []byte) (err error) {
	*w, err = ParseWord(string(text))
	return err
}

// Form is a form of evidence for an effect.
type Form int

// Empirical is the default: the empirical Bayes factor, beside a Student-t
// interval at the z that has the p-value of t. StudentForm is derived from the t
// likelihood itself. The others rest on prior distributions, which bayes.Weighing
// holds: Integrated over the spread τ, Averaged over τ = 0 and τ > 0, or the
// Bayes factor under a normal or a Cauchy prior for the effect.
const (
	Empirical Form = iota
	StudentForm
	IntegratedForm
	AveragedForm
	NormalPriorForm
	CauchyPriorForm
)

var formNames = choice.Of[Form]("form of evidence", "empirical", "student-t", "integrated", "averaged", "normal-prior", "cauchy-prior")

// String returns the form's name, such as "empirical".
func (f Form) String() string { return formNames.String(f) }

// OverTau reports whether the form integrates τ over a prior, for which it needs
// the studies' own estimates.
func (f Form) OverTau() bool { return f == IntegratedForm || f == AveragedForm }

// UnderPrior reports whether the form is a Bayes factor under a prior for the
// effect.
func (f Form) UnderPrior() bool { return f == NormalPriorForm || f == CauchyPriorForm }

// FormNames returns the names of all forms.
func FormNames() []string { return formNames.All() }

// ParseForm returns the form that text names.
func ParseForm(text string) (Form, error) { return formNames.Parse(text) }

// MarshalText writes the name of the form.
func (f Form) MarshalText() ([]byte, error) { return []byte(f.String()), nil }

// UnmarshalText reads the name of a form.
func (f *Form) UnmarshalText(text []byte) (err error) {
	*f, err = ParseForm(string(text))
	return err
}
