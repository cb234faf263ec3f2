package main

import (
	"fmt"
	"slices"
	"strings"

	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// mostFindings is how many findings an answer shows.
const mostFindings = 10

// answer returns the answer of a synthesis.
func answer(s *synthesis.Synthesis) *page {
	var p page
	p.answer(s)
	return &p
}

// answer writes the answer of a synthesis.
func (p *page) answer(s *synthesis.Synthesis) {
	for i := range s.Outcomes {
		if i > 0 {
			p.line("")
		}
		p.outcome(s, &s.Outcomes[i])
	}
	p.findings(s)
	p.line("")
	p.line("Cautions")
	for _, c := range s.Cautions {
		p.item("·", c)
	}
}

// outcome writes one outcome: what was pooled, how large, how sure, how strong.
func (p *page) outcome(s *synthesis.Synthesis, o *synthesis.Outcome) {
	p.line(heading(s, o))
	p.leftOut(s, o)
	if o.Result == nil {
		p.wrapped("", "No result: "+o.Problem)
		p.pValues(o)
		p.methods(s, o)
		return
	}
	fit := o.Result.Fit
	p.wrapped("", words.Pooled(s, o))
	p.line("")
	p.effect(s, o)
	p.evidence(s, o)
	p.beliefs(o.Result)
	if fit.Mean.K > 1 {
		p.scatter(o.Result)
		p.otherModel(o)
	}
	p.converted(o)
	p.pValues(o)
	p.regions(o)
	p.remarks(o)
	p.sceptics(o)
	p.posterior(s, o)
	p.runs(o)
	p.methods(s, o)
}

func heading(s *synthesis.Synthesis, o *synthesis.Outcome) string {
	if o.Name == "" {
		return s.Source.File
	}
	return o.Name
}

// leftOut says which rows are not in the result.
func (p *page) leftOut(s *synthesis.Synthesis, o *synthesis.Outcome) {
	if len(o.Excluded) == 0 {
		return
	}
	p.wrapped("", fmt.Sprintf("%d of %d rows pooled; left out:", len(o.Studies), len(o.Studies)+len(o.Excluded)))
	for i, e := range o.Excluded {
		if i == mostFindings {
			p.item("-", fmt.Sprintf("and %d more", len(o.Excluded)-i))
			return
		}
		p.item("-", fmt.Sprintf("%s (%s): %s", e.Study, e.Where(), e.Reason))
	}
}

// effect writes the estimate and the prediction.
func (p *page) effect(s *synthesis.Synthesis, o *synthesis.Outcome) {
	fit := o.Result.Fit
	about := words.Measure(o.Analysis.Measure) + ", " + words.Level(fit.Model.Level) + " interval"
	if wanted := words.Wanted(o); wanted != "" {
		about += "; " + wanted
	}
	p.value("Effect", words.Reader(o, fit.Mean.Estimate, meta.Limits{Low: fit.Mean.Low, High: fit.Mean.High}), about)
	if fit.Prediction != nil {
		p.value("In a new setting", words.ReaderInterval(o, meta.Limits{Low: fit.Prediction.Low, High: fit.Prediction.High}),
			words.Level(fit.Model.Level)+" prediction interval for the true effect")
	}
}

// evidence writes how strongly the data favour an effect, or none.
func (p *page) evidence(s *synthesis.Synthesis, o *synthesis.Outcome) {
	mean := o.Result.Fit.Mean
	if o.Analysis.NullMissing {
		p.row("Evidence", words.NotWeighed(o))
		return
	}
	p.value("Evidence", words.Evidence(mean.Evidence), words.Strength(mean.Evidence)+"; "+words.Test(mean))
	if text := words.Rests(o); text != "" {
		p.value("", "", text)
	}
	if text := words.OtherForm(o); text != "" {
		p.value("", "", text)
	}
	if r := o.Result.Integrated; r != nil {
		text := words.Strength(r.Effect()) + "; " + words.TauPrior(r.Prior)
		if r.Exceeded {
			text += ", which the estimate of τ exceeds twice: doubt it"
		}
		p.value("", words.Evidence(r.Effect()), text)
	}
	if remark := words.BiasRemark(o); remark != "" {
		k := len(o.Studies)
		p.value("", "", fmt.Sprintf("%s: %d of %d %s at high risk", remark, words.HighRisk(o), k, words.Noun(s, k)))
	}
}

// otherModel writes the result of the effects model that was not chosen.
func (p *page) otherModel(o *synthesis.Outcome) {
	if other := o.Result.Other; other != nil {
		interval := meta.Limits{Low: other.Mean.Low, High: other.Mean.High}
		about := "for comparison"
		if !o.Analysis.NullMissing {
			about = words.OtherEvidence(o, other) + ", " + about
		}
		p.value(otherName(other), words.Reader(o, other.Mean.Estimate, interval), about)
	}
}

// converted writes what the answer is without the converted studies.
func (p *page) converted(o *synthesis.Outcome) {
	n := o.CountConverted()
	if n == 0 {
		return
	}
	if o.Result.Without == nil {
		p.row("Converted", "every study rests on an assumption: "+words.Converted(o))
		return
	}
	m := o.Result.Without.Mean
	about := "without " + words.Converted(o)
	if !o.Analysis.NullMissing {
		about = words.Evidence(m.Evidence) + ", " + about
	}
	p.value("Unconverted only", words.Reader(o, m.Estimate, meta.Limits{Low: m.Low, High: m.High}), about)
}

// pValues writes the evidence of studies that give a p-value alone.
func (p *page) pValues(o *synthesis.Outcome) {
	if o.PValues == nil {
		return
	}
	label := "Evidence alone"
	for _, s := range o.PValues.Studies {
		p.row(label, fmt.Sprintf("%s, p-value alone: %s; z = %s, %s participants", s.Source.Name, words.Evidence(s.Evidence), words.Linear(s.Z, 2), words.People(s.N)))
		label = ""
	}
	p.row("", "together by Stouffer: "+words.PCombined(o.PValues.Stouffer)+"; not in the result above, and not to be multiplied with it")
	p.row("", "by Fisher: "+words.PCombined(o.PValues.Fisher))
}

func otherName(other *meta.Fit) string {
	if other.Model.Effects == meta.CommonEffect {
		return "Common effect"
	}
	return "Random effects"
}

// beliefs writes what prior probabilities of an effect become.
func (p *page) beliefs(r *synthesis.Result) {
	if len(r.Posterior) == 0 {
		return
	}
	p.beliefTable(r.Posterior)
	p.row("", words.Doubter(r.DoubtersPrior))
}

// beliefTable writes probabilities before over those after.
func (p *page) beliefTable(beliefs []synthesis.Belief) {
	const each = 8
	perLine := (answerWidth - labelWidth) / each
	for from := 0; from < len(beliefs); from += perLine {
		before, after := "", ""
		for _, b := range beliefs[from:min(from+perLine, len(beliefs))] {
			before += pad(words.Probability(b.Prior), each)
			after += pad(words.Probability(b.Posterior), each)
		}
		p.write("  " + pad("Belief before", labelWidth) + before)
		p.write("  " + pad("becomes", labelWidth) + after)
	}
	changes := make([]string, len(beliefs))
	for i, b := range beliefs {
		changes[i] = fmt.Sprintf("from %s to %s", words.Probability(b.Prior), words.Probability(b.Posterior))
	}
	p.record(block{kind: labelledBlock, label: "Belief in an effect", text: strings.Join(changes, ", ")})
}

// scatter writes how much the studies differ.
func (p *page) scatter(r *synthesis.Result) {
	fit := r.Fit
	if fit.Model.Effects == meta.RandomEffects {
		p.row("Spread", words.Spread(fit))
	}
	p.row("Heterogeneity", words.Scatter(fit))
	if r.Differing != nil {
		p.row("", words.Differing(r.Differing))
	}
}

// regions writes what the data say of an important difference.
func (p *page) regions(o *synthesis.Outcome) {
	for i, r := range o.Result.Regions {
		label := ""
		if i == 0 {
			label = "Large enough?"
		}
		text := fmt.Sprintf("%s (%s): %s", r.Name, words.RegionRange(o, r), words.RegionEvidence(r))
		if r.Settings >= 0 {
			text += fmt.Sprintf("; %s of settings predicted there", words.Probability(r.Settings))
		}
		p.row(label, text)
	}
	if text := words.RegionForm(o); text != "" {
		p.row("", text)
	}
}

// remarks writes the caveats and assumptions.
func (p *page) remarks(o *synthesis.Outcome) {
	var all []string
	for _, c := range o.Result.Fit.Caveats {
		all = append(all, c.Text())
	}
	all = append(all, o.Notes...)
	if o.Counts.Corrected > 0 {
		all = append(all, fmt.Sprintf("%s with a zero cell: correction %q.", words.Number(o.Counts.Corrected, "table", "tables"), o.Analysis.Correction))
	}
	if len(all) == 0 {
		return
	}
	p.line("")
	for _, text := range all {
		p.item("·", text)
	}
}

// findings writes the findings, gravest first, grouped by rule; those that an
// outcome has named as the reason for leaving a row out are not said twice.
func (p *page) findings(s *synthesis.Synthesis) {
	said := map[string]bool{}
	for _, o := range s.Outcomes {
		for _, e := range o.Excluded {
			said[e.Study+e.Reason] = true
		}
	}
	var rest []int // indices of the findings
	for i, f := range s.Findings {
		if !said[f.Study+f.Message] || len(f.Readings) > 0 {
			rest = append(rest, i)
		}
	}
	if len(rest) == 0 {
		return
	}
	slices.SortStableFunc(rest, func(i, j int) int {
		a, b := &s.Findings[i], &s.Findings[j]
		if a.Severity != b.Severity {
			return int(a.Severity) - int(b.Severity)
		}
		return strings.Compare(a.Rule, b.Rule)
	})
	p.line("")
	p.line("Findings")
	for i, f := range rest {
		if i == mostFindings {
			p.item("·", fmt.Sprintf("and %d more; see: steelyard check %s", len(rest)-i, inCall(s.Source.File)))
			return
		}
		p.item("·", findingText(s.Findings[f]))
		p.readings(s, f)
	}
}

// readings writes what the answer is under each reading of a finding.
func (p *page) readings(s *synthesis.Synthesis, finding int) {
	for i := range s.Readings {
		r := &s.Readings[i]
		if r.Finding != finding {
			continue
		}
		text := r.Label + ": "
		if r.Outcome.Name != "" {
			text = r.Outcome.Name + ", " + text
		}
		if r.Outcome.Result == nil {
			p.item(" ", text+"no result: "+r.Outcome.Problem)
			continue
		}
		k := r.Outcome.Result.Fit.Mean.K
		p.item(" ", fmt.Sprintf("%s%s, from %s %s", text, words.Answer(&r.Outcome, r.Outcome.Result.Fit.Mean), words.Count(k), words.Noun(s, k)))
	}
}

// findingAbout returns the study that a finding is about, else its outcome, unless its
// message names it.
func findingAbout(f review.Finding) string {
	if f.Study != "" || strings.Contains(f.Message, f.Outcome) {
		return f.Study
	}
	return f.Outcome
}

func findingText(f review.Finding) string {
	text := f.Severity.String()
	if f.Rule != "" {
		text += " " + f.Rule
	}
	if where := f.Place.String(); where != "" {
		text += ", " + where
	}
	if about := findingAbout(f); about != "" {
		text += ", " + about
	}
	return text + ": " + verdict(f)
}

// verdict returns the message of a finding, and in place of the offer to accept it the
// reason where somebody has.
func verdict(f review.Finding) string {
	if f.Accepted == "" {
		return f.Message
	}
	message, _, _ := strings.Cut(f.Message, ", or accept it by writing")
	return message + ". Accepted: " + f.Accepted
}
