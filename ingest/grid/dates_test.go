package grid

import (
	"fmt"
	"testing"
	"time"

	"github.com/xuri/excelize/v2"
)

// TestSerialDates: the 1900 system counts 1900-01-01 as 1 and has a day 60 that
// never was; the 1904 system counts 1904-01-01 as 0 (ECMA-376 part 1, 18.17.4.1,
// whose examples are 1, 59, 61, 2958465 and, for 1904, 0 and 2957003).
func TestSerialDates(t *testing.T) {
	for _, tt := range []struct {
		serial     float64
		format     dateFormat
		from1904   bool
		want, note string
	}{
		{1, calendar, false, "1900-01-01", "first day"},
		{59, calendar, false, "1900-02-28", "before the day that never was"},
		{60, calendar, false, "1900-02-29", "the day that never was, as spreadsheets show it"},
		{60.25, calendar, false, "1900-02-29T06:00:00", "with a time"},
		{61, calendar, false, "1900-03-01", "after it"},
		{42707, calendar, false, "2016-12-03", "42705 is 2016-12-01: 1900-01-01 + 42705 - 2 days"},
		{42707.4375, calendar, false, "2016-12-03T10:30:00", "10.5/24 = 0.4375"},
		{42707.99999999999, calendar, false, "2016-12-04", "rounded to the millisecond"},
		{42707.00001, calendar, false, "2016-12-03T00:00:00.864", "0.864 s are 1e-5 days"},
		{2958465, calendar, false, "9999-12-31", "last day"},
		{0.5, timeOfDay, false, "12:00:00", "a time alone"},
		{0, calendar, false, "00:00:00", "no day 0 in the 1900 system"},
		{1.5, elapsedTime, false, "PT36H0M0S", "36 hours"},
		{-0.25, elapsedTime, false, "-PT6H0M0S", "less than nothing"},
		{0, calendar, true, "1904-01-01", "first day of 1904 system"},
		{0.5, timeOfDay, true, "12:00:00", "a time alone"},
		{41245, calendar, true, "2016-12-03", "42707 - 1462"},
		{2957003, calendar, true, "9999-12-31", "last day of 1904 system"},
		{2958466, calendar, false, "", "after the last day"},
		{2957004, calendar, true, "", "after the last day"},
		{-1, calendar, false, "", "before the first day"},
		{1e300, calendar, false, "", "no date"},
	} {
		got, ok := isoDate(tt.serial, tt.format, tt.from1904)
		if got != tt.want || ok != (tt.want != "") {
			t.Errorf("isoDate(%v, %v, %v) = %q, %v; want %q (%s)", tt.serial, tt.format, tt.from1904, got, ok, tt.want, tt.note)
		}
	}
}

// TestSerialDatesAgainstCalendar compares every 97th day with the calendar of the
// standard library, counted from 1900-03-01 = 61.
func TestSerialDatesAgainstCalendar(t *testing.T) {
	day := time.Date(1900, 3, 1, 0, 0, 0, 0, time.UTC)
	for serial := 61; serial <= lastSerial; serial += 97 {
		want := day.AddDate(0, 0, serial-61).Format("2006-01-02")
		if got, _ := isoDate(float64(serial), calendar, false); got != want {
			t.Fatalf("serial %d = %s, want %s", serial, got, want)
		}
	}
}

// TestDateFormats: built-in ids and letters of ECMA-376 part 1, 18.8.30 and 18.8.31.
func TestDateFormats(t *testing.T) {
	for id, want := range map[int]dateFormat{0: noDate, 1: noDate, 2: noDate, 9: noDate, 11: noDate, 13: noDate, 14: calendar, 17: calendar, 18: timeOfDay, 20: timeOfDay,
		21: timeOfDay, 22: calendar, 23: noDate, 37: noDate, 44: noDate, 45: timeOfDay, 46: elapsedTime, 47: timeOfDay, 48: noDate, 49: noDate} {
		if got := builtInDate(id); got != want {
			t.Errorf("built-in format %d: %v, want %v", id, got, want)
		}
	}
	for code, want := range map[string]dateFormat{
		"General": noDate, "0.00": noDate, "#,##0.00": noDate, "0.00E+00": noDate, "##0.0E+0": noDate, "0%": noDate, "@": noDate,
		`0.0" days"`: noDate, `0\d`: noDate, "[Red]0.00": noDate, `[$€-407]\ 0.00`: noDate, `0.00_d`: noDate, "0*d": noDate, `0;"y"`: noDate, "[>=100]0": noDate,
		"[Magenta]General": noDate, "0.00;[Red]-0.00;yyyy": noDate, "[Yellow]#,##0": noDate,
		"yyyy-mm-dd": calendar, "d/m/yy": calendar, "mmm": calendar, "mmm-yy": calendar, `dd\.mm\.yyyy`: calendar, "[$-409]d-mmm-yyyy;@": calendar,
		"yyyy-mm-dd hh:mm": calendar, "dddd": calendar, "[$-411]ggge": calendar, "YYYY": calendar,
		"h:mm": timeOfDay, "h:mm:ss AM/PM": timeOfDay, "mm:ss.0": timeOfDay,
		"[h]:mm": elapsedTime, "[mm]:ss": elapsedTime, "[ss]": elapsedTime, "[HH]:MM": elapsedTime,
	} {
		if got := customDate(code); got != want {
			t.Errorf("format %q: %v, want %v", code, got, want)
		}
	}
}

func TestDateCellsOfAWorkbook(t *testing.T) {
	when := time.Date(2016, 12, 3, 0, 0, 0, 0, time.UTC)
	data := build(t, func(f *excelize.File) { set(t, f, "A1", when, "B1", when.Add(10*time.Hour+30*time.Minute)) })
	equal(t, "dates as written", texts(mustRead(t, data, "a.xlsx").Sheets[0]), []string{"1: 2016-12-03|2016-12-03T10:30:00"})

	inner := `<row r="1">`
	for style := range 5 {
		inner += fmt.Sprintf(`<c s="%d"><v>1.5</v></c>`, style)
	}
	p := rows(inner + `<c s="1"><v>-3</v></c></row>`)
	book := mustRead(t, p.pack(t), "a.xlsx")
	equal(t, "1900 system", texts(book.Sheets[0]), []string{"1: 1.5|1900-01-01T12:00:00|1900-01-01T12:00:00|PT36H0M0S|1900-01-01T12:00:00|-3"})
	if row := book.Sheets[0].Rows[0]; row.Cell(1).Kind != Number || row.Cell(2).Kind != Date || row.Cell(6).Kind != Number {
		t.Errorf("kinds of %+v, want number, dates, number", row.Cells)
	}
	remarked(t, book, "Data", "F1", "no date", "-3")

	p.change(t, mainPart, "<workbookPr/>", `<workbookPr date1904="1"/>`)
	equal(t, "1904 system", texts(mustRead(t, p.pack(t), "a.xlsx").Sheets[0]), []string{"1: 1.5|1904-01-02T12:00:00|1904-01-02T12:00:00|PT36H0M0S|1904-01-02T12:00:00|-3"})
}
