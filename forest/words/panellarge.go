package words

import (
	"fmt"
	"math"

	"steelyard/meta/evidence"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// largeEnough says what the data say of the important difference, baseline by baseline.
// Where the difference is on the relative scale it is the same at each, and said once.
func largeEnough(o *synthesis.Outcome) []Fact {
	var facts []Fact
	for i := range o.Panel.Rows {
		r := &o.Panel.Rows[i]
		if r.Zone == nil {
			continue
		}
		label := ""
		if r.Baseline.Risk > 0 {
			label = BaselineName(r.Baseline)
		}
		relative := o.Panel.Threshold != nil && o.Panel.Threshold.Setting == review.SettingImportant
		switch {
		case relative && i > 0:
			continue
		case relative && len(o.Panel.Rows) > 1:
			label = "at each baseline"
		}
		for _, region := range r.Zone.Regions {
			facts = append(facts, Fact{label, regionWords(o, r, region, !relative || len(o.Panel.Rows) == 1)})
			label = ""
		}
		good, bad := "important benefit", "important harm"
		if o.Analysis.Better == review.BetterUnknown {
			good, bad = "an important lower effect", "an important higher effect"
		}
		if r.Zone.Benefit != nil {
			facts = append(facts, Fact{"", fmt.Sprintf("%s over a trivial effect: %s", good, pairOdds(*r.Zone.Benefit))})
		} else {
			facts = append(facts, Fact{"", good + ": out of reach, as the baseline risk is smaller than the difference"})
		}
		if r.Zone.Harm != nil {
			facts = append(facts, Fact{"", fmt.Sprintf("a trivial effect over %s: %s", bad, pairOdds(*r.Zone.Harm))})
		} else {
			facts = append(facts, Fact{"", bad + ": out of reach, as no risk is above 1000 per 1000 or below 0"})
		}
	}
	return facts
}

// pairOdds writes the evidence for one region over another.
func pairOdds(r evidence.Ratio) string {
	switch {
	case math.Abs(math.Expm1(math.Abs(r.Ln()))) <= even:
		return "1 : 1, for neither"
	case r.Ln() > 0:
		return OddsInSentence(r.Ln()) + ", " + Strength(r)
	}
	return OddsInSentence(-r.Ln()) + " against it, " + Strength(r)
}

// regionWords says how probable a region is and how strong the evidence is for it.
func regionWords(o *synthesis.Outcome, r *synthesis.PanelRow, region synthesis.Region, absolute bool) string {
	where := RegionRange(o, region)
	if absolute && r.Zone.Per1000 != nil {
		low, high := AbsoluteValue(r.Zone.Per1000.Low), AbsoluteValue(r.Zone.Per1000.High)
		switch {
		case math.IsInf(region.Low, -1) && region.Name != "trivial":
			where = low + ", or further"
		case math.IsInf(region.High, 1) && region.Name != "trivial":
			where = high + ", or further"
		default:
			where = "between " + low + " and " + high
		}
	}
	text := fmt.Sprintf("%s (%s): probability %s, evidence %s", region.Name, where, Probability(region.Posterior), RegionEvidence(region))
	if region.Settings >= 0 {
		text += fmt.Sprintf("; %s of settings predicted there", Probability(region.Settings))
	}
	return text
}
