package webpage

import (
	"fmt"
	"math"
	"slices"

	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/synthesis"
)

// tableView is a table of the page.
type tableView struct {
	ID, Caption string
	Number      int
	Heads       []headView
	Rows        []rowView
	Notes       []string
	Folded      bool // behind a summary
	Summary     string
	Sortable    bool
	Filters     []filterView
}

// headView is the head of a column; Number columns stand at the right.
type headView struct {
	Text   string
	Number bool
}

// rowView is a row; its first cell heads it.
type rowView struct {
	Study string // mark of the study in charts and data; blank for none
	Main  bool   // the result as planned
	Cells []cellView
}

// cellView is a cell: a text with a softer rest, and what it is sorted by.
type cellView struct {
	Text, Soft string
	Key        string // a number for sorting; blank sorts by the text
	Number     bool
	Dagger     string // what a † after the text stands for; blank for none
}

func text(t string) cellView { return cellView{Text: t} }

func number(t string, key float64) cellView {
	return cellView{Text: t, Number: true, Key: sortKey(key)}
}

// sortKey writes a number for the script to sort by; blank for none.
func sortKey(x float64) string {
	if math.IsNaN(x) || math.IsInf(x, 0) {
		return ""
	}
	return fmt.Sprintf("%.6g", x)
}

func (v *view) table(caption string, heads ...headView) tableView {
	v.tables++
	return tableView{Caption: caption, Number: v.tables, Heads: heads}
}

func heads(texts ...string) []headView {
	var all []headView
	for _, t := range texts {
		h := headView{Text: t}
		if len(t) > 0 && t[0] == '#' {
			h = headView{Text: t[1:], Number: true}
		}
		all = append(all, h)
	}
	return all
}

func estimateHead(o *synthesis.Outcome) string {
	return fmt.Sprintf("#%s (%s interval)", words.Capital(words.Measure(o.Analysis.Measure)), words.Level(o.Result.Fit.Model.Level))
}

// estimateCell is an estimate with its interval in softer ink.
func estimateCell(o *synthesis.Outcome, y float64, limits meta.Limits) cellView {
	c := number(words.ReaderValue(o, y), y)
	c.Soft = "(" + words.ReaderInterval(o, limits) + ")"
	return c
}

// meanCells are estimate, τ, odds, steps and word of a mean.
func meanCells(o *synthesis.Outcome, m meta.Mean) []cellView {
	tau := words.Missing
	if o.Result.Fit.Model.Effects == meta.RandomEffects && m.K > 1 {
		tau = words.Tau(math.Sqrt(m.Tau2))
	}
	cells := []cellView{estimateCell(o, m.Estimate, meta.Limits{Low: m.Low, High: m.High}), number(tau, m.Tau2)}
	if o.Analysis.NullMissing {
		return append(cells, number(words.Missing, 0), number(words.Missing, 0), text(""))
	}
	ln := m.Evidence.Ln()
	return append(cells, number(oddsCell(ln), ln), number(words.Steps(m.Evidence.Steps()), ln), text(wordOf(m)))
}

func wordOf(m meta.Mean) string {
	word := m.Evidence.Word().String()
	if m.Evidence.Ln() < 0 {
		return word + " for none"
	}
	return word
}

// oddsCell writes odds that no line break tears.
func oddsCell(ln float64) string { return words.NoBreak(words.Odds(ln)) }

func (v *view) cumulativeTable(s *synthesis.Synthesis, o *synthesis.Outcome) tableView {
	t := v.table("Pooled result after each "+words.Noun(s, 1), heads("Entered", "At", "#k", estimateHead(o), "#τ", "#Effect : none", "#Steps", "Word", "#Steps added")...)
	for _, e := range o.Accrual.Cumulative {
		row := rowView{Cells: []cellView{text(entered(o, e)), text(e.At), number(words.Count(e.K), float64(e.K))}}
		if e.Problem != nil {
			row.Cells = append(row.Cells, text(e.Problem.Error()))
		} else {
			row.Cells = append(row.Cells, meanCells(o, e.Mean)...)
			added := ""
			switch {
			case e.Alone:
				added = "*"
			case e.Added != nil:
				added = words.StepsChange(*e.Added)
			}
			row.Cells = append(row.Cells, number(added, math.NaN()))
		}
		t.Rows = append(t.Rows, row)
	}
	t.Notes = []string{fmt.Sprintf("* The first %s’s own effect, not a mean. Every row starts from the same stated prior; steps are not multiplied together.", words.Noun(s, 1))}
	t.pad()
	return t
}

func entered(o *synthesis.Outcome, e synthesis.Entry) string {
	names := ""
	for i, row := range e.Entered {
		if i > 0 {
			names += "; "
		}
		names += o.Studies[row].Source.Name
	}
	return names
}

