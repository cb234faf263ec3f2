package main

import (
	"steelyard/forest/words"
	"steelyard/meta/synthesis"
)

// sceptics writes what sceptics of different strength make of the evidence.
func (p *page) sceptics(o *synthesis.Outcome) {
	b := o.Beliefs
	if b == nil {
		return
	}
	p.line("")
	p.wrapped("", "For the sceptic: other beliefs, and other priors for the size of the effect")
	p.beliefTable(b.Posterior)
	for _, doubter := range b.Doubters {
		p.row("", words.Doubter(doubter))
	}
	p.row("Scepticism limit", words.Scepticism(o, b))
	p.row("Bound", words.PriorBound(b))
	p.line("")
	columns := []column{
		{head: "scale of the prior"}, {head: words.Measure(o.Analysis.Measure) + "s, 95% of a normal prior", right: true},
		{head: "normal", right: true}, {head: "Cauchy", right: true},
	}
	var rows [][]string
	for _, f := range b.Table {
		rows = append(rows, []string{
			words.PriorScale(f.Scale), words.PriorRange(o, f.Scale), words.Odds(f.Normal.Ln()), words.Odds(f.Cauchy.Ln()),
		})
	}
	p.table(columns, rows)
	p.item("·", words.PriorDrift(o, b))
}
