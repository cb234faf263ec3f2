package main

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/explain"
	"steelyard/meta/synthesis"
)

// mostFitted is how many studies the text shows fitted values of.
const mostFitted = 40

// explainAnswer is the answer of explain: each outcome's comparisons, and the
// cautions that belong to them.
func explainAnswer(s *synthesis.Synthesis) *page {
	var p page
	var limits []string
	for i := range s.Outcomes {
		o := &s.Outcomes[i]
		if i > 0 {
			p.line("")
		}
		p.line(heading(s, o))
		p.leftOut(s, o)
		if o.Result == nil {
			p.wrapped("", "No result: "+o.Problem)
			continue
		}
		p.wrapped("", words.Pooled(s, o))
		if e := o.Explain; e != nil {
			p.subgroupComparison(s, o, e.Subgroups)
			p.regression(s, o, e.Regression)
			for _, text := range words.ExplainLimits(s, o) {
				if !slices.Contains(limits, text) {
					limits = append(limits, text)
				}
			}
		}
		if len(o.Notes) > 0 {
			p.line("")
		}
		for _, note := range o.Notes {
			p.item("·", note)
		}
	}
	p.line("")
	p.line("Cautions")
	p.flagged(s)
	for _, text := range limits {
		p.item("·", text)
	}
	p.item("·", synthesis.EvidenceCaution(s.Forms()...))
	return &p
}

// omitted names the studies that a comparison leaves out.
func (p *page) omitted(s *synthesis.Synthesis, o *synthesis.Outcome, omitted []synthesis.Omitted) {
	if len(omitted) == 0 {
		return
	}
	var names []string
	for i, m := range omitted {
		if i == mostFindings {
			names = append(names, fmt.Sprintf("and %d more", len(omitted)-i))
			break
		}
		names = append(names, fmt.Sprintf("%s (%s)", o.Studies[m.Row].Source.Name, strings.Join(m.Cells, "; ")))
	}
	p.item("-", fmt.Sprintf("%s left out for a blank cell: %s", words.Number(len(omitted), words.Noun(s, 1), words.Noun(s, 2)), strings.Join(names, ", ")))
}

// subgroupComparison writes the groups side by side and the test between them.
func (p *page) subgroupComparison(s *synthesis.Synthesis, o *synthesis.Outcome, r *synthesis.SubgroupsResult) {
	if r == nil {
		return
	}
	p.line("")
	if r.Problem != "" {
		p.wrapped("", fmt.Sprintf("No comparison by %s: %s", r.Column, r.Problem))
		p.omitted(s, o, r.Omitted)
		return
	}
	how := "each with a spread τ of its own"
	switch {
	case o.Analysis.Model.Effects == meta.CommonEffect:
		how = "each with a common effect"
	case r.Shared:
		how = fmt.Sprintf("with one spread τ, %s", words.WithInterval(words.Tau(math.Sqrt(r.Tau2)), words.Tau(math.Sqrt(r.Limits.Low)), words.Tau(math.Sqrt(r.Limits.High))))
	}
	p.section(fmt.Sprintf("By %s: %d groups, %s", r.Column, len(r.Groups), how))
	p.omitted(s, o, r.Omitted)
	columns := []column{{head: "group"}, {head: "k", right: true}, {head: estimateHead(o)}, {head: "τ", right: true},
		{head: "effect : none", right: true}, {head: "steps", right: true}, {head: "against the first"}}
	var rows [][]string
	for _, g := range r.Groups {
		estimate, tau, odds, steps := refitCells(o, g.Mean)
		if g.Mean.K == 1 && !r.Shared {
			tau = words.Missing
		}
		against := ""
		if a := g.Against; a != nil {
			against = words.ContrastValue(o, a.Estimate, a.Low, a.High)
		}
		rows = append(rows, []string{g.Name, words.Count(g.Mean.K), estimate, tau, odds, steps, against})
	}
	p.table(columns, rows)
	p.line("")
	t := r.Test
	p.row("Between groups", fmt.Sprintf("%s: %s; %s", words.Difference(t.Evidence), words.Strength(t.Evidence), words.FTest(t.F, t.DF1, t.DF2, t.LnP)))
	if !math.IsInf(t.DF2, 1) {
		p.row("", fmt.Sprintf("Q = %s on %s df, %s, by the model's own standard errors, which takes τ for known", words.Linear(t.Q, 2), words.Count(int(t.DF1)), words.PValue(t.LnPQ)))
	}
	p.item("·", fmt.Sprintf("Against the first: %s, with %s interval.", words.Contrast(o.Analysis.Measure), words.Level(o.Result.Fit.Model.Level)))
}

