package synthesis

import (
	"context"
	"fmt"
	"math"

	"steelyard/meta/effect"
	"steelyard/meta/panel"
	"steelyard/meta/review"
)

// PanelWanted asks for what a guideline panel reads.
type PanelWanted struct {
	Earlier *Earlier // an earlier result to hold the thresholds against; nil: none
}

// Panel is what a guideline panel reads of one outcome: what the effect means at each
// baseline risk, and the numbers beside each domain of certainty. No level is computed.
type Panel struct {
	Baselines review.Value // the setting, with its origin; blank text: the median is offered
	Median    *MedianRisk  // of the studies' control arms; nil where no study states one
	// Rows has one row for each baseline. A measure without an absolute form has one
	// row, in its own unit.
	Rows       []PanelRow
	NoAbsolute string      // why the rows have no absolute effect; blank where they have
	SD         *PanelSD    // the standard deviation in use; nil without one
	Threshold  *Threshold  // the important difference as it was set; nil without one
	Evidence   EvidenceMap // the numbers beside the domains
	Judgements []review.Judgement
}

// MedianRisk is the median of the control arms' risks, or rates for a rate ratio.
type MedianRisk struct {
	Risk    float64
	Studies int // that state one, those that carry nothing about a ratio included
	Used    bool
}

// PanelSD is a standard deviation of the outcome.
type PanelSD struct {
	Value  float64
	Stated *review.Value // the setting; nil: the median of the studies' control arms
}

// PanelRow is what the effect means at one baseline.
type PanelRow struct {
	Baseline    review.Baseline // zero without an absolute form
	Absolute    *panel.Absolute // nil without an absolute form
	Needed      *panel.Needed   // number needed to treat; nil without people
	Zone        *PanelZone      // nil without an important difference
	Null        *Boundary       // what is known of no effect; nil without a null
	Information *Adequacy       // nil where it does not apply; Panel.NoInformation says why
	Trouble     string          // what could not be computed, and why; blank if nothing
}

// Adequacy is the optimal information size and how much of it is reached.
type Adequacy struct {
	panel.Information
	From, To  float64 // the risks told apart; 0 for means
	Delta     float64 // standard deviations told apart; 0 for risks
	Important bool    // the difference is the important one, not the setting reduction
	People    int     // in the pooled studies; 0: not stated
}

// Share is the share of the information size that the people reach.
func (a Adequacy) Share() float64 { return float64(a.People) / a.Total() }

// examinePanel adds the card of an outcome that has a result. It returns an error for
// differences per 1000 on one side of the null, and the cause if ctx ends.
func (o *Outcome) examinePanel(ctx context.Context, x *review.Extraction, plan *review.Plan, w PanelWanted) error {
	if o.Result == nil {
		return nil
	}
	asked, err := plan.Analysis(o.Name)
	if err != nil {
		return fmt.Errorf("%s: %w", o.Called(), err)
	}
	p := &Panel{Baselines: plan.Value(review.SettingBaseline, o.Name), Median: o.medianRisk(), Threshold: o.threshold(plan, x, w)}
	p.SD = o.panelSD(asked.Panel, plan)
	for _, j := range x.Judgements {
		if j.Outcome == o.Name {
			p.Judgements = append(p.Judgements, j)
		}
	}
	if p.Evidence, err = o.evidenceMap(); err != nil {
		return err
	}
	settings := asked.Panel
	for _, baseline := range p.baselines(o, settings) {
		row, err := o.panelRow(ctx, baseline, settings, p.SD)
		if err != nil {
			return err
		}
		p.Rows = append(p.Rows, row)
	}
	o.Panel = p
	return nil
}

// baselines returns those of the plan, else the median of the control arms; one blank
// baseline where the measure has no absolute form, or where there is none to take.
func (p *Panel) baselines(o *Outcome, settings review.PanelSettings) []review.Baseline {
	m := o.Analysis.Measure
	switch {
	case !panel.HasAbsolute(m):
		_, _, err := panel.Risk(m, 0.5, 0)
		p.NoAbsolute = err.Error()
	case len(settings.Baselines) > 0:
		return settings.Baselines
	case p.Median == nil:
		p.NoAbsolute = "no baseline risk is given and no study states the events of its control arm: give one, such as --baseline \"low 0.05, high 0.2\""
	case panel.CheckBaseline(p.Median.Risk) != nil:
		p.NoAbsolute = fmt.Sprintf("no baseline risk is given, and the median risk of the control arms, %v, is none to start from: give one, such as --baseline \"low 0.05, high 0.2\"", p.Median.Risk)
	default:
		p.Median.Used = true
		return []review.Baseline{{Name: MedianBaseline, Risk: p.Median.Risk}}
	}
	return []review.Baseline{{}}
}

