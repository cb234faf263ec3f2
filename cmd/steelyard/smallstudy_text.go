package main

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/missing"
	"steelyard/meta/synthesis"
)

// widestAdjusted is the width of the longest name of an adjusted result.
const widestAdjusted = 44

// smallStudies writes the tests of asymmetry, the adjusted results, and what each
// assumes.
func (p *page) smallStudies(s *synthesis.Synthesis, o *synthesis.Outcome) {
	a := o.SmallStudy
	if a == nil {
		return
	}
	if a.Refused != "" {
		text := "Not run: " + a.Refused + "."
		if a.Few {
			text += " To run them all the same, add --allow-few."
		}
		p.wrapped("", text)
		return
	}
	if a.Few {
		p.item("·", fmt.Sprintf("Run on request with %d %s: below 10 such tests find little and mislead easily.", len(o.Studies), words.Noun(s, 2)))
		p.line("")
	}
	p.asymmetryTests(s, o)
	p.line("")
	p.adjustedResults(o)
	p.line("")
	p.wrapped("", "What each takes for granted, which these data cannot confirm")
	for _, t := range a.Tests {
		if t.Method != missing.OneStepSelection {
			p.assumption(t.Method)
		}
	}
	for _, r := range a.Adjusted {
		if r.Method >= missing.TrimAndFillL {
			p.assumption(r.Method)
		}
	}
}

func (p *page) assumption(m missing.Method) {
	p.item("·", fmt.Sprintf("%s: %s (%s).", m.Title(), m.Assumption(), m.Source()))
}

// asymmetryTests writes the tests with the evidence for asymmetry over none.
func (p *page) asymmetryTests(s *synthesis.Synthesis, o *synthesis.Outcome) {
	columns := []column{{head: "do small " + words.Noun(s, 2) + " differ?"}, {head: "k", right: true}, {head: "shows", right: true},
		{head: "p", right: true}, {head: "asymmetry : none", right: true}, {head: "steps", right: true}}
	var rows [][]string
	var problems []string
	onOdds := false
	for _, t := range o.SmallStudy.Tests {
		name := t.Method.Title()
		if t.Problem != "" {
			problems = append(problems, name+": "+t.Problem)
			rows = append(rows, []string{name, "", words.Missing, "", "", ""})
			continue
		}
		onOdds = onOdds || t.Method == missing.PetersTest || t.Method == missing.HarbordTest
		rows = append(rows, []string{name, words.Count(t.K), words.AsymmetryStatistic(t), bareP(t.LnP), words.Odds(t.Evidence.Ln()), words.Steps(t.Evidence.Steps())})
	}
	p.tableNamed(columns, rows, 32, 40)
	if onOdds && o.Analysis.Measure != effect.OddsRatio {
		p.item("·", "Peters' and Harbord's tests are on the odds ratio of the counts, whatever measure is pooled.")
	}
	if o.SmallStudy.Tables == 0 {
		p.item("·", fmt.Sprintf("Peters' and Harbord's tests need events and totals of both arms, which no pooled %s gives.", words.Noun(s, 1)))
	} else if n := len(o.Studies) - o.SmallStudy.Tables; n > 0 {
		p.item("·", fmt.Sprintf("Without counts as they stand, so in neither Peters' nor Harbord's test: %s.", words.Number(n, words.Noun(s, 1), words.Noun(s, 2))))
	}
	p.item("·", "t above 0: small "+words.Noun(s, 2)+" have higher effects on the analysis scale; below 0: lower ones.")
	if o.SmallStudy.FarOdds {
		text := "The odds ratio is so far from 1 that Egger's and the rank test find asymmetry too often"
		if o.SmallStudy.Tables > 0 {
			text += ": read Harbord's"
		}
		p.item("·", text+".")
	}
	p.problems(problems)
}

func (p *page) problems(problems []string) {
	for _, text := range problems {
		p.item("·", text+".")
	}
}

// bareP is a p-value without its letter.
func bareP(lnP float64) string {
	return strings.TrimPrefix(strings.TrimPrefix(words.PValue(lnP), "p = "), "p ")
}

// adjustedResults writes what effect and evidence become under each assumption.
func (p *page) adjustedResults(o *synthesis.Outcome) {
	columns := []column{{head: "the effect, adjusted by"}, {head: estimateHead(o)},
		{head: "effect : none", right: true}, {head: "steps", right: true}, {head: "change", right: true}}
	pooled := o.SmallStudy.Pooled
	rows := [][]string{adjustedCells(o, "(not adjusted)", pooled, pooled)}
	rows[0][4] = ""
	var problems []string
	open := false
	for _, r := range o.SmallStudy.Adjusted {
		name := words.AdjustedName(r)
		if r.Problem != "" {
			problems = append(problems, name+": "+r.Problem)
			rows = append(rows, []string{name, words.Missing, "", "", ""})
			continue
		}
		open = open || math.IsInf(r.Mean.Low, 0) || math.IsInf(r.Mean.High, 0)
		rows = append(rows, adjustedCells(o, name, r.Mean, pooled))
	}
	p.tableNamed(columns, rows, 30, widestAdjusted)
	p.item("·", "A line's effect is that of a study without error, or of infinite size.")
	p.selectionNote(o)
	if open {
		p.item("·", "An interval without a limit on a side: these data set none there.")
	}
	p.problems(problems)
}

// selectionNote says what the selection model's rate means.
func (p *page) selectionNote(o *synthesis.Outcome) {
	for _, r := range o.SmallStudy.Adjusted {
		if r.Rate == nil {
			continue
		}
		text := fmt.Sprintf("Rate: how often results that do not show %s effects, with a one-sided p above %s, are seen, those that do being 1; by maximum likelihood, with its profile interval.", r.Side, plainNumber(o.SmallStudy.Step))
		if few := min(o.SmallStudy.Above, len(o.Studies)-o.SmallStudy.Above); few < 3 {
			text += fmt.Sprintf(" Only %d of them lie on one side of the step: the rate is hardly known.", few)
		}
		p.item("·", text)
	}
}

// plainNumber writes a number with the digits it was given with.
func plainNumber(x float64) string { return strconv.FormatFloat(x, 'g', -1, 64) }

func adjustedCells(o *synthesis.Outcome, name string, m, pooled meta.Mean) []string {
	row := []string{name, words.AdjustedInterval(o, m), words.Missing, words.Missing, words.Missing}
	if !o.Analysis.NullMissing {
		row[2], row[3] = words.Odds(m.Evidence.Ln()), words.Steps(m.Evidence.Steps())
		row[4] = words.StepsChange(m.Evidence.Steps() - pooled.Evidence.Steps())
	}
	return row
}
