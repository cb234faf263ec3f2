package main

import (
	"fmt"
	"slices"
	"strings"

	"steelyard/forest/words"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// flagged repeats under an answer that does not list the findings what its reader must
// know of them: what was pooled against advice, with the reasons, and how many warnings
// nobody has accepted.
func (p *page) flagged(s *synthesis.Synthesis) {
	var rules []string
	accepted, warnings := 0, 0
	for _, f := range s.Findings {
		switch {
		case f.Severity == review.Note:
		case f.Accepted != "":
			if accepted++; accepted <= mostFindings {
				p.item("·", acceptedText(f))
			}
		case f.Severity == review.Warning:
			warnings++
			if !slices.Contains(rules, f.Rule) {
				rules = append(rules, f.Rule)
			}
		}
	}
	if accepted > mostFindings {
		p.item("·", fmt.Sprintf("and %d more accepted findings; see: steelyard check %s", accepted-mostFindings, inCall(s.Source.File)))
	}
	if warnings > 0 {
		slices.Sort(rules)
		p.item("·", fmt.Sprintf("The sheet has %s that nobody has accepted (%s); see: steelyard check %s",
			words.Number(warnings, "warning", "warnings"), strings.Join(rules, ", "), inCall(s.Source.File)))
	}
}

// acceptedText says which finding was accepted and why.
func acceptedText(f review.Finding) string {
	about := f.Place.String()
	if study := findingAbout(f); study != "" {
		about = study + " (" + about + ")"
	}
	return fmt.Sprintf("Pooled against the finding %s, %s: %s", f.Rule, about, f.Accepted)
}
