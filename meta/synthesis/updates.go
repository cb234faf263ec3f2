package synthesis

import (
	"context"
	"fmt"
	"math"
	"slices"

	"steelyard/meta"
	"steelyard/meta/accrual"
	"steelyard/meta/choice"
	"steelyard/meta/review"
)

// Update is one time at which a living review was looked at.
type Update struct {
	Number int
	At     string // date of the search, else of the record: ISO 8601

	known map[string]map[string]bool     // by outcome: keys of the studies pooled then
	by    map[string]map[string][]string // by outcome and numbers: keys of a study that had them
}

// NewUpdate returns an update at which nothing is known yet.
func NewUpdate(number int, at string) Update {
	return Update{Number: number, At: at, known: map[string]map[string]bool{}, by: map[string]map[string][]string{}}
}

// Knows says that a study of an outcome was pooled at the update, with this estimate
// and standard error; id may be blank.
func (u *Update) Knows(outcome, name, id string, estimate, se float64) {
	outcome = choice.Fold(outcome)
	if u.known[outcome] == nil {
		u.known[outcome], u.by[outcome] = map[string]bool{}, map[string][]string{}
	}
	keys := studyKeys(name, id)
	for _, key := range keys {
		u.known[outcome][key] = true
	}
	u.by[outcome][numbersOf(estimate, se)] = keys
}

// numbersOf tells results apart by more digits than two studies share by chance.
func numbersOf(estimate, se float64) string { return fmt.Sprintf("%.10g %.10g", estimate, se) }

func studyKeys(name, id string) []string {
	keys := []string{"name " + review.FoldName(name)}
	if id != "" {
		keys = append(keys, "id "+choice.Fold(id))
	}
	return keys
}

// knew reports whether the update pooled a study: under its name or id, or with the
// same numbers under a name that no study has any more.
func (u *Update) knew(outcome string, s *Study, today map[string]bool) bool {
	outcome = choice.Fold(outcome)
	if slices.ContainsFunc(studyKeys(s.Source.Name, s.Source.ID), func(key string) bool { return u.known[outcome][key] }) {
		return true
	}
	keys := u.by[outcome][numbersOf(s.Estimate.Y, s.Estimate.SE)]
	return len(keys) > 0 && !slices.ContainsFunc(keys, func(key string) bool { return today[key] })
}

// entering parts the outcome's pooled studies by the update at which each was pooled
// for the first time; those that no update knows entered with the last. Updates that
// brought no study make no part.
func (o *Outcome) entering(updates []Update) (groups [][]int, at []*Update) {
	today := map[string]bool{}
	for i := range o.Studies {
		for _, key := range studyKeys(o.Studies[i].Source.Name, o.Studies[i].Source.ID) {
			today[key] = true
		}
	}
	byUpdate := make([][]int, len(updates))
	for i := range o.Studies {
		first := slices.IndexFunc(updates, func(u Update) bool { return u.knew(o.Name, &o.Studies[i], today) })
		if first < 0 {
			first = len(updates) - 1
		}
		byUpdate[first] = append(byUpdate[first], i)
	}
	for i, rows := range byUpdate {
		if len(rows) > 0 {
			groups, at = append(groups, rows), append(at, &updates[i])
		}
	}
	return groups, at
}

// RepeatedLooks says how often a living review has looked at an outcome, and how
// likely so many looks are to reach the evidence by chance alone.
type RepeatedLooks struct {
	Times     int // updates, those that brought no study included
	Looks     int // at two studies or more, with new studies each time
	Reached   int // whole steps of evidence for an effect that the review has reached now; 0: none
	Sequences int // simulated
	Chances   []LookChance
	Why       string // why nothing was simulated; blank if something was
}

// LookChance is the chance, were there no effect, to reach the steps at one of the
// looks at least.
type LookChance struct {
	Tau2     float64 // between the studies in the simulation
	AnyLook  accrual.Value
	LastLook accrual.Value // at the last look alone
}

