package synthesis

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"steelyard/meta/choice"
	"steelyard/meta/effect"
	"steelyard/meta/numeric"
	"steelyard/meta/review"
)

// Basis says which of a row's numbers its effect was taken from.
type Basis int

// The bases, in the order of the table of kinds.
const (
	NoBasis Basis = iota
	FromCounts
	FromPersonTime
	FromPairedMeans
	FromMeans
	FromCoefficient
	FromOneArm
	FromOneArmTime
	FromObserved
	FromEstimateSE
	FromEstimateLimits
	FromEstimateStatistic
	FromEstimatePaired
	FromEstimateP
	FromEstimateEvents
	FromMeansTest
	FromHazardTest
	FromCountsAsMeans
	FromMeansAsCounts
	FromPValue
)

var basisNames = choice.Of[Basis]("basis", "", "counts", "person time", "paired means", "means", "correlation", "one arm", "one arm, person time",
	"observed minus expected", "estimate with se", "estimate with limits", "estimate with test statistic", "estimate with paired differences",
	"estimate with p", "estimate with events", "means with test", "log-rank test with events", "counts as means", "means as counts", "p alone")

// String returns the name of the basis.
func (b Basis) String() string { return basisNames.String(b) }

// Counted reports whether the numbers were counted or measured, not reported as
// a result.
func (b Basis) Counted() bool { return FromCounts <= b && b <= FromObserved }

// kind is one kind of numbers that a row may give.
type kind struct {
	basis    Basis
	complete func(d *derivation) bool // the row has all its numbers
	suits    func(d *derivation) bool // the outcome's measure can be had from them
	derive   func(d *derivation) (effect.Estimate, error)
	suggests effect.Measure // where nobody states a measure
}

// kinds is the order of preference among the numbers of a row: what was counted
// or measured goes before what was reported about it, a standard error before
// limits before a test, and an approximate change of measure comes last. The first
// kind that is complete and suits the measure is taken.
var kinds = []kind{
	{FromCounts, (*derivation).hasCounts, only(effect.OddsRatio, effect.RiskRatio, effect.RiskDifference, effect.ArcsineDifference), (*derivation).fromCounts, effect.RiskRatio},
	{FromPersonTime, (*derivation).hasPersonTime, only(effect.RateRatio), (*derivation).fromPersonTime, effect.RateRatio},
	{FromPairedMeans, (*derivation).hasPairedMeans, only(effect.MeanDifference, effect.StandardisedMeanDifference), (*derivation).fromPairedMeans, effect.MeanDifference},
	{FromMeans, (*derivation).hasArms, only(effect.MeanDifference, effect.StandardisedMeanDifference, effect.RatioOfMeans), (*derivation).fromArms, effect.MeanDifference},
	{FromCoefficient, has(review.Coefficient, review.Total), only(effect.Correlation), (*derivation).fromCoefficient, effect.Correlation},
	{FromOneArm, has(review.Events, review.Total), only(effect.Proportion, effect.ArcsineProportion, effect.DoubleArcsineProportion), (*derivation).fromOneArm, effect.Proportion},
	{FromOneArmTime, has(review.Events, review.PersonTime), only(effect.Rate), (*derivation).fromOneArmTime, effect.Rate},
	{FromObserved, has(review.ObservedMinusExpected, review.Variance), only(effect.HazardRatio, effect.OddsRatio, effect.RateRatio), (*derivation).fromObserved, effect.Unspecified},
	{FromEstimateSE, (*derivation).hasEstimateSE, (*derivation).reportable, (*derivation).fromSE, effect.Unspecified},
	{FromEstimateLimits, (*derivation).hasEstimateLimits, (*derivation).reportable, (*derivation).fromLimits, effect.Unspecified},
	{FromEstimateStatistic, (*derivation).hasEstimateStatistic, (*derivation).reportable, (*derivation).fromStatistic, effect.Unspecified},
	{FromEstimatePaired, (*derivation).hasEstimatePaired, only(effect.MeanDifference), (*derivation).fromDifferences, effect.MeanDifference},
	{FromEstimateP, (*derivation).hasEstimateP, (*derivation).reportable, (*derivation).fromP, effect.Unspecified},
	{FromEstimateEvents, (*derivation).hasEstimateEvents, only(effect.HazardRatio), (*derivation).fromHazardEvents, effect.Unspecified},
	{FromMeansTest, (*derivation).hasMeansTest, only(effect.MeanDifference, effect.StandardisedMeanDifference), (*derivation).fromMeansTest, effect.MeanDifference},
	{FromHazardTest, (*derivation).hasHazardTest, only(effect.HazardRatio), (*derivation).fromHazardTest, effect.Unspecified},
	{FromCountsAsMeans, (*derivation).hasCounts, only(effect.StandardisedMeanDifference), (*derivation).fromCountsAsMeans, effect.RiskRatio},
	{FromMeansAsCounts, (*derivation).hasArms, only(effect.OddsRatio), (*derivation).fromMeansAsCounts, effect.MeanDifference},
	{FromPValue, (*derivation).hasPValue, func(*derivation) bool { return true }, nil, effect.Unspecified},
}

