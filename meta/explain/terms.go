package explain

import (
	"fmt"
	"slices"
	"strings"

	"steelyard/meta/choice"
)

// ParseTerms reads what effects are regressed on: columns separated by commas, of
// which a*b stands for both and their interaction. A name that holds a comma or a
// star stands in double quotes. Each term is the names of its columns; those of
// interactions come last.
func ParseTerms(text string) ([][]string, error) {
	parts, err := splitOutsideQuotes(text, ',')
	if err != nil {
		return nil, err
	}
	var single, double [][]string
	for _, part := range parts {
		names, err := splitOutsideQuotes(part, '*')
		if err != nil {
			return nil, err
		}
		for i, name := range names {
			if names[i] = strings.TrimSpace(strings.Trim(strings.TrimSpace(name), `"`)); names[i] == "" {
				return nil, &DesignError{"", fmt.Sprintf("%q: the name of a column is missing; write names separated by commas, such as \"latitude, year\", and a*b for an interaction", text)}
			}
		}
		if len(names) > 2 {
			return nil, &DesignError{"", fmt.Sprintf("%q multiplies %d columns: an interaction is of two", strings.TrimSpace(part), len(names))}
		}
		if len(names) == 2 && choice.Fold(names[0]) == choice.Fold(names[1]) {
			return nil, &DesignError{"", fmt.Sprintf("%q multiplies a column with itself: put a column of its squares into the sheet", strings.TrimSpace(part))}
		}
		if len(names) == 2 {
			double = appendTerm(double, names)
		}
		for _, name := range names {
			single = appendTerm(single, []string{name})
		}
	}
	return append(single, double...), nil
}

// appendTerm adds a term unless it is there.
func appendTerm(terms [][]string, term []string) [][]string {
	key := func(names []string) string {
		folded := make([]string, len(names))
		for i, name := range names {
			folded[i] = choice.Fold(name)
		}
		slices.Sort(folded)
		return strings.Join(folded, "*")
	}
	for _, have := range terms {
		if key(have) == key(term) {
			return terms
		}
	}
	return append(terms, term)
}

// splitOutsideQuotes splits text at a sign outside double quotes.
func splitOutsideQuotes(text string, sign rune) ([]string, error) {
	var parts []string
	quoted, from := false, 0
	for i, r := range text {
		switch {
		case r == '"':
			quoted = !quoted
		case r == sign && !quoted:
			parts, from = append(parts, text[from:i]), i+1
		}
	}
	if quoted {
		return nil, &DesignError{"", fmt.Sprintf("%q: a double quote is not closed", text)}
	}
	return append(parts, text[from:]), nil
}
