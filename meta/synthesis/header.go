package synthesis

import (
	"strings"

	"steelyard/meta/review"
)

// callsTrials reports whether the column of names speaks of trials.
func callsTrials(columns []review.Column) bool {
	return strings.Contains(strings.ToLower(header(columns, review.StudyName)), "trial")
}

// armNames returns what the headers of the two arms' columns have in common in
// their leading words, such as "Brindle" over events and total; "treated" and
// "control" where they have nothing.
func armNames(columns []review.Column) [2]string {
	names := [2]string{"treated", "control"}
	pairs := [2][]review.Field{
		{review.TotalTreated, review.EventsTreated, review.MeanTreated},
		{review.TotalControl, review.EventsControl, review.MeanControl},
	}
	for arm, fields := range pairs {
		total := strings.Fields(header(columns, fields[0]))
		for _, other := range fields[1:] {
			words := strings.Fields(header(columns, other))
			n := 0
			for n < len(total) && n < len(words) && strings.EqualFold(total[n], words[n]) {
				n++
			}
			if n > 0 && n < len(total) {
				names[arm] = strings.Join(total[:n], " ")
				break
			}
		}
	}
	return names
}

func header(columns []review.Column, field review.Field) string {
	for _, c := range columns {
		if c.Field == field {
			return c.Header
		}
	}
	return ""
}
