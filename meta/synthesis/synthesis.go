// Package synthesis runs a planned analysis over an extraction: it turns each
// row's numbers into an effect, pools every outcome, weighs the evidence, and
// says what was left out and why. It also writes the results as JSON.
package synthesis

import (
	"context"
	"fmt"
	"slices"
	"strings"

	"steelyard/meta"
	"steelyard/meta/bayes"
	"steelyard/meta/choice"
	"steelyard/meta/dependence"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/review"
)

// Want says which outcomes are asked for, none named meaning all, and what beside
// the pooled result.
type Want struct {
	Outcomes    []string
	Cumulative  bool
	Looks       Looking // repeated looks, beside Cumulative; nil: not wanted
	LeaveOneOut bool
	Influence   bool
	Subsets     Subsetting // nil: not wanted
	Next        Foreseeing // what one more study could change; nil: not wanted
	Methods     bool       // all methods for counts side by side
	Beliefs     bool       // what sceptics make of the evidence
	Runs        bool       // the planned sensitivity runs
	Work        meta.Work  // how all this is done; its progress starts anew with each part
	Further
}

// Further is what else may be wanted; each is nil unless it is.
type Further struct {
	Below      *float64          // steps under which the tipping set brings the evidence
	SmallStudy *SmallStudyWanted // whether small studies show other effects
	Panel      *PanelWanted      // what a guideline panel reads
	Posterior  bool              // the posterior distribution of mean effect and spread
	Explain    Explaining        // why the studies differ
}

// Synthesis is the result of an analysis. Every output prints its numbers.
type Synthesis struct {
	Source   review.Source
	Plan     *review.Plan
	Findings []review.Finding // of the sheet and of the analysis
	Cautions []string
	Outcomes []Outcome
	Readings []ReadingEffect // of the findings that have some
	Trials   bool            // the sheet calls its rows trials
	Arms     [2]string       // what the sheet calls the treated and the control arm
}

// Outcome is one pooled outcome.
type Outcome struct {
	Name     string
	Analysis Analysis
	Counts   Counts
	Studies  []Study // pooled, in the order of the sheet
	Excluded []Excluded
	Silent   []*review.Study // of these, whose counts carry nothing about a ratio
	PValues  *PValues        // studies weighed by their p-value alone; nil if there is none
	Result   *Result         // nil when nothing could be pooled; Problem then says why
	Problem  string
	Notes    []string // what was assumed, in sentences
	Parts
}

// Parts are the capabilities beyond the pooled result; each is nil unless wanted.
type Parts struct {
	Accrual    *Accrual    // how the evidence arrived, who carries it, what the next study could change
	Methods    *Methods    // all methods for counts side by side
	Beliefs    *Beliefs    // what sceptics make of the evidence
	Runs       []RunResult // the planned sensitivity runs; empty where none is planned
	SmallStudy *SmallStudy // whether small studies show other effects
	Panel      *Panel      // what a guideline panel reads
	Posterior  *Posterior  // of mean effect and spread
	Explain    *Explained  // why the studies differ
}

// Analysis is what was settled before pooling, null and thresholds on the
// analysis scale.
type Analysis struct {
	Measure    effect.Measure
	Better     review.Better
	Method     review.Method
	Model      meta.Model
	Important  *meta.Limits   // the trivial zone's limits; nil without an important difference
	Weighing   bayes.Weighing // which evidence the means carry; its Tau is the prior for τ of all that has one
	Prior      []float64
	Correction effect.Correction
	Dependence dependence.Way // of several estimates from one study
	// NullMissing: the measure has no value of no effect and none is given, so
	// that nothing is weighed; Model.Null then means nothing.
	NullMissing bool
}

// Counts counts an outcome's rows and people.
type Counts struct {
	Rows         int // of this outcome, after the filter
	Participants int // in the pooled rows that state totals
	Events       int // in the pooled rows that state events
	Corrected    int // pooled tables with a zero cell that was corrected in the result
	Silent       int // people in the rows that carry nothing about a ratio
	Wrong        int // rows left out because of an error
}

// Study is one pooled row.
type Study struct {
	Source      *review.Study
	Estimate    effect.Estimate
	Interval    meta.Limits
	Weight      float64
	Evidence    evidence.Ratio // normal form, of this study alone
	Basis       Basis
	Table       *effect.Table // its counts as they stand; nil where the effect is not from such counts
	Conversions []effect.Conversion
	Corrected   bool     // a zero cell was corrected in its own estimate
	Assumptions []string // what the number rests on besides the report; see Converted
}

// Excluded is a row that was not pooled.
type Excluded struct {
	Study  string
	Place  review.Place
	Rule   string // of the finding that is to blame; blank for the plan's choice
	Reason string
	Wrong  bool // an error of the sheet, not the plan's or the measure's choice
}

