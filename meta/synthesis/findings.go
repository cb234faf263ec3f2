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

// examine looks for what shows only once an outcome is pooled: hardly any events,
// models and estimators that disagree, and studies far from the others or that decide
// the result. What the fit's own caveats say is not said again.
func (o *Outcome) examine(ctx context.Context) ([]review.Finding, error) {
	if o.Result == nil {
		return nil, nil
	}
	e := &examination{o: o}
	e.events()
	e.repeats()
	e.asymmetry()
	if _, isTables := o.Analysis.Method.Tables(); isTables || len(o.Studies) < 2 {
		return e.findings, nil
	}
	if o.dependent() { // the rest varies what dependence settles, or leaves out estimates one by one
		e.effects()
		return e.findings, nil
	}
	e.narrow()
	e.estimators()
	e.effects()
	if err := e.studies(ctx); err != nil {
		return nil, err
	}
	return e.findings, nil
}

// examination gathers the findings about one outcome.
type examination struct {
	o        *Outcome
	findings []review.Finding
}

// find records a finding about the outcome; any of its rows may accept it.
func (e *examination) find(severity review.Severity, rule, message string) {
	first := e.o.Studies[0].Source.Row
	f := review.Finding{Severity: severity, Rule: rule, Outcome: e.o.Name, Message: message, Place: review.Place{File: first.File, Sheet: first.Sheet}}
	for i := range e.o.Studies {
		if reason := e.o.Studies[i].Source.AcceptedReason(rule); reason != "" {
			f.Accepted = reason
			break
		}
	}
	e.findings = append(e.findings, f)
}

// findStudy records a finding about a pooled study, at the first number that its
// effect may come from.
func (e *examination) findStudy(study *Study, severity review.Severity, rule, message string, readings ...review.Reading) {
	row := study.Source
	place := row.Row
	for _, field := range []review.Field{review.Estimate, review.AnalysisEstimate, review.EventsTreated, review.MeanTreated} {
		if n, ok := row.Number(field); ok {
			place = n.Place.In(row.Row)
			break
		}
	}
	e.findings = append(e.findings, review.Finding{Severity: severity, Rule: rule, Place: place, Study: row.Name, Outcome: e.o.Name,
		Message: message, Accepted: row.AcceptedReason(rule), Readings: readings})
}

// events reports arms without events where a correction decides much (C8), and hardly
// any events at all (C9).
func (e *examination) events() {
	const share, rare, perArm, inAll = 0.2, 0.01, 5, 10
	var tables []effect.Table
	for i := range e.o.Studies {
		if t := e.o.Studies[i].Table; t != nil {
			tables = append(tables, *t)
		}
	}
	for _, row := range e.o.Silent {
		if d := (&derivation{row: row}); d.hasCounts() {
			tables = append(tables, d.table())
		}
	}
	if len(tables) == 0 {
		return
	}
	zero := 0
	var treated, control, people float64
	for _, t := range tables {
		if t.Events1 == 0 || t.Events2 == 0 || t.Events1 == t.Total1 || t.Events2 == t.Total2 {
			zero++
		}
		treated, control, people = treated+t.Events1, control+t.Events2, people+t.Total1+t.Total2
	}
	all := treated + control
	if math.Min(treated, control) < perArm || all < inAll {
		e.find(review.Warning, "C9", fmt.Sprintf("there are %g events in the treated and %g in the control arms over all studies, too few for large-sample intervals and p-values; an exact method (--method conditional-exact) and the absolute numbers say more", treated, control))
	}
	_, isTables := e.o.Analysis.Method.Tables()
	ratio := e.o.Analysis.Measure == effect.OddsRatio || e.o.Analysis.Measure == effect.RiskRatio
	if zero > 0 && ratio && !isTables && (float64(zero) > share*float64(len(tables)) || all < rare*people) {
		e.find(review.Warning, "C8", fmt.Sprintf("%d of %d studies have an arm without events, or with nothing but events, and %.2g%% of all people had the event: what the zero-cell correction adds decides much; compare the methods for counts (--all-methods)", zero, len(tables), 100*all/people))
	}
}

