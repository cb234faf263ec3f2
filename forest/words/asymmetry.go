package words

import (
	"fmt"
	"math"

	"steelyard/meta"
	"steelyard/meta/missing"
	"steelyard/meta/synthesis"
)

// AsymmetryStatistic returns the statistic of a test.
func AsymmetryStatistic(t synthesis.AsymmetryTest) string {
	switch {
	case t.Slope != nil:
		return fmt.Sprintf("t = %s on %s df", Linear(t.Slope.Statistic, 2), Count(int(t.Slope.DF)))
	case t.Tau != nil:
		return "Kendall's tau " + Linear(*t.Tau, 2)
	}
	return "χ² = " + Linear(*t.Chi2, 2) + " on 1 df"
}

// AdjustedName says by what a result is adjusted, and what that found.
func AdjustedName(r synthesis.AdjustedResult) string {
	name := r.Method.Title()
	switch {
	case r.Missing != nil && *r.Missing == 0:
		return name + ": none missing"
	case r.Missing != nil:
		return fmt.Sprintf("%s: %d missing %s", name, *r.Missing, r.Side)
	case r.Square != nil && *r.Square:
		return name + ": PEESE"
	case r.Square != nil:
		return name + ": PET"
	case r.Rate != nil:
		return fmt.Sprintf("%s: rate %s", name, Ratio(*r.Rate))
	case r.Method == missing.EggerMixedEffects:
		return "Egger's line, mixed effects"
	case r.Method == missing.EggerClassical:
		return "Egger's line"
	case r.Method == missing.PetersTest:
		return "Peters' line"
	}
	return name
}

// AdjustedInterval returns an estimate with its interval, of which a side may be open.
func AdjustedInterval(o *synthesis.Outcome, m meta.Mean) string {
	value := func(y float64) string { return ReaderValue(o, y) }
	low, high := math.IsInf(m.Low, -1), math.IsInf(m.High, 1)
	switch {
	case low && high:
		return value(m.Estimate) + " (no limits)"
	case low:
		return fmt.Sprintf("%s (no limit to %s)", value(m.Estimate), value(m.High))
	case high:
		return fmt.Sprintf("%s (%s to no limit)", value(m.Estimate), value(m.Low))
	}
	return Reader(o, m.Estimate, meta.Limits{Low: m.Low, High: m.High})
}