// Where says where the blame for leaving a row out lies: the place, and the rule of
// an error if there is one, such as "trials.csv!C3, rule C2".
func (e Excluded) Where() string {
	if e.Rule == "" || !e.Wrong {
		return e.Place.String()
	}
	return e.Place.String() + ", rule " + e.Rule
}

// Result is what pooling gave.
type Result struct {
	Fit           *meta.Fit
	Other         *meta.Fit // the effects model that was not chosen
	Posterior     []Belief
	DoubtersPrior Belief // Posterior is the level, Prior the doubter's prior
	Regions       []Region
	Without       *meta.Fit         // without the converted studies; nil if there are none, or no others
	Empirical     *evidence.Ratio   // in the empirical form beside another that rests on priors; else nil
	Integrated    *bayes.Integrated // with τ integrated over its prior; nil unless the studies are few
	Differing     *bayes.Integrated // the same for effects that differ, whatever their number; nil where not weighed
}

// Belief is a probability of an effect before and after the data.
type Belief struct{ Prior, Posterior float64 }

// believed is the posterior probability that the doubter's prior refers to.
const believed = 0.95

// Region is a range of the mean effect with what the data say of it.
type Region struct {
	Name      string // "benefit", "trivial", "harm"; "lower", "trivial", "higher" when no direction is better
	Low, High float64
	LnM       float64        // ln of the mean of the likelihood over the region's own posterior, relative
	Posterior float64        // share of the reference posterior in the region
	Evidence  evidence.Ratio // for the region against all other values
	Settings  float64        // predicted share of settings whose true effect lies in it; negative if unknown
}

// Run pools the wanted outcomes of an extraction by the plan. It returns an
// error if a wanted outcome does not occur, if the plan cannot be read, or if ctx
// ends; an outcome that cannot be pooled carries its own Problem.
func Run(ctx context.Context, x *review.Extraction, plan *review.Plan, want Want) (*Synthesis, error) {
	names, err := wanted(x, want)
	if err != nil {
		return nil, err
	}
	s := &Synthesis{Source: x.Source, Plan: plan, Findings: slices.Clone(x.Findings), Trials: callsTrials(x.Columns), Arms: armNames(x.Columns)}
	s.Findings = append(s.Findings, strayPlan(x, plan)...)
	blocked := blockedRows(x.Findings)
	for _, name := range names {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		o, findings, err := runOutcome(x, plan, name, blocked)
		if err != nil {
			return nil, err
		}
		if err := o.accrue(ctx, x.Columns, plan, want); err != nil {
			return nil, err
		}
		if want.Methods {
			if err := o.compare(plan); err != nil {
				return nil, err
			}
		}
		o.weighDiffering()
		if want.Posterior {
			o.posteriorOf()
		}
		if want.Beliefs {
			o.believe()
		}
		if want.Panel != nil {
			if err := o.examinePanel(ctx, x, plan, *want.Panel); err != nil {
				return nil, err
			}
		}
		if want.SmallStudy != nil {
			o.seekAsymmetry(*want.SmallStudy)
		}
		if want.Runs {
			if err := o.runPlanned(ctx, x, plan, blocked); err != nil {
				return nil, err
			}
		}
		if want.Explain != nil && o.Result != nil {
			if err := want.Explain.explain(ctx, o, x.Columns, want.Work); err != nil {
				return nil, err
			}
		}
		more, err := o.examine(ctx)
		if err != nil {
			return nil, err
		}
		s.Outcomes = append(s.Outcomes, *o)
		s.Findings = append(s.Findings, slices.Concat(findings, more)...)
	}
	if err := s.read(ctx, x, plan); err != nil {
		return nil, err
	}
	s.Cautions = cautions(s)
	return s, nil
}

// wanted resolves the names of the outcomes asked for.
func wanted(x *review.Extraction, want Want) ([]string, error) {
	all := x.Outcomes()
	if len(want.Outcomes) == 0 {
		return all, nil
	}
	if len(all) == 1 && all[0] == "" {
		return nil, &choice.UnknownError{What: "outcome of this sheet, which has no column of outcomes: all its rows are one; leave the name away", Text: want.Outcomes[0]}
	}
	var names []string
	for _, name := range want.Outcomes {
		found := false
		for _, have := range all {
			if choice.Fold(have) == choice.Fold(name) {
				names, found = append(names, have), true
				break
			}
		}
		if !found {
			return nil, &choice.UnknownError{What: "outcome of this sheet", Text: name, Valid: all}
		}
	}
	return names, nil
}

// strayPlan warns of plan rows for outcomes that the sheet does not have.
func strayPlan(x *review.Extraction, plan *review.Plan) []review.Finding {
	have := map[string]bool{}
	for _, name := range x.Outcomes() {
		have[choice.Fold(name)] = true
	}
	var stray []review.Finding
	names, places := plan.Outcomes()
	for _, name := range names {
		if !have[name] {
			stray = append(stray, review.Finding{
				Severity: review.Warning, Rule: review.RulePlan, Place: places[name], Outcome: name,
				Message: fmt.Sprintf("the plan has settings for an outcome %q that no row of the sheet has; the outcomes are: %s", name, strings.Join(x.Outcomes(), ", ")),
			})
		}
	}
	return stray
}

