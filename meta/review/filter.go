package review

import (
	"fmt"
	"slices"
	"strconv"
	"strings"
	"unicode"

	"steelyard/meta/choice"
)

// Filter chooses rows by the text of their columns, as in "risk of bias is not
// high and year >= 2010".
type Filter struct {
	text string
	any  [][]condition // conditions joined by "and" within, by "or" between
}

type condition struct {
	text, column, operator, value string // text as written
}

// filterOperators, longest first where one begins with another.
var filterOperators = []string{" is not ", " is ", "!=", "<=", ">=", "=", "<", ">", " contains "}

// ParseFilter reads a filter: conditions COLUMN OPERATOR VALUE joined by "and"
// and "or" ("and" binds closer). Operators are is, is not, =, !=, <, <=, >, >=
// and contains; a name or value may stand in double quotes. "is blank" and "is not
// blank" ask whether a cell is filled. There are no parentheses.
func ParseFilter(text string) (*Filter, error) {
	f := &Filter{text: strings.TrimSpace(text)}
	for _, alternative := range splitWord(" "+f.text+" ", "or") {
		var all []condition
		for _, part := range splitWord(" "+alternative+" ", "and") {
			c, err := parseCondition(part)
			if err != nil {
				return nil, err
			}
			all = append(all, c)
		}
		f.any = append(f.any, all)
	}
	return f, nil
}

// String returns the filter as written.
func (f *Filter) String() string { return f.text }

// And returns the filter that keeps what both keep; a nil filter keeps every row.
func (f *Filter) And(g *Filter) *Filter {
	switch {
	case f == nil:
		return g
	case g == nil:
		return f
	}
	both := &Filter{}
	var texts []string
	for _, a := range f.any {
		for _, b := range g.any {
			all := slices.Concat(a, b)
			both.any = append(both.any, all)
			texts = append(texts, conjunction(all))
		}
	}
	both.text = strings.Join(texts, " or ")
	return both
}

// conjunction writes conditions as a filter has them.
func conjunction(all []condition) string {
	texts := make([]string, len(all))
	for i, c := range all {
		texts[i] = c.text
	}
	return strings.Join(texts, " and ")
}

// Columns returns the folded names of the columns the filter looks at.
func (f *Filter) Columns() []string {
	var names []string
	for _, all := range f.any {
		for _, c := range all {
			names = append(names, c.column)
		}
	}
	return names
}

// Match reports whether the filter keeps a row. cell returns the text of a
// column by its folded name, blank when the row has none.
func (f *Filter) Match(cell func(column string) string) bool {
	for _, all := range f.any {
		holds := true
		for _, c := range all {
			holds = holds && c.holds(cell(c.column))
		}
		if holds {
			return true
		}
	}
	return false
}

func parseCondition(text string) (condition, error) {
	if parenthesised(text) {
		return condition{}, fmt.Errorf("%q: a filter has no parentheses; \"and\" binds closer than \"or\", so write \"a and c or b and c\" for \"(a or b) and c\", and put a name or value that holds parentheses into double quotes", strings.TrimSpace(text))
	}
	padded := " " + text + " "
	at, operator := -1, ""
	for _, op := range filterOperators {
		if i := indexOutsideQuotes(padded, op); i >= 0 && (at < 0 || i < at) {
			at, operator = i, op
		}
	}
	if at < 0 {
		return condition{}, fmt.Errorf("%q is no condition; write COLUMN OPERATOR VALUE, such as \"risk of bias is not high\" or \"year >= 2010\"", strings.TrimSpace(text))
	}
	c := condition{
		text:     strings.TrimSpace(text),
		column:   choice.Fold(unquote(padded[:at])),
		operator: strings.TrimSpace(operator),
		value:    unquote(padded[at+len(operator):]),
	}
	if isBlank := strings.EqualFold(strings.TrimSpace(padded[at+len(operator):]), "blank"); isBlank && (c.operator == "is" || c.operator == "is not") {
		c.value = ""
	}
	if !strings.Contains(padded, `"`) && strings.ContainsAny(c.value, "<>=!") {
		return condition{}, fmt.Errorf("%q has two operators in a row; the operators are is, is not, =, !=, <, <=, >, >= and contains; quote a value that holds such signs", strings.TrimSpace(text))
	}
	if c.column == "" || (c.value == "" && c.operator != "is" && c.operator != "is not") {
		return condition{}, fmt.Errorf("%q lacks a column or a value; write COLUMN OPERATOR VALUE", strings.TrimSpace(text))
	}
	return c, nil
}

