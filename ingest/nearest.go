package ingest

import (
	"fmt"
	"slices"
	"strings"

	"steelyard/meta/choice"
	"steelyard/meta/review"
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

// nearestFields returns the names of at most four fields spelled like text, the
// nearest first: those that a third of its letters tell apart at most, or that
// share a word with it.
func nearestFields(text string) []string {
	const most = 4
	want := choice.Fold(text)
	type near struct {
		name     string
		distance int
	}
	var found []near
	for _, name := range review.FieldNames() {
		have := choice.Fold(name)
		d := editDistance(want, have)
		if 3*d <= max(len(want), len(have)) || sharesWord(want, have) {
			found = append(found, near{name, d})
		}
	}
	slices.SortStableFunc(found, func(a, b near) int { return a.distance - b.distance })
	var names []string
	for _, n := range found[:min(most, len(found))] {
		names = append(names, n.name)
	}
	return names
}

// sharesWord reports whether two folded names have a word in common, give or take
// a letter in a long one.
func sharesWord(a, b string) bool {
	for _, v := range strings.Split(a, "-") {
		for _, w := range strings.Split(b, "-") {
			if len(v) > 1 && (v == w || len(w) > 3 && editDistance(v, w) < 2) {
				return true
			}
		}
	}
	return false
}

// editDistance returns how many letters must be put in, taken out or changed to
// make b of a (Levenshtein 1966).
func editDistance(a, b string) int {
	from, to := []rune(a), []rune(b)
	row := make([]int, len(to)+1)
	for j := range row {
		row[j] = j
	}
	for i := range from {
		diagonal := row[0]
		row[0] = i + 1
		for j := range to {
			cost := diagonal
			if from[i] != to[j] {
				cost++
			}
			diagonal = row[j+1]
			row[j+1] = min(cost, row[j]+1, diagonal+1)
		}
	}
	return row[len(to)]
}
