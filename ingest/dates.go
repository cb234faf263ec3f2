package ingest

import (
	"strconv"
	"strings"

	"steelyard/ingest/grid"
	"steelyard/meta/review"
)

// Years outside these are slips.
const firstYear, lastYear = 1900, 2100

// readDate reads the row's date or year. The letter of a year such as "2015a" is
// kept in the study's name. A date that cannot be read does not keep the row from
// being pooled.
func (r *rowReader) readDate() {
	col := r.t.role.date
	cell := r.cell(col)
	switch cell.Kind {
	case grid.Blank:
		return
	case grid.ErrorValue, grid.Uncalculated, grid.Bool:
		r.find(review.Warning, "F12", col, quote(cell.Text)+" is no date; type it as 2015, 2015-08 or 2015-08-31")
		return
	}
	text := tidy(cell.Text)
	date, letter, ok := parseDate(text)
	switch {
	case !ok:
		r.find(review.Warning, "F12", col, quote(text)+" is not read as a date; type it as 2015, 2015-08 or 2015-08-31")
		return
	case date.Year < firstYear || date.Year > lastYear:
		r.find(review.Warning, "F12", col, quote(text)+" is no likely year and is not used; type the year in four digits")
		return
	}
	r.study.Date = date
	if letter == "" || r.study.Name == "" {
		return
	}
	if !strings.Contains(r.study.Name, text) {
		if year := text[:4]; strings.HasSuffix(r.study.Name, year) {
			r.study.Name += letter
		} else {
			r.study.Name += " " + text
		}
	}
	r.find(review.Note, "F12", col, "the year is read as "+text[:4]+"; its letter is kept in the study's name")
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
