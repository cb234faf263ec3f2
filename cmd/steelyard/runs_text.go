package main

import (
	"math"

	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/synthesis"
)

// runs writes the planned sensitivity runs side by side, below the result as planned.
func (p *page) runs(o *synthesis.Outcome) {
	if o.Runs == nil {
		return
	}
	p.line("")
	if len(o.Runs) == 0 {
		p.wrapped("", "No sensitivity runs are planned: a row \"run\" of the plan names one, with a filter or changed settings")
		return
	}
	p.wrapped("", "Planned sensitivity runs")
	columns := []column{{head: "run"}, {head: "k", right: true}, {head: estimateHead(o)}, {head: "τ", right: true}, {head: "effect : none", right: true}, {head: "steps", right: true}}
	rows := [][]string{append([]string{"(as planned)"}, runCells(o, o)...)}
	for i := range o.Runs {
		r := &o.Runs[i]
		rows = append(rows, append([]string{r.Run.Name}, runCells(o, &r.Outcome)...))
	}
	p.tableNamed(columns, rows, narrowestName, widestMethod)
	for i := range o.Runs {
		r := &o.Runs[i]
		text := r.Run.Name + ": " + words.Changes(r.Run)
		if r.Outcome.Result == nil {
			text += "; no result: " + r.Outcome.Problem
		}
		p.item("·", text)
	}
}

// runCells are what the table says of a run's result; o is the outcome as planned.
func runCells(o, run *synthesis.Outcome) []string {
	if run.Result == nil {
		return []string{words.Count(len(run.Studies)), words.Missing, "", "", ""}
	}
	m := run.Result.Fit.Mean
	estimate := words.Reader(run, m.Estimate, meta.Limits{Low: m.Low, High: m.High})
	if run.Analysis.Measure != o.Analysis.Measure && run.Analysis.Measure != effect.Unspecified {
		estimate += ", " + words.Measure(run.Analysis.Measure)
	}
	tau := words.Missing
	if run.Result.Fit.Model.Effects == meta.RandomEffects && m.K > 1 {
		tau = words.Tau(math.Sqrt(m.Tau2))
	}
	if run.Analysis.NullMissing {
		return []string{words.Count(m.K), estimate, tau, words.Missing, words.Missing}
	}
	return []string{words.Count(m.K), estimate, tau, words.Odds(m.Evidence.Ln()), words.Steps(m.Evidence.Steps())}
}