// MedianBaseline is the name of the baseline that nobody gave.
const MedianBaseline = "median of the control arms"

// panelRow works out one baseline; a zero one has no absolute form.
func (o *Outcome) panelRow(ctx context.Context, b review.Baseline, settings review.PanelSettings, sd *PanelSD) (PanelRow, error) {
	row := PanelRow{Baseline: b}
	m, mean := o.Analysis.Measure, o.Result.Fit.Mean
	if b.Risk > 0 {
		a, err := panel.At(m, b.Risk, panel.Range{Value: mean.Estimate, Low: mean.Low, High: mean.High})
		switch {
		case err != nil:
			row.Trouble = err.Error()
		case math.IsInf(a.Treated.High, 1):
			row.Trouble = "the upper limit of the interval leaves the range of numbers"
		default:
			row.Absolute = &a
		}
		if row.Absolute != nil && m != effect.RateRatio {
			n := panel.NumberNeeded(a.Difference)
			row.Needed = &n
		}
	}
	if o.Analysis.NullMissing {
		return row, nil
	}
	zone, err := o.zoneAt(b.Risk, settings.Per1000)
	if err != nil {
		return row, fmt.Errorf("%s: %w", o.Called(), err)
	}
	trial := o.nullTrial(b.Risk, sd)
	if row.Null, err = o.boundary(ctx, o.Analysis.Model.Null, b.Risk, trial); err != nil {
		return row, err
	}
	if zone != nil {
		if row.Zone, err = o.panelZone(ctx, *zone, b.Risk, settings.Per1000, trial); err != nil {
			return row, err
		}
	}
	row.Information = o.adequacy(b.Risk, zone, settings, sd)
	return row, nil
}

// adequacy returns the optimal information size: for the important difference in the
// wanted direction, for the side that needs more people where no direction is, and
// without an important difference for the relative reduction of the settings. It is nil for a
// rate, and for means without a standard deviation or an important difference.
func (o *Outcome) adequacy(p0 float64, zone *zoneLimits, settings review.PanelSettings, sd *PanelSD) *Adequacy {
	level := 1 - o.Result.Fit.Model.Level
	a := &Adequacy{People: o.Counts.Participants}
	m := o.Analysis.Measure
	var err error
	switch {
	case p0 > 0 && m != effect.RateRatio:
		a.From, a.To = p0, o.reduced(p0, settings.Reduction)
		a.Information, err = panel.RiskInformation(a.From, a.To, level, settings.Power)
		for _, p1 := range o.importantRisks(p0, zone) {
			size, fails := panel.RiskInformation(p0, p1, level, settings.Power)
			if fails == nil && (!a.Important || size.PerArm > a.PerArm) {
				a.To, a.Important, a.Information, err = p1, true, size, nil
			}
		}
	case zone != nil && (m == effect.StandardisedMeanDifference || m == effect.MeanDifference && sd != nil):
		a.Delta, a.Important = math.Abs(o.wantedLimit(zone)-o.Analysis.Model.Null), true
		if m == effect.MeanDifference {
			a.Delta /= sd.Value
		}
		a.Information, err = panel.MeanInformation(a.Delta, level, settings.Power)
	default:
		return nil
	}
	if err != nil {
		return nil
	}
	return a
}

// reduced returns the risk that the setting reduction makes of a baseline: an increase
// of as much where more is better and that stays below 1.
func (o *Outcome) reduced(p0, reduction float64) float64 {
	if more := p0 * (1 + reduction); o.Analysis.Better == review.BetterHigher && more < 1 {
		return more
	}
	return p0 * (1 - reduction)
}

// importantRisks returns the risk at the important limit in the wanted direction, at
// both limits where no direction is; none where no risk is so far away.
func (o *Outcome) importantRisks(p0 float64, zone *zoneLimits) []float64 {
	if zone == nil {
		return nil
	}
	limits := []float64{zone.Low, zone.High}
	if o.Analysis.Better != review.BetterUnknown {
		limits = []float64{o.wantedLimit(zone)}
	}
	var risks []float64
	for _, limit := range limits {
		if math.IsInf(limit, 0) {
			continue
		}
		if risk, capped, err := panel.Risk(o.Analysis.Measure, p0, limit); err == nil && !capped && risk != p0 {
			risks = append(risks, risk)
		}
	}
	return risks
}

// wantedLimit returns the limit of the zone on the side that is better, the nearer one
// where no direction is.
func (o *Outcome) wantedLimit(zone *zoneLimits) float64 {
	null := o.Analysis.Model.Null
	switch o.Analysis.Better {
	case review.BetterLower:
		return zone.Low
	case review.BetterHigher:
		return zone.High
	}
	if null-zone.Low <= zone.High-null {
		return zone.Low
	}
	return zone.High
}
