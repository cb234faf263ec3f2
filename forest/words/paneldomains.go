package words

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// domainCards returns where the rating starts, the five domains that may lower it, and
// those that may raise it where a study is not called randomised or the panel judged
// them.
func domainCards(s *synthesis.Synthesis, o *synthesis.Outcome) []DomainCard {
	cards := []DomainCard{
		rated(o, review.DomainStart, startNumbers(s, o)),
		rated(o, review.DomainRiskOfBias, biasNumbers(s, o)),
		rated(o, review.DomainInconsistency, inconsistencyNumbers(s, o)),
		rated(o, review.DomainIndirectness, []string{"No number speaks of it: compare people, treatments and outcomes with the question."}),
		rated(o, review.DomainImprecision, imprecisionNumbers(s, o)),
		rated(o, review.DomainPublicationBias, missingNumbers(s, o)),
	}
	raising := !allRandomised(o)
	for _, d := range []review.Domain{review.DomainLargeEffect, review.DomainDoseGradient, review.DomainConfounding} {
		var numbers []string
		if d == review.DomainLargeEffect {
			numbers = largeNumbers(o)
		}
		if card := rated(o, d, numbers); card.Rated || (raising && numbers != nil) {
			cards = append(cards, card)
		}
	}
	return cards
}

// rated joins the numbers beside a domain with the panel's own rating.
func rated(o *synthesis.Outcome, d review.Domain, numbers []string) DomainCard {
	card := DomainCard{Domain: d.String(), Numbers: numbers, Rating: NotRated}
	for _, j := range o.Panel.Judgements {
		if j.Domain != d {
			continue
		}
		card.Rating, card.Rated = j.Rating, true
		card.Reason = j.Reason
		var signed []string
		for _, part := range []string{j.By, j.Date.String()} {
			if part != "" {
				signed = append(signed, part)
			}
		}
		if len(signed) > 0 {
			card.Reason += " (" + strings.Join(signed, ", ") + ")"
		}
	}
	return card
}

// shares lists labels with their studies and weight: "low 65% of the weight (6
// trials), high 6% (1)".
func shares(s *synthesis.Synthesis, all []synthesis.LabelShare) string {
	var parts []string
	for i, share := range all {
		label := share.Label
		if label == "" {
			label = "not stated"
		}
		weight := Percent(share.Weight)
		studies := Count(share.Studies)
		if i == 0 {
			weight += " of the weight"
			studies += " " + Noun(s, share.Studies)
		}
		parts = append(parts, fmt.Sprintf("%s %s (%s)", label, weight, studies))
	}
	return strings.Join(parts, ", ")
}

// allRandomised reports whether every study's design is called randomised; a sheet
// that states none is not taken for one of the two.
func allRandomised(o *synthesis.Outcome) bool {
	return !slices.ContainsFunc(o.Panel.Evidence.Designs, func(d synthesis.LabelShare) bool {
		label := strings.ToLower(d.Label)
		return label != "" && (!strings.Contains(label, "random") || strings.Contains(label, "non") || strings.Contains(label, "not "))
	})
}

func startNumbers(s *synthesis.Synthesis, o *synthesis.Outcome) []string {
	if o.Panel.Evidence.Designs == nil {
		return []string{"The sheet has no column design: whether the " + Noun(s, 2) + " are randomised is not known here."}
	}
	return []string{"Designs: " + shares(s, o.Panel.Evidence.Designs) + "."}
}

func biasNumbers(s *synthesis.Synthesis, o *synthesis.Outcome) []string {
	e := o.Panel.Evidence
	if e.RiskOfBias == nil {
		return []string{"The sheet has no column risk of bias: nothing can be said of it."}
	}
	all := []string{"By the sheet's labels: " + shares(s, e.RiskOfBias) + "."}
	switch n := HighRisk(o); {
	case e.WithoutHigh != nil:
		all = append(all, fmt.Sprintf("Without the %s at high risk: %s; with all: %s.", Number(n, Noun(s, 1), Noun(s, 2)), Answer(o, e.WithoutHigh.Mean), Answer(o, o.Result.Fit.Mean)))
	case n > 0:
		all = append(all, "Every "+Noun(s, 1)+" is at high risk: there is no result without them.")
	default:
		all = append(all, "No "+Noun(s, 1)+" is called at high risk.")
	}
	return all
}

