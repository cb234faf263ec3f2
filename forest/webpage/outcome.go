package webpage

import (
	"fmt"
	"slices"

	"steelyard/forest/words"
	"steelyard/meta/synthesis"
)

// outcomeView is one outcome on the page. Parts that the synthesis does not have are
// nil, and their sections stay away.
type outcomeView struct {
	ID, Name  string
	Problem   string
	LeftOut   []leftOutView
	Answer    *answerView
	Trials    *sectionView
	Accrual   *sectionView
	Rests     *sectionView
	Panel     *panelView
	Other     *sectionView
	Posterior *sectionView
	Small     *sectionView
	Data      *tableView
	WhatIf    *whatIfView // what can be changed; nil on a page that only shows
}

// leftOutView is a row that was not pooled.
type leftOutView struct{ Study, Where, Reason string }

// answerView is the answer in words and numbers.
type answerView struct {
	Pooled, Measure, Estimate, Interval, Direction string
	Evidence, Strength, Bias                       string // blank where nothing is weighed
	Reviewer, Panel, Living                        []string
	Baseline                                       *baselineView // what the panel reads first; nil without an absolute form
	Keys                                           []keyView
	Beliefs                                        *beliefsView
	Remarks                                        []string
	Facts                                          []string // attributes: what is set beside a changed analysis
}

// keyView is one of the key numbers.
type keyView struct {
	Name, Value string
	About       []string
	Slot        string // of Value, which a slider changes; blank for none
}

// sectionView is a section that asks, answers in a line, and shows a chart and tables.
type sectionView struct {
	Items   string // of PRISMA 2020
	Heading string
	Under   []string
	Figures []figureView
	Tables  []tableView
	After   []string
}

// outcome builds the view of an outcome for its place, and notes there how many tables
// come late.
func (v *view) outcome(s *synthesis.Synthesis, i int, at *Place) (*outcomeView, error) {
	o := &s.Outcomes[i]
	w := &outcomeView{ID: at.ID, Name: outcomeName(s, o), Problem: o.Problem}
	for _, e := range o.Excluded {
		w.LeftOut = append(w.LeftOut, leftOutView{e.Study, e.Where(), e.Reason})
	}
	if o.Result == nil {
		v.data.Outcomes = append(v.data.Outcomes, v.outcomeData(o, w))
		return w, nil
	}
	w.Problem = ""
	w.Answer = v.answer(s, o, w.ID)
	if v.Live != nil {
		w.WhatIf = whatIf(s, o)
	}
	var err error
	if w.Trials, err = v.trials(s, o, w.ID); err != nil {
		return nil, err
	}
	if w.Accrual, err = v.accrual(s, o, w.ID); err != nil {
		return nil, err
	}
	if w.Rests, err = v.rests(s, o, w.ID); err != nil {
		return nil, err
	}
	if w.Panel, err = v.panel(s, o, w.ID); err != nil {
		return nil, err
	}
	w.Answer.withPanel(w.Panel)
	if err = v.late(s, o, w, at); err != nil {
		return nil, err
	}
	table := v.studyTable(s, o, w.ID)
	w.Data = &table
	v.data.Outcomes = append(v.data.Outcomes, v.outcomeData(o, w))
	return w, nil
}

// late builds the sections that take long to work out.
func (v *view) late(s *synthesis.Synthesis, o *synthesis.Outcome, w *outcomeView, at *Place) error {
	if v.extent != Whole {
		v.tables += at.Late
		return nil
	}
	before := v.tables
	var err error
	if w.Other, err = v.other(s, o, w.ID); err != nil {
		return err
	}
	w.Posterior = v.posterior(s, o)
	if w.Small, err = v.smallStudy(s, o, w.ID); err != nil {
		return err
	}
	at.Late = v.tables - before
	return nil
}

func (v *view) answer(s *synthesis.Synthesis, o *synthesis.Outcome, id string) *answerView {
	fit := o.Result.Fit
	a := &answerView{
		Pooled: words.PooledPeople(s, o), Measure: words.Measure(o.Analysis.Measure), Estimate: words.MeanEstimate(o),
		Interval: words.MeanInterval(o), Direction: words.Direction(o),
		Reviewer: keep(words.ModelShort(o), words.SpreadSentence(s, o), words.LeaveOneOutSentence(s, o)),
		Living:   keep(words.LatestArrival(o), words.BeforeLatest(o), words.CumulativeSentence(o)),
		Remarks:  remarks(o), Facts: whatIfFacts(s, o, id),
	}
	a.Keys = append(a.Keys, keyView{Name: words.Capital(a.Measure), Value: a.Estimate, About: []string{a.Interval}})
	if fit.Prediction != nil {
		a.Keys = append(a.Keys, keyView{Name: "In a new setting", Value: predictionText(o), About: []string{words.Level(fit.Model.Level) + " prediction interval"}})
	}
	if o.Analysis.NullMissing {
		a.Panel = keep(words.NotWeighed(o))
		return a
	}
	a.Evidence, a.Strength, a.Bias = words.Evidence(fit.Mean.Evidence), words.Strength(fit.Mean.Evidence), words.BiasRemark(o)
	a.Keys = append(a.Keys, keyView{Name: "Evidence, effect : none", Value: words.NoBreak(words.Odds(fit.Mean.Evidence.Ln())), About: keep(a.Strength, a.Bias)})
	if len(o.Result.Regions) > 0 {
		a.Panel = append(a.Panel, words.RegionsSentence(o, o.Result.Regions[0]))
	}
	a.Beliefs = v.beliefs(o, id)
	if start := a.Beliefs.Stops[a.Beliefs.Start]; a.Beliefs.Stated { // no one number for a belief that nobody stated
		a.Keys = append(a.Keys, keyView{Name: start.Prior, Value: start.Posterior, About: []string{"that there is an effect"}, Slot: "posterior"})
	}
	return a
}

// withPanel adds what a panel's part says first: the absolute effect at the baseline of
// the slider's start, else the card's sentences.
func (a *answerView) withPanel(p *panelView) {
	switch {
	case p == nil:
	case p.Control == nil:
		a.Panel = append(p.Card.Sentences, a.Panel...)
	default:
		a.Baseline = p.Control
		key := keyView{Name: p.Control.Stop.Texts["base"], Value: p.Control.Stop.Texts["difference"], Slot: "difference", About: []string{p.Control.Stop.Texts["interval"]}}
		at := min(2, len(a.Keys))
		a.Keys = slices.Insert(a.Keys, at, key)
	}
}

// keep returns the texts that are not blank.
func keep(texts ...string) []string {
	var kept []string
	for _, t := range texts {
		if t != "" {
			kept = append(kept, t)
		}
	}
	return kept
}

// remarks are the caveats of the fit and what was assumed.
func remarks(o *synthesis.Outcome) []string {
	var all []string
	for _, c := range o.Result.Fit.Caveats {
		all = append(all, c.Text())
	}
	all = append(all, o.Notes...)
	if o.Counts.Corrected > 0 {
		all = append(all, fmt.Sprintf("%s with a zero cell: correction %q.", words.Number(o.Counts.Corrected, "table", "tables"), o.Analysis.Correction))
	}
	return all
}
