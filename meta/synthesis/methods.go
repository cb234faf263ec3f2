package synthesis

import (
	"errors"
	"fmt"
	"slices"

	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/review"
	"steelyard/meta/sparse"
)

// Methods are the results of all methods for an outcome's counts, side by side.
// They are for comparison: the outcome's own result is by the method that the plan
// chose before results were seen.
type Methods struct {
	Rows     []MethodResult
	Others   int            // pooled studies that give no counts as they stand: in none of the rows
	ZeroCell int            // tables with a zero cell but information
	Advice   *sparse.Advice // which methods are apt for an odds ratio; nil if there are no tables
	Problem  string         // why there is nothing to compare
}

// MethodResult is the result of one method. Fit is nil where it has none, and
// Problem then says why.
type MethodResult struct {
	Method     review.Method
	Effects    meta.Effects
	Measure    effect.Measure
	Correction string // of tables with a zero cell; blank where none is corrected
	Fit        *meta.Fit
	Problem    string
}

// compare pools the outcome's counts by every method: in the outcome's measure
// where the method has it, else as an odds ratio.
func (o *Outcome) compare(plan *review.Plan) error {
	if len(o.Studies) == 0 {
		return nil
	}
	asked, err := plan.Analysis(o.Name)
	if err != nil {
		return fmt.Errorf("%s: %w", o.Called(), err)
	}
	c := &Methods{}
	o.Methods = c
	var tables []effect.Table
	for i := range o.Studies {
		if t := o.Studies[i].Table; t != nil {
			tables = append(tables, *t)
		}
	}
	c.Others = len(o.Studies) - len(tables)
	if len(tables) == 0 {
		c.Problem = "no pooled study gives events and totals of both arms as counted: there are no tables to compare methods on"
		return nil
	}
	c.advise(tables, o.Silent)
	q := quest{asked: asked.Model, measure: effect.OddsRatio, tables: tables}
	q.asked.Null = o.Analysis.Model.Null
	if slices.Contains(sparse.MantelHaenszel.Measures(), o.Analysis.Measure) {
		q.measure = o.Analysis.Measure
	}
	if q.measure != o.Analysis.Measure {
		q.asked.Null = 0
	}
	c.Rows = append(q.inverseVariance(c.ZeroCell > 0), q.counted()...)
	return nil
}

// advise fills in what is apt for the tables, the silent ones included.
func (c *Methods) advise(tables []effect.Table, silent []*review.Study) {
	all := slices.Clone(tables)
	for _, row := range silent {
		d := derivation{row: row}
		if d.hasCounts() && d.table().Check() == nil {
			all = append(all, d.table())
		}
	}
	for _, t := range tables {
		if _, _, err := effect.FromTable(effect.OddsRatio, t, effect.NoCorrection); err != nil && !errors.Is(err, effect.ErrNothingToCompare) {
			c.ZeroCell++
		}
	}
	if advice, err := sparse.Advise(all); err == nil {
		c.Advice = advice
	}
}

// quest is what is asked of every method.
type quest struct {
	asked   meta.Model // with the null of measure
	measure effect.Measure
	tables  []effect.Table
}

// inverseVariance returns the results by inverse variances, with random and with a
// common effect, for each way to treat zero cells if there are any.
func (q quest) inverseVariance(zeroCells bool) []MethodResult {
	var rows []MethodResult
	random, common := q.asked, q.asked
	random.Effects = meta.RandomEffects
	common.Effects, common.Interval = meta.CommonEffect, meta.DefaultInterval
	if q.asked.Interval == meta.ProfileLikelihood || q.asked.Interval == meta.HenmiCopas {
		common.Tau = meta.DefaultTau
	}
	for _, model := range []meta.Model{random, common} {
		for _, name := range effect.CorrectionNames() {
			correction, err := effect.ParseCorrection(name)
			if err != nil || (!zeroCells && correction != effect.NoCorrection) {
				continue
			}
			row := MethodResult{Method: review.InverseVariance, Effects: model.Effects, Measure: q.measure}
			if zeroCells {
				row.Correction = name
			}
			var y, s []float64
			for _, t := range q.tables {
				if e, _, err := effect.FromTable(q.measure, t, correction); err == nil {
					y, s = append(y, e.Y), append(s, e.SE)
				}
			}
			if row.Fit, err = model.Fit(y, s); err != nil {
				row.Problem = err.Error()
				if errors.Is(err, meta.ErrNoStudies) {
					row.Problem = "every table has a zero cell"
				}
			}
			rows = append(rows, row)
		}
	}
	return rows
}

// counted returns the results of the methods that pool the counts themselves.
func (q quest) counted() []MethodResult {
	var rows []MethodResult
	for _, name := range sparse.MethodNames() {
		method, err := sparse.ParseMethod(name)
		if err != nil {
			continue
		}
		effects := []meta.Effects{meta.CommonEffect}
		if method.Random() {
			effects = []meta.Effects{meta.RandomEffects, meta.CommonEffect}
		}
		m := sparse.Model{Method: method, Measure: q.measure, Level: q.asked.Level, Null: q.asked.Null}
		if !slices.Contains(method.Measures(), q.measure) {
			m.Measure, m.Null = effect.OddsRatio, 0
		}
		for _, m.Effects = range effects {
			row := MethodResult{Method: methodOf(method), Effects: m.Effects, Measure: m.Measure}
			result, err := m.Fit(q.tables)
			if err != nil {
				row.Problem = err.Error()
			} else {
				row.Fit = result.Pooled()
			}
			rows = append(rows, row)
		}
	}
	return rows
}

// methodOf returns the setting's value for a method for 2×2 tables.
func methodOf(m sparse.Method) review.Method { return review.MantelHaenszel + review.Method(m) }