// regression writes the coefficients, the tests and what is left unexplained.
func (p *page) regression(s *synthesis.Synthesis, o *synthesis.Outcome, r *synthesis.RegressionResult) {
	if r == nil {
		return
	}
	p.line("")
	if r.Problem != "" {
		p.wrapped("", "No regression: "+r.Problem)
		p.omitted(s, o, r.Omitted)
		return
	}
	var names []string
	for _, t := range r.Design.Terms {
		names = append(names, t.Name)
	}
	p.section(fmt.Sprintf("Regression on %s: %s", strings.Join(names, ", "), words.Number(r.K, words.Noun(s, 1), words.Noun(s, 2))))
	p.wrapped("", words.RegressionModel(r.Model))
	for _, c := range r.Design.Covariates {
		p.wrapped("", words.Covariate(c))
	}
	p.omitted(s, o, r.Omitted)
	p.coefficients(o, r)
	p.line("")
	p.terms(r)
	p.unexplained(r)
	p.fitted(o, r)
}

// coefficients writes a row for the effect at means and references, and one for each
// coefficient.
func (p *page) coefficients(o *synthesis.Outcome, r *synthesis.RegressionResult) {
	statistic := "t"
	if math.IsInf(r.Whole.DF2, 1) {
		statistic = "z"
	}
	columns := []column{{head: "coefficient"}, {head: "change"}, {head: estimateHead(o)}, {head: statistic, right: true},
		{head: "p", right: true}, {head: "any : none", right: true}, {head: "steps", right: true}}
	level := r.Coefficients[0]
	first := []string{"at means and references", "", words.Reader(o, level.Estimate, meta.Limits{Low: level.Low, High: level.High}), "", "", words.Missing, ""}
	if !o.Analysis.NullMissing {
		first[3], first[4] = words.Linear(level.Statistic, 2), bareP(level.LnP)
		first[5], first[6] = words.Odds(level.Evidence.Ln()), words.Steps(level.Evidence.Steps())
	}
	rows := [][]string{first}
	at := 1
	for _, t := range r.Design.Terms {
		step, per := words.TermStep(r.Design, t)
		for _, c := range t.Columns {
			k := r.Coefficients[at]
			at++
			rows = append(rows, []string{c.Name, per, words.ContrastValue(o, step*k.Estimate, step*k.Low, step*k.High), words.Linear(k.Statistic, 2), bareP(k.LnP),
				words.Odds(k.Evidence.Ln()), words.Steps(k.Evidence.Steps())})
		}
	}
	p.table(columns, rows)
	p.line("")
	p.item("·", fmt.Sprintf("The first row is the effect there; the others are changes of it, each a %s. any : none weighs a change against none.", words.Contrast(o.Analysis.Measure)))
}

// terms writes the tests of the terms that have several coefficients, of all
// together, and by permutation.
func (p *page) terms(r *synthesis.RegressionResult) {
	line := func(t explain.Test) string {
		return fmt.Sprintf("%s: %s; %s", words.Difference(t.Evidence), words.Strength(t.Evidence), words.FTest(t.F, t.DF1, t.DF2, t.LnP))
	}
	for i, t := range r.Terms {
		if len(r.Design.Terms[i].Columns) > 1 && len(r.Terms) > 1 {
			p.row(t.Name, line(t))
		}
	}
	p.row("All together", line(r.Whole))
	if r.Permutation == nil {
		return
	}
	var each []string
	if len(r.Terms) > 1 {
		for _, t := range r.Terms {
			each = append(each, fmt.Sprintf("%s %s", t.Name, permutedP(t.PermutedP, r.Permutation)))
		}
	}
	how := fmt.Sprintf("%s permutations of the covariates among the studies, drawn by seed", words.Count(r.Permutation.Count))
	if r.Permutation.Exact {
		how = fmt.Sprintf("all %s permutations of the covariates among the studies", words.Count(r.Permutation.Count))
	}
	text := fmt.Sprintf("%s, by %s", permutedP(r.Permutation.P, r.Permutation), how)
	if len(each) > 0 {
		text += "; of the terms: " + strings.Join(each, "; ")
	}
	p.row("By permutation", text)
}

