package synthesis

import (
	"context"
	"errors"
	"fmt"

	"steelyard/meta"
	"steelyard/meta/accrual"
	"steelyard/meta/bayes"
	"steelyard/meta/choice"
	"steelyard/meta/evidence"
	"steelyard/meta/review"
	"steelyard/meta/sparse"
)

// Accrual says how an outcome's evidence came about: step by step, without each
// study, and over the subsets of the studies. Parts that were not wanted are nil.
type Accrual struct {
	Order       Order // of Cumulative
	Cumulative  []Entry
	Looks       *Looks          // repeated looks at Cumulative
	LeaveOneOut []meta.Omission // in the order of Outcome.Studies, as all rows here
	Tipping     *meta.Tipping
	Influence   []meta.Influence
	Subsets     *Subsets
	Next        *Next // what one more study could change
}

// Entry is a step of a cumulative analysis.
type Entry struct {
	meta.Step
	At        string   // the date or value that put it there; blank in the order of the file
	Posterior []Belief // for the outcome's stated priors; nil if the step has no result or nothing is weighed
}

// SubsetsWanted asks for all subsets of the studies.
type SubsetsWanted struct {
	Study  string // counted apart, with and without it; blank for none
	Sample int    // drawn of more than 24 studies; 0 for the default
}

// Subsets are the subsets of an outcome's studies.
type Subsets struct {
	*meta.Subsets
	Chosen int // index in Outcome.Studies of the study counted apart; −1 for none
}

// accrual reports whether anything is wanted beyond the pooled result.
func (w Want) accrual() bool {
	return w.Cumulative || w.LeaveOneOut || w.Influence || w.Subsets != nil || w.Below != nil || w.Next != nil
}

// refit returns what pools any part of the outcome's studies by its method.
func (o *Outcome) refit() (meta.Refit, error) {
	if _, isTables := o.Analysis.Method.Tables(); isTables {
		return sparse.NewTables(o.tableModel(o.Analysis.Model), tablesOf(o.Studies))
	}
	y, s := estimates(o.Studies)
	return meta.NewPairs(o.Analysis.Model, y, s)
}

// weighedRefit is refit whose means carry the evidence of the outcome's form.
func (o *Outcome) weighedRefit() (meta.Refit, error) {
	r, err := o.refit()
	w := o.Analysis.Weighing
	if err != nil || w.Own() || o.Analysis.NullMissing {
		return r, err
	}
	y, s := estimates(o.Studies)
	return bayes.NewWeighed(r, w, o.Analysis.Model.Null, y, s)
}

// accrue adds the wanted parts to a pooled outcome. It returns an error for a
// chosen study that is not there, and the cause if ctx ends; an order by an
// unknown column is the outcome's Problem.
func (o *Outcome) accrue(ctx context.Context, columns []review.Column, plan *review.Plan, want Want) error {
	if o.Result == nil || !want.accrual() {
		return nil
	}
	if o.dependent() {
		o.Result, o.Problem = nil, o.onlyIndependent("this analysis")
		return nil
	}
	refit, err := o.weighedRefit()
	if err != nil {
		return fmt.Errorf("%s: %w", o.Called(), err)
	}
	a := &Accrual{}
	if want.Cumulative {
		groups, err := o.order(columns, plan)
		if err != nil {
			o.Result, o.Problem = nil, err.Error()
			return nil
		}
		if err := o.cumulative(ctx, refit, groups, a, want.Work); err != nil {
			return err
		}
		if want.Looks != nil {
			if a.Looks, err = want.Looks.look(ctx, o, groups, want.Work); err != nil {
				return err
			}
		}
	}
	if want.LeaveOneOut {
		if a.LeaveOneOut, err = meta.LeaveOneOut(ctx, refit, want.Work); err != nil && !errors.Is(err, meta.ErrTooFew) {
			return err
		}
	}
	if o.Analysis.NullMissing && (want.Below != nil || want.Subsets != nil) {
		o.note("The measure has no value of no effect and none is given, so that there is no evidence to tip or to spread over subsets: state one with --null.")
		want.Below, want.Subsets = nil, nil
	}
	if want.Below != nil {
		if a.Tipping, err = meta.TippingSet(ctx, refit, *want.Below, want.Work); err != nil {
			return err
		}
	}
	if want.Influence {
		if a.Influence, err = meta.Influences(ctx, refit, want.Work); err != nil && !errors.Is(err, meta.ErrTooFew) {
			return err
		}
	}
	if len(o.Studies) == 1 && (want.LeaveOneOut || want.Influence) {
		o.note("There is one study only: nothing can be left out.")
	}
	if want.Subsets != nil {
		if a.Subsets, err = want.Subsets.subsets(ctx, o, refit, want.Work); err != nil {
			return err
		}
	}
	if want.Next != nil {
		if a.Next, err = want.Next.next(ctx, o, plan); err != nil {
			return err
		}
	}
	o.Accrual = a
	return nil
}

