package ingest

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"steelyard/ingest/grid"
	"steelyard/meta/choice"
	"steelyard/meta/review"
)

// scanRows is how many rows with values are searched for the header.
const scanRows = 30

// column is a column of the sheet as its header is understood.
type column struct {
	review.Column
	meaning
}

// header is a row, or a pair of rows, understood as the header of a table.
type header struct {
	top, bottom int      // indices of its first and last row in Sheet.Rows
	columns     []column // index = column-1; NoField with a blank Header where nothing stands
	findings    []review.Finding
	year        int // 1-based column of a year that stands beside the date, 0 if none
	score       int // number of distinct fields recognised
	texts       int // number of columns with a header
}

// fieldSets are the sets of number columns of which a header must hold one.
var fieldSets = [][]review.Field{
	{review.EventsTreated, review.TotalTreated, review.EventsControl, review.TotalControl},
	{review.MeanTreated, review.SDTreated, review.TotalTreated, review.MeanControl, review.SDControl, review.TotalControl},
	{review.MeanTreated, review.SETreated, review.TotalTreated, review.MeanControl, review.SEControl, review.TotalControl},
	{review.Estimate, review.StandardError},
	{review.Estimate, review.LimitLow, review.LimitHigh},
	{review.Estimate, review.PValue},
	{review.AnalysisEstimate, review.StandardError},
	{review.AnalysisEstimate, review.AnalysisLow, review.AnalysisHigh},
	{review.AnalysisEstimate, review.PValue},
}

// rareSets are further sets of which a header may hold one; they are no help in
// guessing what unknown columns mean.
var rareSets = [][]review.Field{
	{review.MeanTreated, review.SDTreated, review.MeanControl, review.SDControl, review.Total},
	{review.MeanTreated, review.TotalTreated, review.MeanControl, review.TotalControl, review.PValue},
	{review.MeanTreated, review.TotalTreated, review.MeanControl, review.TotalControl, review.TestStatistic},
	{review.MeanTreated, review.MeanControl, review.StandardError},
	{review.MeanTreated, review.MeanControl, review.LimitLow, review.LimitHigh},
	{review.MeanTreated, review.MeanControl, review.SDDifference},
	{review.EventsTreated, review.PersonTimeTreated, review.EventsControl, review.PersonTimeControl},
	{review.Coefficient, review.Total},
	{review.Events, review.Total},
	{review.Events, review.PersonTime},
	{review.ObservedMinusExpected, review.Variance},
	{review.Estimate, review.TestStatistic},
	{review.AnalysisEstimate, review.TestStatistic},
	{review.Estimate, review.SDDifference},
	{review.TestStatistic, review.EventsTreated, review.EventsControl},
	{review.TestStatistic, review.Events},
	{review.Estimate, review.Events},
	{review.Estimate, review.EventsTreated, review.EventsControl},
	{review.PValue, review.Direction, review.Total},
	{review.PValue, review.Direction, review.TotalTreated, review.TotalControl},
	{review.PValue, review.Direction, review.Events},
}

// armSets returns the sets of two arms of which each gives its mean in one of
// several forms.
func armSets() [][]review.Field {
	treated := [][]review.Field{{review.MeanTreated, review.SDTreated}, {review.MeanTreated, review.SETreated},
		{review.MeanTreated, review.MeanLowTreated, review.MeanHighTreated},
		{review.MedianTreated, review.Q1Treated, review.Q3Treated}, {review.MedianTreated, review.MinTreated, review.MaxTreated}}
	control := [][]review.Field{{review.MeanControl, review.SDControl}, {review.MeanControl, review.SEControl},
		{review.MeanControl, review.MeanLowControl, review.MeanHighControl},
		{review.MedianControl, review.Q1Control, review.Q3Control}, {review.MedianControl, review.MinControl, review.MaxControl}}
	var sets [][]review.Field
	for _, a := range treated {
		for _, b := range control {
			sets = append(sets, slices.Concat(a, b, []review.Field{review.TotalTreated, review.TotalControl}))
		}
	}
	return sets
}

