package ingest

import (
	"strconv"
	"strings"
	"unicode"
)

// fillers are words of a header that carry no meaning of their own.
var fillers = map[string]bool{"of": true, "the": true, "in": true, "for": true, "group": true, "groups": true, "arm": true, "arms": true,
	"de": true, "des": true, "du": true, "la": true, "le": true, "les": true, "der": true, "die": true, "das": true, "del": true, "el": true, "los": true, "groupe": true, "gruppe": true, "grupo": true}

// fold brings a header to the form in which headers are compared: lower-case
// words joined by single blanks, without punctuation and fillers, "confidence
// interval" as "ci". A level such as that of "95% CI low" is taken out and
// returned as a fraction; it is 0 when there is none.
func fold(header string) (phrase string, level float64) {
	words := strings.FieldsFunc(strings.ToLower(withoutPoints(header)), notInWord)
	kept := words[:0]
	for i := 0; i < len(words); i++ {
		word := words[i]
		next := ""
		if i+1 < len(words) {
			next = words[i+1]
		}
		if (word == "confidence" || word == "conf") && (next == "interval" || next == "int") {
			word = "ci"
			i++
		}
		if l, rest, ok := levelOf(word, next, kept); ok {
			level, word = l, rest
		}
		if word != "" && !fillers[word] {
			kept = append(kept, word)
		}
	}
	return strings.Join(kept, " "), level
}

// withoutPoints puts a blank for every point that is not within a number.
func withoutPoints(header string) string {
	if strings.IndexByte(header, '.') < 0 {
		return header
	}
	digit := func(i int) bool { return 0 <= i && i < len(header) && '0' <= header[i] && header[i] <= '9' }
	text := []byte(header)
	for i, c := range text {
		if c == '.' && !(digit(i-1) && digit(i+1)) {
			text[i] = ' '
		}
	}
	return string(text)
}

func notInWord(r rune) bool {
	return !(unicode.IsLetter(r) || unicode.IsDigit(r) || unicode.IsMark(r) || r == '%' || r == '.')
}

// levelOf recognises the words "95%", "95" beside "ci", "ci95" and "95ci", and
// returns the level as a fraction with what is left of the word.
func levelOf(word, next string, before []string) (level float64, rest string, ok bool) {
	digits, percent := strings.CutSuffix(word, "%")
	if trimmed, found := strings.CutPrefix(digits, "ci"); found && trimmed != "" {
		digits, rest = trimmed, "ci"
	} else if trimmed, found := strings.CutSuffix(digits, "ci"); found && trimmed != "" {
		digits, rest = trimmed, "ci"
	}
	besideCI := rest == "ci" || next == "ci" || next == "confidence" || next == "conf" || (len(before) > 0 && before[len(before)-1] == "ci")
	if !percent && !besideCI {
		return 0, "", false
	}
	x, err := strconv.ParseFloat(digits, 64)
	if err != nil || !(50 <= x && x < 100) {
		return 0, "", false
	}
	return x / 100, rest, true
}

// tidy returns a cell's text in one line: surrounding blanks gone, every run of
// white space one blank. Control characters are gone already.
func tidy(text string) string {
	space := true // before the text, where a blank is one too many
	for _, c := range text {
		switch {
		case c == ' ' && !space:
			space = true
		case unicode.IsSpace(c):
			return strings.Join(strings.FieldsFunc(text, unicode.IsSpace), " ")
		default:
			space = false
		}
	}
	return strings.TrimSuffix(text, " ")
}

// plural returns a number with its noun, "1 row" or "2 rows".
func plural(n float64, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return shortest(n) + " " + many
}
