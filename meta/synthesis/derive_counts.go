package synthesis

import (
	"errors"

	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// hasCounts reports whether the row has a 2×2 table of separate people.
func (d *derivation) hasCounts() bool {
	return !d.crossover() && d.has(review.EventsTreated, review.TotalTreated, review.EventsControl, review.TotalControl)
}

func (d *derivation) table() effect.Table {
	return effect.Table{
		Events1: d.value(review.EventsTreated), Total1: d.value(review.TotalTreated),
		Events2: d.value(review.EventsControl), Total2: d.value(review.TotalControl),
	}
}

func (d *derivation) fromCounts() (effect.Estimate, error) { return d.fromTable(d.measure) }

// fromTable returns an effect of the row's 2×2 table, divided by the design effect
// where clusters were randomised. Counts that are no whole numbers are taken as
// effective ones where the reviewers have accepted rule C2.
func (d *derivation) fromTable(m effect.Measure) (effect.Estimate, error) {
	factor, adjust, err := d.designEffect()
	if err != nil {
		return effect.Estimate{}, err
	}
	vouched := d.row.AcceptedReason("C2") != "" && !d.table().Whole()
	if err := d.keepsCounts(vouched || adjust); err != nil {
		return effect.Estimate{}, err
	}
	switch {
	case vouched && adjust:
		return effect.Estimate{}, errors.New("the counts are no whole numbers and are accepted as corrected already, but the row also asks to divide them by a design effect; write yes under adjusted, or the counts as reported")
	case vouched:
		counts, err := effect.Adjusted(d.table())
		if err != nil {
			return effect.Estimate{}, err
		}
		d.assume("counts that are no whole numbers, accepted by the reviewers")
		return d.made(effect.FromEffectiveTable(m, counts, d.correction))
	case !adjust:
		return d.ownEstimate(m)
	}
	effective, step, err := effect.ClusterTable(d.table(), factor)
	if err != nil {
		return effect.Estimate{}, err
	}
	d.log(step)
	return d.made(effect.FromEffectiveTable(m, effective, d.correction))
}

// fromCountsAsMeans returns the standardised difference that the table's odds
// ratio stands for.
func (d *derivation) fromCountsAsMeans() (effect.Estimate, error) {
	e, err := d.fromTable(effect.OddsRatio)
	if err != nil {
		return e, err
	}
	d.assume("odds ratio taken as a standardised difference")
	return d.made(effect.StandardisedFromOdds(e))
}

// hasPersonTime reports whether both arms have events and person time.
func (d *derivation) hasPersonTime() bool {
	return !d.crossover() && d.has(review.EventsTreated, review.PersonTimeTreated, review.EventsControl, review.PersonTimeControl)
}

func (d *derivation) fromPersonTime() (effect.Estimate, error) {
	if d.measure != effect.RateRatio {
		return effect.Estimate{}, &effect.MeasureError{Measure: d.measure, From: "events and person time", Valid: []effect.Measure{effect.RateRatio}}
	}
	return d.made(effect.FromRates(
		effect.Events{Events: d.value(review.EventsTreated), PersonTime: d.value(review.PersonTimeTreated)},
		effect.Events{Events: d.value(review.EventsControl), PersonTime: d.value(review.PersonTimeControl)}, d.correction))
}

func (d *derivation) fromOneArm() (effect.Estimate, error) {
	return d.made(effect.FromProportion(d.measure, effect.Counts{Events: d.value(review.Events), Total: d.value(review.Total)}, d.correction))
}

func (d *derivation) fromOneArmTime() (effect.Estimate, error) {
	if d.measure != effect.Rate {
		return effect.Estimate{}, &effect.MeasureError{Measure: d.measure, From: "events and person time of one arm", Valid: []effect.Measure{effect.Rate}}
	}
	return d.made(effect.FromRate(effect.Events{Events: d.value(review.Events), PersonTime: d.value(review.PersonTime)}, d.correction))
}

func (d *derivation) fromCoefficient() (effect.Estimate, error) {
	if d.measure != effect.Correlation {
		return effect.Estimate{}, &effect.MeasureError{Measure: d.measure, From: "a correlation coefficient", Valid: []effect.Measure{effect.Correlation}}
	}
	return d.made(effect.FromCorrelation(d.value(review.Coefficient), d.value(review.Total)))
}

func (d *derivation) fromObserved() (effect.Estimate, error) {
	return d.made(effect.FromObservedExpected(d.measure, d.value(review.ObservedMinusExpected), d.value(review.Variance)))
}