// has returns a test for rows that give all of some fields.
func has(fields ...review.Field) func(*derivation) bool {
	return func(d *derivation) bool { return d.has(fields...) }
}

// only returns a test for outcomes of some measures.
func only(measures ...effect.Measure) func(*derivation) bool {
	return func(d *derivation) bool { return slices.Contains(measures, d.measure) }
}

// derivation is the way from one row's numbers to its effect, with what was done
// and assumed on it.
type derivation struct {
	row         *review.Study
	measure     effect.Measure // of the outcome
	method      review.Method
	correction  effect.Correction
	counts      *effect.Table // of an effect that is that of the row's counts as they stand
	steps       []effect.Conversion
	assumptions []string
	findings    []review.Finding
}

func (d *derivation) has(fields ...review.Field) bool {
	for _, f := range fields {
		if _, ok := d.row.Number(f); !ok {
			return false
		}
	}
	return true
}

// value returns the row's number of a field, 0 where it has none.
func (d *derivation) value(f review.Field) float64 {
	n, _ := d.row.Number(f)
	return n.Value
}

// remark returns the folded text of a context column.
func (d *derivation) remark(f review.Field) string {
	r, _ := d.row.Remark(f.String())
	return choice.Fold(r.Text)
}

func (d *derivation) log(steps ...effect.Conversion) { d.steps = append(d.steps, steps...) }

// assume records, once, what the number rests on besides the report.
func (d *derivation) assume(what string) {
	if !slices.Contains(d.assumptions, what) {
		d.assumptions = append(d.assumptions, what)
	}
}

// find records a finding about the row; the reviewer may have accepted it.
func (d *derivation) find(severity review.Severity, rule, message string, readings ...review.Reading) {
	d.findings = append(d.findings, review.Finding{Severity: severity, Rule: rule, Place: d.row.Row, Study: d.row.Name, Outcome: d.row.Outcome,
		Message: message, Accepted: d.row.AcceptedReason(rule), Readings: readings})
}

// made records the steps of a function of effect and hands its estimate on.
func (d *derivation) made(e effect.Estimate, steps []effect.Conversion, err error) (effect.Estimate, error) {
	d.log(steps...)
	if slices.ContainsFunc(steps, func(c effect.Conversion) bool { return c.Added }) {
		d.assume(AssumedCorrection)
	}
	return e, err
}

// choose returns the best kind of numbers that the row makes complete: among
// those that suit the measure, else the first, whose derivation will say which
// measures it gives.
func (d *derivation) choose() (kind, bool) {
	var first *kind
	for i := range kinds {
		k := &kinds[i]
		if !k.complete(d) {
			continue
		}
		if k.suits(d) && (k.basis != FromPValue || first == nil) {
			return *k, true
		}
		if first == nil {
			first = k
		}
	}
	if first == nil {
		return kind{}, false
	}
	return *first, true
}

