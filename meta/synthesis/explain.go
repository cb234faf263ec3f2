package synthesis

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"steelyard/meta"
	"steelyard/meta/choice"
	"steelyard/meta/explain"
	"steelyard/meta/review"
)

// ExplainWanted asks why the studies differ: by subgroups of a column, by a
// regression on columns, or both.
type ExplainWanted struct {
	Subgroups    string            // column; blank: no subgroups
	Shared       bool              // the subgroups share one τ²
	Terms        [][]string        // of the regression, as explain.ParseTerms gives them; nil: none
	References   map[string]string // category by folded name of its column
	At           []explain.Point   // covariates at which an effect is to be predicted; nil: none
	Permutations int               // of the regression; 0: no permutation test
	Planned      bool              // stated to have been planned before results were seen
}

// Explained says why an outcome's studies differ.
type Explained struct {
	Planned    bool
	Subgroups  *SubgroupsResult  // nil: not wanted
	Regression *RegressionResult // nil: not wanted
}

// SubgroupsResult compares the outcome's studies by a column. Rows are indices of
// Outcome.Studies.
type SubgroupsResult struct {
	Column  string // as the sheet heads it
	Omitted []Omitted
	Problem string // why there is no result; else blank
	*explain.Subgroups
}

// RegressionResult regresses the outcome's effects on columns.
type RegressionResult struct {
	Rows    []int // of the studies used, indices of Outcome.Studies
	Omitted []Omitted
	Design  *explain.Design
	Points  []explain.Point // the covariates asked for
	At      *explain.Fitted // at these; nil unless asked for
	Problem string          // why there is no result; else blank
	*explain.Regression
}

// Omitted is a study that a comparison leaves out, for a blank cell.
type Omitted struct {
	Row   int // index of Outcome.Studies
	Cells []string
}

// ColumnError reports a column that the sheet, or the regression, does not have.
type ColumnError struct {
	Text             string
	Among            string // "sheet" or "regression"
	Nearest, Columns []string
}

// Error suggests the nearest columns and lists all.
func (e *ColumnError) Error() string {
	text := fmt.Sprintf("%q is no column of this %s", e.Text, e.Among)
	if len(e.Nearest) > 0 {
		text += fmt.Sprintf("; did you mean %s?", strings.Join(e.Nearest, ", "))
	}
	return fmt.Sprintf("%s; its columns: %s", text, strings.Join(e.Columns, ", "))
}

// explain fills in the wanted comparisons. It returns a *ColumnError for a column
// that the sheet does not have and the cause if ctx ends; what the outcome's own
// cells do not allow is told in the results' Problem.
func (w *ExplainWanted) explain(ctx context.Context, o *Outcome, columns []review.Column, work meta.Work) error {
	e := &Explained{Planned: w.Planned}
	if w.Subgroups != "" {
		column, err := findColumn(columns, w.Subgroups)
		if err != nil {
			return err
		}
		e.Subgroups = o.subgroups(column, w.Shared)
	}
	if len(w.Terms) > 0 {
		var err error
		if e.Regression, err = o.regress(ctx, columns, w, work); err != nil {
			return err
		}
	}
	o.Explain = e
	return nil
}

// column is a column of the sheet as comparisons read it.
type column struct {
	name   string // as headed, or the name by which filters call it
	folded string
	place  review.Place // of the column; the zero place where it is derived
}

// findColumn returns the column that a name calls: as filters call it, or as it is
// headed. "converted" is derived, as it is for filters.
func findColumn(columns []review.Column, name string) (column, error) {
	want := choice.Fold(name)
	for _, c := range columns {
		for _, called := range c.Names() {
			if choice.Fold(called) == want {
				return column{called, want, c.Place}, nil
			}
		}
		if choice.Fold(c.Header) == want {
			return column{c.Header, choice.Fold(c.Names()[0]), c.Place}, nil
		}
	}
	if want == convertedColumn {
		return column{name: convertedColumn, folded: want}, nil
	}
	names := append(columnNames(columns), convertedColumn)
	return column{}, &ColumnError{Text: name, Among: "sheet", Nearest: choice.Nearest(name, names), Columns: names}
}

// cell returns a study's entry in a column.
func (c column) cell(s *Study) explain.Cell {
	place := s.Source.Row
	place.Col = c.place.Col
	cell := explain.Cell{Study: s.Source.Name, Where: place.String(), Text: strings.TrimSpace(s.Source.Cell(c.folded))}
	if c.folded == convertedColumn && c.place.Col == 0 {
		cell.Text = "no"
		if s.Converted() {
			cell.Text = "yes"
		}
	}
	cell.Number, cell.Numeric = columnNumber(s.Source, c.folded, cell.Text)
	if math.IsInf(cell.Number, 0) {
		cell.Numeric = false
	}
	if cell.Numeric && cell.Text == "" {
		cell.Text = fmt.Sprint(cell.Number)
	}
	return cell
}

