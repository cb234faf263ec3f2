package explain

import (
	"fmt"
	"slices"

	"steelyard/meta/choice"
	"steelyard/meta/numeric"
)

// Cell is a study's entry in a column.
type Cell struct {
	Study   string
	Where   string // the cell in the sheet, such as "Sheet1!H4"
	Text    string // not blank
	Number  float64
	Numeric bool // the text is a number: Number
}

func (c Cell) named() string { return fmt.Sprintf("%s (%s) %q", c.Study, c.Where, c.Text) }

// Covariate is a column of the sheet as a regression takes it: numbers, or
// categories of which the first is the reference.
type Covariate struct {
	Name   string
	Values []float64 // per study; nil for categories
	Levels []string  // of categories, the reference first; nil for numbers
	Index  []int     // level of each study
	Mean   float64   // of Values: where the column is centred
}

// mostlyNumbers is the share of numbers from which on a column is taken for one of
// numbers, and its other cells for slips.
const mostlyNumbers = 0.5

// ReadCovariate takes a column of numbers as numbers, and of anything else as
// categories, whose spelling may differ in case and spaces. The reference is the
// category stated, else the commonest (of equals the first in the sheet); numbers
// with a stated reference are categories too.
//
// It returns a *DesignError for a column that is constant, has as many categories
// as studies, mixes numbers with slips, or lacks the reference.
func ReadCovariate(name string, cells []Cell, reference string) (*Covariate, error) {
	c := &Covariate{Name: name}
	var texts []string
	for _, cell := range cells {
		if !cell.Numeric {
			texts = append(texts, cell.named())
		}
	}
	if reference == "" && len(texts) == 0 {
		return c, c.numbers(cells)
	}
	if numbers := len(cells) - len(texts); reference == "" && float64(numbers) > mostlyNumbers*float64(len(cells)) {
		return nil, &DesignError{name, fmt.Sprintf("a number in %d of %d cells, but not in: %s; correct these, leave the studies out with --where, or make it categories with --reference \"%s=...\"",
			numbers, len(cells), listed(texts), name)}
	}
	return c, c.categories(cells, reference)
}

func (c *Covariate) numbers(cells []Cell) error {
	var sum numeric.Sum
	constant := true
	for _, cell := range cells {
		c.Values = append(c.Values, cell.Number)
		sum.Add(cell.Number - cells[0].Number)
		constant = constant && cell.Number == cells[0].Number
	}
	if constant {
		return c.constant(cells)
	}
	c.Mean = cells[0].Number + sum.Value()/float64(len(cells))
	return nil
}

func (c *Covariate) constant(cells []Cell) error {
	if len(cells) == 0 {
		return &DesignError{c.Name, "no study has an entry: fill the column in"}
	}
	return &DesignError{c.Name, fmt.Sprintf("%q in all %d studies: it cannot explain why they differ", cells[0].Text, len(cells))}
}

func (c *Covariate) categories(cells []Cell, reference string) error {
	groups := GroupCells(cells)
	switch {
	case len(groups) < 2:
		return c.constant(cells)
	case len(groups) == len(cells):
		return &DesignError{c.Name, fmt.Sprintf("%d different texts in %d studies: such categories explain everything and show nothing; name one of fewer categories, or one of numbers", len(groups), len(cells))}
	}
	first := 0
	for i, g := range groups {
		switch {
		case reference != "" && choice.Fold(g.Name) == choice.Fold(reference):
			first = i
		case reference == "" && len(g.Rows) > len(groups[first].Rows):
			first = i
		}
	}
	if reference != "" && choice.Fold(groups[first].Name) != choice.Fold(reference) {
		var names []string
		for _, g := range groups {
			names = append(names, g.Name)
		}
		return &DesignError{c.Name, fmt.Sprintf("no study has the reference %q; its entries are: %s", reference, listed(names))}
	}
	groups[0], groups[first] = groups[first], groups[0]
	slices.SortStableFunc(groups[1:], func(a, b Group) int { return a.Rows[0] - b.Rows[0] })
	c.Index = make([]int, len(cells))
	for level, g := range groups {
		c.Levels = append(c.Levels, g.Name)
		for _, row := range g.Rows {
			c.Index[row] = level
		}
	}
	return nil
}

// Group is the studies that share an entry of a column.
type Group struct {
	Name string // as first spelt
	Rows []int  // indices of studies, ascending
}

// GroupCells gathers the studies by their entry, of which case and spaces do not
// matter: in the order of the numbers if all entries are numbers, else of the sheet.
func GroupCells(cells []Cell) []Group {
	var groups []Group
	at := map[string]int{}
	numbers := true
	for row, cell := range cells {
		key := choice.Fold(cell.Text)
		if cell.Numeric {
			key = fmt.Sprint(cell.Number)
		}
		numbers = numbers && cell.Numeric
		i, have := at[key]
		if !have {
			i = len(groups)
			at[key] = i
			groups = append(groups, Group{Name: cell.Text})
		}
		groups[i].Rows = append(groups[i].Rows, row)
	}
	if numbers {
		slices.SortStableFunc(groups, func(a, b Group) int {
			x, y := cells[a.Rows[0]].Number, cells[b.Rows[0]].Number
			switch {
			case x < y:
				return -1
			case x > y:
				return 1
			}
			return 0
		})
	}
	return groups
}
