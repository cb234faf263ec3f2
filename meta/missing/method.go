package missing

import "steelyard/meta/choice"

// Method is a test of asymmetry, or an estimate adjusted for it.
type Method int

// The methods.
const (
	EggerClassical Method = iota
	EggerMixedEffects
	PetersTest
	HarbordTest
	BeggMazumdarTest
	TrimAndFillL
	TrimAndFillR
	PrecisionEffect // PET–PEESE
	OneStepSelection
)

var methodNames = choice.Of[Method]("small-study method",
	"egger", "egger-mixed-effects", "peters", "harbord", "begg-mazumdar",
	"trim-and-fill-l", "trim-and-fill-r", "pet-peese", "one-step-selection")

// String returns the method's name, such as "trim-and-fill-l".
func (m Method) String() string { return methodNames.String(m) }

// MethodNames returns the names of all methods.
func MethodNames() []string { return methodNames.All() }

// ParseMethod returns the method that text names.
func ParseMethod(text string) (Method, error) { return methodNames.Parse(text) }

// MarshalText writes the name of the method.
func (m Method) MarshalText() ([]byte, error) { return []byte(m.String()), nil }

// UnmarshalText reads the name of a method.
func (m *Method) UnmarshalText(text []byte) (err error) {
	*m, err = ParseMethod(string(text))
	return err
}

// about says of a method what it is called, what it assumes and who published it.
type about struct{ title, assumption, source string }

var abouts = map[Method]about{
	EggerClassical: {"Egger's regression",
		"effects change in proportion to the standard error, and all scatter grows with it",
		"Egger et al. 1997, BMJ 315:629"},
	EggerMixedEffects: {"Egger's regression, mixed effects",
		"effects change in proportion to the standard error, and true effects scatter by τ around that line",
		"Sterne and Egger 2005, in Publication Bias in Meta-Analysis, ch. 6; Knapp and Hartung 2003, Stat Med 22:2693"},
	PetersTest: {"Peters' regression",
		"the log odds ratio changes with one over the number of people, which does not depend on the effect as its standard error does",
		"Peters et al. 2006, JAMA 295:676"},
	HarbordTest: {"Harbord's score test",
		"the score of the odds ratio changes with its information; right for odds ratios near 1",
		"Harbord et al. 2006, Stat Med 25:3443"},
	BeggMazumdarTest: {"Begg and Mazumdar's rank test",
		"effects and variances are unrelated in rank if nothing is missing; little power below 25 studies",
		"Begg and Mazumdar 1994, Biometrics 50:1088"},
	TrimAndFillL: {"Trim and fill, L",
		"the studies that are missing are those with the most extreme effects on one side, and the rest is symmetric",
		"Duval and Tweedie 2000, Biometrics 56:455"},
	TrimAndFillR: {"Trim and fill, R",
		"as L, counted by the run of extreme effects on the other side alone",
		"Duval and Tweedie 2000, Biometrics 56:455"},
	PrecisionEffect: {"PET–PEESE",
		"the effect of a study without error lies on a line in the standard error (PET), or in its square (PEESE) once that line shows an effect; its interval takes the choice as given",
		"Stanley and Doucouliagos 2014, Res Synth Methods 5:60"},
	OneStepSelection: {"Selection by p, one step",
		"results whose one-sided p lies above the step stay unseen at one common rate, and true effects scatter normally",
		"Vevea and Hedges 1995, Psychometrika 60:419"},
}

// Title returns the method's usual name.
func (m Method) Title() string { return abouts[m].title }

// Assumption says in a line what the method takes for granted.
func (m Method) Assumption() string { return abouts[m].assumption }

// Source names the publication.
func (m Method) Source() string { return abouts[m].source }

// Side is the side of the effects on which studies are missing.
type Side int

// The sides.
const (
	Lower Side = iota
	Higher
)

var sideNames = choice.Of[Side]("side", "lower", "higher")

// String returns "lower" or "higher".
func (s Side) String() string { return sideNames.String(s) }

// SideNames returns the names of the sides.
func SideNames() []string { return sideNames.All() }
