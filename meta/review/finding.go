package review

import "steelyard/meta/choice"

// Severity says what a finding does: an error keeps its row, or its outcome, out
// of the pooled result until it is mended or accepted; a warning is to be
// acknowledged; a note informs.
type Severity int

// The severities, gravest first.
const (
	Error Severity = iota
	Warning
	Note
)

var severityNames = choice.Of[Severity]("severity", "error", "warning", "note")

// String returns "error", "warning" or "note".
func (s Severity) String() string { return severityNames.String(s) }

// MarshalText writes the name of the severity.
func (s Severity) MarshalText() ([]byte, error) { return []byte(s.String()), nil }

// UnmarshalText reads the name of a severity.
func (s *Severity) UnmarshalText(text []byte) (err error) {
	*s, err = severityNames.Parse(string(text))
	return err
}

// RulePlan is the rule of findings about the plan.
const RulePlan = "plan"

// Finding is something in the sheet or the plan that a person should look at.
type Finding struct {
	Severity Severity
	Rule     string // of the catalogue, such as "C1"; a finding of the reader has the nearest rule
	Place    Place
	Study    string    // blank when it concerns no single study
	Outcome  string    // the outcome refused or remarked on; blank when it concerns the row or the file
	Message  string    // what was found, why it matters, what to do; one or two sentences, no place in it
	Accepted string    // the reviewer's reason for keeping the row, blank if none
	Readings []Reading // what the numbers may be instead; nil where there is one reading
}

// Reading is one way to read the numbers that a finding doubts: the numbers that
// it changes, each with the place of its row. A number that the row lacks is
// added.
type Reading struct {
	Label   string // such as "commas as decimal marks"
	Numbers []Number
}

// Blocks reports whether the finding keeps its row or outcome from being pooled.
func (f Finding) Blocks() bool { return f.Severity == Error && f.Accepted == "" }