// LookAgain works out the repeated looks of an outcome over its updates, the last of
// which is now: sequences of the studies' own standard errors are simulated in the
// parts in which they entered, with τ² as estimated and with none. Its errors are
// those of accrual.Looks.
func (o *Outcome) LookAgain(ctx context.Context, updates []Update, draws accrual.Draws) (*RepeatedLooks, error) {
	r := &RepeatedLooks{Times: len(updates)}
	switch {
	case o.Result == nil:
		r.Why = "there is no result"
		return r, nil
	case o.Analysis.NullMissing:
		r.Why = "the measure has no value of no effect"
		return r, nil
	}
	groups, _ := o.entering(updates)
	for i, pooled := 0, 0; i < len(groups); i++ {
		if pooled += len(groups[i]); pooled > 1 {
			r.Looks++
		}
	}
	r.Reached = max(0, int(math.Floor(o.Result.Fit.Mean.Evidence.Steps())))
	switch {
	case r.Looks == 0:
		r.Why = "there are fewer than two studies"
		return r, nil
	case r.Reached == 0:
		r.Why = "no step of evidence for an effect is reached"
		return r, nil
	}
	model := o.Analysis.Model
	_, s := estimates(o.Studies)
	sequence := accrual.Sequence{SE: s, Groups: groups, Model: model, Steps: []float64{float64(r.Reached)}}
	results, err := accrual.Looks(ctx, sequence, accrual.Scenarios(o.Result.Fit.Mean, model.Null, nil), draws)
	if err != nil {
		return nil, err
	}
	r.Sequences = draws.N
	for _, result := range results {
		r.Chances = append(r.Chances, LookChance{Tau2: result.Scenario.Tau2, AnyLook: result.AnyLook[0].Value, LastLook: result.LastLook[0].Value})
	}
	return r, nil
}

// RuleLooks is the rule of findings about repeated looks.
const RuleLooks = "A8"

// conventional is the level of an interval that repeated looks need more than.
const conventional = 0.95

// FindLooks adds a warning to each outcome that a living review has looked at more
// than once with an interval of the conventional level or less (rule A8). Simmonds et
// al. (2017), Syst Rev 6:11; Cochrane Handbook 22.
func (s *Synthesis) FindLooks(updates []Update) {
	for i := range s.Outcomes {
		o := &s.Outcomes[i]
		if o.Result == nil || o.Result.Fit.Model.Level > conventional {
			continue
		}
		groups, _ := o.entering(updates)
		if len(groups) < 2 {
			continue
		}
		e := &examination{o: o}
		e.find(review.Warning, RuleLooks, fmt.Sprintf("the review has looked at this outcome %d times with new studies, each time with an interval of %.4g%%: the chance that one of the intervals leaves out no effect, were there none, grows with every look beyond %.4g%%. Read the plain interval as the estimate of today, and decide by triggers set beforehand",
			len(groups), 100*o.Result.Fit.Model.Level, 100*(1-o.Result.Fit.Model.Level)))
		s.Findings = append(s.Findings, e.findings...)
	}
}

// OrderByUpdate is what Order.By is where studies enter with the updates of a living
// review.
const OrderByUpdate = "update"

// AccrueByUpdate replaces the cumulative analysis of an outcome by one in which its
// studies enter with the updates that brought them, each refitted with today's
// numbers. It returns an error of the refit, and the cause if ctx ends.
func (o *Outcome) AccrueByUpdate(ctx context.Context, updates []Update, work meta.Work) error {
	if o.Result == nil {
		return nil
	}
	refit, err := o.refit()
	if err != nil {
		return fmt.Errorf("%s: %w", o.Called(), err)
	}
	groups, at := o.entering(updates)
	entering := &order{Order: Order{By: OrderByUpdate, Ties: review.TiesTogether}, groups: groups}
	for _, u := range at {
		entering.at = append(entering.at, u.At)
	}
	a := &Accrual{}
	if err := o.cumulative(ctx, refit, entering, a, work); err != nil {
		return err
	}
	o.Accrual = a
	return nil
}
