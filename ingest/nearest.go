package ingest

import (
	"fmt"
	"strings"
)

// FieldError reports a text that names no field.
type FieldError struct {
	Text    string
	Nearest []string // names of fields that are spelled alike; nil if none is
}

// Error suggests the nearest fields.
func (e *FieldError) Error() string {
	if len(e.Nearest) == 0 {
		return fmt.Sprintf("%s is no field; fields are such as study, date, outcome, events treated, total treated, mean treated, sd treated, estimate, se, ci low and ci high", quote(e.Text))
	}
	return fmt.Sprintf("%s is no field; did you mean %s?", quote(e.Text), strings.Join(e.Nearest, ", "))
}
