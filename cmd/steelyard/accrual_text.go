package main

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/evidence"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// cells of a refit that every accrual table shows.
func refitCells(o *synthesis.Outcome, m meta.Mean) (estimate, tau, odds, steps string) {
	estimate = words.Reader(o, m.Estimate, meta.Limits{Low: m.Low, High: m.High})
	tau = words.Tau(math.Sqrt(m.Tau2))
	if o.Analysis.NullMissing {
		return estimate, tau, words.Missing, words.Missing
	}
	return estimate, tau, words.Odds(m.Evidence.Ln()), words.Steps(m.Evidence.Steps())
}

func estimateHead(o *synthesis.Outcome) string {
	return fmt.Sprintf("%s (%s)", words.Measure(o.Analysis.Measure), words.Level(o.Result.Fit.Model.Level))
}

// cumulative writes the result as each study arrived.
func (p *page) cumulative(s *synthesis.Synthesis, o *synthesis.Outcome) {
	prior := math.NaN()
	if len(o.Analysis.Prior) > 0 && !o.Analysis.NullMissing {
		prior = o.Analysis.Prior[0]
	}
	columns := []column{{head: "entered"}, {head: "at"}, {head: "k", right: true}, {head: estimateHead(o)}, {head: "τ", right: true},
		{head: "effect : none", right: true}, {head: "steps", right: true}, {head: "added", right: true}}
	if prior > 0 {
		columns = append(columns, column{head: "from " + words.Probability(prior), right: true})
	}
	var rows [][]string
	for _, entry := range o.Accrual.Cumulative {
		names := make([]string, len(entry.Entered))
		for i, row := range entry.Entered {
			names[i] = o.Studies[row].Source.Name
		}
		row := []string{strings.Join(names, "; "), entry.At, words.Count(entry.K)}
		if entry.Problem != nil {
			row = append(row, entry.Problem.Error())
		} else {
			estimate, tau, odds, steps := refitCells(o, entry.Mean)
			row = append(row, estimate, tau, odds, steps, addedSteps(entry))
			if entry.Alone {
				row[len(row)-1] = "*"
			}
		}
		for len(row) < len(columns) {
			row = append(row, "")
		}
		if prior > 0 && len(entry.Posterior) > 0 {
			row[len(columns)-1] = words.Probability(entry.Posterior[0].Posterior)
		}
		rows = append(rows, row)
	}
	p.table(columns, rows)
	p.predictions(s, o)
	p.line("")
	p.item("*", fmt.Sprintf("The first %s's own effect, not a mean.", words.Noun(s, 1)))
	if prior > 0 {
		p.item("·", fmt.Sprintf("Each row starts from the stated prior of %s; the steps of rows are not multiplied together.", words.Probability(prior)))
	}
	p.item("·", orderNote(o.Accrual.Order))
	p.looks(s, o)
}

// predictions writes the prediction interval of each step that has one.
func (p *page) predictions(s *synthesis.Synthesis, o *synthesis.Outcome) {
	var rows [][]string
	for _, entry := range o.Accrual.Cumulative {
		if f := entry.Prediction; f != nil {
			rows = append(rows, []string{words.Count(entry.K) + " " + words.Noun(s, entry.K), words.ReaderInterval(o, meta.Limits{Low: f.Low, High: f.High})})
		}
	}
	if len(rows) == 0 {
		return
	}
	p.line("")
	p.table([]column{{head: "in a new setting after"}, {head: words.Level(o.Result.Fit.Model.Level) + " prediction interval"}}, rows)
}

func addedSteps(entry synthesis.Entry) string {
	if entry.Added == nil {
		return ""
	}
	return words.StepsChange(*entry.Added)
}

// orderNote says in which order the studies entered.
func orderNote(order synthesis.Order) string {
	switch {
	case order.By == synthesis.OrderByFile:
		return "Order: as in the file."
	case order.Ties == review.TiesFile:
		return fmt.Sprintf("Order: by %s; ties in the order of the file.", order.By)
	}
	return fmt.Sprintf("Order: by %s; ties enter together.", order.By)
}