// narrow reports a Hartung–Knapp interval that is narrower than the ordinary one (A2).
func (e *examination) narrow() {
	fit := e.o.Result.Fit
	if fit.Model.Interval != meta.HartungKnapp {
		return
	}
	model := fit.Model
	model.Interval = meta.HartungKnappFloor
	floor, err := e.o.fit(model, e.o.Studies)
	if err != nil || !(fit.Mean.SE < floor.Mean.SE*(1-1e-9)) {
		return
	}
	e.find(review.Warning, "A2", fmt.Sprintf("the Hartung–Knapp factor is %.2g, so the interval is narrower than the ordinary one, and may hold the true effect too seldom; with the factor held at 1 it is %s (--interval hartung-knapp-floor)",
		math.Pow(fit.Mean.SE/floor.Mean.SE, 2), e.interval(floor.Mean)))
}

// interval words the interval of a mean in the reader's unit.
func (e *examination) interval(m meta.Mean) string {
	reader := func(y float64) float64 { return effect.ToReader(e.o.Analysis.Measure, y) }
	return fmt.Sprintf("%.3g to %.3g", reader(m.Low), reader(m.High))
}

// excludesNull reports whether the interval of a mean leaves out no effect.
func (e *examination) excludesNull(m meta.Mean) bool {
	null := e.o.Result.Fit.Model.Null
	return !e.o.Analysis.NullMissing && (m.Low > null || m.High < null)
}

// estimators reports estimators of τ² that disagree on whether there is any spread, or
// on whether the interval leaves out no effect (A3).
func (e *examination) estimators() {
	model := e.o.Result.Fit.Model
	student := model.Interval == meta.HartungKnapp || model.Interval == meta.HartungKnappFloor
	if model.Effects != meta.RandomEffects || !(student || model.Interval == meta.Wald) {
		return
	}
	var texts []string
	var zeros, excluding, all int
	for _, tau := range []meta.TauMethod{meta.DerSimonianLaird, meta.RestrictedML, meta.PauleMandel, meta.MaximumLikelihood} {
		model.Tau = tau
		fit, err := e.o.fit(model, e.o.Studies)
		if err != nil {
			continue
		}
		all++
		if fit.Mean.Tau2 == 0 {
			zeros++
		}
		if e.excludesNull(fit.Mean) {
			excluding++
		}
		texts = append(texts, fmt.Sprintf("%s τ %.2g, %s", tau, math.Sqrt(fit.Mean.Tau2), e.interval(fit.Mean)))
	}
	what := "whether the studies differ at all"
	switch {
	case 0 < excluding && excluding < all:
		what = "whether the interval leaves out no effect"
	case zeros == 0 || zeros == all:
		return
	}
	e.find(review.Warning, "A3", "the estimators of the spread disagree on "+what+": "+strings.Join(texts, "; "))
}

// effects reports common and random effects that differ (A4).
func (e *examination) effects() {
	const factor, few = 1.2, 5
	r := e.o.Result
	if r.Other == nil {
		return
	}
	common, random := r.Other.Mean, r.Fit.Mean
	if r.Fit.Model.Effects == meta.CommonEffect {
		common, random = random, common
	}
	apart := e.o.Analysis.Measure.Log() && math.Abs(common.Estimate-random.Estimate) > math.Log(factor)
	split := len(e.o.Studies) >= few && random.Tau2 > 0 && e.excludesNull(common) != e.excludesNull(random)
	if !apart && !split {
		return
	}
	reader := func(m meta.Mean) float64 { return effect.ToReader(e.o.Analysis.Measure, m.Estimate) }
	text := fmt.Sprintf("the common effect is %.3g (%s), the mean of random effects %.3g (%s)", reader(common), e.interval(common), reader(random), e.interval(random))
	switch {
	case apart:
		text += fmt.Sprintf(", apart by a factor of %.2g: small studies may show other effects than large ones, and neither mean may be apt", math.Exp(math.Abs(common.Estimate-random.Estimate)))
	default:
		text += ", and only one of the intervals leaves out no effect: the answer hangs on whether effects vary"
	}
	e.find(review.Warning, "A4", text)
}
