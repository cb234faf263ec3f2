package grid

import (
	"strings"
)

// The delimiters that are told by looking, in order of preference where two fit
// alike: what rarely stands in a text comes first.
const delimiters = "\t;|,"

const (
	sampleBytes = 64 << 10
	sampleLines = 200
)

// cutSeparatorLine takes off a first line "sep=;", by which spreadsheet programs
// announce the delimiter. ok is false if there is none.
func cutSeparatorLine(text string) (delimiter byte, rest string, ok bool) {
	end := strings.IndexAny(text, "\r\n")
	if end < 0 || end > 256 {
		return 0, text, false
	}
	line := strings.TrimPrefix(text[:end], `"`)
	if len(line) < 5 || !strings.EqualFold(line[:4], "sep=") {
		return 0, text, false
	}
	c := line[4]
	padding := strings.Trim(strings.TrimPrefix(line[5:], `"`), string(rune(c))+", ;\t")
	if padding != "" || !canDelimit(c) {
		return 0, text, false
	}
	rest = text[end+1:]
	if text[end] == '\r' {
		rest = strings.TrimPrefix(rest, "\n")
	}
	return c, rest, true
}

// canDelimit reports whether c is ASCII and no letter, digit, quote or part of a number.
func canDelimit(c byte) bool {
	return c == '\t' || ' ' <= c && c < 0x7f && !strings.ContainsRune(`"'.+-`, rune(c)) &&
		!('0' <= c && c <= '9' || 'a' <= c|0x20 && c|0x20 <= 'z')
}

// tally says how often a delimiter stands in each line of a sample.
type tally struct {
	counts []int
	mode   int // the commonest count above zero, the larger of two; 0 if it never occurs
	agree  int // lines of that count
}

func (t *tally) settle() {
	lines := map[int]int{}
	for _, n := range t.counts {
		if n == 0 {
			continue
		}
		lines[n]++
		if lines[n] > t.agree || lines[n] == t.agree && n > t.mode {
			t.mode, t.agree = n, lines[n]
		}
	}
}

// first returns the index of the first line of the commonest count.
func (t *tally) first() int {
	for i, n := range t.counts {
		if n == t.mode {
			return i
		}
	}
	return -1
}

// sniffDelimiter tells the delimiter by the first lines of the text. The one
// that splits most lines into the same number of fields wins; a decimal comma or
// a list in a cell splits data rows as regularly, so that the first line that
// commas split regularly, commonly the header, must hold the other mark too.
func sniffDelimiter(text string, tabsHint bool) byte {
	tallies := tallyDelimiters(text)
	comma, best := &tallies[3], 0
	for i := range tallies {
		tallies[i].settle()
		best = max(best, tallies[i].agree)
	}
	if tabsHint && tallies[0].mode > 0 {
		return '\t'
	}
	for i := range tallies[:3] {
		t := &tallies[i]
		if t.mode > 0 && t.agree*5 >= best*4 && (comma.mode == 0 || t.counts[comma.first()] > 0) {
			return delimiters[i]
		}
	}
	return ','
}

// tallyDelimiters counts the delimiters outside quotes in each line that is not blank.
func tallyDelimiters(text string) (tallies [4]tally) {
	whole := len(text) <= sampleBytes
	text = text[:min(len(text), sampleBytes)]
	var counts [4]int
	start, quoted := 0, false
	flush := func(end int) {
		if strings.TrimSpace(text[start:end]) != "" {
			for i := range tallies {
				tallies[i].counts = append(tallies[i].counts, counts[i])
			}
		}
		start, counts = end+1, [4]int{}
	}
	for i := 0; i < len(text) && len(tallies[0].counts) < sampleLines; i++ {
		c := text[i]
		switch {
		case quoted:
			quoted = c != '"'
		case c == '"':
			// A quote opens a field, or reopens one at a doubled quote.
			quoted = i == start || text[i-1] == '"' || strings.IndexByte(delimiters, text[i-1]) >= 0
		case c == '\n' || c == '\r':
			flush(i)
		default:
			if d := strings.IndexByte(delimiters, c); d >= 0 {
				counts[d]++
			}
		}
	}
	if start < len(text) && (whole || len(tallies[0].counts) == 0) {
		flush(len(text))
	}
	return tallies
}
