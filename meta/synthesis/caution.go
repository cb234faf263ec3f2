package synthesis

import (
	"fmt"
	"slices"

	"steelyard/meta/evidence"
	"steelyard/meta/review"
)

// EvidenceCaution says what an evidence ratio is not, and what those of the given
// forms can reach.
func EvidenceCaution(forms ...evidence.Form) string {
	text := "The evidence ratio says how well the data agree with an effect against none under this model: not the probability that a treatment works, no statement of size, harm or certainty."
	for _, form := range forms {
		text += " " + formCautions[form]
	}
	return text
}

// formCautions say what each form can reach against no effect, or rests on.
var formCautions = map[evidence.Form]string{
	evidence.Empirical:       "Against no effect it can reach 2.33 : 1 at most.",
	evidence.StudentForm:     "In the Student-t form it can reach 7.7 : 1 against no effect with two studies, less with more, 2.33 : 1 in the end.",
	evidence.IntegratedForm:  "Integrated over τ it rests on the prior for τ as well, with few studies heavily.",
	evidence.AveragedForm:    "Averaged over models it rests on the prior for τ, and on both models of τ being equally probable before.",
	evidence.NormalPriorForm: "Under a normal prior for the effect it depends on that prior: a wide one favours no effect whatever the data.",
	evidence.CauchyPriorForm: "Under a Cauchy prior for the effect it depends on that prior: a wide one favours no effect whatever the data.",
}

// Forms returns the forms of evidence that the outcomes' results carry, each once.
func (s *Synthesis) Forms() []evidence.Form {
	var forms []evidence.Form
	for i := range s.Outcomes {
		o := &s.Outcomes[i]
		if o.Result == nil || o.Analysis.NullMissing {
			continue
		}
		if form := o.FormOf(o.Result.Fit); !slices.Contains(forms, form) {
			forms = append(forms, form)
		}
	}
	if len(forms) == 0 {
		return []evidence.Form{evidence.Empirical}
	}
	slices.Sort(forms)
	return forms
}

// AccrualCaution belongs under cumulative, leave-one-out and subset results.
const AccrualCaution = "Cumulative, leave-one-out and subset results describe and are correlated; repeated looks raise false positives. Do not stop or start trials on them."

// panelCautions belong under what a guideline panel reads.
var panelCautions = []string{
	"Absolute effects use an assumed baseline risk; a wrong baseline gives wrong numbers per 1000. Give its source.",
	"Not significant is not no effect, and significant is not important: judge against the thresholds and the absolute effects. That there is no important effect only the regions can show.",
	"Certainty levels were entered by the people named beside them; the program computes none. Its numbers prompt a judgement and never replace one.",
	"Asymmetry of small studies has several causes, and its absence is no proof that nothing is missing.",
	"Few studies measure harms well; absent data are not zero events.",
	"If an error in the data could affect patients now, tell the authors and the guideline body; do not only mend the sheet.",
	"The program needs summaries only: load no names or identifiers of patients.",
}

// cautions returns the short cautions that belong under these results, general
// ones first.
func cautions(s *Synthesis) []string {
	all := []string{
		"Decision support only: it does not replace a qualified methodologist, clinicians or your body's own procedures, which prevail. Not for decisions on one patient.",
		"No result can be better than its studies and its sheet: bias, selective reporting and missing trials are not corrected, and a clean check does not mean correct data. Have a second person check every number.",
		EvidenceCaution(s.Forms()...),
	}
	var few, random, corrected, converted bool
	for i := range s.Outcomes {
		o := &s.Outcomes[i]
		if o.Result == nil {
			continue
		}
		k := o.Result.Fit.Mean.K
		few = few || k < 5
		random = random || (o.Result.Fit.Prediction != nil)
		corrected = corrected || o.Counts.Corrected > 0
		for _, study := range o.Studies {
			converted = converted || study.Converted()
		}
	}
	if random {
		all = append(all, "The mean is an average over studies; a given setting may differ: read the prediction interval.")
	}
	if few {
		all = append(all, "With fewer than 5 studies τ², I² and the prediction interval are very uncertain, and τ² = 0 does not show that the studies agree.")
	}
	if corrected {
		all = append(all, "Some tables have a zero cell: interval and p may be off; compare methods made for sparse tables.")
	}
	if converted {
		all = append(all, "Converted numbers (marked †) rest on assumptions; see the result without them.")
	}
	for i := range s.Outcomes {
		if s.Outcomes[i].Panel != nil {
			all = append(all, panelCautions...)
			break
		}
	}
	if n := overrides(s.Findings); n > 0 {
		all = append(all, fmt.Sprintf("Flagged findings accepted against advice: %d; their reasons stand with the findings.", n))
	}
	return all
}

func overrides(findings []review.Finding) int {
	n := 0
	for _, f := range findings {
		if f.Accepted != "" {
			n++
		}
	}
	return n
}