// runOutcome pools one outcome, with what was found on the way.
func runOutcome(x *review.Extraction, plan *review.Plan, name string, blocked map[rowKey]review.Finding) (*Outcome, []review.Finding, error) {
	asked, err := plan.Analysis(name)
	if err != nil {
		return nil, nil, fmt.Errorf("outcome %q: %w", name, err)
	}
	o := &Outcome{Name: name}
	if err := knownColumns(asked.Where, x.Columns); err != nil {
		o.Problem = err.Error()
		return o, nil, nil
	}
	if f, refused := refusal(x.Findings, name); refused {
		o.Problem = f.Message
		return o, nil, nil
	}
	where := newRowFilter(asked.Where, x.Columns)
	o.noteUnmatched(x, where)
	rows := o.rows(x, where, blocked)
	if err := o.settle(asked, rows); err != nil {
		o.Problem = err.Error()
		return o, nil, nil
	}
	findings := o.derive(rows)
	slices.SortStableFunc(o.Excluded, func(a, b Excluded) int { return a.Place.Row - b.Place.Row })
	o.markReported()
	o.filterConverted(where)
	o.noteSilent()
	o.noteZeroCells()
	if err := o.PValues.combine(); err != nil {
		o.Problem = err.Error()
		return o, findings, nil
	}
	if len(o.Studies) == 0 {
		o.Problem = o.nothingLeft()
		return o, findings, nil
	}
	o.count()
	if err := o.settleDependence(asked, plan); err != nil {
		o.Problem = err.Error()
		return o, findings, nil
	}
	o.noteIndependent()
	if err := o.pool(asked); err != nil {
		o.Problem = err.Error()
		return o, findings, nil
	}
	o.idleSettings(plan)
	return o, findings, nil
}

// idleSetting is a setting that may be of no use, and why.
type idleSetting struct {
	name string
	idle bool
	why  string
}

// idleByMethod lists the settings that a method for 2×2 tables has no use for.
func idleByMethod(method review.Method, common, own bool) []idleSetting {
	tau := fmt.Sprintf("%s estimates τ² by maximum likelihood", method)
	if common {
		tau = "a common effect has no τ²"
	}
	return []idleSetting{
		{review.SettingTau, true, tau},
		{review.SettingInterval, true, fmt.Sprintf("%s has an interval of its own", method)},
		{review.SettingPrediction, true, fmt.Sprintf("%s gives no prediction interval", method)},
		{review.SettingEvidence, own, fmt.Sprintf("beside %s the evidence has the normal form", method)},
		{review.SettingCorrection, true, fmt.Sprintf("%s corrects no table; a study's own estimate alone may have a correction", method)},
	}
}

// idleSettings notes settings that somebody chose and the model has no use for.
func (o *Outcome) idleSettings(plan *review.Plan) {
	if o.Result.Fit.Mean.K < 2 {
		return
	}
	model := o.Result.Fit.Model
	common := model.Effects == meta.CommonEffect
	student := model.Interval == meta.HartungKnapp || model.Interval == meta.HartungKnappFloor
	idle := []idleSetting{
		{review.SettingTau, common, "a common effect has no τ²"},
		{review.SettingPrediction, common, "a common effect has no prediction interval"},
		{review.SettingEvidence, !student && o.Analysis.Weighing.Own(), fmt.Sprintf("beside the %s interval the evidence has the normal form", model.Interval)},
	}
	if method := o.Analysis.Method; method != review.InverseVariance {
		idle = idleByMethod(method, common, o.Analysis.Weighing.Own())
	}
	for _, name := range []string{review.SettingEffectMean, review.SettingEffectSD, review.SettingEffectSide} {
		idle = append(idle, idleSetting{name, !o.Analysis.Weighing.Form.UnderPrior(), "evidence normal-prior and cauchy-prior alone have a prior for the effect"})
	}
	for _, s := range idle {
		if v := plan.Value(s.name, o.Name); s.idle && v.From != review.FromDefault {
			o.note(fmt.Sprintf("The setting %s (%s) is not used: %s.", s.name, v.Text, s.why))
		}
	}
}

func (o *Outcome) count() {
	for i := range o.Studies {
		study := &o.Studies[i]
		d := derivation{row: study.Source}
		o.Counts.Participants += int(d.bothArms())
		if d.has(review.EventsTreated) || d.has(review.EventsControl) {
			o.Counts.Events += int(d.value(review.EventsTreated)) + int(d.value(review.EventsControl))
		} else {
			o.Counts.Events += int(d.value(review.Events))
		}
		if study.Corrected && o.Analysis.Method == review.InverseVariance {
			o.Counts.Corrected++
		}
	}
}
