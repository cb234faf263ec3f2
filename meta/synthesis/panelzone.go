package synthesis

import (
	"context"
	"errors"
	"fmt"
	"math"

	"steelyard/meta"
	"steelyard/meta/accrual"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/panel"
	"steelyard/meta/review"
)

// zoneLimits are the important differences on the analysis scale; an infinite one
// cannot be reached at the baseline.
type zoneLimits = meta.Limits

// PanelZone is what the data say of the important difference at one baseline.
type PanelZone struct {
	Limits meta.Limits // of the trivial zone, on the analysis scale; infinite: out of reach
	// Per1000 are the limits as differences per 1000, as given or as they follow at
	// this baseline; nil without an absolute form.
	Per1000 *meta.Limits
	Regions []Region // in ascending order; one that cannot be reached is left out
	// Benefit is the evidence for an important benefit over a trivial effect, Harm that
	// for a trivial effect over an important harm; without a direction that is better,
	// for the lower and over the higher side. Nil where the side cannot be reached.
	Benefit, Harm *evidence.Ratio
	Low, High     *Boundary // nil where out of reach
	Sides         [3]int    // studies whose estimate lies below, within and above
}

// Boundary is where the interval lies to a value of the effect: a threshold, or none.
type Boundary struct {
	At        float64 // on the analysis scale
	Crossed   bool    // the interval holds it
	Low, High float64 // distance of each limit from it, per 1000 or in the reader's unit
	// Trial is the smallest trial that finds no effect and brings the interval to hold
	// the value (or, where it holds it, to hold it no more); nil where no such trial
	// could, or where none can be planned from the measure.
	Trial *panel.Crossing
}

// zoneAt returns the important differences at a baseline: those per 1000 where given
// and the measure has an absolute form, else those of the analysis.
func (o *Outcome) zoneAt(baseline float64, per1000 []float64) (*zoneLimits, error) {
	if len(per1000) == 0 || baseline == 0 {
		return o.Analysis.Important, nil
	}
	low, high := per1000Ends(per1000)
	m := o.Analysis.Measure
	var z zoneLimits
	var err error
	if z.Low, err = panel.Effect(m, baseline, baseline+low/1000); err != nil {
		return nil, err
	}
	if z.High, err = panel.Effect(m, baseline, baseline+high/1000); err != nil {
		return nil, err
	}
	if null := o.Analysis.Model.Null; !(z.Low < null && null < z.High) {
		return nil, fmt.Errorf("%s: %v and %v per 1000 lie on one side of the null of the plan; give one difference on each side of it", review.SettingPer1000, low, high)
	}
	return &z, nil
}

// per1000Ends returns both differences per 1000; one alone is mirrored.
func per1000Ends(values []float64) (low, high float64) {
	if len(values) == 2 {
		return min(values[0], values[1]), max(values[0], values[1])
	}
	return -math.Abs(values[0]), math.Abs(values[0])
}

// panelZone weighs the regions that the zone leaves.
func (o *Outcome) panelZone(ctx context.Context, z zoneLimits, baseline float64, per1000 []float64, trial *panel.NullTrial) (*PanelZone, error) {
	p := &PanelZone{Limits: z}
	location := o.Result.Fit.Mean.Location()
	below, above := "lower", "higher"
	switch o.Analysis.Better {
	case review.BetterLower:
		below, above = "benefit", "harm"
	case review.BetterHigher:
		below, above = "harm", "benefit"
	}
	lowest, highest := math.Inf(-1), math.Inf(1)
	trivial := evidence.Region{{Low: z.Low, High: z.High}}
	var lower, higher evidence.Region
	if z.Low > lowest {
		lower = evidence.Region{{Low: lowest, High: z.Low}}
	}
	if z.High < highest {
		higher = evidence.Region{{Low: z.High, High: highest}}
	}
	for _, r := range []struct {
		name string
		part evidence.Region
	}{{below, lower}, {"trivial", trivial}, {above, higher}} {
		if r.part == nil || len(r.part.Complement()) == 0 {
			continue
		}
		ratio, err := location.Region(r.part, r.part.Complement())
		if err != nil {
			return nil, fmt.Errorf("important: %w", err)
		}
		at := r.part[0]
		p.Regions = append(p.Regions, Region{
			Name: r.name, Low: at.Low, High: at.High, LnM: location.LnM(r.part), Posterior: location.Posterior(r.part),
			Evidence: ratio, Settings: o.settingsWithin(at.Low, at.High),
		})
	}
	good, bad := lower, higher
	if o.Analysis.Better == review.BetterHigher {
		good, bad = higher, lower
	}
	p.Benefit, p.Harm = over(location, good, trivial), over(location, trivial, bad)
	for _, study := range o.Studies {
		switch y := study.Estimate.Y; {
		case y <= z.Low:
			p.Sides[0]++
		case y < z.High:
			p.Sides[1]++
		default:
			p.Sides[2]++
		}
	}
	if baseline > 0 {
		p.Per1000 = &meta.Limits{Low: o.difference(baseline, z.Low), High: o.difference(baseline, z.High)}
		if len(per1000) > 0 {
			p.Per1000.Low, p.Per1000.High = per1000Ends(per1000)
		}
	}
	var err error
	if lower != nil {
		if p.Low, err = o.boundary(ctx, z.Low, baseline, trial); err != nil {
			return nil, err
		}
	}
	if higher != nil {
		p.High, err = o.boundary(ctx, z.High, baseline, trial)
	}
	return p, err
}

