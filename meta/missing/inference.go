package missing

import (
	"math"

	"steelyard/meta"
)

// finite returns an error if a number of a mean beside its limits is none.
func finite(m meta.Mean) error {
	for _, x := range []float64{m.Estimate, m.SE, m.Statistic, m.LnP, m.Tau2, m.Evidence.Ln()} {
		if math.IsNaN(x) || math.IsInf(x, 0) {
			return &InputError{Index: -1, Problem: "the result exceeds the range of numbers: use another unit for the estimates"}
		}
	}
	return nil
}

// againstZero is the model for a slope: its null is no slope.
func againstZero(m meta.Model) meta.Model {
	m.Null = 0
	return m
}
