package panel

import (
	"fmt"

	"steelyard/meta/effect"
)

// MeasureError reports an effect measure that has no absolute form at a baseline.
type MeasureError struct {
	Measure effect.Measure
	Why     string // why it has none, and what there is instead
}

func (e *MeasureError) Error() string {
	return fmt.Sprintf("%s has no absolute effect at a baseline risk: %s", e.Measure.WithArticle(), e.Why)
}

// InputError reports a number from which nothing can be computed.
type InputError struct{ Problem string }

func (e *InputError) Error() string { return e.Problem }

// refuse returns the error of a measure without an absolute form.
func refuse(m effect.Measure) error {
	why := "it compares no risks; judge it in its own unit"
	switch m {
	case effect.MeanDifference:
		why = "it is absolute already, in the unit of the outcome"
	case effect.StandardisedMeanDifference:
		why = "it counts standard deviations; state one to read it in a unit"
	case effect.RatioOfMeans:
		why = "it multiplies a mean; multiply the mean that you expect without treatment by it"
	case effect.Correlation:
		why = "a correlation compares no groups"
	case effect.Proportion, effect.ArcsineProportion, effect.DoubleArcsineProportion, effect.Rate:
		why = "it describes one group and is absolute already"
	case effect.Unspecified:
		why = "it is not stated what the estimates measure; state it with --measure"
	}
	return &MeasureError{Measure: m, Why: why}
}
