package ingest

import (
	"fmt"
	"path/filepath"
	"strings"

	"steelyard/ingest/grid"
	"steelyard/meta/choice"
	"steelyard/meta/review"
)

// judgementPath returns the name of the judgements beside a text file:
// "trials.judgement.csv" for "trials.csv".
func judgementPath(path string) string {
	return strings.TrimSuffix(path, filepath.Ext(path)) + ".judgement.csv"
}

// judgementColumns are the 1-based columns of a sheet of judgements, 0 where there is
// none.
type judgementColumns struct{ outcome, domain, rating, reason, by, date int }

// judgementReader reads the panel's ratings for an extraction that is read already.
type judgementReader struct {
	x       *review.Extraction
	file    string
	sheet   *grid.Sheet
	columns judgementColumns
	first   map[string]review.Place // of the rating of an outcome's domain
}

// maxJudgementRows is far above ten domains of any review's outcomes.
const maxJudgementRows = 10_000

// readJudgements reads the sheet "judgement" of a workbook, or the book of the file
// beside a text file. What cannot be read is a warning of the rule
// review.RuleJudgement: it changes no pooled result.
func readJudgements(x *review.Extraction, book, beside *grid.Book) {
	source := book
	if book.Text {
		source = beside
	}
	if source == nil {
		return
	}
	for i := range source.Sheets {
		s := &source.Sheets[i]
		if source.Text || choice.Fold(s.Name) == judgementSheet {
			r := &judgementReader{x: x, file: source.File, sheet: s, first: map[string]review.Place{}}
			r.read()
			return
		}
	}
}

func (r *judgementReader) read() {
	if len(r.sheet.Rows) == 0 {
		return
	}
	for i := range r.sheet.Rows[:min(planHeaderRows, len(r.sheet.Rows))] {
		r.columns = judgementHeader(&r.sheet.Rows[i])
		if r.columns.domain == 0 || r.columns.rating == 0 {
			continue
		}
		if rows := len(r.sheet.Rows) - i - 1; rows > maxJudgementRows {
			r.find(r.place(0, 0, ""), "", fmt.Sprintf("the judgements have %d rows, more than the limit of %d, and were not read; keep those that judge something", rows, maxJudgementRows))
			return
		}
		for j := i + 1; j < len(r.sheet.Rows); j++ {
			r.readRow(&r.sheet.Rows[j])
		}
		return
	}
	r.find(r.place(0, 0, ""), "", "the judgements have no header; write outcome, domain, rating, reason, by and date above the rows")
}

func judgementHeader(row *grid.Row) judgementColumns {
	var c judgementColumns
	names := map[string]*int{"outcome": &c.outcome, "domain": &c.domain, "rating": &c.rating, "reason": &c.reason, "by": &c.by, "date": &c.date}
	for i := range row.Cells {
		if column := names[choice.Fold(tidy(headerText(row, i+1)))]; column != nil && *column == 0 {
			*column = i + 1
		}
	}
	return c
}

// readRow reads one judgement. A row without a rating says nothing yet.
func (r *judgementReader) readRow(row *grid.Row) {
	text := func(col int) string { return tidy(row.Cell(col).Text) }
	if text(r.columns.rating) == "" || strings.HasPrefix(text(1), "#") {
		return
	}
	at := func(col int) review.Place { return r.place(row.Number, col, row.Cell(col).Text) }
	outcome, problem := r.outcome(text(r.columns.outcome))
	if problem != "" {
		r.find(at(max(r.columns.outcome, 1)), "", problem)
		return
	}
	domain, err := review.ParseDomain(text(r.columns.domain))
	if err != nil {
		r.find(at(r.columns.domain), outcome, err.Error())
		return
	}
	rating := row.Cell(r.columns.rating)
	if rating.Kind == grid.ErrorValue || rating.Kind == grid.Uncalculated {
		r.find(at(r.columns.rating), outcome, "the cell holds no rating that can be read ("+rating.Kind.String()+"); type the rating")
		return
	}
	key := choice.Fold(outcome) + "\x00" + domain.String()
	if old, twice := r.first[key]; twice {
		r.find(at(r.columns.rating), outcome, fmt.Sprintf("%s is rated in %s already; keep one of the two", domain, old))
		return
	}
	r.first[key] = at(r.columns.rating)
	if text(r.columns.reason) == "" {
		r.find(at(r.columns.rating), outcome, fmt.Sprintf("the rating of %s has no reason and does not count; write the reason beside it", domain))
		return
	}
	date, readable := planDate(row.Cell(r.columns.date))
	if !readable {
		r.find(at(r.columns.date), outcome, quote(text(r.columns.date))+" is not read as the date of the judgement; type it as 2015, 2015-08 or 2015-08-31")
		return
	}
	r.x.Judgements = append(r.x.Judgements, review.Judgement{
		Outcome: outcome, Domain: domain, Rating: text(r.columns.rating), Reason: text(r.columns.reason),
		By: text(r.columns.by), Date: date, Place: at(r.columns.rating),
	})
}

// outcome returns the sheet's spelling of the outcome that a judgement is about; a
// blank one is the sheet's only outcome.
func (r *judgementReader) outcome(typed string) (name, problem string) {
	all := r.x.Outcomes()
	if typed == "" {
		if len(all) == 1 {
			return all[0], ""
		}
		return "", "the judgement names no outcome, and the sheet has several: " + strings.Join(all, ", ") + "; write which"
	}
	for _, have := range all {
		if choice.Fold(have) == choice.Fold(typed) {
			return have, ""
		}
	}
	if len(all) == 1 && all[0] == "" {
		return "", quote(typed) + " is no outcome of the sheet, which has no column of outcomes: all its rows are one; leave the outcome blank"
	}
	return "", (&choice.UnknownError{What: "outcome of the sheet", Text: typed, Valid: all}).Error()
}

func (r *judgementReader) place(row, col int, text string) review.Place {
	return review.Place{File: r.file, Sheet: r.sheet.Name, Row: row, Col: col, Text: text}
}

func (r *judgementReader) find(place review.Place, outcome, message string) {
	r.x.Findings = append(r.x.Findings, review.Finding{Severity: review.Warning, Rule: review.RuleJudgement, Place: place, Outcome: outcome, Message: message})
}
