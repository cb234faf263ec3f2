package explain

import (
	"fmt"
	"strings"
)

// DesignError reports covariates that no regression or comparison can use; the
// message names the column, its cells where they are to blame, and the remedy.
type DesignError struct {
	Column  string // blank where no single column is to blame
	Problem string
}

func (e *DesignError) Error() string {
	if e.Column == "" {
		return e.Problem
	}
	return fmt.Sprintf("column %q: %s", e.Column, e.Problem)
}

// mostCells is how many cells a message names.
const mostCells = 8

// listed joins names, the first few of many.
func listed(names []string) string {
	if more := len(names) - mostCells; more > 0 {
		return strings.Join(names[:mostCells], "; ") + fmt.Sprintf("; and %d more", more)
	}
	return strings.Join(names, "; ")
}
