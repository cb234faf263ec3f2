package synthesis

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/review"
	"steelyard/meta/sparse"
)

// settleMethod checks that a method for 2×2 tables gives the outcome's measure
// and the effects asked for, and settles on a common effect where it has no other.
func (o *Outcome) settleMethod(asked review.Analysis) error {
	method, isTables := asked.Method.Tables()
	if !isTables {
		return nil
	}
	if valid := method.Measures(); !slices.Contains(valid, o.Analysis.Measure) {
		var names []string
		for _, m := range valid {
			names = append(names, m.String())
		}
		return fmt.Errorf("method: %s pools a measure of counts: %s, and this outcome's is %s; choose one of these with --measure, or --method inverse-variance",
			method, strings.Join(names, ", "), measureName(o.Analysis.Measure))
	}
	if method.Random() {
		return nil
	}
	if asked.EffectsSet && asked.Model.Effects == meta.RandomEffects {
		return fmt.Errorf("effects: %s estimates one common effect, and random effects are asked for; leave the setting effects away, or choose --method binomial-normal or inverse-variance, which let effects vary", method)
	}
	o.Analysis.Model.Effects = meta.CommonEffect
	if !asked.EffectsSet {
		o.note(fmt.Sprintf("By %s the result is a common effect: one %s taken to hold in every study. binomial-normal and inverse-variance can let it vary between studies.", method, o.Analysis.Measure))
	}
	return nil
}

func measureName(m effect.Measure) string {
	if m == effect.Unspecified {
		return "not stated"
	}
	return m.String()
}

// leftByMethodError says why a method for 2×2 tables has no use for a row that
// another method could pool.
type leftByMethodError struct{ reason string }

func (e *leftByMethodError) Error() string { return e.reason }

// needsCounts returns an error for a row that the method cannot pool because its
// effect does not come from counts as they stand.
func (d *derivation) needsCounts(basis Basis) error {
	if _, isTables := d.method.Tables(); !isTables || basis == FromCounts {
		return nil
	}
	return &leftByMethodError{fmt.Sprintf("gives no events and totals of two separate arms, which %s pools (its numbers: %s)", d.method, basis)}
}

// keepsCounts returns an error where a method for 2×2 tables would have to pool
// counts that are not those of the people themselves.
func (d *derivation) keepsCounts(adjusted bool) error {
	if _, isTables := d.method.Tables(); !isTables || !adjusted {
		return nil
	}
	return &leftByMethodError{fmt.Sprintf("its counts are adjusted, so that they are no whole numbers, which %s pools; inverse-variance takes it", d.method)}
}

// ownEstimate returns the effect of one table by itself, as it stands beside the
// result: Peto's own, else with a correction where zero cells leave none, which the
// pooled result does not have.
func (d *derivation) ownEstimate(m effect.Measure) (effect.Estimate, error) {
	t := d.table()
	d.counts = &t
	correction := d.correction
	if _, isTables := d.method.Tables(); isTables {
		if d.method == review.Peto {
			return d.made(effect.FromPeto(t))
		}
		if correction == effect.NoCorrection {
			correction = effect.Half
		}
		e, steps, err := effect.FromTable(m, t, correction)
		d.log(steps...)
		return e, err
	}
	return d.made(effect.FromTable(m, t, correction))
}

// fit pools studies by the outcome's method with a model; its evidence is of the
// outcome's form.
func (o *Outcome) fit(model meta.Model, studies []Study) (*meta.Fit, error) {
	fit, err := o.fitOwn(model, studies)
	if err != nil {
		return nil, err
	}
	return fit, o.weigh(fit, studies)
}

// fitOwn is fit with the evidence that the model gives by itself.
func (o *Outcome) fitOwn(model meta.Model, studies []Study) (*meta.Fit, error) {
	if _, isTables := o.Analysis.Method.Tables(); isTables {
		r, err := o.tableModel(model).Fit(tablesOf(studies))
		if err != nil {
			return nil, err
		}
		return r.Pooled(), nil
	}
	if o.dependent() {
		return o.fitDependent(model, studies)
	}
	y, s := estimates(studies)
	return model.Fit(y, s)
}

// tableModel returns the model for 2×2 tables of an outcome pooled by one.
func (o *Outcome) tableModel(model meta.Model) sparse.Model {
	method, _ := o.Analysis.Method.Tables()
	return sparse.Model{Method: method, Measure: o.Analysis.Measure, Effects: model.Effects, Level: model.Level, Null: model.Null}
}

// tablesOf returns the tables of studies that all have one.
func tablesOf(studies []Study) []effect.Table {
	tables := make([]effect.Table, len(studies))
	for i := range studies {
		tables[i] = *studies[i].Table
	}
	return tables
}

// explainBoundary says in words what is known of a ratio estimated as 0 or as
// infinite.
func (o *Outcome) explainBoundary(e *sparse.BoundaryError) error {
	estimate, side := "0", "at most"
	if e.Toward > 0 {
		estimate, side = "infinite", "at least"
	}
	text := fmt.Sprintf("the %s is estimated as %s by %s: no study has an event that speaks against that", e.Measure, estimate, e.Method)
	if e.OneSided == nil {
		return errors.New(text + "; use --method conditional-exact, which gives the limit on the other side")
	}
	limit := e.OneSided
	text += fmt.Sprintf("; it is %s %.4g (the limit that is left of the %.4g%% interval", side, math.Exp(limit.Limit), 100*o.Analysis.Model.Level)
	if limit.LnP > math.Log(0.001) {
		text += fmt.Sprintf(", p = %.3f", math.Exp(limit.LnP))
	} else {
		text += ", p < 0.001"
	}
	return fmt.Errorf("%s, %.1f steps of evidence for an effect)", text, limit.Evidence.Steps())
}

// noteSilent says what became of the studies that carry nothing about a ratio.
func (o *Outcome) noteSilent() {
	n := len(o.Silent)
	if n == 0 {
		return
	}
	for _, row := range o.Silent {
		d := derivation{row: row}
		o.Counts.Silent += int(d.bothArms())
	}
	people, text := "", "carries nothing about a ratio: it is listed and in no sum"
	if o.Counts.Silent > 0 {
		people = fmt.Sprintf(" (participants: %d)", o.Counts.Silent)
	}
	studies := "study"
	if n > 1 {
		studies, text = "studies", "carry nothing about a ratio: they are listed and in no sum"
	}
	o.note(fmt.Sprintf("%d %s with no event in either arm, or nothing but events%s, %s.", n, studies, people, text))
}

// noteZeroCells says that a method for 2×2 tables corrects no table that it pools.
func (o *Outcome) noteZeroCells() {
	if _, isTables := o.Analysis.Method.Tables(); !isTables {
		return
	}
	n := 0
	for i := range o.Studies {
		if o.Studies[i].Corrected {
			n++
		}
	}
	if n > 0 {
		o.note(fmt.Sprintf("Tables with a zero cell: %d. They are pooled as they are; their own estimates alone, as listed and drawn, have a correction.", n))
	}
}
