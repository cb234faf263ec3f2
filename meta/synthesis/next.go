package synthesis

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"

	"steelyard/meta"
	"steelyard/meta/accrual"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/review"
)

// NextWanted asks what one more study could change. Its standard error is SE, on the
// analysis scale, or follows from the arms with the control risk or the standard
// deviation that the measure needs.
type NextWanted struct {
	Treated, Control float64 // people in each arm; 0 with SE
	ControlRisk, SD  float64 // 0: not stated
	SE               float64 // 0: from the arms
	Toward           float64 // steps that the evidence is to reach, below 0 for none; 0: the next whole step
	Chance           float64 // with which
}

// Next is what one more study could change.
type Next struct {
	Wanted   NextWanted // Toward and ControlRisk settled
	RiskFrom int        // control arms whose median the control risk is; 0: it was stated or plays no part
	Now      float64    // steps of the present evidence, pooled as the next study will be
	// MostForNone is the number of steps, below 0, that no evidence with the next study
	// can go beyond for none; nil where the form of evidence has no such limit.
	MostForNone *float64
	Tau         float64 // between the studies, as estimated
	Outlook     *accrual.Outlook
	Curve       []accrual.SizePoint // by people in all, the arms in proportion; nil with SE
	Smallest    *accrual.Smallest   // that reaches Toward with Chance; nil with SE
}

// towardNone is the number of steps for none whose passing is always told: against no
// effect the empirical form can reach 0.64 steps at most.
const towardNone = -0.5

// mostForNone returns the steps that the form of evidence cannot go beyond for none
// with one study more: those of an estimate of exactly none. It is nil for a form
// that rests on priors.
func (o *Outcome) mostForNone() *float64 {
	most := evidence.Normal(0).Steps()
	model := o.Analysis.Model
	student := len(o.Studies) == 1 || model.Interval == meta.HartungKnapp || model.Interval == meta.HartungKnappFloor
	switch {
	case !o.Analysis.Weighing.Own():
		return nil
	case o.Analysis.Weighing.Form == evidence.StudentForm && model.Effects == meta.RandomEffects && student:
		most = evidence.Student(0, float64(len(o.Studies))).Steps()
	}
	return &most
}

// nextSizes are the people in all of the size curve, 50 to 100,000.
var nextSizes = curveSizes()

func curveSizes() []float64 {
	sizes := []float64{50, 60, 70, 80}
	for _, decade := range []float64{10, 100, 1000} {
		for _, tenths := range []float64{10, 12, 15, 20, 25, 30, 40, 50, 70} {
			sizes = append(sizes, decade*tenths)
		}
	}
	return append(sizes, 100_000)
}

// next foresees the next study. An outcome without evidence says so in a note. It
// returns an *accrual.InputError if its size gives no standard error, and the cause
// if ctx ends.
func (asked *NextWanted) next(ctx context.Context, o *Outcome, plan *review.Plan) (*Next, error) {
	w := *asked
	if o.Analysis.NullMissing {
		o.note("The measure has no value of no effect and none is given, so that there is no evidence that another study could change: state one with --null.")
		return nil, nil
	}
	y, s := estimates(o.Studies)
	pooled, err := o.pooledByPairs(y, s)
	if err != nil {
		return nil, err
	}
	if err := o.checkSlowNext(w); err != nil {
		return nil, err
	}
	n := &Next{Wanted: w, Now: pooled.Evidence.Steps(), Tau: math.Sqrt(pooled.Tau2), MostForNone: o.mostForNone()}
	if most := n.MostForNone; most != nil && w.Toward < 0 && w.Toward <= *most {
		return nil, &accrual.InputError{Problem: fmt.Sprintf("toward %v steps: for none the evidence in the form %s can reach %.2f steps at most; ask for fewer", w.Toward, o.Analysis.Weighing.Form, -*most)}
	}
	if w.Toward == 0 {
		n.Wanted.Toward = max(1, math.Floor(n.Now)+1)
	}
	model, err := o.modelWithNext(plan)
	if err != nil {
		return nil, err
	}
	trial := accrual.Trial{Y: y, SE: s, Model: model, Important: o.Analysis.Important, Steps: []float64{1, 2, 3, 4, towardNone}}
	if !slices.Contains(trial.Steps, n.Wanted.Toward) {
		trial.Steps = append(trial.Steps, n.Wanted.Toward)
	}
	if !o.Analysis.Weighing.Own() {
		trial.Weigh = func(mean meta.Mean, y, s []float64) (evidence.Ratio, error) {
			return o.Analysis.Weighing.Evidence(mean, o.Analysis.Model.Null, y, s)
		}
	}
	if w.SE > 0 {
		n.Outlook, err = trial.Foresee(ctx, w.SE)
		return n, err
	}
	if w, err = o.riskOfSheet(w, n); err != nil {
		return nil, err
	}
	if err := o.unusedBySize(w); err != nil {
		return nil, err
	}
	design := accrual.Design{Measure: o.Analysis.Measure, Effect: pooled.Estimate, ControlRisk: w.ControlRisk, SD: w.SD, Ratio: w.Treated / w.Control}
	se, err := design.SE(w.Treated, w.Control)
	var measure *effect.MeasureError
	if errors.As(err, &measure) {
		what := "a " + o.Analysis.Measure.String()
		if o.Analysis.Measure == effect.Unspecified {
			what = "a measure that is not stated (--measure)"
		}
		return nil, &accrual.InputError{Problem: fmt.Sprintf("no standard error follows from the arms for %s: give it with --se", what)}
	}
	if err != nil {
		return nil, err
	}
	if n.Outlook, err = trial.Foresee(ctx, se); err != nil {
		return nil, err
	}
	if n.Curve, err = trial.Curve(ctx, design.SizeToSE, nextSizes); err != nil {
		return nil, err
	}
	n.Smallest, err = trial.SmallestSize(ctx, design.SizeToSE, n.Reaches, w.Chance)
	return n, err
}