func inconsistencyNumbers(s *synthesis.Synthesis, o *synthesis.Outcome) []string {
	fit, e := o.Result.Fit, o.Panel.Evidence
	if fit.Mean.K < 2 {
		return []string{"There is one " + Noun(s, 1) + ": nothing to be consistent with."}
	}
	var all []string
	if !o.Analysis.NullMissing {
		null := plain(effect.ToReader(o.Analysis.Measure, o.Analysis.Model.Null))
		all = append(all, fmt.Sprintf("Estimates: %d below %s, %d above. The intervals of %d of %d %s do not hold the pooled effect.", e.Scatter.Below, null, e.Scatter.Above, e.Scatter.Apart, fit.Mean.K, Noun(s, fit.Mean.K)))
	}
	if text := sideWords(o); text != "" {
		all = append(all, text)
	}
	if fit.Model.Effects == meta.RandomEffects {
		all = append(all, "Spread: "+Spread(fit)+".")
	}
	all = append(all, capital(Scatter(fit))+".")
	if o.Result.Differing != nil {
		all = append(all, "Do effects differ? "+Differing(o.Result.Differing)+".")
	}
	if p := fit.Prediction; p != nil {
		all = append(all, fmt.Sprintf("Prediction interval: %s.", ReaderInterval(o, meta.Limits{Low: p.Low, High: p.High})))
	} else if fit.Model.Effects == meta.RandomEffects {
		all = append(all, "There is no prediction interval: it needs 3 "+Noun(s, 3)+" or more.")
	}
	return all
}

// sideWords counts the estimates below, within and above the important difference.
func sideWords(o *synthesis.Outcome) string {
	var parts []string
	for i := range o.Panel.Rows {
		r := &o.Panel.Rows[i]
		if r.Zone == nil {
			continue
		}
		relative := o.Panel.Threshold.Setting == review.SettingImportant
		if relative && i > 0 {
			break
		}
		low, high := r.Zone.Limits.Low, r.Zone.Limits.High
		text := fmt.Sprintf("%d at %s or beyond, %d trivial, %d at %s or beyond", r.Zone.Sides[0], boundaryName(o, r, low), r.Zone.Sides[1], r.Zone.Sides[2], boundaryName(o, r, high))
		if relative {
			text = fmt.Sprintf("%d at %s or beyond, %d trivial, %d at %s or beyond", r.Zone.Sides[0], ReaderValue(o, low), r.Zone.Sides[1], r.Zone.Sides[2], ReaderValue(o, high))
		} else {
			text += " from " + BaselineName(r.Baseline)
		}
		parts = append(parts, text)
	}
	if len(parts) == 0 {
		return ""
	}
	return "Estimates by the important difference: " + strings.Join(parts, "; ") + "."
}

func imprecisionNumbers(s *synthesis.Synthesis, o *synthesis.Outcome) []string {
	if o.Analysis.NullMissing {
		return []string{"There is no value of no effect to hold the interval against."}
	}
	var all []string
	for i := range o.Panel.Rows {
		all = append(all, boundaryNumbers(o, &o.Panel.Rows[i])...)
	}
	for i := range o.Panel.Rows {
		if text := informationWords(s, o, &o.Panel.Rows[i]); text != "" {
			all = append(all, text)
		}
	}
	if text := noInformation(o); text != "" {
		all = append(all, text)
	}
	if o.Panel.Threshold == nil {
		all = append(all, "No important difference is set: the interval can be held against no effect only. Set one with --important or --important-per-1000 before results are seen.")
	}
	return all
}

// boundaryNumbers says where the interval of a row lies to each threshold and to none.
func boundaryNumbers(o *synthesis.Outcome, r *synthesis.PanelRow) []string {
	var crossed, parts []string
	where := ""
	if r.Baseline.Risk > 0 {
		where = "From " + BaselineName(r.Baseline) + ": "
	}
	var all []*synthesis.Boundary
	if r.Zone != nil {
		all = append(all, r.Zone.Low)
	}
	all = append(all, r.Null)
	if r.Zone != nil {
		all = append(all, r.Zone.High)
	}
	count := 0
	for _, b := range all {
		if b == nil {
			continue
		}
		count++
		if b.Crossed {
			crossed = append(crossed, boundaryName(o, r, b.At))
		}
		parts = append(parts, boundaryWords(o, r, b))
	}
	lines := []string{}
	if count > 0 {
		head := fmt.Sprintf("%sthe interval crosses %d of %d values", where, len(crossed), count)
		if len(crossed) > 0 {
			head += ": " + strings.Join(crossed, ", ")
		}
		lines = append(lines, capital(head)+". "+strings.Join(parts, " "))
	}
	return lines
}