// permutedP writes a p-value with the digits that the permutations give it.
func permutedP(p float64, how *explain.Permuted) string {
	if least := 1 / float64(how.Count+1); !how.Exact && p <= least*1.000001 {
		return fmt.Sprintf("p at most %s", words.Linear(p, 4))
	}
	return words.PValue(math.Log(p))
}

// unexplained writes the scatter that is left.
func (p *page) unexplained(r *synthesis.RegressionResult) {
	if r.Model.Effects == meta.RandomEffects {
		text := fmt.Sprintf("τ %s; I² %s by τ, %s by Q", words.WithInterval(words.Tau(math.Sqrt(r.Residual.Tau2)), words.Tau(math.Sqrt(r.Residual.Limits.Low)), words.Tau(math.Sqrt(r.Residual.Limits.High))),
			words.Percent(r.Residual.I2Tau), words.Percent(r.Residual.I2Q))
		if limits := r.Residual.Limits; r.Residual.Tau2 < limits.Low || r.Residual.Tau2 > limits.High {
			text += "; the limits are those of the Q-profile, which this estimate of τ lies outside"
		}
		p.row("Spread left", text)
		explained := fmt.Sprintf("τ without covariates is %s: there is no spread to explain", words.Tau(0))
		if r.R2 != nil {
			explained = fmt.Sprintf("R² %s of τ², from τ %s without covariates; a rough figure with few studies", words.Percent(*r.R2), words.Tau(math.Sqrt(r.Without)))
		}
		p.row("Explained", explained)
	}
	p.row("Scatter left", fmt.Sprintf("Q = %s on %s df, %s", words.Linear(r.Residual.Q, 2), words.Count(r.Residual.DF), words.PValue(r.Residual.LnP)))
}

// fitted writes what the regression expects of each study, and where it was asked.
func (p *page) fitted(o *synthesis.Outcome, r *synthesis.RegressionResult) {
	p.line("")
	level := words.Level(r.Model.Level)
	columns := []column{{head: "study"}}
	for _, c := range r.Design.Covariates {
		columns = append(columns, column{head: c.Name, right: c.Levels == nil, names: c.Levels != nil})
	}
	columns = append(columns, column{head: "own", right: true}, column{head: "expected (" + level + ")"}, column{head: "predicted (" + level + ")"})
	values := func(f explain.Fitted) []string {
		predicted := words.Missing
		if f.Prediction != nil {
			predicted = words.ReaderInterval(o, *f.Prediction)
		}
		return []string{words.Reader(o, f.Estimate, meta.Limits{Low: f.Low, High: f.High}), predicted}
	}
	var rows [][]string
	for i, row := range r.Rows {
		if i == mostFitted {
			break
		}
		study := &o.Studies[row]
		cells := []string{study.Source.Name}
		for _, c := range r.Design.Covariates {
			cells = append(cells, covariateCell(c, i))
		}
		rows = append(rows, append(append(cells, words.ReaderValue(o, study.Estimate.Y)), values(r.Fitted[i])...))
	}
	p.table(columns, rows)
	if more := len(r.Rows) - mostFitted; more > 0 {
		p.item("·", fmt.Sprintf("and %d more; --format json has all", more))
	}
	if r.At != nil {
		p.line("")
		cells := values(*r.At)
		var at []string
		for _, point := range r.Points {
			at = append(at, point.Covariate+" "+point.Level)
		}
		text := fmt.Sprintf("%s expected; %s predicted for the true effect of one setting", cells[0], cells[1])
		if beyond := words.OutsideStudied(r.Design, r.Points); beyond != "" {
			text += "; beyond what was studied: " + beyond
		}
		p.row("At", strings.Join(at, ", ")+": "+text)
	}
}

// covariateCell writes a study's covariate.
func covariateCell(c *explain.Covariate, i int) string {
	if c.Levels != nil {
		return c.Levels[c.Index[i]]
	}
	return words.CovariateValue(c, c.Values[i])
}
