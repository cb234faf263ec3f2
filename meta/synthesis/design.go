package synthesis

import (
	"errors"
	"fmt"
	"strings"

	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// clusteredCounts are the bases whose people are divided by the design effect;
// with the others the standard error is multiplied by its root.
var clusteredCounts = []Basis{FromCounts, FromCountsAsMeans, FromMeans, FromMeansAsCounts}

// crossover reports whether the row is of a trial in which the same people had
// both treatments.
func (d *derivation) crossover() bool {
	design := strings.ReplaceAll(d.remark(review.Design), "-", "")
	for _, word := range []string{"crossover", "paired", "withinperson", "withinpatient"} {
		if strings.Contains(strings.ReplaceAll(design, " ", ""), word) {
			return !strings.Contains(design, "unpaired")
		}
	}
	return false
}

// cluster reports whether the row is of a trial that randomised clusters.
func (d *derivation) cluster() bool {
	return strings.Contains(d.remark(review.Design), "cluster") || yes(d.remark(review.Cluster)) ||
		d.has(review.DesignEffect) || d.has(review.ClusterSize, review.ICC)
}

// yes reports whether a folded text says so.
func yes(text string) bool {
	return strings.HasPrefix(text, "yes") || text == "y" || text == "true" || text == "adjusted"
}

// designEffect returns the factor by which clusters multiply the row's variance;
// adjust is false where nothing is to be done. A trial of clusters that says
// neither how large nor how alike they are is pooled as it stands, with a warning.
func (d *derivation) designEffect() (factor float64, adjust bool, err error) {
	if !d.cluster() || yes(d.remark(review.Adjusted)) {
		return 1, false, nil
	}
	switch {
	case d.has(review.DesignEffect):
		factor = d.value(review.DesignEffect)
	case d.has(review.ClusterSize, review.ICC):
		var step effect.Conversion
		if factor, step, err = effect.DesignEffect(d.value(review.ClusterSize), d.value(review.ICC)); err != nil {
			return 1, false, err
		}
		d.log(step)
	default:
		d.find(review.Warning, "D7", "the trial randomised clusters and is pooled as if it had randomised people, which makes it look too sure; give cluster size and icc (or the design effect), or write yes under adjusted if the estimate allows for clusters",
			d.tries(review.ICC, review.ClusterSize, 0.01, 0.05, 0.1)...)
		return 1, false, nil
	}
	d.assume("clusters allowed for by a stated design effect")
	return factor, true, nil
}

// clustered multiplies a standard error by the root of the row's design effect.
func (d *derivation) clustered(e effect.Estimate) (effect.Estimate, error) {
	factor, adjust, err := d.designEffect()
	if err != nil || !adjust {
		return e, err
	}
	se, step, err := effect.ClusterSE(e.SE, factor)
	if err != nil {
		return e, err
	}
	d.log(step)
	e.SE = se
	return e, nil
}

// tries returns readings of the row with values of a number that it lacks; none
// unless it has the other number that is needed with it.
func (d *derivation) tries(f, beside review.Field, values ...float64) []review.Reading {
	if beside != review.NoField && !d.has(beside) {
		return nil
	}
	var all []review.Reading
	for _, v := range values {
		all = append(all, review.Reading{
			Label:   fmt.Sprintf("with %s %v", f, v),
			Numbers: []review.Number{{Field: f, Value: v, Place: review.Spot{Row: d.row.Row.Row}}},
		})
	}
	return all
}

// unpaired says what a cross-over trial lacks whose means are given as if two
// groups of people had been measured.
func (d *derivation) unpaired() error {
	if !(d.people() > 0) {
		return errors.New("the row is of a cross-over trial and does not say how many people it measured; give the total")
	}
	return &missingError{rule: "D8",
		message:  "the row is of a cross-over trial, whose arms are the same people, and lacks what tells how their two measurements go together: give the sd of the difference, or the correlation, or an estimate with its se from a paired analysis",
		readings: d.tries(review.WithinCorrelation, review.NoField, 0.3, 0.5, 0.7)}
}
