package review

import "strings"

// Acceptance is one finding that the reviewer accepts, with the reason.
type Acceptance struct{ Rule, Reason string }

// ParseAccept reads the text of an accept cell: RULE and reason, "RULE: reason" or
// "RULE, reason", several parted by semicolons. What follows a semicolon and begins
// with no rule goes on with the reason before it. A rule that is none is returned as it
// is, in capitals.
func ParseAccept(text string) []Acceptance {
	var all []Acceptance
	for _, part := range strings.Split(text, ";") {
		part = strings.TrimSpace(part)
		if part == "" {
			continue
		}
		end := strings.IndexAny(part, ":, \t")
		if end < 0 {
			end = len(part)
		}
		rule := strings.ToUpper(part[:end])
		if last := len(all) - 1; last >= 0 && IsRuleName(all[last].Rule) && all[last].Reason != "" && !IsRuleName(rule) {
			all[last].Reason += "; " + part
			continue
		}
		all = append(all, Acceptance{
			Rule:   rule,
			Reason: strings.TrimSpace(strings.TrimLeft(part[end:], ":,-– \t")),
		})
	}
	return all
}

// IsRuleName reports whether a text has the form of a rule: a capital and digits.
func IsRuleName(text string) bool {
	return len(text) >= 2 && len(text) <= 4 && 'A' <= text[0] && text[0] <= 'Z' && strings.Trim(text[1:], "0123456789") == ""
}

// AcceptedReason returns the reason that the study's accept cell gives for a
// rule, blank if none.
func (s *Study) AcceptedReason(rule string) string {
	remark, ok := s.Remark(Accept.String())
	if !ok {
		return ""
	}
	for _, a := range ParseAccept(remark.Text) {
		if a.Rule == rule {
			return a.Reason
		}
	}
	return ""
}
