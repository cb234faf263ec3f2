package synthesis

import (
	"context"
	"fmt"
	"math"
	"strings"

	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// mostRefitted is the number of studies up to which the outcome is pooled again
// without each; beyond, one study cannot move the spread between all.
const mostRefitted = 100

// studies reports studies far from the others (I14, I15, I19) and studies that decide
// the result (I16).
func (e *examination) studies(ctx context.Context) error {
	y, s := estimates(e.o.Studies)
	model := e.o.Result.Fit.Model
	model.Effects, model.Interval = meta.RandomEffects, meta.Wald
	if model.Tau == meta.DefaultTau {
		model.Tau = meta.RestrictedML
	}
	if len(y) > 2 {
		rests, err := restsOf(ctx, model, y, s)
		if err != nil {
			return err
		}
		for i := range rests {
			e.outlying(&e.o.Studies[i], rests[i])
		}
	}
	e.dominating()
	return e.deciding(ctx, y, s)
}

// rest is what the other studies say of one: their mean, and the standard deviation
// of its difference from a study of this standard error.
type rest struct{ mean, sd float64 }

// residual returns the studentised difference of an effect.
func (r rest) residual(y float64) float64 { return (y - r.mean) / r.sd }

// restsOf returns for each study what the others say of it.
func restsOf(ctx context.Context, model meta.Model, y, s []float64) ([]rest, error) {
	all := make([]rest, len(y))
	if len(y) > mostRefitted {
		fit, err := model.Fit(y, s)
		if err != nil {
			return nil, nil // what a fit cannot be made of has been said by the outcome's own
		}
		fixedSpread(all, fit.Mean.Tau2, y, s)
		return all, nil
	}
	pairs, err := meta.NewPairs(model, y, s)
	if err != nil {
		return nil, nil // likewise
	}
	list, err := meta.Influences(ctx, pairs, meta.Work{Workers: 1})
	if err != nil {
		return nil, err
	}
	for i, v := range list {
		all[i] = rest{mean: y[i], sd: 1}
		if v.Problem == nil && v.Detail != nil && v.Detail.Residual != 0 {
			all[i] = rest{mean: v.Mean.Estimate, sd: (y[i] - v.Mean.Estimate) / v.Detail.Residual}
		}
	}
	return all, nil
}

// fixedSpread fills in the rests with the spread of all studies.
func fixedSpread(all []rest, tau2 float64, y, s []float64) {
	var sum, weighted float64
	for i := range y {
		w := 1 / (s[i]*s[i] + tau2)
		sum, weighted = sum+w, weighted+w*y[i]
	}
	for i := range y {
		w := 1 / (s[i]*s[i] + tau2)
		all[i] = rest{mean: (weighted - w*y[i]) / (sum - w), sd: math.Sqrt(1/w + 1/(sum-w))}
	}
}

// outlying reports a study far from the others: turned round it would agree (I14), a
// decimal place would explain it (I19), or neither (I15).
func (e *examination) outlying(study *Study, others rest) {
	const far, slip, fine = 3, 4, 1
	y := study.Estimate.Y
	z := others.residual(y)
	if math.Abs(z) <= far {
		return
	}
	m := e.o.Analysis.Measure
	reader := func(y float64) string { return fmt.Sprintf("%.3g", effect.ToReader(m, y)) }
	about := fmt.Sprintf("its effect of %s lies %.1f standard errors from the mean of the others, %s", reader(y), math.Abs(z), reader(others.mean))
	if m.HasNull() && math.Abs(others.residual(-y)) < fine {
		e.findStudy(study, review.Warning, "I14", about+fmt.Sprintf("; turned round, as %s, it would agree with them: are the arms or the direction of the scale reversed?", reader(-y)), e.turned(study)...)
		return
	}
	if moved, ok := e.moved(study, others); ok && math.Abs(z) > slip && math.Abs(others.residual(moved)) < fine {
		e.findStudy(study, review.Warning, "I19", about+fmt.Sprintf("; %s would agree with them: has a decimal place slipped?", reader(moved)))
		return
	}
	e.findStudy(study, review.Note, "I15", about+"; see the result without it (leave-one-out), and look for the reason: a study is not left out for lying far off")
}

// turned returns the readings of a study as entered and with its arms swapped; nil
// where its numbers are not those of two arms.
func (e *examination) turned(study *Study) []review.Reading {
	var entered, swapped review.Reading
	entered.Label, swapped.Label = "as entered", "arms swapped"
	for _, pair := range armPairs {
		a, okA := study.Source.Number(pair[0])
		b, okB := study.Source.Number(pair[1])
		if !okA || !okB {
			continue
		}
		entered.Numbers = append(entered.Numbers, a, b)
		a.Value, b.Value = b.Value, a.Value
		swapped.Numbers = append(swapped.Numbers, a, b)
	}
	if len(entered.Numbers) == 0 || !study.Basis.Counted() {
		return nil
	}
	return []review.Reading{entered, swapped}
}

// armPairs are the fields of both arms.
var armPairs = [][2]review.Field{
	{review.EventsTreated, review.EventsControl}, {review.TotalTreated, review.TotalControl}, {review.PersonTimeTreated, review.PersonTimeControl},
	{review.MeanTreated, review.MeanControl}, {review.SDTreated, review.SDControl}, {review.SETreated, review.SEControl},
}

// moved returns a reported effect with its decimal place moved towards the others; ok
// is false where no effect at all would agree with them too.
func (e *examination) moved(study *Study, others rest) (float64, bool) {
	if study.Basis.Counted() {
		return 0, false
	}
	y := study.Estimate.Y
	if e.o.Analysis.Measure.Log() {
		return y - math.Copysign(math.Ln10, y-others.mean), true
	}
	if math.Abs(others.residual(0)) < 1 {
		return 0, false
	}
	if math.Abs(y) > math.Abs(others.mean) {
		return y / 10, true
	}
	return y * 10, true
}

// dominating reports a study with more than half of the weight under a common effect
// and less than a quarter under random ones (I16).
func (e *examination) dominating() {
	const most, less = 0.5, 0.25
	common, random := e.o.Result.Fit, e.o.Result.Other
	if random == nil {
		return
	}
	if common.Model.Effects == meta.RandomEffects {
		common, random = random, common
	}
	for i := range e.o.Studies {
		if common.Weights[i] > most && random.Weights[i] < less {
			e.findStudy(&e.o.Studies[i], review.Warning, "I16", fmt.Sprintf("it has %.0f%% of the weight under a common effect and %.0f%% under random ones, so that the two answer different questions; say which is meant, and look at the study closely", 100*common.Weights[i], 100*random.Weights[i]))
		}
	}
}

// deciding notes the studies without which the interval leaves, or reaches, no effect
// (I16).
func (e *examination) deciding(ctx context.Context, y, s []float64) error {
	const named = 5
	if len(y) < 3 || len(y) > mostRefitted || e.o.Analysis.NullMissing {
		return nil
	}
	pairs, err := meta.NewPairs(e.o.Result.Fit.Model, y, s)
	if err != nil {
		return nil // the outcome's own fit has said it
	}
	list, err := meta.LeaveOneOut(ctx, pairs, meta.Work{Workers: 1})
	if err != nil {
		return err
	}
	whole := e.excludesNull(e.o.Result.Fit.Mean)
	var names []string
	var only *Study
	for i, v := range list {
		if v.Problem == nil && e.excludesNull(v.Mean) != whole {
			only = &e.o.Studies[i]
			names = append(names, only.Source.Name)
		}
	}
	if len(names) == 0 {
		return nil
	}
	verb := "reaches no effect"
	if !whole {
		verb = "leaves out no effect"
	}
	if len(names) == 1 {
		e.findStudy(only, review.Note, "I16", "without this study the interval "+verb+", as it does not with it; see leave-one-out")
		return nil
	}
	if len(names) > named {
		names = append(names[:named], fmt.Sprintf("%d more", len(names)-named))
	}
	e.find(review.Note, "I16", fmt.Sprintf("without one of these studies the interval %s, as it does not with all: %s; see leave-one-out", verb, strings.Join(names, ", ")))
	return nil
}
