package ingest

import (
	"fmt"
	"strings"

	"steelyard/ingest/grid"
	"steelyard/meta/review"
)

// SheetError says why no sheet could be chosen: several may hold the studies, or
// the one asked for is not there.
type SheetError struct {
	File  string
	Asked string // of Options.Sheet; blank when several sheets were found
	Text  bool   // the file is a text file, which has no sheets
	Names []string
}

// Error names the sheets and the flag.
func (e *SheetError) Error() string {
	quoted := make([]string, len(e.Names))
	for i, name := range e.Names {
		quoted[i] = quote(name)
	}
	list := strings.Join(quoted, ", ")
	switch {
	case e.Text:
		return fmt.Sprintf("%s: a text file has no sheets, so there is no sheet %s; leave --sheet out", e.File, quote(e.Asked))
	case e.Asked != "":
		return fmt.Sprintf("%s: there is no sheet %s; the sheets are: %s", e.File, quote(e.Asked), list)
	}
	return fmt.Sprintf("%s: %d sheets hold a table of studies: %s; name the one to pool, such as --sheet %s", e.File, len(e.Names), list, shellQuote(e.Names[0]))
}

// ColumnError reports a request for a column whose header the sheet does not have.
type ColumnError struct {
	File    string
	Field   review.Field
	Header  string // as asked for
	Headers []string
}

// Error lists the headers that are there.
func (e *ColumnError) Error() string {
	return fmt.Sprintf("%s: --column %q asks for a header %s, which the sheet does not have; its headers are: %s",
		e.File, e.Field.String()+"="+e.Header, quote(e.Header), quoteList(e.Headers))
}

// HeaderError reports a sheet in which no header was understood. Its message shows
// the headers found and the call that says which is which.
type HeaderError struct {
	File    string
	Sheet   string   // blank for a text file
	Row     int      // of the row most like a header, 0 if there is none
	Headers []string // of that row
	Missing string   // in words
	Columns []string // best guess, each "FIELD=HEADER"
	score   int
}

// Error shows the --column flags filled in.
func (e *HeaderError) Error() string {
	where := e.File
	if e.Sheet != "" {
		where += ", " + e.Sheet
	}
	if len(e.Headers) == 0 {
		return where + ": no header was found; write one row of column names, such as study, events treated, total treated, events control, total control, above the studies"
	}
	message := fmt.Sprintf("%s: no header was understood; row %d is nearest to one, with %s, but %s", where, e.Row, quoteList(e.Headers), e.Missing)
	if len(e.Columns) == 0 {
		return message + "; add the columns, or name them with --column \"FIELD=HEADER\""
	}
	call := "steelyard pool " + shellQuote(e.File)
	for _, c := range e.Columns {
		call += " --column " + shellQuote(c)
	}
	return message + "; say which column is which, after checking this guess:\n  " + call
}

// newHeaderError explains why h, the row most like a header, is not usable.
func newHeaderError(book *grid.Book, s *grid.Sheet, h *header) *HeaderError {
	e := &HeaderError{File: book.File, Sheet: s.Name}
	if h == nil || h.texts < 2 {
		return e
	}
	e.Row, e.Headers, e.score = s.Rows[h.bottom].Number, h.headers(), h.score
	have := h.fields()
	e.Missing = "no complete set of number columns, such as events and totals of both arms, is among them"
	if !have[review.StudyName] {
		e.Missing = "no column with the names of the studies is among them"
	}
	e.Columns = guessColumns(s, h)
	return e
}

// quoteList shows at most a dozen texts.
func quoteList(texts []string) string {
	const most = 12
	quoted := make([]string, 0, most)
	for _, text := range texts[:min(most, len(texts))] {
		quoted = append(quoted, quote(text))
	}
	list := strings.Join(quoted, ", ")
	if more := len(texts) - most; more > 0 {
		list += fmt.Sprintf(" and %d more", more)
	}
	return list
}

// columnFlag returns the text of a --column flag for a shell.
func columnFlag(field review.Field, header string) string {
	return shellQuote(field.String() + "=" + header)
}

// shellQuote puts a text into double quotes where a shell needs them.
func shellQuote(text string) string {
	plain := strings.IndexFunc(text, func(r rune) bool {
		return !(r == '.' || r == '_' || r == '-' || r == '/' || '0' <= r && r <= '9' || 'a' <= r && r <= 'z' || 'A' <= r && r <= 'Z')
	}) < 0
	if plain && text != "" {
		return text
	}
	return `"` + strings.NewReplacer(`\`, `\\`, `"`, `\"`, "$", `\$`, "`", "\\`").Replace(text) + `"`
}
