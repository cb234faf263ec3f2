package ingest

import (
	"fmt"

	"steelyard/ingest/grid"
	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// Heading is a column of a table as its header says.
type Heading struct {
	review.Column
	Measure effect.Measure // of an estimate, where the header names it
	Level   float64        // of limits, where the header states it
}

// Headings understands one row of texts as the header of a table, by the words that
// Open knows. line is where it stands in file; columns are those of Options. A
// column asked for must be there; whether the fields suffice is for the caller to
// say.
func Headings(file string, line int, texts []string, columns map[string]string) ([]Heading, error) {
	asked, err := requests(Options{Columns: columns}, &planDraft{})
	if err != nil {
		return nil, err
	}
	row := grid.Row{Number: line, Line: line}
	for _, text := range texts {
		kind := grid.Text
		if tidy(text) == "" {
			kind = grid.Blank
		}
		row.Cells = append(row.Cells, grid.Cell{Text: text, Kind: kind})
	}
	r := &headerReader{file: file, sheet: &grid.Sheet{Rows: []grid.Row{row}}, asked: asked}
	h := r.single(0)
	r.settle(h)
	if err := checkRequests(file, h, asked); err != nil {
		return nil, err
	}
	for _, f := range h.findings {
		if f.Severity == review.Error {
			return nil, fmt.Errorf("%s, line %d: %s", file, line, f.Message)
		}
	}
	list := make([]Heading, len(h.columns))
	for i, c := range h.columns {
		list[i] = Heading{Column: c.Column, Measure: c.measure, Level: c.level}
	}
	return list, nil
}
