package ingest

import (
	"context"
	"fmt"

	"steelyard/ingest/grid"
	"steelyard/meta/choice"
	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// readRows reads every row into a study.
func (t *tableReader) readRows(ctx context.Context) error {
	outcomes := map[string]string{}
	outcomeUsed := t.columnUsed(t.role.outcome)
	titled := false // the row above holds a single text
	for i := range t.rows {
		if i%4096 == 4095 && ctx.Err() != nil {
			return grid.Interrupted(ctx, t.book.File)
		}
		row := &t.rows[i]
		if t.looksLikeHeader(row) {
			if t.repeatsHeader(row) {
				gap := i > 0 && row.Number > t.rows[i-1].Number+1
				t.reportRepeat(row, !outcomeUsed && (gap || titled))
				continue
			}
			t.refuseSecondTable(i)
			return nil
		}
		r := rowReader{t: t, row: row, firstFinding: len(t.x.Findings)}
		r.read()
		if outcomeUsed {
			r.readOutcome(outcomes)
		}
		r.finish()
		t.x.Studies = append(t.x.Studies, r.study)
		if len(t.x.Findings) > maxFindings {
			return t.tooManyFindings()
		}
		titled = t.loneText(row) != ""
		row.Cells = nil // read: the room of its cells is needed for the studies
	}
	return nil
}

// maxFindings is the number of findings beyond which a sheet is not read on: they
// would fill the memory, and nobody could go through them.
const maxFindings = 100_000

func (t *tableReader) tooManyFindings() error {
	return &grid.FileError{File: t.book.File, Sheet: t.sheet.Name, Problem: fmt.Sprintf("has more than %d cells or rows that need looking at, the limit", maxFindings),
		Remedy: "check that each column holds what its header says, with one decimal mark throughout, and that this is the right sheet"}
}

// columnUsed reports whether a column has a value below the header.
func (t *tableReader) columnUsed(col int) bool {
	for i := range t.rows {
		if col > 0 && t.rows[i].Cell(col).Kind != grid.Blank {
			return true
		}
	}
	return false
}

// rowReader reads one row.
type rowReader struct {
	t            *tableReader
	row          *grid.Row
	study        review.Study
	values       rowValues
	firstFinding int
	unreadable   bool // a number could not be read
}

// cell returns the cell of a 1-based column; cells that were merged downwards have
// the text of the topmost.
func (r *rowReader) cell(col int) grid.Cell {
	if col == 0 {
		return grid.Cell{}
	}
	cell := r.row.Cell(col)
	if cell.Kind == grid.Blank && len(r.t.merged.above) > 0 {
		return r.t.merged.above[cellKey{r.row.Number, col}]
	}
	return cell
}

// place returns the place of a cell of the row.
func (r *rowReader) place(col int, text string) review.Place {
	return review.Place{File: r.t.book.File, Sheet: r.t.sheet.Name, Row: r.row.Number, Col: col, Text: text}
}

// find records a finding about the row.
func (r *rowReader) find(severity review.Severity, rule string, col int, message string) {
	text := ""
	if col > 0 {
		text = r.cell(col).Text
	}
	r.t.find(severity, rule, r.place(col, text), r.study.Name, message)
}

// read reads identity, numbers and context.
func (r *rowReader) read() {
	r.study.Row = r.place(0, "")
	r.study.Name = tidy(r.text(r.t.role.name))
	r.study.ID = tidy(r.text(r.t.role.id))
	if r.t.role.date > 0 {
		r.readDate()
	}
	if r.study.Name == "" {
		r.study.Name = fmt.Sprintf("row %d", r.row.Number)
		r.find(review.Error, "F9", r.t.role.name, "the row names no study; write its name, or clear the row")
	}
	r.readNumbers()
	r.readContext()
	r.readCellNotes()
	r.readMeasure()
	r.readBetter()
}

// text returns the text of an identity or context cell. An error value or a
// formula that was never calculated is no text.
func (r *rowReader) text(col int) string {
	cell := r.cell(col)
	switch cell.Kind {
	case grid.ErrorValue:
		r.find(review.Error, "F9", col, "the cell holds the error value "+cell.Text+" where a text belongs; mend the formula or type the text")
		return ""
	case grid.Uncalculated:
		r.find(review.Error, "F9", col, uncalculated)
		return ""
	}
	return cell.Text
}

const uncalculated = "the cell holds a formula whose value was never calculated, so there is nothing to read; open the workbook in a spreadsheet program and save it"

// readOutcome reads the outcome. Outcomes whose names differ in case and spacing
// alone are the same; the first spelling is kept.
func (r *rowReader) readOutcome(seen map[string]string) {
	name := tidy(r.text(r.t.role.outcome))
	if name == "" {
		r.find(review.Error, "F9", r.t.role.outcome, "the row names no outcome though the sheet has a column for it; write which outcome its numbers are of")
		return
	}
	if known, ok := seen[name]; ok {
		r.study.Outcome = known
		return
	}
	key := choice.Fold(name)
	if known, ok := seen["\x00"+key]; ok {
		r.find(review.Note, "F9", r.t.role.outcome, quote(name)+" is taken for the same outcome as "+quote(known)+"; spell an outcome the same way throughout")
		seen[name] = known
		r.study.Outcome = known
		return
	}
	seen[name], seen["\x00"+key] = name, name
	r.study.Outcome = name
}

// readContext keeps every other filled cell as a remark.
func (r *rowReader) readContext() {
	t := r.t
	t.remarks = room(t.remarks, len(t.context))
	start := len(t.remarks)
	for _, i := range t.context {
		text := tidy(r.text(i + 1))
		if text == "" {
			continue
		}
		r.warnUnsettled(i+1, text)
		c := &t.header.columns[i]
		name := c.Header
		if c.field != review.NoField {
			name = c.field.String()
		}
		t.remarks = append(t.remarks, review.Remark{Header: name, Text: text, Col: i + 1})
	}
	if end := len(t.remarks); end > start {
		r.study.Remarks = t.remarks[start:end:end]
	}
}

// readMeasure takes the measure of the row's cell, else of the header of an
// estimate the row has. A measure said to be logged turns the estimate and its
// limits into ones on the analysis scale.
func (r *rowReader) readMeasure() {
	fromHeader := r.headerMeasure()
	r.study.Measure = fromHeader
	text := tidy(r.text(r.t.role.measure))
	if text == "" {
		return
	}
	measure, logged, err := parseMeasure(text)
	if err != nil {
		r.find(review.Error, "F9", r.t.role.measure, err.Error())
		return
	}
	if fromHeader != effect.Unspecified && measure != effect.Unspecified && measure != fromHeader {
		r.find(review.Error, "I20", r.t.role.measure, fmt.Sprintf("the row says %s, but the header over its estimate says %s; make them agree, or head the column \"estimate\"", measure, fromHeader))
	}
	r.study.Measure = measure
	if logged {
		r.toAnalysisScale()
	}
}

// headerMeasure returns the measure that the header of the row's estimate names.
func (r *rowReader) headerMeasure() effect.Measure {
	for _, field := range []review.Field{review.Estimate, review.AnalysisEstimate} {
		if n := r.values.at[field]; n != nil {
			return r.t.header.columns[n.Place.Col-1].measure
		}
	}
	return effect.Unspecified
}

// toAnalysisScale marks the row's estimate and limits as logarithms.
func (r *rowReader) toAnalysisScale() {
	for from, to := range map[review.Field]review.Field{
		review.Estimate: review.AnalysisEstimate, review.LimitLow: review.AnalysisLow, review.LimitHigh: review.AnalysisHigh,
	} {
		if n := r.values.at[from]; n != nil && r.values.at[to] == nil {
			n.Field = to
			r.values.at[from], r.values.at[to] = nil, n
		}
	}
}

// parseMeasure reads a measure's name or abbreviation, and whether it is logged.
func parseMeasure(text string) (measure effect.Measure, logged bool, err error) {
	phrase, _ := fold(text)
	if m, ok := vocabulary().phrases[phrase]; ok && m.measure != effect.Unspecified {
		return m.measure, m.field == review.AnalysisEstimate, nil
	}
	measure, err = effect.ParseMeasure(text)
	return measure, false, err
}

// readBetter reads which direction is wanted.
func (r *rowReader) readBetter() {
	text := tidy(r.text(r.t.role.better))
	if text == "" {
		return
	}
	better, err := parseBetter(text)
	if err != nil {
		r.find(review.Error, "F9", r.t.role.better, err.Error())
		return
	}
	r.study.Better = better
}

// parseBetter reads "lower", "higher", "low", "lower is better" and the like.
func parseBetter(text string) (review.Better, error) {
	phrase, _ := fold(text)
	switch phrase {
	case "low", "lower", "lower is better", "lower better", "less":
		return review.BetterLower, nil
	case "high", "higher", "higher is better", "higher better", "more":
		return review.BetterHigher, nil
	}
	return review.ParseBetter(text)
}

// finish checks the row's numbers and applies what the reviewer accepts.
func (r *rowReader) finish() {
	r.checkNumbers()
	r.checkRow()
	r.accept()
}
