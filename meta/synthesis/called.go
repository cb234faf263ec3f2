package synthesis

import "fmt"

// Called names the outcome in a message: outcome "death", or "the outcome" where the
// sheet has one without a name.
func (o *Outcome) Called() string {
	if o.Name == "" {
		return "the outcome"
	}
	return fmt.Sprintf("outcome %q", o.Name)
}
