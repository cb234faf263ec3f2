package synthesis

import (
	"errors"
	"fmt"
	"math"
	"strings"

	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// settle decides what the outcome measures and puts the null and the thresholds
// on the analysis scale.
func (o *Outcome) settle(asked review.Analysis, rows []*review.Study) error {
	measure, err := o.measure(asked, rows)
	if err != nil {
		return err
	}
	o.Analysis = Analysis{
		Measure:    measure,
		Better:     o.better(asked.Better, rows),
		Method:     asked.Method,
		Model:      asked.Model,
		Prior:      asked.Weighing.Prior,
		Correction: asked.Correction,
	}
	if err := o.settleMethod(asked); err != nil {
		return err
	}
	if !measure.HasNull() && asked.Null == nil {
		o.Analysis.NullMissing = true
		if len(asked.Important) > 0 {
			return fmt.Errorf("important: the measure, %s, has no value of no effect to measure a difference from; give one with --null", measure)
		}
		return nil
	}
	null := measure.Null()
	if asked.Null != nil {
		null = *asked.Null
	}
	if o.Analysis.Model.Null, err = settled(measure, "the value of no effect", null); err != nil {
		return fmt.Errorf("null: %w", err)
	}
	o.Analysis.Important, err = important(measure, asked.Important, o.Analysis.Model.Null)
	return err
}

// measure returns the plan's measure, else the one all rows state, else what
// their numbers suggest, saying so in a note.
func (o *Outcome) measure(asked review.Analysis, rows []*review.Study) (effect.Measure, error) {
	if asked.MeasureSet {
		return asked.Measure, nil
	}
	stated := map[effect.Measure]string{}
	var names []string
	for _, row := range rows {
		if row.Measure != effect.Unspecified {
			if _, seen := stated[row.Measure]; !seen {
				names = append(names, fmt.Sprintf("%s (%s)", row.Measure, row.Name))
			}
			stated[row.Measure] = row.Name
		}
	}
	switch len(stated) {
	case 1:
		for m := range stated {
			return m, nil
		}
	case 0:
	default:
		return 0, fmt.Errorf("the rows state different measures: %s; pool one measure at a time, or choose with --measure where the numbers allow it", strings.Join(names, ", "))
	}
	if method, isTables := asked.Method.Tables(); isTables {
		o.note(fmt.Sprintf("No measure is stated: counts are pooled as an %s, which %s gives. Choose another with --measure where the method allows it.", method.Measures()[0], method))
		return method.Measures()[0], nil
	}
	suggested, basis := suggestion(rows)
	switch suggested {
	case effect.Unspecified:
		o.note("No measure is stated: estimates are pooled as they stand, on a linear scale. State one with --measure if they are ratios.")
	default:
		o.note(fmt.Sprintf("No measure is stated: %s are pooled as %s. Choose another with --measure.", basisWords[basis], suggested.WithArticle()))
	}
	return suggested, nil
}

// basisWords says what numbers suggest a measure.
var basisWords = map[Basis]string{
	FromCounts: "counts", FromPersonTime: "events with person time", FromPairedMeans: "means", FromMeans: "means",
	FromCoefficient: "correlation coefficients", FromOneArm: "events of one arm", FromOneArmTime: "events of one arm with person time",
	FromMeansTest: "means", FromEstimatePaired: "mean differences",
}

// suggestion returns the measure that the rows' numbers suggest: that of the kind
// highest in the table that any row makes complete; one arm gives way to an
// estimate.
func suggestion(rows []*review.Study) (effect.Measure, Basis) {
	best, measure := FromPValue, effect.Unspecified
	for _, row := range rows {
		d := &derivation{row: row}
		for _, k := range kinds {
			oneArm := k.basis == FromOneArm || k.basis == FromOneArmTime
			if k.basis >= best || !k.complete(d) || (oneArm && d.hasEstimate()) {
				continue
			}
			best, measure = k.basis, k.suggests
			break
		}
	}
	return measure, best
}

func (o *Outcome) note(sentence string) { o.Notes = append(o.Notes, sentence) }

// better returns the plan's direction, else the one all rows state.
func (o *Outcome) better(asked review.Better, rows []*review.Study) review.Better {
	if asked != review.BetterUnknown {
		return asked
	}
	found := review.BetterUnknown
	for _, row := range rows {
		switch {
		case row.Better == review.BetterUnknown:
		case found == review.BetterUnknown:
			found = row.Better
		case found != row.Better:
			o.note("The rows state different directions (better: lower and higher); none is assumed. Check that all scales point the same way.")
			return review.BetterUnknown
		}
	}
	return found
}

// settled puts a value of the plan on the analysis scale; its error names what it is.
func settled(m effect.Measure, what string, value float64) (float64, error) {
	y, err := effect.FromReader(m, value)
	var input *effect.InputError
	if errors.As(err, &input) { // which speaks of an estimate
		err = &effect.InputError{What: what, Value: input.Value, Why: input.Why, Do: input.Do}
	}
	return y, err
}

// important puts the important difference on the analysis scale: one value is
// mirrored at the null.
func important(m effect.Measure, values []float64, null float64) (*meta.Limits, error) {
	if len(values) == 0 {
		return nil, nil
	}
	scaled := make([]float64, 0, 2)
	for _, v := range values {
		y, err := settled(m, "the difference", v)
		if err != nil {
			return nil, fmt.Errorf("important: %w", err)
		}
		scaled = append(scaled, y)
	}
	if len(scaled) == 1 {
		scaled = append(scaled, 2*null-scaled[0])
	}
	zone := meta.Limits{Low: math.Min(scaled[0], scaled[1]), High: math.Max(scaled[0], scaled[1])}
	if !(zone.Low < null && null < zone.High) {
		return nil, fmt.Errorf("important: the differences must lie on both sides of the null, such as 0.8 (mirrored as 1.25) or \"0.8, 1.2\" around 1")
	}
	return &zone, nil
}
