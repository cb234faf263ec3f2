package main

import (
	"fmt"

	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/synthesis"
)

// posterior writes the posterior distribution of mean effect and spread.
func (p *page) posterior(s *synthesis.Synthesis, o *synthesis.Outcome) {
	post := o.Posterior
	if post == nil {
		return
	}
	level := words.Level(post.Level)
	p.line("")
	p.wrapped("", "Posterior: "+words.Priors(post))
	p.value("Effect", words.ReaderQuantiles(o, post.Effect), fmt.Sprintf("%s, median and %s of the posterior", words.Measure(o.Analysis.Measure), level))
	p.value("In a new setting", words.ReaderInterval(o, meta.Limits{Low: post.New.Low, High: post.New.High}), level+" of the predictive distribution of the true effect")
	p.value("Spread τ", words.SpreadQuantiles(post.Tau), "median and "+level)
	label := "Probability"
	for _, t := range post.Thresholds {
		p.row(label, words.ProbablyBeyond(o, t))
		label = ""
	}
	p.line("")
	noun := words.Noun(s, 1)
	columns := []column{{head: noun}, {head: "its own estimate"}, {head: "with the others"}, {head: "towards the mean", right: true}}
	var rows [][]string
	for i, study := range post.Studies {
		own := o.Studies[i]
		rows = append(rows, []string{
			own.Source.Name, words.Reader(o, own.Estimate.Y, own.Interval), words.ReaderQuantiles(o, study.Quantiles), words.Percent(study.Toward),
		})
	}
	p.table(columns, rows)
	p.item("·", fmt.Sprintf("With the others: the true effect of each %s, drawn towards the mean effect by the share at the right. These probabilities hold under these priors and normal errors with known standard errors; they are no evidence ratio.", noun))
}
