package stream

import (
	"bufio"
	"bytes"
	"cmp"
	"container/heap"
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"slices"
	"strconv"
)

// sortBytes is how much of the table is sorted at a time, in memory.
const sortBytes = 32 << 20

// Group sorts the rest of the table by set on disk and returns a reader of the sorted
// copy: sets whose names are whole numbers first, by size, then the others by text;
// the rows of a set in the order of the file. The copy is a temporary file, of about
// the table's own size, that has no name from the start on where the system allows it;
// close removes it elsewhere.
func Group(ctx context.Context, r *Reader) (sorted *Reader, close func(), err error) {
	file, err := os.CreateTemp("", "steelyard-group-*")
	if err != nil {
		return nil, nil, fmt.Errorf("no temporary file for sorting: %w; set TMPDIR to a folder with room for a copy of the table", err)
	}
	_ = os.Remove(file.Name()) // a system that keeps names of open files has it removed below
	done := func() {
		_ = file.Close()
		_ = os.Remove(file.Name())
	}
	runs, err := sortRuns(ctx, r, file)
	if err != nil {
		done()
		return nil, nil, err
	}
	merged, err := newMerger(r.Table, file, runs)
	if err != nil {
		done()
		return nil, nil, err
	}
	return &Reader{Table: r.Table, in: merged, line: 1, numbered: true}, done, nil
}

// run is a sorted part of the temporary file.
type run struct{ from, size int64 }

// record is a line with the number it has in the file before it.
type record struct {
	set  []byte
	line []byte // with its number, a tab and its end
}

// sortRuns writes the table in sorted runs.
func sortRuns(ctx context.Context, r *Reader, file *os.File) ([]run, error) {
	w := bufio.NewWriterSize(file, 1<<20)
	var runs []run
	var records []record
	at, held := int64(0), 0
	flush := func() error {
		slices.SortStableFunc(records, func(a, b record) int { return compareSets(a.set, b.set) })
		size := int64(0)
		for _, one := range records {
			n, err := w.Write(one.line)
			size += int64(n)
			if err != nil {
				return fmt.Errorf("sorting on disk: %w; set TMPDIR to a folder with room for a copy of the table", err)
			}
		}
		if size > 0 {
			runs = append(runs, run{at, size})
		}
		at += size
		records, held = records[:0], 0
		return nil
	}
	in := bufio.NewReaderSize(io.MultiReader(bytes.NewReader(r.rest), r.in), 1<<20)
	for number := r.line; ; number++ {
		if number%4096 == 0 && ctx.Err() != nil {
			return nil, context.Cause(ctx)
		}
		line, err := in.ReadBytes('\n')
		if text := lineText(line, false); len(bytes.TrimSpace(text)) > 0 {
			numbered := append(strconv.AppendInt(make([]byte, 0, len(text)+12), int64(number), 10), '\t')
			start := len(numbered)
			numbered = append(append(numbered, text...), '\n')
			records = append(records, record{r.Table.setOf(numbered[start : len(numbered)-1]), numbered})
			held += len(numbered) + 80 // with what the slices themselves take
		}
		if err != nil && !errors.Is(err, io.EOF) {
			return nil, err
		}
		if held > sortBytes || err != nil {
			if failed := flush(); failed != nil {
				return nil, failed
			}
		}
		if err != nil {
			return runs, w.Flush()
		}
	}
}

// compareSets orders names of sets: whole numbers by size before texts.
func compareSets(a, b []byte) int {
	numberA, numberB := wholeNumber(a), wholeNumber(b)
	switch {
	case numberA && numberB:
		shortA, shortB := bytes.TrimLeft(a, "0"), bytes.TrimLeft(b, "0")
		return cmp.Or(cmp.Compare(len(shortA), len(shortB)), bytes.Compare(shortA, shortB), cmp.Compare(len(a), len(b)))
	case numberA:
		return -1
	case numberB:
		return 1
	}
	return bytes.Compare(a, b)
}

func wholeNumber(text []byte) bool {
	for _, c := range text {
		if c < '0' || c > '9' {
			return false
		}
	}
	return len(text) > 0
}

// merger merges sorted runs into one stream. Equal sets come in the order of the runs,
// which is that of the file.
type merger struct {
	table *Table
	heads []*head
	rest  []byte // of the line being handed out
}

// head is a run with its foremost line.
type head struct {
	index int
	in    *bufio.Reader
	record
}

func newMerger(t *Table, file *os.File, runs []run) (*merger, error) {
	m := &merger{table: t}
	for i, part := range runs {
		room := max(4096, min(256<<10, (32<<20)/len(runs)))
		h := &head{index: i, in: bufio.NewReaderSize(io.NewSectionReader(file, part.from, part.size), room)}
		more, err := m.advance(h)
		if err != nil {
			return nil, err
		}
		if more {
			m.heads = append(m.heads, h)
		}
	}
	heap.Init(m)
	return m, nil
}

// advance moves a run to its next line; false at its end.
func (m *merger) advance(h *head) (bool, error) {
	line, err := h.in.ReadBytes('\n')
	if errors.Is(err, io.EOF) {
		return false, nil
	}
	h.line = line
	h.set = m.table.setOf(lineText(line, true))
	return err == nil, err
}

func (m *merger) Len() int { return len(m.heads) }
func (m *merger) Less(i, j int) bool {
	a, b := m.heads[i], m.heads[j]
	if order := compareSets(a.set, b.set); order != 0 {
		return order < 0
	}
	return a.index < b.index
}
func (m *merger) Swap(i, j int) { m.heads[i], m.heads[j] = m.heads[j], m.heads[i] }
func (m *merger) Push(x any)    { m.heads = append(m.heads, x.(*head)) }
func (m *merger) Pop() any {
	last := m.heads[len(m.heads)-1]
	m.heads = m.heads[:len(m.heads)-1]
	return last
}

// Read hands out the merged lines.
func (m *merger) Read(p []byte) (int, error) {
	n := 0
	for n < len(p) {
		if len(m.rest) > 0 {
			moved := copy(p[n:], m.rest)
			m.rest = m.rest[moved:]
			n += moved
			continue
		}
		if len(m.heads) == 0 {
			return n, io.EOF
		}
		h := m.heads[0]
		m.rest = h.line
		more, err := m.advance(h)
		if err != nil {
			return n, err
		}
		if more {
			heap.Fix(m, 0)
		} else {
			heap.Pop(m)
		}
	}
	return n, nil
}
