// Package effect turns extracted numbers into an effect and its standard error
// on the analysis scale, as small pure functions, each with its source.
package effect

import "steelyard/meta/choice"

// Measure is what an outcome's estimates measure.
type Measure int

// The effect measures. Ratios are analysed as natural logarithms.
const (
	Unspecified Measure = iota
	OddsRatio
	RiskRatio
	RiskDifference
	HazardRatio
	RateRatio
	MeanDifference
	StandardisedMeanDifference
	RatioOfMeans
)

var measureNames = choice.Of[Measure]("effect measure",
	"unspecified", "odds ratio", "risk ratio", "risk difference", "hazard ratio", "rate ratio",
	"mean difference", "standardised mean difference", "ratio of means",
).With(map[string]Measure{
	"standardized mean difference": StandardisedMeanDifference,
	"relative risk":                RiskRatio,
	"absolute risk difference":     RiskDifference,
	"difference in means":          MeanDifference,
	"difference of means":          MeanDifference,
	"incidence rate ratio":         RateRatio,
})

// String returns the measure's name in words, such as "odds ratio".
func (m Measure) String() string { return measureNames.String(m) }

// MeasureNames returns the names of all measures.
func MeasureNames() []string { return measureNames.All() }

// ParseMeasure returns the measure that text names.
func ParseMeasure(text string) (Measure, error) { return measureNames.Parse(text) }

// MarshalText and UnmarshalText write and read the measure's name.
func (m Measure) MarshalText() ([]byte, error) { return []byte(m.String()), nil }

// UnmarshalText reads a measure's name.
func (m *Measure) UnmarshalText(text []byte) (err error) {
	*m, err = ParseMeasure(string(text))
	return err
}

// Log reports whether the measure is analysed as a natural logarithm.
func (m Measure) Log() bool {
	switch m {
	case OddsRatio, RiskRatio, HazardRatio, RateRatio, RatioOfMeans:
		return true
	}
	return false
}

// Null returns the value of no effect as a reader sees it: 1 for ratios, else 0.
func (m Measure) Null() float64 {
	if m.Log() {
		return 1
	}
	return 0
}
