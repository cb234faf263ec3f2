package review

import "strings"

// Acceptance is one finding that the reviewer accepts, with the reason.
type Acceptance struct{ Rule, Reason string }

// ParseAccept reads the text of an accept cell: RULE and reason, "RULE: reason" or
// "RULE, reason", several parted by semicolons. A rule that is none is returned as
// it is, in capitals.
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
		all = append(all, Acceptance{
			Rule:   strings.ToUpper(part[:end]),
			Reason: strings.TrimSpace(strings.TrimLeft(part[end:], ":,-– \t")),
		})
	}
	return all
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