// cumulative fills in the order and the steps, each with what its evidence makes
// of the stated priors.
func (o *Outcome) cumulative(ctx context.Context, refit meta.Refit, order *order, a *Accrual, work meta.Work) error {
	steps, err := meta.Cumulative(ctx, refit, order.groups, work)
	if err != nil {
		return err
	}
	a.Order = order.Order
	for i, step := range steps {
		entry := Entry{Step: step, At: order.at[i]}
		if step.Problem == nil && !o.Analysis.NullMissing {
			entry.Posterior = o.posterior(step.Mean.Evidence)
		}
		a.Cumulative = append(a.Cumulative, entry)
	}
	return nil
}

// posterior returns what evidence makes of the stated priors.
func (o *Outcome) posterior(r evidence.Ratio) []Belief {
	var all []Belief
	for _, prior := range o.Analysis.Prior {
		all = append(all, Belief{Prior: prior, Posterior: evidence.Posterior(prior, r)})
	}
	return all
}

// mostWeighed is how many subsets are pooled at most in a form of evidence that is
// slow to weigh: about half a minute on one processor.
var mostWeighed = map[evidence.Form]int{
	evidence.IntegratedForm: 1 << 15, evidence.AveragedForm: 1 << 15, evidence.CauchyPriorForm: 1 << 18,
}

// checkAffordable returns an *accrual.InputError for more subsets than the form of
// evidence can be weighed for.
func (o *Outcome) checkAffordable(want SubsetsWanted) error {
	form, k := o.Analysis.Weighing.Form, len(o.Studies)
	most, slow := mostWeighed[form]
	every := meta.SubsetCount(k, want.Sample)
	if !slow || every <= most {
		return nil
	}
	remedy := "choose --evidence empirical"
	if k > meta.EverySubset {
		remedy += fmt.Sprintf(", or --sample %d", most)
	}
	return &accrual.InputError{Problem: fmt.Sprintf("subsets: evidence %s is too slow for %d subsets of %d studies, at most %d are weighed; %s", form, every, k, most, remedy)}
}

func (w *SubsetsWanted) subsets(ctx context.Context, o *Outcome, refit meta.Refit, work meta.Work) (*Subsets, error) {
	if err := o.checkAffordable(*w); err != nil {
		return nil, err
	}
	options := meta.SubsetOptions{
		Important: o.Analysis.Important, Sample: w.Sample,
		Seed: o.Analysis.Model.Seed, Work: work,
	}
	result := &Subsets{Chosen: -1}
	if w.Study != "" {
		var names []string
		for i, study := range o.Studies {
			names = append(names, study.Source.Name)
			if choice.Fold(study.Source.Name) == choice.Fold(w.Study) && result.Chosen < 0 {
				result.Chosen = i
			}
		}
		if result.Chosen < 0 {
			return nil, &choice.UnknownError{What: "pooled study", Text: w.Study, Valid: names}
		}
		options.Chosen = &result.Chosen
	}
	var err error
	result.Subsets, err = meta.AllSubsets(ctx, refit, options)
	return result, err
}
