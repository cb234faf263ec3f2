package ingest

import (
	"regexp"
	"strings"

	"steelyard/meta/review"
)

// missingWords are what people write into a cell for a number that is not there,
// folded.
var missingWords = map[string]bool{"na": true, "n/a": true, "n.a.": true, "nr": true, "n/r": true, "not reported": true, "not available": true, "not stated": true,
	"missing": true, "unknown": true, "unclear": true, "none": true, "nd": true, "no data": true, "-": true, "–": true, "—": true, ".": true, "?": true, "..": true, "--": true}

// Forms of texts that stand where a number belongs.
var (
	dateLike    = regexp.MustCompile(`^(?i)(\d{1,2}[-/. ](jan|feb|mar|apr|may|jun|jul|aug|sep|oct|nov|dec)[a-z]*([-/. ]\d{2,4})?|(jan|feb|mar|apr|may|jun|jul|aug|sep|oct|nov|dec)[a-z]*[-/. ]\d{1,4}|\d{1,2}[-/.]\d{1,2}[-/.]\d{2,4}|\d{4}-\d{1,2}-\d{1,2})$`)
	ratioLike   = regexp.MustCompile(`(?i)^\d+\s*(/|of|out of|from)\s*\d+$`)
	severalLike = regexp.MustCompile(`\d\s*[([;]|\d\s+to\s+|\d\s*±|\d\s*[-–]\s*\d`)
	footnoted   = regexp.MustCompile(`^[-+−]?\d[\d.,]*\s*[*†‡§¶#a-zA-Z)]+$`)
)

// unreadableText reports a text that is no number: what it looks like and what to
// do. A word for "not reported" is read as missing, with a warning.
func (r *rowReader) unreadableText(c *numberColumn, text string) (float64, bool) {
	trimmed := tidy(text)
	if missingWords[strings.ToLower(trimmed)] {
		r.find(review.Warning, "F6", c.col, quote(trimmed)+" is read as missing; leave the cell blank and say why in a note")
		return 0, false
	}
	if percent, found := strings.CutSuffix(trimmed, "%"); found && c.field == review.LimitLevel {
		if value, ok := plainNumber(strings.TrimSpace(percent), '.'); ok {
			return value / 100, true
		}
	}
	rule := "F6"
	if dateLike.MatchString(trimmed) {
		rule = "F1"
	}
	return r.refuse(c, rule, notANumber(text))
}

// notANumber says what a text looks like that is no number, and what to do.
func notANumber(text string) string {
	trimmed := tidy(text)
	said := quote(trimmed)
	switch {
	case dateLike.MatchString(trimmed):
		return said + " looks like a date, which spreadsheet programs make of entries such as 3-12 or 3/12; write the number again as a plain number"
	case twoNumbers.MatchString(trimmed):
		return said + settle
	case strings.ContainsAny(trimmed, "<>≤≥~≈"):
		return said + " is a bound, not a value; write the exact number if the report gives it, else leave the cell blank and keep the bound in a note"
	case ratioLike.MatchString(trimmed):
		return said + " holds two numbers; write events and total each into a column of its own"
	case strings.EqualFold(trimmed, "ns"):
		return said + " says \"not significant\", which is no number; write the number, or leave the cell blank"
	case severalLike.MatchString(trimmed):
		return said + " holds more than one number; write each into a column of its own"
	case strings.HasSuffix(trimmed, "%"):
		return said + " is a percentage, not a plain number; write the number itself, for counts the number of people"
	case footnoted.MatchString(trimmed):
		return said + " carries a mark; write the number alone and the remark into a note column"
	}
	return said + " is not a number; write it in digits with a decimal point, or leave the cell blank if it is not reported"
}
