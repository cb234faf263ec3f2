package stream

import (
	"bytes"
	"fmt"
	"strconv"
)

// Row is one row of a set. Values and Present are by Table.Numbers; the row must not
// be kept.
type Row struct {
	Line    int
	Set     []byte
	Values  []float64
	Present []bool
	Problem string // why the row cannot be read; blank if it can
}

// Rows goes through the rows of a block:
//
//	for rows := t.Rows(b); rows.Next(); { use(&rows.Row) }
type Rows struct {
	Row   Row
	table *Table
	block *Block
	rest  []byte
	line  int // of the next line
	cells [][]byte
}

// Rows returns the rows of a block of the table.
func (t *Table) Rows(b *Block) *Rows {
	r := &Rows{table: t}
	r.Row.Values, r.Row.Present = make([]float64, len(t.Numbers)), make([]bool, len(t.Numbers))
	r.Reset(b)
	return r
}

// Reset goes back to the start of another block of the same table.
func (r *Rows) Reset(b *Block) { r.block, r.rest, r.line = b, b.data, b.Line }

// Next reads the next row that is not blank; false at the end of the block.
func (r *Rows) Next() bool {
	for len(r.rest) > 0 {
		end := bytes.IndexByte(r.rest, '\n') + 1
		if end == 0 {
			end = len(r.rest)
		}
		whole := r.rest[:end]
		r.rest = r.rest[end:]
		r.Row.Line = r.line
		r.line++
		if r.block.numbered {
			r.Row.Line, _ = strconv.Atoi(string(whole[:max(0, bytes.IndexByte(whole, '\t'))]))
		}
		if line := lineText(whole, r.block.numbered); len(trim(line)) > 0 {
			r.read(line)
			return true
		}
	}
	return false
}

// read takes a line apart and reads its numbers.
func (r *Rows) read(line []byte) {
	t, row := r.table, &r.Row
	row.Problem, row.Set = "", nil
	clear(row.Present)
	var err error
	if r.cells, err = t.cells(line, r.cells); err != nil {
		row.Problem = err.Error()
		return
	}
	if t.set < len(r.cells) {
		row.Set = r.cells[t.set]
	}
	if len(row.Set) == 0 {
		row.Problem = "the row names no set"
		return
	}
	for i := range t.Numbers {
		c := &t.Numbers[i]
		if c.Index >= len(r.cells) || len(r.cells[c.Index]) == 0 {
			continue
		}
		value, problem := number(r.cells[c.Index])
		if problem != "" {
			if c.Field.Aside() {
				continue
			}
			row.Problem = fmt.Sprintf("%s: %q %s", c.Name, r.cells[c.Index], problem)
			return
		}
		row.Values[i], row.Present[i] = value, true
	}
}
