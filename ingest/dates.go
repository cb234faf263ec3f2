package ingest

import (
	"strconv"
	"strings"

	"steelyard/ingest/grid"
	"steelyard/meta/review"
)

// Years outside these are slips.
const firstYear, lastYear = 1800, 2100

// readDate reads the row's date. Where the sheet has a year too, the two are
// compared, and the year stands in for a date that is not there. The letter of a
// year such as "2015a" is kept in the study's name. A date that cannot be read
// does not keep the row from being pooled.
func (r *rowReader) readDate() {
	date, letter := r.dateCell(r.t.role.date)
	r.study.Date = date
	if letter != "" {
		r.keepLetter(r.t.role.date, date, letter)
	}
	col := r.t.header.year
	if col == 0 {
		return
	}
	year, letter := r.dateCell(col)
	if letter != "" {
		r.keepLetter(col, year, letter)
	}
	switch {
	case year.Year == 0:
	case date.Year == 0:
		r.study.Date = year
	case date.Year != year.Year:
		r.find(review.Warning, "F12", col, "the year "+year.String()[:4]+" is not that of the date "+date.String()+
			"; check both: the date orders the studies, and filters on the year look at the year")
	}
}

// dateCell reads a date or year; it reports what cannot be read and returns the
// zero date for it.
func (r *rowReader) dateCell(col int) (date review.Date, letter string) {
	cell := r.cell(col)
	switch cell.Kind {
	case grid.Blank:
		return review.Date{}, ""
	case grid.ErrorValue, grid.Uncalculated, grid.Bool:
		r.find(review.Warning, "F12", col, quote(cell.Text)+" is no date; type it as 2015, 2015-08 or 2015-08-31")
		return review.Date{}, ""
	}
	text := tidy(cell.Text)
	date, letter, ok := parseDate(text)
	switch {
	case !ok:
		r.find(review.Warning, "F12", col, quote(text)+" is not read as a date; type it as 2015, 2015-08 or 2015-08-31")
		return review.Date{}, ""
	case date.Year < firstYear || date.Year > lastYear:
		r.find(review.Warning, "F12", col, quote(text)+" is no likely year and is not used; type the year in four digits")
		return review.Date{}, ""
	}
	return date, letter
}

// keepLetter puts the letter of a year into the study's name.
func (r *rowReader) keepLetter(col int, date review.Date, letter string) {
	if r.study.Name == "" {
		return
	}
	year := date.String()[:4]
	if !strings.Contains(r.study.Name, year+letter) {
		if strings.HasSuffix(r.study.Name, year) {
			r.study.Name += letter
		} else {
			r.study.Name += " " + year + letter
		}
	}
	r.find(review.Note, "F12", col, "the year is read as "+year+"; its letter is kept in the study's name")
}

// parseDate reads 2015, 2015-08, 2015-08-31, the latter with a time of day, and
// 2015a; letter is the small letter after the year.
func parseDate(text string) (date review.Date, letter string, ok bool) {
	day, _, _ := strings.Cut(text, "T")
	if len(day) == 5 && 'a' <= day[4] && day[4] <= 'z' {
		day, letter = day[:4], day[4:]
	}
	var values [3]int
	for i, width := range [3]int{4, 2, 2} {
		part, rest, more := strings.Cut(day, "-")
		value, err := strconv.ParseUint(part, 10, 16)
		if err != nil || len(part) != width || (i > 0 && value == 0) || (more && (i == 2 || letter != "")) {
			return review.Date{}, "", false
		}
		values[i] = int(value)
		if day = rest; !more {
			break
		}
	}
	date = review.Date{Year: values[0], Month: values[1], Day: values[2]}
	return date, letter, date.Month <= 12 && date.Day <= daysIn(date.Year, date.Month)
}

// daysIn returns the number of days of a month.
func daysIn(year, month int) int {
	switch month {
	case 2:
		if year%4 == 0 && (year%100 != 0 || year%400 == 0) {
			return 29
		}
		return 28
	case 4, 6, 9, 11:
		return 30
	}
	return 31
}
