package synthesis

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"

	"steelyard/meta/accrual"
	"steelyard/meta/effect"
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
	Wanted   NextWanted // Toward settled
	Now      float64    // steps of the present evidence
	Tau      float64    // between the studies, as estimated
	Outlook  *accrual.Outlook
	Curve    []accrual.SizePoint // by people in all, the arms in proportion; nil with SE
	Smallest *accrual.Smallest   // that reaches Toward with Chance; nil with SE
}

// towardNone is the number of steps for none whose passing is always told: against no
// effect the evidence can reach 0.64 steps at most.
const towardNone = -0.5

// MostForNone is the number of steps that evidence for a null of one value can reach.
var MostForNone = -(math.Log(2) + 1) / 2 / math.Log(2+math.Sqrt(3))

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
func (o *Outcome) next(ctx context.Context, w NextWanted) (*Next, error) {
	if o.Analysis.NullMissing {
		o.note("The measure has no value of no effect and none is given, so that there is no evidence that another study could change: state one with --null.")
		return nil, nil
	}
	pooled := o.Result.Fit.Mean
	n := &Next{Wanted: w, Now: pooled.Evidence.Steps(), Tau: math.Sqrt(pooled.Tau2)}
	if w.Toward == 0 {
		n.Wanted.Toward = max(1, math.Floor(n.Now)+1)
	}
	y, s := estimates(o.Studies)
	trial := accrual.Trial{Y: y, SE: s, Model: o.Analysis.Model, Important: o.Analysis.Important, Steps: []float64{1, 2, 3, 4, towardNone}}
	if !slices.Contains(trial.Steps, n.Wanted.Toward) {
		trial.Steps = append(trial.Steps, n.Wanted.Toward)
	}
	if o.Analysis.Method != review.InverseVariance {
		o.note(fmt.Sprintf("The next study is pooled with the studies' own estimates by %s, not by the method for counts.", review.InverseVariance))
	}
	if w.SE > 0 {
		var err error
		n.Outlook, err = trial.Foresee(ctx, w.SE)
		return n, err
	}
	if err := o.unusedBySize(w); err != nil {
		return nil, err
	}
	design := accrual.Design{Measure: o.Analysis.Measure, Effect: pooled.Estimate, ControlRisk: w.ControlRisk, SD: w.SD, Ratio: w.Treated / w.Control}
	se, err := design.SE(w.Treated, w.Control)
	var measure *effect.MeasureError
	if errors.As(err, &measure) {
		return nil, &accrual.InputError{Problem: fmt.Sprintf("no standard error follows from the arms for a %s: give it with --se", o.Analysis.Measure)}
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
	binary := m == effect.OddsRatio || m == effect.RiskRatio || m == effect.RiskDifference
	switch {
	case w.ControlRisk > 0 && !binary:
		return &accrual.InputError{Problem: fmt.Sprintf("a %s has no use for a control risk: leave --control-risk away", m)}
	case w.SD > 0 && m != effect.MeanDifference:
		return &accrual.InputError{Problem: fmt.Sprintf("a %s has no use for a standard deviation: leave --sd away", m)}
	case binary && w.ControlRisk == 0:
		return &accrual.InputError{Problem: fmt.Sprintf("the standard error of a %s needs the risk in the control arm: give it with --control-risk, such as 0.2, or --se in place of the size", m)}
	case m == effect.MeanDifference && w.SD == 0:
		return &accrual.InputError{Problem: fmt.Sprintf("the standard error of a %s needs the standard deviation: give it with --sd, or --se in place of the size", m)}
	}
	return nil
}

// NextDocument is what one more study could change. Curve and Smallest are by the
// number of people in all; they are absent where its standard error alone is given.
type NextDocument struct {
	Treated     float64             `json:"treated,omitempty"`
	Control     float64             `json:"control,omitempty"`
	ControlRisk float64             `json:"control_risk,omitempty"`
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
		Treated: w.Treated, Control: w.Control, ControlRisk: w.ControlRisk, SD: w.SD,
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
