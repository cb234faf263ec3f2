package synthesis

import (
	"cmp"
	"fmt"
	"slices"
	"strconv"
	"strings"

	"steelyard/meta/choice"
	"steelyard/meta/review"
)

// Order says by what the studies of a cumulative analysis enter.
type Order struct {
	By   string // "date", "file", or the column's name
	Ties review.Ties
}

// OrderByDate and OrderByFile are what Order.By is without a column.
const (
	OrderByDate = "date"
	OrderByFile = "file"
)

// order is an Order with what enters at each step: indices of studies, and the
// date or value that put them there.
type order struct {
	Order
	groups [][]int
	at     []string
}

// accrualKey is what a study is ordered by.
type accrualKey struct {
	text    string // as shown; blank: not known
	date    review.Date
	number  float64
	numeric bool
}

// order returns the order in which the studies enter: by date, or by the column
// that the plan names, of which numbers are compared as numbers, and as texts
// otherwise. Studies of equal dates or values enter together, or in the order of
// the file if the plan says so; those without one enter last. Where no study has
// one, they enter one by one in the order of the file.
func (o *Outcome) order(columns []review.Column, plan *review.Plan) (*order, error) {
	column := plan.Value(review.SettingOrder, o.Name).Text
	ties, err := review.ParseTies(plan.Value(review.SettingTies, o.Name).Text)
	if err != nil {
		return nil, fmt.Errorf("%s: %w", review.SettingTies, err)
	}
	keys, what, err := o.accrualKeys(columns, column)
	if err != nil {
		return nil, err
	}
	result := &order{Order: Order{By: OrderByDate, Ties: ties}}
	if column != "" && what != "date" {
		result.By = column
	}
	rows := make([]int, len(keys))
	var missing []string
	for i := range keys {
		rows[i] = i
		if keys[i].text == "" {
			missing = append(missing, o.Studies[i].Source.Name)
		}
	}
	switch {
	case len(missing) == len(keys):
		o.note(fmt.Sprintf("No study has a %s: they enter in the order of the file.", what))
		result.By, result.Ties = OrderByFile, review.TiesFile
	case len(missing) == 1:
		o.note(fmt.Sprintf("One study without a %s enters last: %s.", what, missing[0]))
	case len(missing) > 1:
		o.note(fmt.Sprintf("%d studies without a %s enter last: %s.", len(missing), what, strings.Join(missing, ", ")))
	}
	compare := comparison(keys)
	slices.SortStableFunc(rows, func(a, b int) int { return compare(keys[a], keys[b]) })
	for i, row := range rows {
		if last := len(result.groups) - 1; i > 0 && result.Ties == review.TiesTogether && compare(keys[rows[i-1]], keys[row]) == 0 {
			result.groups[last] = append(result.groups[last], row)
			continue
		}
		result.groups = append(result.groups, []int{row})
		result.at = append(result.at, keys[row].text)
	}
	return result, nil
}

// accrualKeys returns the date of each study, or its value in a column, and what
// to call one.
func (o *Outcome) accrualKeys(columns []review.Column, column string) (keys []accrualKey, what string, err error) {
	folded := choice.Fold(column)
	dated := column == "" || folded == "date" || folded == "year"
	if names := columnNames(columns); !dated && !slices.ContainsFunc(names, func(have string) bool { return choice.Fold(have) == folded }) {
		return nil, "", fmt.Errorf("order: the sheet has no column %q; its columns are: %s", column, strings.Join(names, ", "))
	}
	for _, study := range o.Studies {
		if dated {
			keys = append(keys, accrualKey{date: study.Source.Date, text: study.Source.Date.String()})
			continue
		}
		key := accrualKey{text: strings.TrimSpace(study.Source.Cell(folded))}
		key.number, key.numeric = columnNumber(study.Source, folded, key.text)
		if key.numeric && key.text == "" {
			key.text = strconv.FormatFloat(key.number, 'g', -1, 64)
		}
		keys = append(keys, key)
	}
	if dated {
		return keys, "date", nil
	}
	return keys, fmt.Sprintf("value of %q", column), nil
}

// columnNames returns the names by which settings call the sheet's columns.
func columnNames(columns []review.Column) []string {
	var names []string
	for _, c := range columns {
		names = append(names, c.Names()...)
	}
	return names
}

// columnNumber returns the number of a cell: as read, or as its text says.
func columnNumber(row *review.Study, folded, text string) (float64, bool) {
	for _, n := range row.Numbers {
		if choice.Fold(n.Field.String()) == folded {
			return n.Value, true
		}
	}
	x, err := strconv.ParseFloat(strings.ReplaceAll(text, "\u2212", "-"), 64)
	return x, err == nil && x == x
}

// comparison returns how keys compare: dates by date, values as numbers if all
// are numbers, else as texts; the unknown come last.
func comparison(keys []accrualKey) func(a, b accrualKey) int {
	numeric := true
	for _, key := range keys {
		numeric = numeric && (key.numeric || key.text == "")
	}
	return func(a, b accrualKey) int {
		switch {
		case a.text == "" && b.text == "":
			return 0
		case a.text == "":
			return 1
		case b.text == "":
			return -1
		case a.date != b.date:
			return a.date.Compare(b.date)
		case numeric:
			return cmp.Compare(a.number, b.number)
		}
		return compareText(choice.Fold(a.text), choice.Fold(b.text))
	}
}

// compareText compares texts piece by piece, runs of digits as whole numbers, so
// that "trial 9" stands before "trial 10" and dates of ISO 8601 in their order.
func compareText(a, b string) int {
	for a != "" && b != "" {
		runA, runB := digits(a), digits(b)
		if runA > 0 && runB > 0 {
			x, y := strings.TrimLeft(a[:runA], "0"), strings.TrimLeft(b[:runB], "0")
			if order := cmp.Or(cmp.Compare(len(x), len(y)), cmp.Compare(x, y)); order != 0 {
				return order
			}
			a, b = a[runA:], b[runB:]
			continue
		}
		if a[0] != b[0] {
			return cmp.Compare(a[0], b[0])
		}
		a, b = a[1:], b[1:]
	}
	return cmp.Compare(len(a), len(b))
}

// digits returns the length of the run of digits that a text begins with.
func digits(text string) int {
	n := 0
	for n < len(text) && '0' <= text[n] && text[n] <= '9' {
		n++
	}
	return n
}