// modelWithNext returns the model by which the studies and the next are pooled: that of
// the studies, or, as a single study resolves to methods of its own, the one asked for.
func (o *Outcome) modelWithNext(plan *review.Plan) (meta.Model, error) {
	if len(o.Studies) > 1 {
		return o.Analysis.Model, nil
	}
	asked, err := plan.Analysis(o.Name)
	if err != nil {
		return meta.Model{}, fmt.Errorf("%s: %w", o.Called(), err)
	}
	model := asked.Model
	model.Effects, model.Null = o.Analysis.Model.Effects, o.Analysis.Model.Null
	return model, nil
}

// pooledByPairs returns the present result as the next study will be pooled with it:
// for a method for counts, whose counts no draw of a next study has, that of the
// studies' own estimates, as a note says.
func (o *Outcome) pooledByPairs(y, s []float64) (meta.Mean, error) {
	own := o.Result.Fit.Mean
	if o.Analysis.Method == review.InverseVariance {
		return own, nil
	}
	var pool meta.Pooler
	mean, err := pool.Pool(o.Analysis.Model, y, s)
	if err != nil {
		return mean, o.explain(err)
	}
	if mean.Evidence, err = o.Analysis.Weighing.Evidence(mean, o.Analysis.Model.Null, y, s); err != nil {
		return mean, err
	}
	o.note(fmt.Sprintf("What is foreseen is not pooling by %s, which needs the next study's counts: its estimate is drawn with a standard error and pooled with the studies' own estimates by %s, where the evidence now is %.1f steps and by %s %.1f.",
		o.Analysis.Method, review.InverseVariance, mean.Evidence.Steps(), o.Analysis.Method, own.Evidence.Steps()))
	return mean, nil
}

// mostSlowNext is up to how many studies a form that integrates τ is weighed over the
// sizes of the next study: half a minute on one processor.
const mostSlowNext = 50

// checkSlowNext refuses sizes of the next study to many studies in a form of evidence
// that would take minutes over them.
func (o *Outcome) checkSlowNext(w NextWanted) error {
	if form := o.Analysis.Weighing.Form; form.OverTau() && w.SE == 0 && len(o.Studies) > mostSlowNext {
		return &accrual.InputError{Problem: fmt.Sprintf("next-trial: evidence %s is too slow to weigh over the sizes of a study beside more than %d; give the next study's standard error with --se in place of its size, or choose another form with --%s", form, mostSlowNext, review.SettingEvidence)}
	}
	return nil
}

// riskOfSheet takes the median control risk of the studies where a measure of counts
// needs one and none is stated.
func (o *Outcome) riskOfSheet(w NextWanted, n *Next) (NextWanted, error) {
	if !comparesRisks(o.Analysis.Measure) || w.ControlRisk != 0 {
		return w, nil
	}
	median := o.medianRisk()
	if median == nil {
		return w, nil
	}
	if risk := median.Risk; !(risk > 0 && risk < 1) {
		return w, &accrual.InputError{Problem: fmt.Sprintf("the median risk of the studies' %d control arms is %v, which gives no standard error: state the risk in the control arm with --control-risk, such as 0.2", median.Studies, risk)}
	}
	w.ControlRisk = median.Risk
	n.Wanted.ControlRisk, n.RiskFrom = median.Risk, median.Studies
	return w, nil
}

// comparesRisks reports whether a measure compares the risks of two arms.
func comparesRisks(m effect.Measure) bool {
	return m == effect.OddsRatio || m == effect.RiskRatio || m == effect.RiskDifference
}

// Reaches is the chance in an outlook that the wanted step is passed.
func (n *Next) Reaches(o *accrual.Outlook) float64 {
	for _, c := range o.Passing {
		if c.Steps == n.Wanted.Toward {
			return c.Value.Value
		}
	}
	return 0
}