// derive turns the rows into effects; a row that yields none is excluded, with a
// finding if the sheet is at fault.
func (o *Outcome) derive(rows []*review.Study) []review.Finding {
	var findings []review.Finding
	for _, row := range rows {
		d := &derivation{row: row, measure: o.Analysis.Measure, method: o.Analysis.Method, correction: o.Analysis.Correction}
		study, err := d.study()
		findings = append(findings, d.findings...)
		switch {
		case study.Basis == FromPValue && err == nil:
			err = o.addPValue(d)
			if err == nil {
				o.exclude(row, "gives a p-value and no estimate: weighed as evidence alone")
				continue
			}
		case err == nil:
			o.Studies = append(o.Studies, study)
			continue
		}
		f := review.Finding{Severity: review.Error, Rule: "F9", Place: d.blame(err), Study: row.Name, Outcome: o.Name, Message: err.Error()}
		var missing *missingError
		var left *leftByMethodError
		switch {
		case errors.Is(err, effect.ErrNothingToCompare):
			f.Severity, f.Rule = review.Note, "C8"
			o.Silent = append(o.Silent, row)
		case errors.As(err, &left):
			o.exclude(row, left.reason)
			continue
		case errors.As(err, &missing):
			f.Rule, f.Readings = missing.rule, missing.readings
		}
		o.excludeFor(row, f)
		findings = append(findings, f)
	}
	return append(findings, o.mixedScores()...)
}

// study turns the row into an effect of the outcome's measure.
func (d *derivation) study() (Study, error) {
	study := Study{Source: d.row}
	k, ok := d.choose()
	if !ok {
		return study, d.incomplete()
	}
	study.Basis = k.basis
	if k.basis == FromPValue {
		return study, nil
	}
	if err := d.needsCounts(k.basis); err != nil {
		return study, err
	}
	e, err := k.derive(d)
	if err != nil {
		return study, err
	}
	if d.measure == effect.RiskDifference && math.Abs(e.Y) > 1 {
		return study, fmt.Errorf("a risk difference of %v is beyond 1, which is everybody; 5%% is written 0.05", e.Y)
	}
	if !slices.Contains(clusteredCounts, k.basis) {
		if e, err = d.clustered(e); err != nil {
			return study, err
		}
	}
	if k.basis == FromCounts {
		study.Table = d.counts
	}
	study.Estimate, study.Conversions, study.Assumptions = e, d.steps, d.assumptions
	study.Corrected = slices.ContainsFunc(d.steps, func(c effect.Conversion) bool { return c.Added })
	return study, nil
}

// missingError says which number a row lacks, or that it has another measure's, under
// the rule that asks for it and with values to try.
type missingError struct {
	rule, message string
	readings      []review.Reading
}

func (e *missingError) Error() string { return e.message }

// incomplete says what is missing from a row without a complete set of numbers.
func (d *derivation) incomplete() error {
	switch {
	case d.crossover() && d.hasBothMeans():
		return d.unpaired()
	case d.crossover():
		return &missingError{rule: "D8", message: "the row is of a cross-over trial, whose arms are the same people: give an estimate with its se or limits from a paired analysis"}
	case d.has(review.Variance) && d.hasEstimate():
		return errors.New("the row has a variance, which is read as that of observed minus expected events, and none of these: give observed minus expected beside it, or the square root of the variance as se")
	case d.has(review.PValue) && !d.hasEstimate():
		return errors.New("the row has a p-value alone: give the estimate beside it, or the direction of the effect (higher or lower) and the total of people to weigh it as evidence alone")
	}
	return d.lacking()
}

// armed gives the values of a step about one arm the names of that arm's
// columns, where there are such columns.
func armed(step effect.Conversion, arm string) effect.Conversion {
	for _, values := range [][]effect.Value{step.From, step.To} {
		for i, v := range values {
			if _, err := review.ParseField(v.Name + " " + arm); err == nil && !strings.HasSuffix(v.Name, arm) {
				values[i].Name += " " + arm
			}
		}
	}
	return step
}

// studyInterval returns the Wald interval of a single study.
func studyInterval(e effect.Estimate, level float64) (low, high float64) {
	half := numeric.NormalCritical(1-level) * e.SE
	return e.Y - half, e.Y + half
}