// pad fills short rows with blank cells.
func (t *tableView) pad() {
	for i := range t.Rows {
		for len(t.Rows[i].Cells) < len(t.Heads) {
			t.Rows[i].Cells = append(t.Rows[i].Cells, cellView{})
		}
	}
}

// byCarried sorts the analyses without one study, the greatest carrier first, as the
// chart does.
func byCarried(o *synthesis.Outcome) []meta.Omission {
	sorted := slices.Clone(o.Accrual.LeaveOneOut)
	slices.SortStableFunc(sorted, func(a, b meta.Omission) int {
		switch {
		case a.Carried > b.Carried:
			return -1
		case a.Carried < b.Carried:
			return 1
		}
		return 0
	})
	return sorted
}

func (v *view) leaveOneOutTable(s *synthesis.Synthesis, o *synthesis.Outcome) tableView {
	t := v.table("Pooled result without each "+words.Noun(s, 1), heads("Without", estimateHead(o), "#τ", "#Effect : none", "#Steps", "Word", "#Carries, steps")...)
	for _, x := range byCarried(o) {
		row := rowView{Cells: []cellView{text(o.Studies[x.Row].Source.Name)}}
		if x.Problem != nil {
			row.Cells = append(row.Cells, text(x.Problem.Error()))
		} else {
			row.Cells = append(row.Cells, meanCells(o, x.Mean)...)
			carried := words.StepsChange(x.Carried)
			if o.Analysis.NullMissing {
				carried = words.Missing
			}
			row.Cells = append(row.Cells, number(carried, x.Carried))
		}
		t.Rows = append(t.Rows, row)
	}
	t.pad()
	return t
}

// runsTable sets the result as planned, the planned runs, the other model of effects
// and the result without conversions side by side.
func (v *view) runsTable(o *synthesis.Outcome) tableView {
	t := v.table("Sensitivity runs", heads("Run", "Planned", "#k", estimateHead(o), "#τ", "#Effect : none", "#Steps", "Word")...)
	row := func(name, planned string, of *synthesis.Outcome, m meta.Mean) rowView {
		return rowView{Cells: append([]cellView{text(name), text(planned), number(words.Count(m.K), float64(m.K))}, meanCells(of, m)...)}
	}
	main := row("As planned", "planned", o, o.Result.Fit.Mean)
	main.Main = true
	t.Rows = append(t.Rows, main)
	for i := range o.Runs {
		r := &o.Runs[i]
		if r.Outcome.Result == nil {
			t.Rows = append(t.Rows, rowView{Cells: []cellView{text(r.Run.Name), text("planned"), number("0", 0), text("no result: " + r.Outcome.Problem)}})
			continue
		}
		t.Rows = append(t.Rows, row(r.Run.Name, "planned", &r.Outcome, r.Outcome.Result.Fit.Mean))
		t.Notes = append(t.Notes, words.Capital(r.Run.Name)+": "+words.Changes(r.Run)+".")
	}
	if other := o.Result.Other; other != nil && len(o.Studies) > 1 {
		alone := *o
		result := *o.Result
		result.Fit, alone.Result = other, &result
		t.Rows = append(t.Rows, row(words.Capital(other.Model.Effects.String())+" effects, for comparison", "always shown", &alone, other.Mean))
	}
	if without := o.Result.Without; without != nil {
		t.Rows = append(t.Rows, row("Without converted numbers (†)", "always shown", o, without.Mean))
	}
	t.pad()
	return t
}

// heterogeneity lays out how much the studies differ.
func (v *view) heterogeneity(o *synthesis.Outcome) tableView {
	fit := o.Result.Fit
	t := v.table("Heterogeneity and model", heads("Quantity", "Value")...)
	add := func(name, value string) {
		if value != "" {
			t.Rows = append(t.Rows, rowView{Cells: []cellView{text(name), text(value)}})
		}
	}
	add("Model", words.ModelOf(o))
	add("Evidence", words.Rests(o))
	if fit.Model.Effects == meta.RandomEffects {
		add("Spread", words.Spread(fit))
	}
	add("Heterogeneity", words.Scatter(fit))
	if o.Result.Differing != nil {
		add("Do the effects differ?", words.Differing(o.Result.Differing))
	}
	if fit.Prediction != nil {
		add("Prediction interval", predictionText(o))
	}
	return t
}

func (v *view) beliefTable(b *synthesis.Beliefs) tableView {
	t := v.table("Probability of an effect before and after the data", heads("Before", "#After")...)
	for _, belief := range b.Posterior {
		before := text(words.Probability(belief.Prior))
		t.Rows = append(t.Rows, rowView{Cells: []cellView{before, number(words.Probability(belief.Posterior), belief.Posterior)}})
	}
	return t
}
