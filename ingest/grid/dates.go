package grid

import (
	"fmt"
	"math"
	"strings"
	"time"
)

// dateFormat says how a number format shows a number.
type dateFormat int

const (
	noDate      dateFormat = iota
	calendar               // with a day, month or year
	timeOfDay              // hours, minutes, seconds alone
	elapsedTime            // [h]:mm and the like
)

// builtInDate classes the number formats that have no code in the file
// (ECMA-376 part 1, 18.8.30, with those of East Asian languages).
func builtInDate(id int) dateFormat {
	switch {
	case id == 46:
		return elapsedTime
	case 18 <= id && id <= 21, id == 45, id == 47, 32 <= id && id <= 35, id == 55, id == 56:
		return timeOfDay
	case 14 <= id && id <= 22, 27 <= id && id <= 36, 50 <= id && id <= 58:
		return calendar
	}
	return noDate
}

// customDate classes a number format by its code: by the letters of dates in its
// first section, outside quotes, escapes and brackets.
func customDate(code string) dateFormat {
	letters, elapsed := formatLetters(code)
	switch {
	case strings.Contains(letters, "general"), strings.ContainsAny(letters, "#?"):
		return noDate
	case elapsed:
		return elapsedTime
	}
	letters = strings.NewReplacer("am/pm", "h", "a/p", "h", "e+", "", "e-", "").Replace(letters)
	clock, days := strings.ContainsAny(letters, "hs"), strings.ContainsAny(letters, "ydegb")
	switch {
	case days, !clock && strings.Contains(letters, "m"):
		return calendar
	case clock:
		return timeOfDay
	}
	return noDate
}

// formatLetters returns the first section of a format code in lower case without
// its literal text, and whether it holds a bracketed hour, minute or second.
func formatLetters(code string) (letters string, elapsed bool) {
	var b strings.Builder
	runes := []rune(strings.ToLower(code))
	for i := 0; i < len(runes); i++ {
		switch r := runes[i]; r {
		case ';':
			return b.String(), elapsed
		case '\\', '_', '*':
			i++
		case '"':
			for i++; i < len(runes) && runes[i] != '"'; i++ {
			}
		case '[':
			start := i + 1
			for i++; i < len(runes) && runes[i] != ']'; i++ {
			}
			inner := string(runes[start:min(i, len(runes))])
			elapsed = elapsed || inner != "" && strings.Trim(inner, "hms") == "" && strings.Count(inner, inner[:1]) == len(inner)
		default:
			b.WriteRune(r)
		}
	}
	return b.String(), elapsed
}

const (
	dayMillis = 24 * 60 * 60 * 1000
	// lastSerial is 9999-12-31 in the 1900 system.
	lastSerial = 2958465
	// leapSerial is the day 1900-02-29, which never was but counts in the 1900
	// system (ECMA-376 part 1, 18.17.4.1).
	leapSerial = 60
	days1904   = 1462 // from the start of the 1900 system to that of the 1904 system
)

// isoDate writes a serial date number as ISO 8601, to the millisecond. ok is
// false for numbers that are no date.
func isoDate(serial float64, format dateFormat, from1904 bool) (text string, ok bool) {
	if !(math.Abs(serial) <= lastSerial+1) {
		return "", false
	}
	millis := int64(math.Round(serial * dayMillis))
	if format == elapsedTime {
		return isoDuration(millis), true
	}
	day, rest := millis/dayMillis, millis%dayMillis
	if from1904 && (format == calendar || day > 0) {
		day += days1904
	}
	switch {
	case millis < 0 || day > lastSerial:
		return "", false
	case day == 0:
		return clock(rest), true
	case day == leapSerial:
		text = "1900-02-29"
	default:
		if day < leapSerial {
			day++
		}
		text = time.Date(1899, 12, 30, 0, 0, 0, 0, time.UTC).AddDate(0, 0, int(day)).Format(time.DateOnly)
	}
	if rest > 0 {
		text += "T" + clock(rest)
	}
	return text, true
}

// clock writes a time of day, with a fraction of a second if there is one.
func clock(millis int64) string {
	return fmt.Sprintf("%02d:%02d:%02d", millis/3600000, millis/60000%60, millis/1000%60) + fraction(millis)
}

func fraction(millis int64) string {
	if millis%1000 == 0 {
		return ""
	}
	return strings.TrimRight(fmt.Sprintf(".%03d", millis%1000), "0")
}

// isoDuration writes a length of time in hours, minutes and seconds.
func isoDuration(millis int64) string {
	sign := ""
	if millis < 0 {
		sign, millis = "-", -millis
	}
	return fmt.Sprintf("%sPT%dH%dM%d%sS", sign, millis/3600000, millis/60000%60, millis/1000%60, fraction(millis))
}

// plainISO normalises a date that is stored as ISO 8601 text: midnight and the
// zone of universal time are left off. ok is false for other text.
func plainISO(text string) (string, bool) {
	for _, layout := range []string{time.DateOnly, "2006-01-02T15:04:05.999", "2006-01-02T15:04:05.999Z", "2006-01-02T15:04", "15:04:05.999"} {
		t, err := time.Parse(layout, text)
		switch {
		case err != nil:
			continue
		case layout == "15:04:05.999":
			return t.Format(layout), true
		case t.Equal(t.Truncate(24 * time.Hour)):
			return t.Format(time.DateOnly), true
		}
		return t.Format("2006-01-02T15:04:05.999"), true
	}
	return "", false
}
