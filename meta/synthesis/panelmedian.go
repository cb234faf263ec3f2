package synthesis

import (
	"slices"

	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// medianRisk returns the median risk of the control arms: events over people, or over
// person time for a rate ratio. Studies that carry nothing about a ratio are counted,
// as they matter for the absolute risk. It is nil where no study states one.
func (o *Outcome) medianRisk() *MedianRisk {
	per := review.TotalControl
	if o.Analysis.Measure == effect.RateRatio {
		per = review.PersonTimeControl
	}
	rows := slices.Clone(o.Silent)
	for i := range o.Studies {
		rows = append(rows, o.Studies[i].Source)
	}
	var risks []float64
	for _, row := range rows {
		events, have := row.Number(review.EventsControl)
		total, also := row.Number(per)
		if have && also && total.Value > 0 {
			risks = append(risks, events.Value/total.Value)
		}
	}
	if len(risks) == 0 {
		return nil
	}
	return &MedianRisk{Risk: medianOf(risks), Studies: len(risks)}
}

// panelSD returns the stated standard deviation; for a mean difference without one the
// median of the control arms, which serves the information size alone.
func (o *Outcome) panelSD(settings review.PanelSettings, plan *review.Plan) *PanelSD {
	if settings.SD > 0 {
		stated := plan.Value(review.SettingSD, o.Name)
		return &PanelSD{Value: settings.SD, Stated: &stated}
	}
	if o.Analysis.Measure != effect.MeanDifference {
		return nil
	}
	var sds []float64
	for i := range o.Studies {
		if sd, have := o.Studies[i].Source.Number(review.SDControl); have && sd.Value > 0 {
			sds = append(sds, sd.Value)
		}
	}
	if len(sds) == 0 {
		return nil
	}
	return &PanelSD{Value: medianOf(sds)}
}