// filledRows returns the studies that have an entry in all columns, with these, and
// the others.
func (o *Outcome) filledRows(columns []column) (rows []int, cells [][]explain.Cell, omitted []Omitted) {
	cells = make([][]explain.Cell, len(columns))
	for i := range o.Studies {
		var blank []string
		entries := make([]explain.Cell, len(columns))
		for j, c := range columns {
			if entries[j] = c.cell(&o.Studies[i]); entries[j].Text == "" {
				blank = append(blank, fmt.Sprintf("%s, %s", c.name, entries[j].Where))
			}
		}
		if len(blank) > 0 {
			omitted = append(omitted, Omitted{Row: i, Cells: blank})
			continue
		}
		rows = append(rows, i)
		for j := range columns {
			cells[j] = append(cells[j], entries[j])
		}
	}
	return rows, cells, omitted
}

// subgroups compares the groups of a column.
func (o *Outcome) subgroups(c column, shared bool) *SubgroupsResult {
	rows, cells, omitted := o.filledRows([]column{c})
	r := &SubgroupsResult{Column: c.name, Omitted: omitted}
	if len(rows) == 0 {
		r.Problem = fmt.Sprintf("no study has an entry in column %q", c.name)
		return r
	}
	groups := explain.GroupCells(cells[0])
	for i := range groups { // from the filled cells to the studies
		for j, row := range groups[i].Rows {
			groups[i].Rows[j] = rows[row]
		}
	}
	err := explain.Check(c.name, groups, len(rows))
	if err == nil {
		r.Subgroups, err = o.compareGroups(groups, shared)
	}
	if err != nil {
		r.Problem = err.Error()
	}
	return r
}

// compareGroups compares groups of studies, each with its own τ² or with a shared one.
func (o *Outcome) compareGroups(groups []explain.Group, shared bool) (*explain.Subgroups, error) {
	o.noteSplitClusters(groups)
	y, s := estimates(o.Studies)
	if !shared {
		fit := func(rows []int) (*meta.Fit, error) {
			studies := make([]Study, len(rows))
			for i, row := range rows {
				studies[i] = o.Studies[row]
			}
			return o.fit(o.Analysis.Model, studies)
		}
		if o.Analysis.Method != review.InverseVariance || o.dependent() {
			s = nil
		}
		return explain.Separate(groups, s, fit, o.Analysis.Model)
	}
	if o.dependent() {
		return nil, errors.New(o.onlyIndependent("a shared τ²"))
	}
	o.noteRegressionModel("The comparison with a shared τ²")
	// Studies without an entry take no part: the groups' rows alone are fitted.
	var part []int
	for _, g := range groups {
		part = append(part, g.Rows...)
	}
	slices.Sort(part)
	local := make([]explain.Group, len(groups))
	for i, g := range groups {
		local[i].Name = g.Name
		for _, row := range g.Rows {
			at, _ := slices.BinarySearch(part, row)
			local[i].Rows = append(local[i].Rows, at)
		}
	}
	partY, partS := chosen(y, part), chosen(s, part)
	result, err := explain.Shared(local, partY, partS, o.Analysis.Model)
	if err != nil {
		return nil, err
	}
	for i := range result.Groups {
		result.Groups[i].Rows = groups[i].Rows
	}
	return result, nil
}

// noteSplitClusters notes studies with estimates in several groups.
func (o *Outcome) noteSplitClusters(groups []explain.Group) {
	clusters := clustersOf(o.Studies)
	in := map[int]int{} // the group of each study, from 1
	for i, g := range groups {
		for _, row := range g.Rows {
			if have := in[clusters[row]]; have != 0 && have != i+1 {
				o.note(fmt.Sprintf("%s has estimates in several groups, and the test between them takes groups for independent.", o.Studies[row].Source.Name))
				return
			}
			in[clusters[row]] = i + 1
		}
	}
}

// chosen returns the elements at some indices.
func chosen(all []float64, rows []int) []float64 {
	part := make([]float64, len(rows))
	for i, row := range rows {
		part[i] = all[row]
	}
	return part
}