// unusedBySize refuses what the measure has no use for.
func (o *Outcome) unusedBySize(w NextWanted) error {
	m := o.Analysis.Measure
	binary := comparesRisks(m)
	switch {
	case w.ControlRisk > 0 && !binary:
		return &accrual.InputError{Problem: fmt.Sprintf("%s has no use for a control risk: leave --control-risk away", m.WithArticle())}
	case w.SD > 0 && m != effect.MeanDifference:
		return &accrual.InputError{Problem: fmt.Sprintf("%s has no use for a standard deviation: leave --sd away", m.WithArticle())}
	case binary && w.ControlRisk == 0:
		return &accrual.InputError{Problem: fmt.Sprintf("the standard error of %s needs the risk in the control arm: give it with --control-risk, such as 0.2, or --se in place of the size", m.WithArticle())}
	case m == effect.MeanDifference && w.SD == 0:
		return &accrual.InputError{Problem: fmt.Sprintf("the standard error of %s needs the standard deviation: give it with --sd, or --se in place of the size", m.WithArticle())}
	}
	return nil
}

// NextDocument is what one more study could change. Curve and Smallest are by the
// number of people in all; they are absent where its standard error alone is given.
type NextDocument struct {
	Treated     float64             `json:"treated,omitempty"`
	Control     float64             `json:"control,omitempty"`
	ControlRisk float64             `json:"control_risk,omitempty"`
	RiskFrom    int                 `json:"control_risk_median_of_arms,omitempty"` // absent where the risk was stated
	SD          float64             `json:"sd,omitempty"`
	Toward      float64             `json:"toward_steps"`
	Chance      float64             `json:"wanted_chance"`
	Outlook     OutlookDocument     `json:"outlook"`
	Curve       []SizePointDocument `json:"size_curve,omitempty"`
	Smallest    *SmallestDocument   `json:"smallest_size,omitempty"`
}

// OutlookDocument is the distribution of the updated result over what the next study
// may find. Passing is of the evidence for an effect over none; a number of steps
// below 0 is reached by evidence for none.
type OutlookDocument struct {
	SE            float64              `json:"se"`
	ExpectedSteps float64              `json:"expected_steps"`
	Passing       []ChanceDocument     `json:"passing"`
	ExcludesNull  float64              `json:"excludes_null"`
	Zone          *ZoneDocument        `json:"important,omitempty"`
	Spread        []PercentileDocument `json:"spread"`
}

// ZoneDocument is the outlook for the zone of unimportant effects: the chance that the
// updated interval lies inside it, or wholly beyond one end.
type ZoneDocument struct {
	Inside  float64          `json:"interval_inside"`
	Outside float64          `json:"interval_outside"`
	Passing []ChanceDocument `json:"passing"`
}

// PercentileDocument holds quantiles at one probability, each of its own distribution.
type PercentileDocument struct {
	P        float64 `json:"p"`
	Steps    float64 `json:"steps"`
	Estimate float64 `json:"estimate"`
	Low      float64 `json:"ci_low"`
	High     float64 `json:"ci_high"`
}

// SizePointDocument is the outlook at one size.
type SizePointDocument struct {
	Size float64 `json:"size"`
	OutlookDocument
}

// SmallestDocument is the smallest size that reaches the wanted step with the wanted
// chance; where none does, Found is false and the rest is of the size with the best
// chance.
type SmallestDocument struct {
	Found bool `json:"found"`
	SizePointDocument
}

func nextDocument(n *Next) *NextDocument {
	w := n.Wanted
	d := &NextDocument{
		Treated: w.Treated, Control: w.Control, ControlRisk: w.ControlRisk, RiskFrom: n.RiskFrom, SD: w.SD,
		Toward: w.Toward, Chance: w.Chance, Outlook: outlookDocument(n.Outlook),
	}
	for _, point := range n.Curve {
		d.Curve = append(d.Curve, SizePointDocument{point.Size, outlookDocument(point.Outlook)})
	}
	if n.Smallest != nil {
		d.Smallest = &SmallestDocument{n.Smallest.Found, SizePointDocument{n.Smallest.At.Size, outlookDocument(n.Smallest.At.Outlook)}}
	}
	return d
}

func outlookDocument(o *accrual.Outlook) OutlookDocument {
	d := OutlookDocument{
		SE: o.SE, ExpectedSteps: o.Expected.Value, Passing: chanceDocuments(o.Passing),
		ExcludesNull: o.ExcludesNull.Value, Spread: []PercentileDocument{},
	}
	if z := o.Zone; z != nil {
		d.Zone = &ZoneDocument{Inside: z.Inside.Value, Outside: z.Outside.Value, Passing: chanceDocuments(z.Passing)}
	}
	for _, p := range o.Spread {
		d.Spread = append(d.Spread, PercentileDocument(p))
	}
	return d
}
