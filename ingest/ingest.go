package ingest

import (
	"context"
	"errors"
	"fmt"
	"maps"
	"path/filepath"
	"slices"
	"strings"

	"steelyard/ingest/grid"
	"steelyard/meta/choice"
	"steelyard/meta/review"
)

// Options say how a file is to be understood where it does not speak for itself.
// The zero value leaves everything to the reader.
type Options struct {
	// Columns maps the name of a field, such as "events treated", to the text of
	// the header as typed in the sheet, or to "column C" by the column's letter.
	Columns map[string]string
	// Sheet names the sheet with the studies; blank lets the reader choose.
	Sheet string
}

// Open reads the file at path with its plan and its panel's judgements: the sheets
// "plan" and "judgement" of a workbook, or the files NAME.plan.csv and
// NAME.judgement.csv beside a text file. The error is a *grid.FileError, a
// *HeaderError, a *SheetError, a *ColumnError or wraps ErrNoStudies.
func Open(ctx context.Context, path string, o Options) (*review.Extraction, *review.Plan, error) {
	files, err := Load(ctx, path)
	if err != nil {
		return nil, nil, err
	}
	return files.Read(ctx, path, o)
}

// Read reads a file's bytes like Open; name serves for messages. A text file has
// no plan and no judgements then.
func Read(ctx context.Context, data []byte, name string, o Options) (*review.Extraction, *review.Plan, error) {
	book, err := grid.Read(ctx, data, name)
	if err != nil {
		return nil, nil, err
	}
	return read(ctx, book, beside{}, o)
}

// planPath returns the name of the plan beside a text file: "trials.plan.csv" for
// "trials.csv".
func planPath(path string) string {
	return strings.TrimSuffix(path, filepath.Ext(path)) + ".plan.csv"
}

// ErrNoStudies reports a table whose header has no row of a study below it.
var ErrNoStudies = errors.New("no row with a study follows the header; add the studies below it")

func read(ctx context.Context, book *grid.Book, with beside, o Options) (*review.Extraction, *review.Plan, error) {
	draft := readPlan(book, with.plan)
	asked, err := requests(o, draft)
	if err != nil {
		return nil, nil, err
	}
	sheet, h, err := chooseSheet(book, o.Sheet, asked)
	if err != nil {
		return nil, nil, err
	}
	if err := checkRequests(book.File, h, asked); err != nil {
		return nil, nil, err
	}
	x, err := readTable(ctx, book, sheet, h)
	if err != nil {
		return nil, nil, err
	}
	x.Findings = append(x.Findings, draft.findings...)
	readJudgements(x, book, with.judgement)
	return x, draft.plan, nil
}

// requests joins what the plan and the call ask of single columns; the call wins.
func requests(o Options, draft *planDraft) ([]request, error) {
	byField := map[review.Field]string{}
	for _, want := range draft.columns {
		byField[want.field] = want.header
	}
	for _, name := range slices.Sorted(maps.Keys(o.Columns)) {
		field, err := parseField(name)
		if err != nil {
			return nil, err
		}
		byField[field] = o.Columns[name]
	}
	var asked []request
	for _, field := range slices.Sorted(maps.Keys(byField)) {
		asked = append(asked, request{field: field, header: byField[field]})
	}
	return asked, nil
}

// checkRequests refuses a request for a header that the sheet does not have, or has
// more than once.
func checkRequests(file string, h *header, asked []request) error {
	for _, want := range asked {
		found := matchHeaders(h, want.header)
		if len(found) == 1 {
			continue
		}
		e := &ColumnError{File: file, Field: want.field, Header: want.header, Headers: h.headers()}
		for _, col := range found {
			e.Twins = append(e.Twins, review.ColumnLetters(col))
		}
		return e
	}
	return nil
}

// headers returns the texts of the header in order, blank ones left out.
func (h *header) headers() []string {
	var texts []string
	for _, c := range h.columns {
		if c.Header != "" {
			texts = append(texts, c.Header)
		}
	}
	return texts
}

// ParseColumn reads the value of a --column flag, "FIELD=HEADER", such as "events
// treated=Deaths, drug arm". Only the first "=" splits; everything after it is the
// header. field is the field's own name.
func ParseColumn(flag string) (field, header string, err error) {
	left, right, found := strings.Cut(flag, "=")
	header = strings.TrimSpace(right)
	if !found || strings.TrimSpace(left) == "" || header == "" {
		return "", "", fmt.Errorf("%q maps no column; write FIELD=HEADER, such as \"events treated=Deaths, drug arm\"", flag)
	}
	f, err := parseField(left)
	if err != nil {
		return "", "", err
	}
	return f.String(), header, nil
}

// parseField returns the field that text names, by its own name or a synonym.
func parseField(text string) (review.Field, error) {
	if m, ok := recognise(text); ok {
		return m.field, nil
	}
	field, err := review.ParseField(text)
	if err != nil {
		return 0, &FieldError{Text: text, Nearest: choice.Nearest(text, review.FieldNames())}
	}
	return field, nil
}
