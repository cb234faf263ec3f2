package ingest

import (
	"fmt"
	"strings"

	"steelyard/meta/review"
)

// resolve leaves each field at most one column. Of "n" and "N" the small one is
// the events; a date goes before a year. What else several columns claim is an
// error for numbers and identity, since any choice would be a guess, and a
// warning for context, where the first column is taken.
func (r *headerReader) resolve(h *header) {
	r.resolveLetterCase(h, review.TotalTreated, review.EventsTreated)
	r.resolveLetterCase(h, review.TotalControl, review.EventsControl)
	r.resolveLetterCase(h, review.Total, review.Events)
	r.resolveYear(h)
	first := map[review.Field]int{}
	unknown := map[string]int{}
	for i := range h.columns {
		c := &h.columns[i]
		if c.field == review.NoField {
			r.remarkTwin(h, i, unknown)
			continue
		}
		j, taken := first[c.field]
		if !taken {
			first[c.field] = i
			continue
		}
		r.refuseTwin(h, j, i)
		c.meaning = meaning{}
	}
}

// refuseTwin reports that two columns claim one field.
func (r *headerReader) refuseTwin(h *header, i, j int) {
	a, b := &h.columns[i], &h.columns[j]
	f := review.Finding{Severity: review.Error, Rule: "F9", Place: b.Place}
	f.Place.Row = 0
	chosen := b.Header
	other, _ := fold(b.Header)
	if one, _ := fold(a.Header); one == other {
		chosen = byLetter + review.ColumnLetters(j+1)
	}
	f.Message = fmt.Sprintf("the headers %s (column %s) and %s (column %s) both mean %q, so it is unclear which to read; rename one, or choose with --column %s",
		quote(a.Header), review.ColumnLetters(i+1), quote(b.Header), review.ColumnLetters(j+1), a.field, columnFlag(a.field, chosen))
	if a.field > review.OutcomeField && !a.field.Numeric() {
		f.Severity = review.Warning
		f.Message = fmt.Sprintf("the headers %s (column %s) and %s (column %s) both mean %q; the first is read as it and the second kept as a covariate",
			quote(a.Header), review.ColumnLetters(i+1), quote(b.Header), review.ColumnLetters(j+1), a.field)
	}
	h.findings = append(h.findings, f)
}

// remarkTwin warns of two covariates under one header, which a filter could not
// tell apart.
func (r *headerReader) remarkTwin(h *header, i int, seen map[string]int) {
	c := &h.columns[i]
	name, _ := fold(c.Header)
	if name == "" {
		return
	}
	j, twice := seen[name]
	if !twice {
		seen[name] = i
		return
	}
	place := c.Place
	place.Row = 0
	h.findings = append(h.findings, review.Finding{Severity: review.Warning, Rule: "F9", Place: place,
		Message: fmt.Sprintf("the header %s stands over columns %s and %s; filters and subgroups see only the first, so rename one",
			quote(c.Header), review.ColumnLetters(j+1), review.ColumnLetters(i+1))})
}

// resolveLetterCase tells a pair of columns headed "n" and "N" apart.
func (r *headerReader) resolveLetterCase(h *header, total, events review.Field) {
	if h.column(events) != 0 {
		return
	}
	var small, large []int
	for i, c := range h.columns {
		if c.field != total {
			continue
		}
		for _, word := range strings.FieldsFunc(c.Header, notInWord) {
			switch word {
			case "n":
				small = append(small, i)
			case "N":
				large = append(large, i)
			}
		}
	}
	if len(small) != 1 || len(large) != 1 {
		return
	}
	a, b := &h.columns[small[0]], &h.columns[large[0]]
	a.field = events
	h.note(a.Place, "F9", fmt.Sprintf("%s is read as the number with the event and %s as the number in the arm", quote(a.Header), quote(b.Header)))
}

// resolveYear keeps the year as a covariate when there is a date, to compare the
// two.
func (r *headerReader) resolveYear(h *header) {
	var dates []int
	date := -1
	for i, c := range h.columns {
		if c.field != review.DateField {
			continue
		}
		dates = append(dates, i)
		if phrase, _ := fold(c.Header); date < 0 && strings.Contains(phrase, "date") {
			date = i
		}
	}
	if len(dates) < 2 || date < 0 {
		return
	}
	for _, i := range dates {
		if i != date {
			h.columns[i].meaning = meaning{}
			if h.year == 0 {
				h.year = i + 1
			}
		}
	}
}
