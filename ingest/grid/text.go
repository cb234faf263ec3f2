package grid

import (
	"context"
	"fmt"
	"path/filepath"
	"strings"
)

// readText reads a text file into the book's only sheet.
func readText(ctx context.Context, data []byte, book *Book) error {
	text, remark, err := decodeText(data, book.File)
	if err != nil {
		return err
	}
	s := &splitter{ctx: ctx, file: book.File, line: 1, cells: cellStore{limit: MaxTextCells}}
	if remark != "" {
		s.remarks.add("", 0, 0, remark, "")
	}
	if err := s.chooseDelimiter(text); err != nil {
		return err
	}
	s.dirty = hasUnwanted(s.text)
	if err := s.split(); err != nil {
		return err
	}
	book.Text = true
	book.Sheets = []Sheet{{Rows: s.rows}}
	book.Remarks = s.remarks.all()
	return nil
}

// splitter cuts a text into records and fields in one pass. Fields are parts of
// the one text and cells lie in large blocks, so that little is allocated.
type splitter struct {
	ctx     context.Context
	file    string
	text    string
	delim   byte
	dirty   bool // fields need cleaning
	pos     int
	line    int // of pos, 1-based
	rows    []Row
	cells   cellStore
	record  []Cell // scratch
	remarks remarker
}

// chooseDelimiter takes the delimiter of a line "sep=", else looks for it.
func (s *splitter) chooseDelimiter(text string) error {
	delim, rest, ok := cutSeparatorLine(text)
	s.text = rest
	ending := strings.ToLower(filepath.Ext(s.file))
	tabs := ending == ".tsv" || ending == ".tab"
	if ok {
		s.delim, s.line = delim, 2
		s.remarks.add("", 0, 0, fmt.Sprintf("fields are separated by %q, as the first line says", string(delim)), "")
		return nil
	}
	s.delim = sniffDelimiter(text, tabs)
	if s.delim != ',' && !(tabs && s.delim == '\t') {
		s.remarks.add("", 0, 0, fmt.Sprintf("fields are separated by %q", string(s.delim)), "")
	}
	return nil
}

// split reads all records.
func (s *splitter) split() error {
	for number := 1; s.pos < len(s.text); number++ {
		if number%1024 == 0 && s.ctx.Err() != nil {
			return interrupted(s.file, s.ctx.Err())
		}
		line := s.line
		if err := s.readRecord(number); err != nil {
			return err
		}
		if len(s.record) == 0 {
			continue
		}
		if number > MaxRows {
			return s.refuse(line, fmt.Sprintf("has more than %d rows, the limit", MaxRows), "split the file")
		}
		cells, ok := s.cells.keep(s.record)
		if !ok {
			return s.refuse(line, fmt.Sprintf("has more than %d cells, the limit", s.cells.limit), "keep only the columns of the studies, or split the file")
		}
		s.rows = append(s.rows, Row{Number: number, Line: line, Cells: cells})
	}
	return nil
}

func (s *splitter) refuse(line int, problem, remedy string) error {
	return &FileError{File: s.file, Place: fmt.Sprintf("line %d", line), Problem: problem, Remedy: remedy}
}

// readRecord reads the next record into s.record, trailing blanks left off.
func (s *splitter) readRecord(number int) error {
	s.record = s.record[:0]
	for col := 1; ; col++ {
		field, err := s.readField()
		if err != nil {
			return err
		}
		if !isBlank(field) {
			if col > MaxColumns {
				return s.refuse(s.line, fmt.Sprintf("a value stands in column %d; at most %d columns are read", col, MaxColumns),
					"keep only the columns of the studies; if this is one column too many in every row, check the delimiter")
			}
			if s.dirty {
				var removed bool
				if field, removed = cleanText(field); removed {
					s.remarks.add("", number, col, removedCharacters, "")
				}
			}
			if !isBlank(field) {
				for len(s.record) < col-1 {
					s.record = append(s.record, Cell{})
				}
				s.record = append(s.record, Cell{Kind: Text, Text: field})
			}
		}
		if s.pos >= len(s.text) {
			return nil
		}
		c := s.text[s.pos]
		s.pos++
		if c == s.delim {
			continue
		}
		if c == '\r' && s.pos < len(s.text) && s.text[s.pos] == '\n' {
			s.pos++
		}
		s.line++
		return nil
	}
}

// readField reads up to the next delimiter or line end, which it leaves.
func (s *splitter) readField() (string, error) {
	if s.pos < len(s.text) && s.text[s.pos] == '"' {
		return s.readQuoted()
	}
	start := s.pos
	for s.pos < len(s.text) {
		if c := s.text[s.pos]; c == s.delim || c == '\n' || c == '\r' {
			break
		}
		s.pos++
	}
	if s.pos-start > MaxFieldBytes {
		return "", s.refuse(s.line, fmt.Sprintf("a value is longer than %d bytes", MaxFieldBytes), "check that the file is a table of studies")
	}
	return s.text[start:s.pos], nil
}

// readQuoted reads a field in quotes, in which a quote is doubled.
func (s *splitter) readQuoted() (string, error) {
	opened, start := s.line, s.pos+1
	doubled := false
	end := start
	for {
		step := strings.IndexByte(s.text[end:], '"')
		if step < 0 || end+step-start > MaxFieldBytes {
			return "", s.refuse(opened, "a quote is opened here and not closed, so that the rows after it would be lost in one cell",
				`close it, or double it if it belongs to the text ("")`)
		}
		end += step
		if !strings.HasPrefix(s.text[end+1:], `"`) {
			break
		}
		doubled = true
		end += 2
	}
	field := s.text[start:end]
	s.line += countLines(field)
	s.pos = end + 1
	for s.pos < len(s.text) && s.text[s.pos] == ' ' && s.delim != ' ' {
		s.pos++
	}
	if s.pos < len(s.text) {
		if c := s.text[s.pos]; c != s.delim && c != '\n' && c != '\r' {
			return "", s.refuse(s.line, fmt.Sprintf("text follows the quote that closes the value opened in line %d", opened),
				`double a quote that belongs to the text (""), and look for an unclosed one before it`)
		}
	}
	if doubled {
		field = strings.ReplaceAll(field, `""`, `"`)
	}
	if strings.IndexByte(field, '\r') >= 0 {
		field = strings.ReplaceAll(strings.ReplaceAll(field, "\r\n", "\n"), "\r", "\n")
	}
	return field, nil
}

// countLines counts the line ends in a text, CR, LF or both.
func countLines(text string) int {
	return strings.Count(text, "\n") + strings.Count(text, "\r") - strings.Count(text, "\r\n")
}
