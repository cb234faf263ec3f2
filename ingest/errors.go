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

// ColumnError reports a request for a column whose header the sheet does not have,
// or has more than once.
type ColumnError struct {
	File    string
	Field   review.Field
	Header  string   // as asked for
	Twins   []string // letters of the columns with that header, if there are several
	Headers []string
}

// Error lists the headers that are there, or the columns to choose from.
func (e *ColumnError) Error() string {
	if len(e.Twins) > 1 {
		return fmt.Sprintf("%s: --column %q: the header %s stands over columns %s; choose one by its letter, such as --column %s",
			e.File, e.Field.String()+"="+e.Header, quote(e.Header), strings.Join(e.Twins, " and "), columnFlag(e.Field, byLetter+e.Twins[0]))
	}
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
	Advice  []string // what to do about columns that no guess may use
	Call    Call     // what the caller typed
	score   int
}

// Call is what the caller typed, for messages that show a call again.
type Call struct {
	Path  string // of the file; blank for its base name
	Sheet string // of Options.Sheet
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
	for _, advice := range e.Advice {
		message += "; " + advice
	}
	if len(e.Columns) == 0 {
		return message + "; add the columns, or name them with --column \"FIELD=HEADER\""
	}
	path := e.File
	if e.Call.Path != "" {
		path = e.Call.Path
	}
	call := "steelyard pool " + shellQuote(path)
	if e.Call.Sheet != "" {
		call += " --sheet " + shellQuote(e.Call.Sheet)
	}
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
	e.Missing = lacking(h)
	if arms := armRows(s, h); arms != "" {
		e.Missing = arms
		return e
	}
	e.Advice = advise(h)
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
