package webpage

import (
	"fmt"

	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/synthesis"
)

// posterior is the section on the posterior of mean effect and spread; nil without one.
func (v *view) posterior(s *synthesis.Synthesis, o *synthesis.Outcome) *sectionView {
	p := o.Posterior
	if p == nil {
		return nil
	}
	level := words.Level(p.Level)
	w := &sectionView{Items: "13d, 20b", Heading: "What is probable, given a prior?", Under: []string{words.Capital(words.Priors(p)) + "."}}
	t := v.table("Posterior", heads("Quantity", "Median or range", "What it is")...)
	add := func(name, value, about string) {
		t.Rows = append(t.Rows, rowView{Cells: []cellView{text(name), text(value), text(about)}})
	}
	add("Effect", words.ReaderQuantiles(o, p.Effect), words.Measure(o.Analysis.Measure)+", median and "+level)
	add("In a new setting", words.ReaderInterval(o, meta.Limits{Low: p.New.Low, High: p.New.High}), level+" of the predictive distribution of the true effect")
	add("Spread τ", words.SpreadQuantiles(p.Tau), "median and "+level)
	for _, b := range p.Thresholds {
		w.After = append(w.After, "Probability "+words.ProbablyBeyond(o, b)+".")
	}
	w.After = append(w.After, "These probabilities hold under these priors and normal errors with known standard errors; they are no evidence ratio.")
	studies := v.table(fmt.Sprintf("Each %s with the others", words.Noun(s, 1)), heads(words.Capital(words.Noun(s, 1)), "Its own estimate", "With the others", "#Towards the mean")...)
	for i, x := range p.Studies {
		own := o.Studies[i]
		studies.Rows = append(studies.Rows, rowView{Cells: []cellView{
			text(own.Source.Name), text(words.Reader(o, own.Estimate.Y, own.Interval)), text(words.ReaderQuantiles(o, x.Quantiles)), number(words.Percent(x.Toward), x.Toward),
		}})
	}
	studies.Folded, studies.Summary = true, studies.Caption
	w.Tables = []tableView{t, studies}
	return w
}
