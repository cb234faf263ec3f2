package ingest

import (
	"fmt"
	"slices"
	"strconv"
	"strings"

	"steelyard/meta/review"
)

// rowRules are the rules whose findings about a row come from this reader alone;
// accepting one of them where it does not occur is remarked on.
var rowRules = map[string]bool{"F1": true, "F3": true, "F4": true, "F6": true, "F9": true, "F10": true, "F11": true, "F12": true}

// lastRules is the highest number of the rules of each letter.
var lastRules = map[byte]int{'F': 12, 'D': 9, 'C': 11, 'M': 16, 'I': 20, 'A': 20}

// knownRule reports whether a text names a rule, such as "C2".
func knownRule(text string) bool {
	if !review.IsRuleName(text) {
		return false
	}
	number, err := strconv.Atoi(text[1:])
	return err == nil && 1 <= number && number <= lastRules[text[0]]
}

// howToAccept ends the message of a finding that a reviewer may accept.
func howToAccept(rule string) string {
	return fmt.Sprintf(", or accept it by writing \"%s reason\" in the accept column", rule)
}

// accept marks the row's findings that the reviewer accepts; what is amiss with
// the acceptance itself is said when all findings are known.
func (r *rowReader) accept() {
	text := tidy(r.cell(r.t.role.accept).Text)
	if text == "" {
		return
	}
	for _, a := range review.ParseAccept(text) {
		for i := r.firstFinding; i < len(r.t.x.Findings); i++ {
			if f := &r.t.x.Findings[i]; f.Rule == a.Rule && f.Severity != review.Note && !r.t.final[i] {
				f.Accepted = a.Reason
			}
		}
	}
}

// remarkAcceptances reports accept cells that accept nothing: without a rule or a
// reason, of a rule that is none or that the row does not break, or of numbers
// that cannot be used whatever the reviewer says.
func (t *tableReader) remarkAcceptances() {
	if t.role.accept == 0 {
		return
	}
	byRow := map[int][]int{}
	for i, f := range t.x.Findings {
		if f.Severity != review.Note && f.Place.Row > 0 {
			byRow[f.Place.Row] = append(byRow[f.Place.Row], i)
		}
	}
	for i := range t.x.Studies {
		s := &t.x.Studies[i]
		if remark, ok := s.Remark(review.Accept.String()); ok {
			t.remarkAcceptance(s, remark.Text, byRow[s.Row.Row])
		}
	}
}

// remarkAcceptance goes through one accept cell; findings are the row's.
func (t *tableReader) remarkAcceptance(s *review.Study, text string, findings []int) {
	say := func(severity review.Severity, message string) {
		t.find(severity, "F9", t.place(s.Row.Row, t.role.accept, text), s.Name, message)
	}
	wordless := false
	for _, a := range review.ParseAccept(text) {
		found, final := false, false
		for _, i := range findings {
			if t.x.Findings[i].Rule == a.Rule {
				found, final = true, final || t.final[i]
			}
		}
		switch {
		case !review.IsRuleName(a.Rule):
			wordless = true
		case !knownRule(a.Rule):
			say(review.Warning, quote(a.Rule)+" is no rule; write the rule of the finding and the reason, such as \"C2 corrected for clusters\"")
		case a.Reason == "":
			say(review.Warning, "the rule "+a.Rule+" is accepted without a reason, so it still counts; write the reason after it")
		case final:
			say(review.Warning, "the finding "+a.Rule+" cannot be accepted, since nothing can be made of such a number; mend it, or clear the cell")
		case !found && rowRules[a.Rule]:
			say(review.Note, "the row has no finding of rule "+a.Rule+", so there is nothing to accept")
		}
	}
	if wordless {
		say(review.Note, t.wordless(text, findings))
	}
}

// wordless answers an accept cell that gives a reason and no rule.
func (t *tableReader) wordless(text string, findings []int) string {
	var rules []string
	for _, i := range findings {
		if rule := t.x.Findings[i].Rule; !t.final[i] && !slices.Contains(rules, rule) {
			rules = append(rules, rule)
		}
	}
	if len(rules) == 0 {
		return quote(text) + " names no rule, and the reader has found nothing in the row that could be accepted; an acceptance is written such as \"C2 corrected for clusters\""
	}
	return fmt.Sprintf("%s names no rule, so it accepts nothing; the row has findings of %s: write such as %s", quote(text), strings.Join(rules, ", "), quote(rules[0]+" "+text))
}
