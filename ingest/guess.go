package ingest

import (
	"slices"

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
	var best []request
	bestScore := -1 << 30
	for _, set := range fieldSets {
		var missing []review.Field
		for _, field := range set {
			if !have[field] {
				missing = append(missing, field)
			}
		}
		fit, told := assign(h, missing, numbers)
		if len(missing) == 0 || len(fit) < len(missing) {
			continue // complete already, or no column may be taken for one of them
		}
		if score := 2*(len(set)-len(missing)) + len(missing) - len(numbers) + 2*told; score > bestScore {
			best, bestScore = fit, score
		}
	}
	return best
}

// assign gives each field a column whose header says so, else one whose header
// says nothing at all, unless one of the others says what no field takes; fit is
// short if a field finds none. told counts the former.
func assign(h *header, fields []review.Field, columns []int) (fit []request, told int) {
	taken := map[int]bool{}
	strange := slices.ContainsFunc(columns, func(c int) bool { return adviceFor(h.columns[c].Header) != "" })
	for _, field := range fields {
		column, says := -1, false
		for _, c := range columns {
			header := h.columns[c].Header
			said := sayingsOf(header)
			fits := len(said) == 1 && said[fieldSays(field)]
			if taken[c] || (!fits && (strange || len(said) > 0)) || !sameSide(sideOf(header), fieldSide(field)) || (column >= 0 && (says || !fits)) {
				continue
			}
			column, says = c, fits
		}
		if column < 0 {
			return fit, told
		}
		taken[column] = true
		if says {
			told++
		}
		fit = append(fit, request{field: field, header: h.columns[column].Header})
	}
	return fit, told
}

// sameSide reports whether a header's arm does not speak against a field's.
func sameSide(header, field side) bool {
	return header == noSide || header == field
}

// advise says what to do about the columns that no guess may use.
func advise(h *header) []string {
	var advice []string
	for _, c := range h.columns {
		if (c.field == review.NoField || c.field == review.Variance) && c.Header != "" {
			if text := adviceFor(c.Header); text != "" {
				advice = append(advice, text)
			}
		}
	}
	return advice
}
