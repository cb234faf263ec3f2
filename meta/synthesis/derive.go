package synthesis

import (
	"errors"
	"fmt"
	"slices"

	"steelyard/meta/effect"
	"steelyard/meta/numeric"
	"steelyard/meta/review"
)

// Basis says which of a row's numbers its effect was taken from.
type Basis int

// The bases, in the order of preference: what was counted or measured goes
// before what was reported about it.
const (
	NoBasis Basis = iota
	FromCounts
	FromMeans
	FromEstimateSE
	FromEstimateLimits
)

// basisOf returns the best basis that a row's numbers make complete.
func basisOf(row *review.Study) Basis {
	has := func(fields ...review.Field) bool {
		for _, f := range fields {
			if _, ok := row.Number(f); !ok {
				return false
			}
		}
		return true
	}
	spread := func(sd, se review.Field) bool { return has(sd) || has(se) }
	estimate := has(review.Estimate) || has(review.AnalysisEstimate)
	switch {
	case has(review.EventsTreated, review.TotalTreated, review.EventsControl, review.TotalControl):
		return FromCounts
	case has(review.MeanTreated, review.TotalTreated, review.MeanControl, review.TotalControl) &&
		spread(review.SDTreated, review.SETreated) && spread(review.SDControl, review.SEControl):
		return FromMeans
	case estimate && has(review.StandardError):
		return FromEstimateSE
	case estimate && (has(review.LimitLow, review.LimitHigh) || has(review.AnalysisLow, review.AnalysisHigh)):
		return FromEstimateLimits
	}
	return NoBasis
}

// derive turns the rows into effects; a row that yields none is excluded, with a
// finding if the sheet is at fault.
func (o *Outcome) derive(rows []*review.Study) []review.Finding {
	var findings []review.Finding
	for _, row := range rows {
		study, err := deriveOne(row, o.Analysis)
		if err == nil {
			o.Studies = append(o.Studies, study)
			continue
		}
		f := review.Finding{Severity: review.Error, Rule: "I20", Place: row.Row, Study: row.Name, Outcome: o.Name, Message: err.Error()}
		if errors.Is(err, effect.ErrNothingToCompare) {
			f.Severity, f.Rule = review.Note, "C8"
		}
		o.exclude(row, f.Message, f.Severity == review.Error)
		findings = append(findings, f)
	}
	return findings
}

// deriveOne turns one row into an effect of the outcome's measure.
func deriveOne(row *review.Study, a Analysis) (Study, error) {
	study := Study{Source: row, Basis: basisOf(row)}
	value := func(f review.Field) float64 { n, _ := row.Number(f); return n.Value }
	var err error
	switch study.Basis {
	case FromCounts:
		table := effect.Table{
			Events1: value(review.EventsTreated), Total1: value(review.TotalTreated),
			Events2: value(review.EventsControl), Total2: value(review.TotalControl),
		}
		study.Estimate, study.Conversions, err = effect.FromTable(a.Measure, table, a.Correction)
		study.Corrected = slices.ContainsFunc(study.Conversions, func(c effect.Conversion) bool { return c.Added })
	case FromMeans:
		treated, control, made, problem := arms(row)
		if problem != nil {
			return study, problem
		}
		study.Estimate, study.Conversions, err = effect.FromArms(a.Measure, treated, control)
		study.Conversions = append(made, study.Conversions...)
	case FromEstimateSE, FromEstimateLimits:
		if row.Measure != effect.Unspecified && a.Measure != effect.Unspecified && row.Measure != a.Measure {
			return study, fmt.Errorf("the row gives a %s, which cannot be pooled as a %s", row.Measure, a.Measure)
		}
		study.Estimate, study.Conversions, err = reported(row, a)
	default:
		return study, errors.New("the row has no complete set of numbers: give an estimate with se or both limits, events and totals of both arms, or means, SDs and totals of both arms")
	}
	return study, err
}

// arms returns both arms of a row with means, with the conversions of standard
// errors to standard deviations.
func arms(row *review.Study) (treated, control effect.Arm, made []effect.Conversion, err error) {
	arm := func(mean, sd, se, total review.Field) effect.Arm {
		m, _ := row.Number(mean)
		n, _ := row.Number(total)
		a := effect.Arm{Mean: m.Value, N: n.Value}
		if s, ok := row.Number(sd); ok {
			a.SD = s.Value
			return a
		}
		s, _ := row.Number(se)
		value, conversion, problem := effect.SDFromSE(s.Value, n.Value)
		if problem != nil && err == nil {
			err = problem
		}
		a.SD, made = value, append(made, conversion)
		return a
	}
	treated = arm(review.MeanTreated, review.SDTreated, review.SETreated, review.TotalTreated)
	control = arm(review.MeanControl, review.SDControl, review.SEControl, review.TotalControl)
	return treated, control, made, err
}

// reported takes the row's own estimate with its standard error or limits. What
// stands on the analysis scale already is not logged again.
func reported(row *review.Study, a Analysis) (effect.Estimate, []effect.Conversion, error) {
	measure := a.Measure
	estimate, ok := row.Number(review.Estimate)
	lowField, highField := review.LimitLow, review.LimitHigh
	if !ok {
		measure = effect.Unspecified // linear: the numbers are on the analysis scale
		estimate, _ = row.Number(review.AnalysisEstimate)
	}
	if _, ok := row.Number(review.AnalysisLow); ok {
		lowField, highField = review.AnalysisLow, review.AnalysisHigh
	}
	if se, ok := row.Number(review.StandardError); ok {
		return effect.FromSE(measure, estimate.Value, se.Value)
	}
	low, _ := row.Number(lowField)
	high, _ := row.Number(highField)
	level := 0.95
	if l, ok := row.Number(review.LimitLevel); ok {
		level = l.Value
	}
	if measure.Log() && lowField == review.AnalysisLow {
		return effect.Estimate{}, nil, errors.New("the estimate is a ratio but its limits are logarithms; give both in the same form")
	}
	return effect.FromLimits(measure, estimate.Value, low.Value, high.Value, level)
}

// studyInterval returns the Wald interval of a single study.
func studyInterval(e effect.Estimate, level float64) (low, high float64) {
	half := numeric.NormalCritical(1-level) * e.SE
	return e.Y - half, e.Y + half
}