// usable reports whether the header names the studies and one complete set of
// numbers.
func (h *header) usable() bool {
	have := h.fields()
	if !have[review.StudyName] {
		return false
	}
	for _, set := range slices.Concat(fieldSets, rareSets, armSets()) {
		complete := true
		for _, field := range set {
			complete = complete && have[field]
		}
		if complete {
			return true
		}
	}
	return false
}

// fields returns the fields that the header has.
func (h *header) fields() map[review.Field]bool {
	have := map[review.Field]bool{}
	for _, c := range h.columns {
		if c.field != review.NoField {
			have[c.field] = true
		}
	}
	return have
}

// column returns the 1-based number of a field's column, 0 if there is none.
func (h *header) column(field review.Field) int {
	for i, c := range h.columns {
		if c.field == field {
			return i + 1
		}
	}
	return 0
}

// headerReader looks for the header of one sheet.
type headerReader struct {
	file  string
	sheet *grid.Sheet
	asked []request
}

// request is one wish of Options.Columns or of the plan.
type request struct {
	field  review.Field
	header string // as typed
}

// find returns the best header: among the usable ones that with the most fields,
// a single row before a pair and the higher before the lower. Without a usable
// one, ok is false and the header is the row that looks most like one.
func (r *headerReader) find() (best *header, ok bool) {
	limit := min(scanRows, len(r.sheet.Rows))
	for i := range limit {
		candidates := []*header{r.single(i)}
		if i+1 < limit && r.sheet.Rows[i+1].Number == r.sheet.Rows[i].Number+1 {
			candidates = append(candidates, r.pair(i))
		}
		for _, h := range candidates {
			r.settle(h)
			if best == nil || r.better(h, best) {
				best = h
			}
		}
	}
	return best, best != nil && best.usable()
}

func (r *headerReader) better(a, b *header) bool {
	if a.usable() != b.usable() {
		return a.usable()
	}
	if a.score != b.score {
		return a.score > b.score
	}
	if aSingle, bSingle := a.top == a.bottom, b.top == b.bottom; aSingle != bSingle && a.score > 0 {
		return aSingle
	}
	return !a.usable() && a.score == 0 && a.texts > b.texts && a.top == a.bottom
}

// single understands one row as the header.
func (r *headerReader) single(i int) *header {
	row := &r.sheet.Rows[i]
	h := &header{top: i, bottom: i, columns: make([]column, len(row.Cells))}
	for c := range row.Cells {
		h.columns[c] = r.newColumn(headerText(row, c+1), row.Number, c+1)
	}
	return h
}

// newColumn returns a column with what its header alone says.
func (r *headerReader) newColumn(text string, row, col int) column {
	c := column{Column: review.Column{Header: text, Place: r.place(row, col, text)}}
	if text != "" {
		c.meaning, _ = recognise(text)
	}
	return c
}

func (r *headerReader) place(row, col int, text string) review.Place {
	return review.Place{File: r.file, Sheet: r.sheet.Name, Row: row, Col: col, Text: text}
}

// headerText returns the text of a cell that may be a header; numbers and dates
// of a workbook are none.
func headerText(row *grid.Row, col int) string {
	cell := row.Cell(col)
	if cell.Kind != grid.Text {
		return ""
	}
	return tidy(cell.Text)
}

// settle applies what was asked for, resolves what several columns claim, and
// counts.
func (r *headerReader) settle(h *header) {
	r.applyRequests(h)
	r.adoptStudyID(h)
	r.adoptAnalysisLimits(h)
	r.resolve(h)
	h.score = len(h.fields())
	for _, c := range h.columns {
		if c.Header != "" {
			h.texts++
		}
	}
	for i := range h.columns {
		h.columns[i].Field = h.columns[i].field
	}
}

