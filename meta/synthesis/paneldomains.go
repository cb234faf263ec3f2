package synthesis

import (
	"cmp"
	"fmt"
	"slices"
	"strings"

	"steelyard/meta"
	"steelyard/meta/choice"
)

// EvidenceMap holds the numbers beside the domains of certainty that are not in the
// pooled result.
type EvidenceMap struct {
	RiskOfBias  []LabelShare // by the sheet's own labels, the heaviest first; nil where it has none
	WithoutHigh *meta.Fit    // without the studies at high risk; nil if there are none, or no others
	Scatter     ScatterCount
	Small       SmallStudies
	Funding     []LabelShare // by the labels of a column of funding; nil where there is none
	Designs     []LabelShare // by the labels of the column design; nil where there is none
}

// LabelShare is what the studies of one label weigh.
type LabelShare struct {
	Label   string // as typed; blank where a study has none
	Studies int
	Weight  float64 // their share of the pooled weight
}

// ScatterCount says how the studies lie to the pooled effect.
type ScatterCount struct {
	Below, Above int // of the null; nothing is counted where there is no null
	Apart        int // studies whose own interval does not hold the pooled effect
}

// SmallStudies says how much rests on small studies. Nothing is counted for studies
// that state no totals.
type SmallStudies struct {
	Counted int     // studies that state their people
	Below   int     // of these, with fewer than FewPeople people
	Weight  float64 // share of the weight of those below
	Largest float64 // share of the people in the largest study
}

// FewPeople is the number of people below which a study is called small. It is a
// convention of this program, not a threshold of any guidance.
const FewPeople = 100

// evidenceMap counts and refits what the domains ask about.
func (o *Outcome) evidenceMap() (EvidenceMap, error) {
	e := EvidenceMap{
		RiskOfBias: o.labels("risk-of-bias"), Designs: o.labels("design"), Small: o.smallStudies(),
	}
	for _, column := range []string{"funding", "funding-source", "sponsor", "funded-by"} {
		if e.Funding == nil {
			e.Funding = o.labels(column)
		}
	}
	mean := o.Result.Fit.Mean
	for _, study := range o.Studies {
		if study.Interval.High < mean.Estimate || study.Interval.Low > mean.Estimate {
			e.Scatter.Apart++
		}
		if o.Analysis.NullMissing {
			continue
		}
		switch y := study.Estimate.Y; {
		case y < o.Analysis.Model.Null:
			e.Scatter.Below++
		case y > o.Analysis.Model.Null:
			e.Scatter.Above++
		}
	}
	rest := slices.DeleteFunc(slices.Clone(o.Studies), func(s Study) bool { return s.HighRisk() })
	if len(rest) == 0 || len(rest) == len(o.Studies) {
		return e, nil
	}
	fit, err := o.fit(o.Analysis.Model, rest)
	if err != nil {
		return e, fmt.Errorf("%s without the studies at high risk of bias: %w", o.Called(), err)
	}
	e.WithoutHigh = fit
	return e, nil
}

// HighRisk reports whether the sheet calls the study's risk of bias high, serious or
// critical.
func (s *Study) HighRisk() bool {
	risk := strings.ToLower(s.Source.Cell("risk-of-bias"))
	return strings.Contains(risk, "high") || strings.Contains(risk, "serious") || strings.Contains(risk, "critical")
}

// labels sums the weight by the labels of a column; nil where no study has one.
func (o *Outcome) labels(column string) []LabelShare {
	var all []LabelShare
	labelled := false
	for i := range o.Studies {
		label := strings.TrimSpace(o.Studies[i].Source.Cell(column))
		labelled = labelled || label != ""
		at := slices.IndexFunc(all, func(s LabelShare) bool { return choice.Fold(s.Label) == choice.Fold(label) })
		if at < 0 {
			at, all = len(all), append(all, LabelShare{Label: label})
		}
		all[at].Studies++
		all[at].Weight += o.Studies[i].Weight
	}
	if !labelled {
		return nil
	}
	slices.SortStableFunc(all, func(a, b LabelShare) int { return cmp.Compare(b.Weight, a.Weight) })
	return all
}

// smallStudies counts the small studies and the share of the largest.
func (o *Outcome) smallStudies() SmallStudies {
	var s SmallStudies
	total, most := 0.0, 0.0
	for i := range o.Studies {
		people := (&derivation{row: o.Studies[i].Source}).bothArms()
		if people <= 0 {
			continue
		}
		s.Counted++
		total += people
		most = max(most, people)
		if people < FewPeople {
			s.Below++
			s.Weight += o.Studies[i].Weight
		}
	}
	if total > 0 {
		s.Largest = most / total
	}
	return s
}