// parenthesised reports whether a condition begins with a parenthesis, or has one
// outside quotes that is not closed within it, so that it groups conditions.
func parenthesised(text string) bool {
	depth, quoted := 0, false
	for _, r := range text {
		switch {
		case r == '"':
			quoted = !quoted
		case quoted:
		case r == '(':
			depth++
		case r == ')':
			depth--
		}
		if depth < 0 {
			return true
		}
	}
	return depth > 0 || strings.HasPrefix(strings.TrimSpace(text), "(")
}

// Unmatched returns the conditions, as written, whose value no row has: a slip of
// spelling there keeps or drops every row. For an order, such as year >= 2010, it
// is a value that no row's cell can be compared with. cell returns the text of a
// column of one row, by the column's folded name.
func (f *Filter) Unmatched(rows int, cell func(row int, column string) string) []string {
	var unmatched []string
	for _, all := range f.any {
		for _, c := range all {
			found := c.value == ""
			for row := 0; row < rows && !found; row++ {
				found = c.meets(strings.TrimSpace(cell(row, c.column)))
			}
			if !found {
				unmatched = append(unmatched, c.text)
			}
		}
	}
	return unmatched
}

// meets reports whether a cell has the condition's value, or can be compared with
// it where the operator is one of order.
func (c condition) meets(cell string) bool {
	switch c.operator {
	case "is", "=", "is not", "!=":
		return equalCell(cell, c.value)
	case "contains":
		return c.holds(cell)
	}
	_, known := compareCell(cell, c.value)
	return known
}

func unquote(text string) string { return strings.Trim(strings.TrimSpace(text), `"`) }

func (c condition) holds(cell string) bool {
	cell = strings.TrimSpace(cell)
	switch c.operator {
	case "is", "=":
		return equalCell(cell, c.value)
	case "is not", "!=":
		return !equalCell(cell, c.value)
	case "contains":
		return strings.Contains(strings.ToLower(cell), strings.ToLower(c.value))
	}
	order, known := compareCell(cell, c.value)
	if !known {
		return false
	}
	switch c.operator {
	case "<":
		return order < 0
	case "<=":
		return order <= 0
	case ">":
		return order > 0
	}
	return order >= 0
}

// equalCell compares as numbers where both are, else as folded text.
func equalCell(cell, value string) bool {
	if order, numbers := compareCell(cell, value); numbers {
		return order == 0
	}
	return choice.Fold(cell) == choice.Fold(value)
}

// compareCell orders two numbers, or two ISO dates; known is false for others.
func compareCell(cell, value string) (order int, known bool) {
	a, errA := strconv.ParseFloat(cell, 64)
	b, errB := strconv.ParseFloat(value, 64)
	switch {
	case errA == nil && errB == nil && a < b:
		return -1, true
	case errA == nil && errB == nil && a > b:
		return 1, true
	case errA == nil && errB == nil:
		return 0, a == b
	case startsWithYear(cell) && startsWithYear(value):
		return strings.Compare(cell, value), true
	}
	return 0, false
}

func startsWithYear(s string) bool {
	if len(s) < 4 {
		return false
	}
	for _, r := range s[:4] {
		if !unicode.IsDigit(r) {
			return false
		}
	}
	return len(s) == 4 || s[4] == '-'
}

// splitWord splits text at a word that stands between blanks outside quotes.
func splitWord(text, word string) []string {
	var parts []string
	for {
		i := indexOutsideQuotes(text, " "+word+" ")
		if i < 0 {
			return append(parts, text)
		}
		parts = append(parts, text[:i])
		text = text[i+len(word)+2:]
	}
}

// indexOutsideQuotes finds part, in any letter case, outside double quotes.
func indexOutsideQuotes(text, part string) int {
	quoted := false
	for i := 0; i+len(part) <= len(text); i++ {
		if text[i] == '"' {
			quoted = !quoted
		}
		if !quoted && strings.EqualFold(text[i:i+len(part)], part) {
			return i
		}
	}
	return -1
}