// applyRequests gives columns the fields that the caller asked for; a field asked
// for is taken from every other column.
func (r *headerReader) applyRequests(h *header) {
	for _, want := range r.asked {
		col := matchHeader(h, want.header)
		if col == 0 {
			continue
		}
		c := &h.columns[col-1]
		said := c.meaning
		for i := range h.columns {
			if h.columns[i].field == want.field {
				h.columns[i].meaning = meaning{}
			}
		}
		c.meaning = meaning{field: want.field}
		if aboutEffect(want.field) {
			c.measure, c.level = said.measure, said.level
		}
	}
}

func aboutEffect(f review.Field) bool { return f >= review.Estimate && f <= review.AnalysisHigh }

// byLetter begins a request that names its column by the letter, "column C".
const byLetter = "column "

// matchHeader returns the 1-based column whose header is text, as matchHeaders
// does; 0 if none.
func matchHeader(h *header, text string) int {
	if found := matchHeaders(h, text); len(found) > 0 {
		return found[0]
	}
	return 0
}

// matchHeaders returns the 1-based columns whose header is text: as typed if there
// are any, else as folded, else the one that text names by its letter.
func matchHeaders(h *header, text string) []int {
	want, _ := fold(text)
	var typed, folded []int
	for i, c := range h.columns {
		if c.Header == tidy(text) {
			typed = append(typed, i+1)
		}
		if have, _ := fold(c.Header); c.Header != "" && have == want && choice.Fold(text) != "" {
			folded = append(folded, i+1)
		}
	}
	switch {
	case len(typed) > 0:
		return typed
	case len(folded) > 0:
		return folded
	}
	for i, c := range h.columns {
		if c.Header != "" && strings.EqualFold(tidy(text), byLetter+review.ColumnLetters(i+1)) {
			return []int{i + 1}
		}
	}
	return nil
}

// adoptStudyID takes a column such as "study id" for the study's name when no
// other column names the studies.
func (r *headerReader) adoptStudyID(h *header) {
	id := h.column(review.StudyID)
	if id != 0 && h.column(review.StudyName) == 0 {
		h.columns[id-1].field = review.StudyName
	}
}

// adoptAnalysisLimits takes plain limits beside a logarithm for limits of that
// logarithm, when there is no estimate in the reader's unit they could belong to.
func (r *headerReader) adoptAnalysisLimits(h *header) {
	estimate := h.column(review.AnalysisEstimate)
	if estimate == 0 || h.column(review.Estimate) != 0 {
		return
	}
	for i := range h.columns {
		c := &h.columns[i]
		to := review.AnalysisLow
		switch c.field {
		case review.LimitHigh:
			to = review.AnalysisHigh
		case review.LimitLow:
		default:
			continue
		}
		c.field = to
		if measure := h.columns[estimate-1].measure; measure.Log() {
			h.note(c.Place, "F9", "the limits in "+quote(c.Header)+" are read as limits of "+quote(h.columns[estimate-1].Header)+
				", on the same scale; if they are limits of the ratio itself, give the ratio instead of its logarithm")
		}
	}
}

// noteLevels tells of limits whose header gives another level than the usual one.
func (h *header) noteLevels() {
	const usual = 0.95
	for _, c := range h.columns {
		if c.level != 0 && c.level != usual {
			place := c.Place
			place.Row = 0
			h.note(place, "I6", fmt.Sprintf("the limits are read as those of a %s%% interval, as the header %s says", shortest(math.Round(c.level*1e8)/1e6), quote(c.Header)))
			return
		}
	}
}

func (h *header) note(place review.Place, rule, message string) {
	h.findings = append(h.findings, review.Finding{Severity: review.Note, Rule: rule, Place: place, Message: message})
}

// quote puts a text of the sheet into a message, cut if it is long.
func quote(text string) string {
	const most = 60
	if runes := []rune(text); len(runes) > most {
		text = string(runes[:most]) + "…"
	}
	return `"` + strings.ReplaceAll(text, `"`, `'`) + `"`
}