// over returns the evidence for a region over another, nil where one cannot be reached.
func over(location evidence.Location, first, second evidence.Region) *evidence.Ratio {
	if first == nil || second == nil {
		return nil
	}
	ratio, err := location.Region(first, second)
	if err != nil {
		return nil
	}
	return &ratio
}

// difference returns what an effect makes of a baseline, as a difference per 1000.
func (o *Outcome) difference(baseline, y float64) float64 {
	risk, _, err := panel.Risk(o.Analysis.Measure, baseline, y)
	if err != nil {
		return 0
	}
	return 1000 * (risk - baseline)
}

// boundary measures how far the interval lies from a value, and which null trial would
// change that it holds it or not.
func (o *Outcome) boundary(ctx context.Context, at, baseline float64, trial *panel.NullTrial) (*Boundary, error) {
	mean := o.Result.Fit.Mean
	shown := func(y float64) float64 { return effect.ToReader(o.Analysis.Measure, y) }
	if baseline > 0 {
		shown = func(y float64) float64 { return o.difference(baseline, y) }
	}
	b := &Boundary{At: at, Crossed: mean.Low < at && at < mean.High, Low: shown(mean.Low) - shown(at), High: shown(mean.High) - shown(at)}
	crossed := b.trialGoal(mean, o.Analysis.Model.Null)
	if trial == nil || crossed == nil {
		return b, nil
	}
	found, err := trial.Smallest(ctx, crossed)
	switch {
	case err != nil && context.Cause(ctx) != nil:
		return nil, err
	case err == nil:
		b.Trial = &found
	}
	return b, nil
}

// trialGoal returns what a null trial is to do with the interval: to hold a value that
// lies between it and no effect; to leave one behind that it holds now, other than no
// effect itself. It is nil for anything else, as a trial without effect only draws the
// interval towards none.
func (b *Boundary) trialGoal(mean meta.Mean, null float64) func(low, high float64) bool {
	at := b.At
	switch {
	case !b.Crossed && mean.High <= at && at <= null:
		return func(_, high float64) bool { return high >= at }
	case !b.Crossed && mean.Low >= at && at >= null:
		return func(low, _ float64) bool { return low <= at }
	case b.Crossed && at < null:
		return func(low, _ float64) bool { return low >= at }
	case b.Crossed && at > null:
		return func(_, high float64) bool { return high <= at }
	}
	return nil
}

// nullTrial returns the question for a trial that finds no effect, nil where the
// measure gives no standard error from a number of people.
func (o *Outcome) nullTrial(baseline float64, sd *PanelSD) *panel.NullTrial {
	y, s := estimates(o.Studies)
	trial := &panel.NullTrial{Y: y, S: s, Model: o.Analysis.Model}
	m := o.Analysis.Measure
	design := accrual.Design{Measure: m, Effect: o.Analysis.Model.Null, ControlRisk: baseline}
	if sd != nil {
		design.SD = sd.Value
	}
	switch m {
	case effect.HazardRatio: // two arms with half of n·p events each: √(4/(n·p))
		trial.SE = func(n float64) (float64, error) { return 2 / math.Sqrt(n*baseline), nil }
	case effect.ArcsineDifference: // √(1/(4n₁)+1/(4n₂))
		trial.SE = func(n float64) (float64, error) { return 1 / math.Sqrt(n), nil }
	case effect.OddsRatio, effect.RiskRatio, effect.RiskDifference, effect.MeanDifference, effect.StandardisedMeanDifference:
		trial.SE = design.SizeToSE
	default:
		return nil
	}
	needsRisk := panel.HasAbsolute(m) && m != effect.ArcsineDifference
	if needsRisk && baseline == 0 {
		return nil
	}
	if _, err := trial.SE(panel.FewestPeople); err != nil {
		var input *accrual.InputError
		if errors.As(err, &input) {
			return nil
		}
	}
	return trial
}

// hasAbsolute reports whether the outcome's measure has an absolute form at a baseline.
func (o *Outcome) hasAbsolute() bool { return panel.HasAbsolute(o.Analysis.Measure) }
