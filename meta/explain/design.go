package explain

import (
	"fmt"
	"math"
	"slices"

	"steelyard/meta/choice"
)

// Design is what effects are regressed on, besides an intercept: the terms with
// their columns. Numbers are centred at their mean over the studies, so that the
// intercept is the effect at the means, with the references of all categories.
type Design struct {
	K          int
	Terms      []Term
	Covariates []*Covariate
}

// Term is a covariate or an interaction of two.
type Term struct {
	Name    string
	Columns []Column
	parts   []int // indices of Design.Covariates
}

// Column is one column of the regression, with a coefficient.
type Column struct {
	Name   string
	Values []float64 // per study
	levels []int     // of each part: the category it stands for; 0 for numbers
}

// NewDesign builds the design of terms as ParseTerms gives them, each name that of
// a covariate. It returns a *DesignError for a name that is none of them.
func NewDesign(terms [][]string, covariates []*Covariate) (*Design, error) {
	d := &Design{Covariates: covariates}
	for _, names := range terms {
		t := Term{}
		for _, name := range names {
			i := slices.IndexFunc(covariates, func(c *Covariate) bool { return choice.Fold(c.Name) == choice.Fold(name) })
			if i < 0 {
				return nil, &DesignError{"", fmt.Sprintf("no covariate is called %q", name)}
			}
			d.K = max(len(covariates[i].Values), len(covariates[i].Index))
			if t.Name != "" {
				t.Name += " × "
			}
			t.Name += covariates[i].Name
			t.parts = append(t.parts, i)
		}
		t.Columns = d.columns(t.parts)
		d.Terms = append(d.Terms, t)
	}
	if len(d.Terms) == 0 {
		return nil, &DesignError{"", "no covariate to regress on: name one"}
	}
	return d, nil
}

// columns returns the columns of a covariate or of the product of two.
func (d *Design) columns(parts []int) []Column {
	all := []Column{{}}
	for _, part := range parts {
		c := d.Covariates[part]
		levels := []int{0}
		if c.Levels != nil {
			levels = make([]int, len(c.Levels)-1)
			for i := range levels {
				levels[i] = i + 1
			}
		}
		var next []Column
		for _, column := range all {
			for _, level := range levels {
				name := c.label(level)
				if column.Name != "" {
					name = column.Name + " × " + name
				}
				next = append(next, Column{Name: name, levels: append(slices.Clone(column.levels), level)})
			}
		}
		all = next
	}
	for i := range all {
		all[i].Values = make([]float64, d.K)
		for row := range all[i].Values {
			value := 1.0
			for j, part := range parts {
				value *= d.Covariates[part].at(row, all[i].levels[j])
			}
			all[i].Values[row] = value
		}
	}
	return all
}

// label names a column of a covariate: its name, or the category against the
// reference.
func (c *Covariate) label(level int) string {
	if c.Levels == nil {
		return c.Name
	}
	return c.Name + ": " + c.Levels[level]
}

// at is what a study puts into a column: the centred number, or whether it is in
// the category.
func (c *Covariate) at(row, level int) float64 {
	switch {
	case c.Levels == nil:
		return c.Values[row] - c.Mean
	case c.Index[row] == level:
		return 1
	}
	return 0
}

// Columns returns all columns in the order of the terms.
func (d *Design) Columns() []Column {
	var all []Column
	for _, t := range d.Terms {
		all = append(all, t.Columns...)
	}
	return all
}

// names returns the names of the covariates.
func (d *Design) names() []string {
	var all []string
	for _, c := range d.Covariates {
		all = append(all, c.Name)
	}
	return all
}

// Point is a value of one covariate: a number, or a category.
type Point struct {
	Covariate string
	Number    float64 // NaN where Level is no number
	Level     string  // as written: the category
}

// PointError reports a point at which a design cannot be read.
type PointError struct{ Problem string }

func (e *PointError) Error() string { return e.Problem }

// Row returns what a setting with these covariates puts into the columns; the
// others are at their means and references. It returns a *PointError for a covariate
// or category that is not in the design, or a number that is not finite.
func (d *Design) Row(points []Point) ([]float64, error) {
	centred := make([]float64, len(d.Covariates))
	levels := make([]int, len(d.Covariates))
	for _, p := range points {
		i := slices.IndexFunc(d.Covariates, func(c *Covariate) bool { return choice.Fold(c.Name) == choice.Fold(p.Covariate) })
		if i < 0 {
			return nil, &PointError{fmt.Sprintf("%q is no covariate of this regression; it has: %s", p.Covariate, listed(d.names()))}
		}
		c := d.Covariates[i]
		if c.Levels == nil {
			if math.IsNaN(p.Number) || math.IsInf(p.Number, 0) {
				return nil, &PointError{fmt.Sprintf("%s: %q is not a number", c.Name, p.Level)}
			}
			centred[i] = p.Number - c.Mean
			continue
		}
		if levels[i] = slices.IndexFunc(c.Levels, func(l string) bool { return choice.Fold(l) == choice.Fold(p.Level) }); levels[i] < 0 {
			return nil, &PointError{fmt.Sprintf("%s: %q is none of its categories: %s", c.Name, p.Level, listed(c.Levels))}
		}
	}
	var row []float64
	for _, t := range d.Terms {
		for _, column := range t.Columns {
			value := 1.0
			for j, part := range t.parts {
				switch {
				case d.Covariates[part].Levels == nil:
					value *= centred[part]
				case levels[part] != column.levels[j]:
					value = 0
				}
			}
			row = append(row, value)
		}
	}
	return row, nil
}
