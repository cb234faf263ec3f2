package meta

import (
	"fmt"

	"steelyard/meta/choice"
	"steelyard/meta/numeric"
)

// CaveatKind says what a reader must know beside a result.
type CaveatKind int

// The kinds of caveat.
const (
	SingleStudy             CaveatKind = iota // one study: its own result, nothing pooled
	WaldForSingleStudy                        // another interval was asked for, one study has only its own
	TwoStudies                                // one degree of freedom
	FewStudies                                // fewer than five
	TauZero                                   // τ² estimated as 0
	LessScatterThanExpected                   // both limits of τ² are 0
	FloorForEqualEstimates                    // all estimates equal: the unmodified factor would be 0
	PredictionNeedsThree                      // no prediction interval for fewer than three studies
	PredictionWidened                         // the prediction would lie inside the interval for the mean
	FewDegrees                                // a robust variance with fewer than 4 degrees of freedom
)

var caveatNames = choice.Of[CaveatKind]("caveat",
	"single-study", "wald-for-single-study", "two-studies", "few-studies", "tau-zero",
	"less-scatter-than-expected", "floor-for-equal-estimates", "prediction-needs-three", "prediction-widened", "few-degrees")

// String returns the caveat's name, such as "two-studies".
func (k CaveatKind) String() string { return caveatNames.String(k) }

// CaveatNames returns the names of all caveats.
func CaveatNames() []string { return caveatNames.All() }

// ParseCaveat returns the caveat that text names.
func ParseCaveat(text string) (CaveatKind, error) { return caveatNames.Parse(text) }

// MarshalText writes the name of the caveat.
func (k CaveatKind) MarshalText() ([]byte, error) { return []byte(k.String()), nil }

// UnmarshalText reads the name of a caveat.
func (k *CaveatKind) UnmarshalText(text []byte) (err error) {
	*k, err = ParseCaveat(string(text))
	return err
}

// Caveat is something a reader must know beside a result.
type Caveat struct {
	Kind CaveatKind
	K    int     // number of studies
	Size float64 // TwoStudies: half-width of the interval in standard errors; FewDegrees: their number; else 0
}

// Text returns the caveat in a sentence or two.
func (c Caveat) Text() string {
	switch c.Kind {
	case SingleStudy:
		return "One study: the result is that study's own, and nothing can be said about spread between studies."
	case WaldForSingleStudy:
		return "The interval asked for needs two studies; the study's own (Wald) interval is given."
	case TwoStudies:
		return fmt.Sprintf("Two studies leave one degree of freedom: the interval reaches %.1f standard errors to each side. "+
			"Read it beside the common-effect result and the evidence integrated over τ.", c.Size)
	case FewStudies:
		return fmt.Sprintf("%d studies tell little about the spread between studies.", c.K)
	case TauZero:
		return "The spread between studies is estimated as 0, which does not show that there is none."
	case LessScatterThanExpected:
		return "The estimates scatter less than their standard errors imply; both limits of τ are 0. Check the standard errors."
	case FloorForEqualEstimates:
		return "All estimates are equal, so the Hartung–Knapp factor would be 0 and the interval a point; it was held at 1."
	case PredictionNeedsThree:
		return fmt.Sprintf("No prediction interval: it needs at least 3 studies, there are %d.", c.K)
	case FewDegrees:
		return fmt.Sprintf("The robust variance has %.1f degrees of freedom, fewer than 4: too few studies or one with most of the weight; p-value and evidence are rough.", c.Size)
	case PredictionWidened:
		return "The prediction interval would lie inside the interval for the mean; it was widened by the latter's own standard error."
	}
	return c.Kind.String()
}

// caveats returns what must be known beside a fit of the model as asked for.
func (p *Pooler) caveats(asked Model, f *Fit) []Caveat {
	k := p.data.k()
	var list []Caveat
	add := func(kind CaveatKind, when bool) {
		if when {
			list = append(list, Caveat{Kind: kind, K: k})
		}
	}
	random := p.model.Effects == RandomEffects
	add(SingleStudy, k == 1)
	add(WaldForSingleStudy, k == 1 && asked.Interval != DefaultInterval && asked.Interval != Wald)
	if k == 2 && f.Mean.DF == 1 {
		list = append(list, Caveat{Kind: TwoStudies, K: k, Size: numeric.StudentCritical(1-p.model.Level, 1)})
	} else {
		add(FewStudies, random && k > 1 && k < 5)
	}
	add(TauZero, random && k > 1 && p.final.tau2 == 0)
	add(LessScatterThanExpected, k > 1 && p.model.TauInterval == QProfile && f.Tau2.High == 0)
	add(FloorForEqualEstimates, p.floor)
	add(PredictionNeedsThree, random && k < 3)
	add(PredictionWidened, f.Prediction != nil && f.Prediction.Widened)
	return list
}
