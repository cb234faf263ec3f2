package ingest

import (
	"strings"

	"steelyard/meta/review"
)

// acceptance is one finding that the reviewer accepts, with the reason.
type acceptance struct{ rule, reason string }

// parseAccept reads the text of an accept cell: RULE and reason, or RULE: reason,
// several parted by semicolons.
func parseAccept(text string) []acceptance {
	var all []acceptance
	for _, part := range strings.Split(text, ";") {
		part = strings.TrimSpace(part)
		if part == "" {
			continue
		}
		end := strings.IndexAny(part, ": \t")
		if end < 0 {
			end = len(part)
		}
		all = append(all, acceptance{
			rule:   strings.ToUpper(part[:end]),
			reason: strings.TrimSpace(strings.TrimLeft(part[end:], ": \t")),
		})
	}
	return all
}

// acceptedReason returns the reason that a study's accept cell gives for a rule,
// blank if none.
func acceptedReason(s *review.Study, rule string) string {
	remark, ok := s.Remark(review.Accept.String())
	if !ok {
		return ""
	}
	for _, a := range parseAccept(remark.Text) {
		if a.rule == rule {
			return a.reason
		}
	}
	return ""
}

// readerRules are the rules whose findings about a row come from this reader
// alone; accepting one of them where it does not occur is remarked on.
var readerRules = map[string]bool{"F1": true, "F3": true, "F4": true, "F6": true, "F9": true, "F10": true, "F11": true, "F12": true}

// accept marks the row's findings that the reviewer accepts.
func (r *rowReader) accept() {
	text := tidy(r.cell(r.t.role.accept).Text)
	if text == "" {
		return
	}
	col := r.t.role.accept
	for _, a := range parseAccept(text) {
		switch found := r.acceptRule(a); {
		case !ruleName(a.rule):
			r.find(review.Warning, "F9", col, quote(a.rule)+" is no rule; write the rule of the finding and the reason, such as \"C2 corrected for clusters\"")
		case a.reason == "":
			r.find(review.Warning, "F9", col, "the rule "+a.rule+" is accepted without a reason, so it still counts; write the reason after it")
		case !found && readerRules[a.rule]:
			r.find(review.Note, "F9", col, "the row has no finding of rule "+a.rule+", so there is nothing to accept")
		}
	}
}

// acceptRule marks the row's findings of a rule, and reports whether there is one.
func (r *rowReader) acceptRule(a acceptance) (found bool) {
	for i := r.firstFinding; i < len(r.t.x.Findings); i++ {
		if f := &r.t.x.Findings[i]; f.Rule == a.rule && f.Severity != review.Note {
			f.Accepted = a.reason
			found = true
		}
	}
	return found
}

// ruleName reports whether a text has the form of a rule: a capital and digits.
func ruleName(text string) bool {
	return len(text) >= 2 && len(text) <= 4 && 'A' <= text[0] && text[0] <= 'Z' && strings.Trim(text[1:], "0123456789") == ""
}