// noteRegressionModel notes what a regression cannot take over from the outcome's
// model.
func (o *Outcome) noteRegressionModel(what string) {
	m := o.Analysis.Model
	if o.Analysis.Method != review.InverseVariance {
		o.note(fmt.Sprintf("%s weighs the studies' own estimates by %s, not counts by %s.", what, review.InverseVariance, o.Analysis.Method))
	}
	if settled, err := explain.Resolve(m); err == nil && settled.Interval != m.Interval && len(o.Studies) > 1 {
		o.note(fmt.Sprintf("%s has no %s interval; %s stands in.", what, m.Interval, settled.Interval))
	}
	if w := o.Analysis.Weighing; !w.Own() {
		o.note(fmt.Sprintf("%s weighs evidence in the form that is matched to its interval, not in the %s one.", what, w.Form))
	}
	if m.Prediction == meta.PredictionBootstrap && m.Effects == meta.RandomEffects {
		o.note(fmt.Sprintf("%s has no bootstrap prediction; that of Student's t stands in.", what))
	}
}

// regress regresses the effects on the wanted columns.
func (o *Outcome) regress(ctx context.Context, columns []review.Column, w *ExplainWanted, work meta.Work) (*RegressionResult, error) {
	var used []column
	for _, term := range w.Terms {
		for _, name := range term {
			c, err := findColumn(columns, name)
			if err != nil {
				return nil, err
			}
			if !slices.ContainsFunc(used, func(have column) bool { return have.folded == c.folded }) {
				used = append(used, c)
			}
		}
	}
	if err := knownReferences(w.References, used); err != nil {
		return nil, err
	}
	r := &RegressionResult{}
	if o.dependent() {
		r.Problem = o.onlyIndependent("a regression")
		return r, nil
	}
	var cells [][]explain.Cell
	r.Rows, cells, r.Omitted = o.filledRows(used)
	err := r.fit(ctx, o, used, cells, w, work)
	var model *meta.ModelError
	if cause := context.Cause(ctx); cause != nil {
		return nil, cause
	}
	var point *explain.PointError
	if errors.As(err, &point) {
		return nil, err
	}
	if errors.As(err, &model) {
		return nil, fmt.Errorf("%s: %w", o.Called(), err)
	}
	if err != nil {
		r.Problem = err.Error()
		r.Regression = nil
	}
	return r, nil
}

// knownReferences refuses a reference for a column that is not regressed on.
func knownReferences(references map[string]string, used []column) error {
	var names []string
	for _, c := range used {
		names = append(names, c.name)
	}
	for name := range references {
		if !slices.ContainsFunc(used, func(c column) bool { return c.folded == name || choice.Fold(c.name) == name }) {
			return &ColumnError{Text: name, Among: "regression", Nearest: choice.Nearest(name, names), Columns: names}
		}
	}
	return nil
}

// fit reads the covariates and fits.
func (r *RegressionResult) fit(ctx context.Context, o *Outcome, used []column, cells [][]explain.Cell, w *ExplainWanted, work meta.Work) error {
	var covariates []*explain.Covariate
	for j, c := range used {
		reference := w.References[c.folded]
		if reference == "" {
			reference = w.References[choice.Fold(c.name)]
		}
		covariate, err := explain.ReadCovariate(c.name, cells[j], reference)
		if err != nil {
			return err
		}
		covariates = append(covariates, covariate)
	}
	terms := make([][]string, len(w.Terms))
	for i, term := range w.Terms { // by the names of the columns, however they were called
		for _, name := range term {
			for _, c := range used {
				if c.folded == choice.Fold(name) || choice.Fold(c.name) == choice.Fold(name) {
					name = c.name
					break
				}
			}
			terms[i] = append(terms[i], name)
		}
	}
	var err error
	if r.Design, err = explain.NewDesign(terms, covariates); err != nil {
		return err
	}
	y, s := estimates(o.Studies)
	y, s = chosen(y, r.Rows), chosen(s, r.Rows)
	if r.Regression, err = explain.Regress(o.Analysis.Model, y, s, r.Design); err != nil {
		return err
	}
	if w.At != nil {
		row, err := r.Design.Row(w.At)
		if err != nil {
			return err
		}
		at := r.Regression.At(row)
		r.Points, r.At = w.At, &at
	}
	o.noteRegressionModel("The regression")
	if w.Permutations == 0 {
		return nil
	}
	return r.Permute(ctx, y, s, r.Design, w.Permutations, o.Analysis.Model.Seed, work)
}

// Unexplained reports whether a comparison that was wanted has no result.
func (e *Explained) Unexplained() bool {
	return e != nil && (e.Subgroups != nil && e.Subgroups.Problem != "" || e.Regression != nil && e.Regression.Problem != "")
}
