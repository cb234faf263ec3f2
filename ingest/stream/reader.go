package stream

import (
	"bytes"
	"io"
	"unicode/utf8"
)

// blockBytes is how much is read at a time; a set that is longer makes its block
// longer.
const blockBytes = 1 << 20

// mostSetBytes bounds the text of one set.
const mostSetBytes = 1 << 30

// Block is a piece of the table that holds whole sets.
type Block struct {
	Line     int // of its first row in the file
	End      int64
	data     []byte
	numbered bool // every line is preceded by its number in the file and a tab
}

// Reader cuts a table into blocks. It must not be used by two goroutines at once.
type Reader struct {
	Table    *Table
	in       io.Reader
	rest     []byte // read but not yet handed out
	line     int    // of the first line of rest
	done     int64  // bytes handed out
	ended    bool
	numbered bool
}

// NewReader reads the header of a table. It returns an *Error, or one of
// ingest.Headings.
func NewReader(in io.Reader, o Options) (*Reader, error) {
	r := &Reader{in: in, line: 1}
	header, err := r.header(o.File)
	if err != nil {
		return nil, err
	}
	r.Table, err = newTable(string(header), r.line, o)
	r.line++
	return r, err
}

// header takes the first line with text off the input.
func (r *Reader) header(file string) ([]byte, error) {
	for {
		end := bytes.IndexByte(r.rest, '\n')
		if end < 0 && !r.ended {
			if len(r.rest) > blockBytes {
				return nil, &Error{File: file, Line: r.line, Problem: "no line ends within a million characters", Remedy: "save the file as CSV with one row on each line"}
			}
			if err := r.more(); err != nil {
				return nil, err
			}
			continue
		}
		if end < 0 {
			end = len(r.rest)
		}
		line := bytes.TrimSuffix(r.rest[:end], []byte{'\r'})
		if r.done == 0 {
			line = bytes.TrimPrefix(line, []byte("\xef\xbb\xbf"))
		}
		r.take(min(end+1, len(r.rest)))
		switch {
		case bytes.IndexByte(line, 0) >= 0 || !utf8.Valid(line):
			return nil, &Error{File: file, Line: r.line, Problem: "the header is not text in UTF-8", Remedy: "save the file as CSV in UTF-8"}
		case bytes.IndexByte(line, '\r') >= 0:
			return nil, &Error{File: file, Line: r.line, Problem: "lines end with a carriage return alone", Remedy: "save the file as CSV with the usual line ends"}
		case len(bytes.TrimSpace(line)) > 0 && !bytes.HasPrefix(line, []byte("sep=")):
			return line, nil
		case r.ended && len(r.rest) == 0:
			return nil, &Error{File: file, Problem: "the file is empty", Remedy: "give a table with one row for each study and a column that names its set"}
		}
		r.line++
	}
}

// take moves n bytes of rest out of it.
func (r *Reader) take(n int) {
	r.rest = r.rest[n:]
	r.done += int64(n)
}

// more reads on into rest.
func (r *Reader) more() error {
	grown := make([]byte, len(r.rest), len(r.rest)+blockBytes)
	copy(grown, r.rest)
	n, err := io.ReadFull(r.in, grown[len(grown):cap(grown)])
	r.rest = grown[:len(grown)+n]
	if err == io.EOF || err == io.ErrUnexpectedEOF {
		r.ended, err = true, nil
	}
	return err
}

// Next fills b, whose room is used again, with the next whole sets; io.EOF after the
// last.
func (r *Reader) Next(b *Block) error {
	b.data = append(b.data[:0], r.rest...)
	r.rest = nil
	wanted := blockBytes
	for {
		if !r.ended {
			if err := r.fill(b, wanted); err != nil {
				return err
			}
		}
		cut := len(b.data)
		if !r.ended {
			cut = r.Table.lastBorder(b.data, r.numbered)
		}
		if cut == 0 && !r.ended {
			if wanted = 2 * len(b.data); wanted > mostSetBytes {
				return &Error{File: r.Table.File, Line: r.line, Problem: "a set takes more than a thousand million characters", Remedy: "check that the column of the set holds its name"}
			}
			continue
		}
		if cut == 0 {
			return io.EOF
		}
		r.rest = append([]byte(nil), b.data[cut:]...)
		b.data = b.data[:cut]
		b.Line, b.numbered = r.line, r.numbered
		r.line += bytes.Count(b.data, []byte{'\n'})
		r.done += int64(cut)
		b.End = r.done
		return nil
	}
}

// fill reads on until b holds the wanted number of bytes or the input ends.
func (r *Reader) fill(b *Block, wanted int) error {
	if wanted <= len(b.data) {
		return nil
	}
	start := len(b.data)
	if cap(b.data) < wanted {
		grown := make([]byte, start, wanted+wanted/8)
		copy(grown, b.data)
		b.data = grown
	}
	n, err := io.ReadFull(r.in, b.data[start:wanted])
	b.data = b.data[:start+n]
	if err == io.EOF || err == io.ErrUnexpectedEOF {
		r.ended, err = true, nil
	}
	return err
}

// lastBorder returns where the last set of data begins, of which more may follow; 0
// if no set ends in data.
func (t *Table) lastBorder(data []byte, numbered bool) int {
	end := bytes.LastIndexByte(data, '\n') + 1 // of whole lines
	var last []byte
	known := false
	for end > 0 {
		start := bytes.LastIndexByte(data[:end-1], '\n') + 1
		if line := lineText(data[start:end], numbered); len(bytes.TrimSpace(line)) > 0 {
			set := t.setOf(line)
			if known && !bytes.Equal(set, last) {
				return end
			}
			last, known = set, true
		}
		end = start
	}
	return 0
}

// lineText returns a line without its end and without the number before it.
func lineText(line []byte, numbered bool) []byte {
	line = bytes.TrimSuffix(bytes.TrimSuffix(line, []byte{'\n'}), []byte{'\r'})
	if numbered {
		line = line[bytes.IndexByte(line, '\t')+1:]
	}
	return line
}
