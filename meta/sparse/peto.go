package sparse

import (
	"math"

	"steelyard/meta/effect"
	"steelyard/meta/numeric"
)

// peto pools observed minus expected events of the treated arm, O − E, with
// their variances V given the margins: log odds ratio Σ(O−E)/ΣV with standard
// error 1/√ΣV. Weights are V, and the heterogeneity
//
//	ΣV((O−E)/V − estimate)² = Σ(O−E)²/V − (Σ(O−E))²/ΣV.
//
// It is always finite, and close to the odds ratio only where effects are small
// and arms of like size: see Advise.
//
// Source: Yusuf, Peto, Lewis, Collins & Sleight (1985), Progress in
// Cardiovascular Diseases 27:335-371.
func (m Model) peto(tables []effect.Table) (*Result, error) {
	differences, variances := make([]float64, len(tables)), make([]float64, len(tables))
	var difference, variance, q numeric.Sum
	for i, t := range tables {
		d, v, err := effect.Peto(t)
		if err != nil {
			return nil, &TableError{Index: i, Err: err}
		}
		differences[i], variances[i] = d, v
		difference.Add(d)
		variance.Add(v)
	}
	estimate := difference.Value() / variance.Value()
	for i, v := range variances {
		gap := differences[i] - v*estimate
		q.Add(gap * gap / v)
	}
	r := m.wald(estimate, 1/math.Sqrt(variance.Value()))
	r.Weights = variances
	r.Mean.Q = q.Value()
	r.Heterogeneity = scattered(AboutEstimate, q.Value(), len(tables))
	return r, nil
}
