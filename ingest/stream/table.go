package stream

import (
	"bytes"
	"encoding/csv"
	"fmt"
	"slices"
	"strings"

	"steelyard/ingest"
	"steelyard/meta/choice"
	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// Options say how a table is to be understood.
type Options struct {
	File    string            // for messages
	Set     string            // header of the column that names the set; blank means "set"
	Columns map[string]string // as ingest.Options.Columns
}

// Table is a long table as its header says.
type Table struct {
	File      string
	Numbers   []NumberColumn // in the order of the header
	Measure   effect.Measure // that the header of an estimate names
	Delimiter byte
	set       int // index of the set's column
	width     int // columns up to the last that is read
}

// NumberColumn is a column of numbers. A Level that its header states is 0 where it
// states none.
type NumberColumn struct {
	Index int // of the column
	Field review.Field
	Level float64
	Name  string // its header
}

// Error says that a table cannot be read, where, and what to do.
type Error struct {
	File    string
	Line    int // 0 for the whole file
	Problem string
	Remedy  string
}

func (e *Error) Error() string {
	where := e.File
	if e.Line > 0 {
		where = fmt.Sprintf("%s, line %d", where, e.Line)
	}
	return where + ": " + e.Problem + "; " + e.Remedy
}

// changers are the columns of texts that change what the numbers of a row mean; they
// are refused, as nothing here reads them.
var changers = []review.Field{review.OutcomeField, review.MeasureField, review.Design, review.Cluster, review.Adjusted,
	review.ResultType, review.Accept, review.Direction}

// newTable understands the header.
func newTable(header string, line int, o Options) (*Table, error) {
	t := &Table{File: o.File, Delimiter: delimiter(header), set: -1}
	texts, err := t.split(header)
	if err != nil {
		return nil, &Error{File: o.File, Line: line, Problem: "the header cannot be read: " + err.Error(), Remedy: "write one line of column names"}
	}
	if err := t.findSet(texts, line, o.Set); err != nil {
		return nil, err
	}
	others := slices.Clone(texts)
	others[t.set] = ""
	headings, err := ingest.Headings(o.File, line, others, o.Columns)
	if err != nil {
		return nil, err
	}
	for i, h := range headings {
		switch {
		case slices.Contains(changers, h.Field):
			return nil, &Error{File: o.File, Line: line, Problem: fmt.Sprintf("the column %q changes what the numbers of a row mean, and only numbers are read here", h.Header),
				Remedy: "split the file by it, or take the column out; pool reads such sheets"}
		case h.Field.Numeric():
			t.Numbers = append(t.Numbers, NumberColumn{Index: i, Field: h.Field, Level: h.Level, Name: h.Header})
			t.width = max(t.width, i+1)
		}
		if h.Measure != effect.Unspecified && (h.Field == review.Estimate || h.Field == review.AnalysisEstimate) {
			t.Measure = h.Measure
		}
	}
	t.width = max(t.width, t.set+1)
	if len(t.Numbers) == 0 {
		return nil, &Error{File: o.File, Line: line, Problem: fmt.Sprintf("no column of numbers was understood among %s", strings.Join(texts, ", ")),
			Remedy: `name them, such as --column "estimate=beta" --column "se=sigma"`}
	}
	return t, nil
}

// findSet finds the column that names the set.
func (t *Table) findSet(texts []string, line int, wanted string) error {
	remedy := "put the name of its set into every row, under the header \"set\", or name the column with --set"
	if wanted == "" {
		wanted = "set"
	} else {
		remedy = "name one of them with --set"
	}
	for i, text := range texts {
		if choice.Fold(text) != choice.Fold(wanted) {
			continue
		}
		if t.set >= 0 {
			return &Error{File: t.File, Line: line, Problem: fmt.Sprintf("two columns are headed %q", wanted), Remedy: "rename one of them"}
		}
		t.set = i
	}
	if t.set < 0 {
		return &Error{File: t.File, Line: line, Problem: fmt.Sprintf("no column is headed %q; the headers are: %s", wanted, strings.Join(texts, ", ")), Remedy: remedy}
	}
	return nil
}

// delimiter returns the one that parts a header most often.
func delimiter(header string) byte {
	best, most := byte(','), 0
	for _, c := range []byte{',', '\t', ';', '|'} {
		if n := strings.Count(header, string(c)); n > most {
			best, most = c, n
		}
	}
	return best
}

// split takes a line with quotes apart.
func (t *Table) split(line string) ([]string, error) {
	r := csv.NewReader(strings.NewReader(line))
	r.Comma = rune(t.Delimiter)
	r.FieldsPerRecord = -1
	fields, err := r.Read()
	if err != nil {
		return nil, fmt.Errorf("its quotes do not close on the line")
	}
	for i := range fields {
		fields[i] = strings.TrimSpace(fields[i])
	}
	return fields, nil
}

// cells takes a line apart into into, as far as the last column that is read; cells
// that are missing are left out.
func (t *Table) cells(line []byte, into [][]byte) ([][]byte, error) {
	into = into[:0]
	if bytes.IndexByte(line, '"') >= 0 {
		fields, err := t.split(string(line))
		if err != nil {
			return nil, err
		}
		for _, field := range fields {
			into = append(into, []byte(field))
		}
		return into, nil
	}
	for len(into) < t.width {
		end := bytes.IndexByte(line, t.Delimiter)
		if end < 0 {
			return append(into, trim(line)), nil
		}
		into = append(into, trim(line[:end]))
		line = line[end+1:]
	}
	return into, nil
}

// trim takes blanks off both ends.
func trim(cell []byte) []byte {
	if n := len(cell); n > 0 && cell[0] > ' ' && cell[n-1] > ' ' && cell[0] < 0x80 && cell[n-1] < 0x80 {
		return cell
	}
	return bytes.TrimSpace(cell)
}

// setOf returns the name of a line's set.
func (t *Table) setOf(line []byte) []byte {
	if bytes.IndexByte(line, '"') >= 0 {
		fields, err := t.split(string(line))
		if err != nil || t.set >= len(fields) {
			return nil
		}
		return []byte(fields[t.set])
	}
	for range t.set {
		end := bytes.IndexByte(line, t.Delimiter)
		if end < 0 {
			return nil
		}
		line = line[end+1:]
	}
	if end := bytes.IndexByte(line, t.Delimiter); end >= 0 {
		line = line[:end]
	}
	return trim(line)
}
