package choice

import (
	"slices"
	"strings"
)

// mostNearest is how many names Nearest returns.
const mostNearest = 4

// Nearest returns the names that are spelled like text, the nearest first and at
// most four: those that a third of the letters tell apart at most, or that share a
// word with it.
func Nearest(text string, names []string) []string {
	want := Fold(text)
	type near struct {
		name     string
		distance int
	}
	var found []near
	for _, name := range names {
		have := Fold(name)
		d := editDistance(want, have)
		if 3*d <= max(len(want), len(have)) || sharesWord(want, have) {
			found = append(found, near{name, d})
		}
	}
	slices.SortStableFunc(found, func(a, b near) int { return a.distance - b.distance })
	var nearest []string
	for _, n := range found[:min(mostNearest, len(found))] {
		nearest = append(nearest, n.name)
	}
	return nearest
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
