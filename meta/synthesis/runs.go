package synthesis

import (
	"context"

	"steelyard/meta"
	"steelyard/meta/choice"
	"steelyard/meta/review"
)

// RunResult is a planned sensitivity analysis of an outcome: the outcome pooled anew
// with the run's filter or settings. Without a Result its Problem says why.
type RunResult struct {
	Run     review.Run
	Outcome Outcome
}

// runPlanned pools the outcome once for each planned run that concerns it, in the
// order of the plan.
func (o *Outcome) runPlanned(ctx context.Context, x *review.Extraction, plan *review.Plan, blocked map[rowKey]review.Finding) error {
	o.Runs = []RunResult{}
	for _, run := range plan.Runs {
		if run.Outcome != "" && choice.Fold(run.Outcome) != choice.Fold(o.Name) {
			continue
		}
		if err := ctx.Err(); err != nil {
			return err
		}
		changed, err := plan.With(run, o.Name)
		if err != nil {
			return err
		}
		result, _, err := runOutcome(x, changed, o.Name, blocked)
		if err != nil {
			return err
		}
		o.Runs = append(o.Runs, RunResult{Run: run, Outcome: *result})
	}
	return nil
}

// RunDocument is the result of a planned run. Changes are its settings by name,
// "where" being a filter that holds besides the plan's own. Tau2 is absent beside a
// common effect; without a result the numbers are absent and Problem says why.
type RunDocument struct {
	Name    string            `json:"run"`
	Changes map[string]string `json:"changes"`
	Measure string            `json:"measure,omitempty"`
	Effects string            `json:"effects,omitempty"`
	Tau2    *float64          `json:"tau2,omitempty"`
	*SubsetDocument
	Problem string `json:"problem,omitempty"`
}

func (r *RunResult) document() RunDocument {
	d := RunDocument{Name: r.Run.Name, Changes: r.Run.Changes, Problem: r.Outcome.Problem}
	if r.Outcome.Result == nil {
		return d
	}
	fit := r.Outcome.Result.Fit
	d.Measure, d.Effects = r.Outcome.Analysis.Measure.String(), fit.Model.Effects.String()
	if fit.Model.Effects == meta.RandomEffects && fit.Mean.K > 1 {
		d.Tau2 = &fit.Mean.Tau2
	}
	d.SubsetDocument = subsetDocument(fit, r.Outcome.Analysis.NullMissing)
	return d
}