// leaveOneOut writes the result without each study, the greatest carrier first.
func (p *page) leaveOneOut(s *synthesis.Synthesis, o *synthesis.Outcome) {
	columns := []column{{head: "without"}, {head: estimateHead(o)}, {head: "τ", right: true},
		{head: "effect : none", right: true}, {head: "steps", right: true}, {head: "carries", right: true}}
	estimate, tau, odds, steps := refitCells(o, o.Result.Fit.Mean)
	rows := [][]string{{"(none left out)", estimate, tau, odds, steps, ""}}
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
	for _, omission := range sorted {
		name := o.Studies[omission.Row].Source.Name
		if omission.Problem != nil {
			rows = append(rows, []string{name, omission.Problem.Error(), "", "", "", ""})
			continue
		}
		estimate, tau, odds, steps := refitCells(o, omission.Mean)
		carried := words.StepsChange(omission.Carried)
		if o.Analysis.NullMissing {
			carried = words.Missing
		}
		rows = append(rows, []string{name, estimate, tau, odds, steps, carried})
	}
	p.table(columns, rows)
	p.line("")
	p.item("·", fmt.Sprintf("A %s carries the steps of evidence that are lost without it; below 0 it held evidence back.", words.Noun(s, 1)))
	if o.Accrual.Tipping != nil {
		p.item("·", tippingText(s, o, o.Accrual.Tipping))
	}
}

// tippingText says which studies' removal brings the evidence under a step.
func tippingText(s *synthesis.Synthesis, o *synthesis.Outcome, t *meta.Tipping) string {
	under := fmt.Sprintf("below %s steps (%s)", words.Steps(t.Below), words.OddsInSentence(t.Below*evidence.LnStep))
	if !t.Found {
		return fmt.Sprintf("Tipping set: no removal that leaves a %s brings the evidence %s.", words.Noun(s, 1), under)
	}
	if len(t.Rows) == 0 {
		return fmt.Sprintf("Tipping set: the evidence is %s with all %s.", under, words.Noun(s, 2))
	}
	names := make([]string, len(t.Rows))
	for i, row := range t.Rows {
		names[i] = o.Studies[row].Source.Name
	}
	text := fmt.Sprintf("Tipping set: leaving out %s brings the evidence %s, to %s", strings.Join(names, ", "), under, words.OddsInSentence(t.Mean.Evidence.Ln()))
	switch {
	case !t.Exact:
		return text + "; found by greedy removal, so a smaller set may exist."
	case t.Ways > 1:
		return fmt.Sprintf("%s; no smaller set does, and %s sets of %d do.", text, words.Count(t.Ways), len(t.Rows))
	}
	return fmt.Sprintf("%s; no smaller set does, and no other of %d.", text, len(t.Rows))
}

// influence writes how each study pulls on the result.
func (p *page) influence(s *synthesis.Synthesis, o *synthesis.Outcome) {
	columns := []column{{head: "study"}, {head: "without it"}, {head: "τ", right: true}, {head: "steps", right: true}, {head: "pull", right: true}}
	detailed := slices.ContainsFunc(o.Accrual.Influence, func(one meta.Influence) bool { return one.Detail != nil })
	if detailed {
		columns = append(columns, column{head: "leverage", right: true}, column{head: "residual", right: true})
	}
	var rows [][]string
	for _, one := range o.Accrual.Influence {
		row := []string{o.Studies[one.Row].Source.Name}
		if one.Problem != nil {
			row = append(row, one.Problem.Error())
		} else {
			estimate, tau, _, steps := refitCells(o, one.Mean)
			row = append(row, estimate, tau, steps, words.StepsChange(one.Pull))
			if d := one.Detail; d != nil {
				row = append(row, words.Percent(d.Leverage), words.StepsChange(d.Residual))
			}
		}
		for len(row) < len(columns) {
			row = append(row, "")
		}
		rows = append(rows, row)
	}
	p.table(columns, rows)
	p.line("")
	p.item("·", "Pull: how far the study moves the pooled estimate, in standard errors of the estimate without it; signs on the analysis scale.")
	for _, text := range []string{
		fmt.Sprintf("Leverage: its share of the weight; an even share is %s.", words.Percent(1/float64(len(o.Studies)))),
		"Residual: its distance from what the others predict, in standard errors; beyond ±2 for about 1 in 20 if the model holds.",
	} {
		if detailed {
			p.item("·", text)
		}
	}
	for _, one := range o.Accrual.Influence {
		if one.Problem == nil {
			if text := influenceWords(one, len(o.Studies)); text != "" {
				p.item("·", o.Studies[one.Row].Source.Name+" "+text+".")
			}
		}
	}
}

