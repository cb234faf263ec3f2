package synthesis

import (
	"errors"
	"fmt"
	"math"

	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/review"
)

// SetRule says how each of many sets is pooled: as Run pools an outcome of that set's
// rows alone.
type SetRule struct {
	Measure effect.Measure
	Model   meta.Model // Null on the analysis scale

	correction effect.Correction
}

// NewSetRule settles the measure and the null of sets whose rows have numbers of the
// fields of sample, and whose estimates stand in its measure. It returns an error for
// settings that pool more than estimates with standard errors, or that have no
// meaning for sets.
func NewSetRule(asked review.Analysis, sample *review.Study) (*SetRule, error) {
	o := &Outcome{}
	switch {
	case asked.Method != review.InverseVariance:
		return nil, fmt.Errorf("method: %s pools tables of counts; sets are pooled by inverse-variance: split the file and use pool", asked.Method)
	case asked.Weighing.Form != evidence.Empirical && asked.Weighing.Form != evidence.StudentForm:
		return nil, fmt.Errorf("evidence: %s is not worked out for sets; choose empirical or student-t, or split the file and use pool", asked.Weighing.Form)
	}
	if err := o.settle(asked, []*review.Study{sample}); err != nil {
		return nil, err
	}
	if o.Analysis.NullMissing {
		return nil, fmt.Errorf("null: the measure, %s, has no value of no effect to weigh the evidence against; give one with --null", o.Analysis.Measure)
	}
	return &SetRule{Measure: o.Analysis.Measure, Model: o.Analysis.Model, correction: asked.Correction}, nil
}

// Effect returns the effect of a row: the same numbers by the same steps as Run.
// Effect of a row whose counts carry nothing wraps effect.ErrNothingToCompare.
func (r *SetRule) Effect(row *review.Study) (effect.Estimate, error) {
	d := &derivation{row: row, measure: r.Measure, correction: r.correction}
	study, err := d.study()
	if err == nil && study.Basis == FromPValue {
		err = errors.New("the row gives a p-value and no estimate, which only pool weighs")
	}
	return study.Estimate, err
}

// FromSE is Effect for a row that gives an estimate with its standard error and
// nothing else, in the measure own or, logged, on the analysis scale. ok is false
// where Effect has to say what is wrong.
func (r *SetRule) FromSE(own effect.Measure, logged bool, estimate, se float64) (e effect.Estimate, ok bool) {
	if own == effect.Unspecified {
		own = r.Measure
	}
	scale := own
	if logged {
		scale = effect.Unspecified
	}
	if own != r.Measure || !(se > 0) || math.IsInf(se, 1) {
		return e, false
	}
	y, err := effect.FromReader(scale, estimate)
	if err != nil || math.IsInf(y, 0) || r.Measure == effect.RiskDifference && math.Abs(y) > 1 {
		return e, false
	}
	return effect.Estimate{Y: y, SE: se}, true
}
