// Package effect turns extracted numbers into an effect and its standard error
// on the analysis scale, as small pure functions, each with its source.
package effect

import (
	"strings"

	"steelyard/meta/choice"
)

// Measure is what an outcome's estimates measure.
type Measure int

// The effect measures. Ratios and rates are analysed as natural logarithms, a
// correlation as Fisher's z, a proportion as its logit or as the arcsine of its
// square root; ToReader and FromReader go to and fro. The double arcsine is for
// those who ask for it: pooled, its way back to a proportion can mislead
// (Schwarzer et al. 2019, Research Synthesis Methods 10:476-483).
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
	Correlation
	Proportion
	ArcsineProportion
	DoubleArcsineProportion
	Rate
	ArcsineDifference
)

var measureNames = choice.Of[Measure]("effect measure",
	"unspecified", "odds ratio", "risk ratio", "risk difference", "hazard ratio", "rate ratio",
	"mean difference", "standardised mean difference", "ratio of means",
	"correlation", "proportion", "arcsine proportion", "double arcsine proportion", "rate", "arcsine difference",
).With(map[string]Measure{
	"standardized mean difference": StandardisedMeanDifference,
	"relative risk":                RiskRatio,
	"absolute risk difference":     RiskDifference,
	"difference in means":          MeanDifference,
	"difference of means":          MeanDifference,
	"incidence rate ratio":         RateRatio,
	"correlation coefficient":      Correlation,
	"incidence rate":               Rate,
	"event rate per person time":   Rate,
	"weighted mean difference":     MeanDifference,
	"mean diff":                    MeanDifference,
	"mean diff.":                   MeanDifference,
	"hazards ratio":                HazardRatio,
	// The trade's own abbreviations.
	"or":  OddsRatio,
	"rr":  RiskRatio,
	"rd":  RiskDifference,
	"hr":  HazardRatio,
	"irr": RateRatio,
	"md":  MeanDifference,
	"wmd": MeanDifference,
	"smd": StandardisedMeanDifference,
})

// String returns the measure's name in words, such as "odds ratio".
func (m Measure) String() string { return measureNames.String(m) }

// WithArticle returns the measure's name after "a" or "an", for sentences.
func (m Measure) WithArticle() string {
	name := m.String()
	if strings.ContainsRune("aeiou", rune(name[0])) {
		return "an " + name
	}
	return "a " + name
}

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
	case OddsRatio, RiskRatio, HazardRatio, RateRatio, RatioOfMeans, Rate:
		return true
	}
	return false
}

// HasNull reports whether "no effect" has a value of its own. A proportion or a
// rate of one arm has none: evidence for or against an effect means something
// only against a value that the review has stated.
func (m Measure) HasNull() bool {
	switch m {
	case Proportion, ArcsineProportion, DoubleArcsineProportion, Rate:
		return false
	}
	return true
}

// Null returns the value of no effect as a reader sees it: 1 for ratios, else 0.
// On the analysis scale that is 0 for every measure. Where HasNull is false the
// 0 returned is no null, and nothing may be weighed against it.
func (m Measure) Null() float64 {
	if m.Log() && m.HasNull() {
		return 1
	}
	return 0
}