// influenceWords says what is remarkable about a study; blank if nothing is.
func influenceWords(one meta.Influence, k int) string {
	var all []string
	if math.Abs(one.Pull) >= 1 {
		all = append(all, "moves the estimate by a standard error or more")
	}
	if d := one.Detail; d != nil {
		if math.Abs(d.Residual) >= 2 {
			all = append(all, "lies far from what the others predict")
		}
		if d.Leverage >= 0.5 || (k > 3 && d.Leverage >= 3/float64(k)) {
			all = append(all, fmt.Sprintf("has %s of the weight", words.Percent(d.Leverage)))
		}
	}
	if math.Abs(one.Carried) >= 1 {
		all = append(all, fmt.Sprintf("carries %s steps", words.StepsChange(one.Carried)))
	}
	return strings.Join(all, ", ")
}

// quantileHeads are the quantiles that the text shows, with their heads.
var quantileHeads = map[float64]string{0: "least", 0.025: "2.5%", 0.25: "25%", 0.5: "50%", 0.75: "75%", 0.975: "97.5%", 1: "most"}

// sideNames are what evidence can be for.
var sideNames = map[evidence.Hypothesis]string{evidence.Effect: "an effect", evidence.NoEffect: "none"}

// subsets writes the spread of the result over the subsets of the studies.
func (p *page) subsets(s *synthesis.Synthesis, o *synthesis.Outcome) {
	sub := o.Accrual.Subsets
	what := fmt.Sprintf("all %s subsets", words.Count(sub.Count))
	if !sub.Every {
		what = fmt.Sprintf("a sample of %s subsets", words.Count(sub.Count))
	}
	p.row("Taken", fmt.Sprintf("%s of %d %s", what, sub.K, words.Noun(s, sub.K)))
	columns := []column{{head: "share at or below"}}
	estimate, steps := []string{words.Measure(o.Analysis.Measure)}, []string{"steps of evidence"}
	for i, q := range sub.Estimate.Quantiles {
		head, shown := quantileHeads[q.P]
		if !shown {
			continue
		}
		columns = append(columns, column{head: head, right: true})
		estimate = append(estimate, words.ReaderValue(o, q.Value))
		steps = append(steps, words.Steps(sub.Steps.Quantiles[i].Value))
	}
	p.table(columns, [][]string{estimate, steps})
	null := words.ReaderValue(o, o.Analysis.Model.Null)
	sides := fmt.Sprintf("%s below %s, %s above", words.Probability(sub.Sides.BelowNull), null, words.Probability(sub.Sides.AboveNull))
	if zone := o.Analysis.Important; zone != nil && sub.Sides.BelowZone != nil {
		sides += fmt.Sprintf("; %s at %s or less, %s at %s or more", words.Probability(*sub.Sides.BelowZone), words.ReaderValue(o, zone.Low),
			words.Probability(*sub.Sides.AboveZone), words.ReaderValue(o, zone.High))
	}
	p.row("Estimates", sides)
	label := "Evidence"
	for _, w := range sub.Words {
		if w.Share == 0 {
			continue
		}
		p.row(label, fmt.Sprintf("%s for %s: %s", w.Word, sideNames[w.Favours], words.Probability(w.Share)))
		label = ""
	}
	if sub.Failed > 0 {
		p.item("·", fmt.Sprintf("%s subsets could not be pooled and are in no share.", words.Count(sub.Failed)))
	}
}