// boundaryWords says how far the limits lie from a value, and which null trial would
// change it.
func boundaryWords(o *synthesis.Outcome, r *synthesis.PanelRow, b *synthesis.Boundary) string {
	name := boundaryName(o, r, b.At)
	distance := func(d float64) string {
		if r.Absolute != nil {
			return Linear(math.Abs(d), max(0, absoluteDecimals(math.Abs(d))))
		}
		n := OutcomeNotation(o)
		if n.Ratio {
			return Linear(math.Abs(d), 2)
		}
		return n.Value(math.Abs(d))
	}
	var text string
	if b.Crossed {
		text = fmt.Sprintf("Its limits lie %s below and %s above %s", distance(b.Low), distance(b.High), name)
	} else {
		text = fmt.Sprintf("It stays %s from %s", distance(min(math.Abs(b.Low), math.Abs(b.High))), name)
	}
	t := b.Trial
	switch {
	case t == nil:
		return text + "."
	case !t.Found && b.Crossed:
		return text + fmt.Sprintf("; no trial of up to %s people that found no effect would take it off that.", People(t.People))
	case !t.Found:
		return text + fmt.Sprintf("; no trial of up to %s people that found no effect would bring it there.", People(t.People))
	case b.Crossed:
		return text + fmt.Sprintf("; a trial of %s people that found no effect would take it off that.", People(t.People))
	}
	return text + fmt.Sprintf("; a trial of %s people that found no effect would bring it there.", People(t.People))
}

// informationWords says the optimal information size of a row and what is reached.
func informationWords(s *synthesis.Synthesis, o *synthesis.Outcome, r *synthesis.PanelRow) string {
	a := r.Information
	if a == nil {
		return ""
	}
	what := fmt.Sprintf("to tell %s from %s per 1000", Per1000(a.To), Per1000(a.From))
	if a.Delta != 0 {
		what = fmt.Sprintf("to tell %s standard deviations from none", Linear(math.Abs(a.Delta), 2))
	}
	why := "the important difference"
	if !a.Important {
		why = fmt.Sprintf("a relative change of %s", Percent(math.Abs(a.To-a.From)/a.From))
	}
	text := fmt.Sprintf("Optimal information size %s people %s (%s)", People(a.Total()), what, why)
	if a.Events > 0 {
		text += fmt.Sprintf(", %s events", People(math.Round(a.Events)))
	}
	if a.People == 0 {
		return text + "; how many people the " + Noun(s, 2) + " have is not stated."
	}
	return text + fmt.Sprintf("; reached %s with %s.", Percent(a.Share()), People(float64(a.People)))
}

// noInformation says why no row has an information size; blank if one has.
func noInformation(o *synthesis.Outcome) string {
	for i := range o.Panel.Rows {
		if o.Panel.Rows[i].Information != nil {
			return ""
		}
	}
	switch m := o.Analysis.Measure; {
	case m == effect.MeanDifference && o.Panel.SD == nil:
		return "The optimal information size of means needs a standard deviation: state one with --standard-deviation."
	case m == effect.MeanDifference, m == effect.StandardisedMeanDifference:
		return "The optimal information size of means needs an important difference: set one with --important."
	}
	return "No optimal information size is worked out for this measure here."
}

func missingNumbers(s *synthesis.Synthesis, o *synthesis.Outcome) []string {
	small := o.Panel.Evidence.Small
	k := len(o.Studies)
	text := fmt.Sprintf("%s %s", capital(Count(k)), Noun(s, k))
	if small.Counted > 0 {
		text += fmt.Sprintf("; %d of %d that state their people have fewer than %d, with %s of the weight; the largest holds %s of the people",
			small.Below, small.Counted, synthesis.FewPeople, Percent(small.Weight), Percent(small.Largest))
	}
	all := []string{text + "."}
	if k < 10 {
		all = append(all, "Asymmetry is not tested below ten "+Noun(s, 2)+".")
	}
	if o.Panel.Evidence.Funding != nil {
		all = append(all, "Funding: "+shares(s, o.Panel.Evidence.Funding)+".")
	}
	if o.PValues != nil {
		all = append(all, fmt.Sprintf("%s a p-value alone and no effect.", Number(len(o.PValues.Studies), Noun(s, 1)+" gives", Noun(s, 2)+" give")))
	}
	return append(all, "Registered studies without results are not in the sheet: count them.")
}

// largeNumbers holds a ratio against the guides for a large effect; nil for another
// measure.
func largeNumbers(o *synthesis.Outcome) []string {
	m := o.Analysis.Measure
	if m != effect.RiskRatio && m != effect.OddsRatio && m != effect.HazardRatio && m != effect.RateRatio {
		return nil
	}
	mean := o.Result.Fit.Mean
	return []string{fmt.Sprintf("%s against the guides 2 or 0.5 for a large and 5 or 0.2 for a very large effect, for a risk ratio without plausible confounding.",
		Reader(o, mean.Estimate, meta.Limits{Low: mean.Low, High: mean.High}))}
}
