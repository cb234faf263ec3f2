package ingest

import (
	"strings"

	"steelyard/ingest/grid"
	"steelyard/meta/review"
)

// guessRows is how many rows below the header a guess looks at.
const guessRows = 50

// guessColumns proposes a mapping, each "FIELD=HEADER", for a header that is not
// understood: the first column of texts names the studies, and the columns of
// numbers complete the set of fields that they fit best.
func guessColumns(s *grid.Sheet, h *header) []string {
	have := h.fields()
	numbers, texts := freeColumns(s, h)
	var guess []string
	if !have[review.StudyName] && len(texts) > 0 {
		guess = append(guess, review.StudyName.String()+"="+h.columns[texts[0]].Header)
	}
	for _, pair := range bestFit(h, have, numbers) {
		guess = append(guess, pair.field.String()+"="+pair.header)
	}
	return guess
}

// freeColumns returns the indices of the columns without a field, those of numbers
// and those of texts; a column of whole years is neither.
func freeColumns(s *grid.Sheet, h *header) (numbers, texts []int) {
	rows := s.Rows[h.bottom+1:]
	rows = rows[:min(guessRows, len(rows))]
	for i, c := range h.columns {
		if c.field != review.NoField || c.Header == "" {
			continue
		}
		number, text, year := 0, 0, 0
		for j := range rows {
			cell := rows[j].Cell(i + 1)
			value, _, err := grid.ParseNumber(cell.Text, '.')
			switch {
			case cell.Kind == grid.Blank:
			case err != nil:
				text++
			case value == float64(int(value)) && 1900 <= value && value <= 2100:
				year++
			default:
				number++
			}
		}
		switch {
		case number > text && number >= year:
			numbers = append(numbers, i)
		case text > year:
			texts = append(texts, i)
		}
	}
	return numbers, texts
}

// bestFit gives the columns of numbers to the missing fields of the set that
// leaves the fewest of either over.
func bestFit(h *header, have map[review.Field]bool, numbers []int) []request {
	var best []review.Field
	bestScore := -1 << 30
	for _, set := range fieldSets {
		var missing []review.Field
		for _, field := range set {
			if !have[field] {
				missing = append(missing, field)
			}
		}
		over := len(missing) - len(numbers)
		if over > 0 || len(missing) == 0 {
			continue // not enough columns, or complete already
		}
		if score := 2*(len(set)-len(missing)) + over; score > bestScore {
			best, bestScore = missing, score
		}
	}
	free := append([]int(nil), numbers...)
	var fit []request
	for _, field := range best {
		at := 0
		for i, c := range free {
			if resembles(h.columns[c].Header, field) {
				at = i
				break
			}
		}
		fit = append(fit, request{field: field, header: h.columns[free[at]].Header})
		free = append(free[:at], free[at+1:]...)
	}
	return fit
}

// resembles reports whether a header has a word for the quantity of a field.
func resembles(header string, field review.Field) bool {
	phrase, _ := fold(header)
	padded := " " + phrase + " "
	for _, q := range quantities {
		if q.treated != field && q.control != field {
			continue
		}
		for _, word := range q.words {
			if strings.Contains(padded, " "+word+" ") {
				return true
			}
		}
	}
	return false
}
