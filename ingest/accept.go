package ingest

import (
	"strings"

	"steelyard/meta/review"
)

// readerRules are the rules whose findings about a row come from this reader
// alone and as it reads the row; accepting one of them where it does not occur is remarked on.
var readerRules = map[string]bool{"F1": true, "F3": true, "F4": true, "F6": true, "F9": true, "F11": true, "F12": true}

// accept marks the row's findings that the reviewer accepts.
func (r *rowReader) accept() {
	text := tidy(r.cell(r.t.role.accept).Text)
	if text == "" {
		return
	}
	col := r.t.role.accept
	for _, a := range review.ParseAccept(text) {
		switch found := r.acceptRule(a); {
		case !ruleName(a.Rule):
			r.find(review.Warning, "F9", col, quote(a.Rule)+" is no rule; write the rule of the finding and the reason, such as \"C2 corrected for clusters\"")
		case a.Reason == "":
			r.find(review.Warning, "F9", col, "the rule "+a.Rule+" is accepted without a reason, so it still counts; write the reason after it")
		case !found && readerRules[a.Rule]:
			r.find(review.Note, "F9", col, "the row has no finding of rule "+a.Rule+", so there is nothing to accept")
		}
	}
}

// acceptRule marks the row's findings of a rule, and reports whether there is one.
func (r *rowReader) acceptRule(a review.Acceptance) (found bool) {
	for i := r.firstFinding; i < len(r.t.x.Findings); i++ {
		if f := &r.t.x.Findings[i]; f.Rule == a.Rule && f.Severity != review.Note {
			f.Accepted = a.Reason
			found = true
		}
	}
	return found
}

// ruleName reports whether a text has the form of a rule: a capital and digits.
func ruleName(text string) bool {
	return len(text) >= 2 && len(text) <= 4 && 'A' <= text[0] && text[0] <= 'Z' && strings.Trim(text[1:], "0123456789") == ""
}
