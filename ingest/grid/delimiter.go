package grid

import (
	"strings"
)

// The delimiters that are told by looking, in order of preference where two fit
// alike: what rarely stands in a text comes first.
const delimiters = "\t;|,"

const (
	commaIndex  = 3 // in delimiters
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

// sniffDelimiter tells the delimiter by the first lines of the text. The one
// that splits most lines into the same number of fields wins. Where commas and
// another mark fit alike, as with a list in a cell of every row, the first line
// that commas split so, commonly the header, must hold the other mark too.
func sniffDelimiter(text string, tabsHint bool) byte {
	tallies := tallyDelimiters(text)
	best := 0
	for i := range tallies {
		tallies[i].settle()
		best = max(best, tallies[i].agree)
	}
	if tabsHint && tallies[0].mode > 0 {
		return '\t'
	}
	comma := &tallies[commaIndex]
	for i := range tallies[:commaIndex] {
		t := &tallies[i]
		if t.mode > 0 && t.agree*5 >= best*4 && (t.agree >= 2*comma.agree || t.heads(comma)) {
			return delimiters[i]
		}
	}
	return ','
}

// heads reports whether the first line that holds as many commas as most do
// holds this delimiter too.
func (t *tally) heads(comma *tally) bool {
	for i, n := range comma.counts {
		if n >= comma.mode {
			return t.counts[i] > 0
		}
	}
	return false
}

// tallyDelimiters counts the delimiters outside quotes in each line that is not
// blank. In a line that holds another one, commas that mark decimals or part
// words do not count.
func tallyDelimiters(text string) (tallies [4]tally) {
	whole := len(text) <= sampleBytes
	text = text[:min(len(text), sampleBytes)]
	var counts [4]int
	start, weak, quoted := 0, 0, false
	flush := func(end int) {
		if strings.TrimSpace(text[start:end]) != "" {
			if counts[0]+counts[1]+counts[2] > 0 {
				counts[commaIndex] -= weak
			}
			for i := range tallies {
				tallies[i].counts = append(tallies[i].counts, counts[i])
			}
		}
		start, weak, counts = end+1, 0, [4]int{}
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
				if d == commaIndex && isWeakComma(text, i) {
					weak++
				}
			}
		}
	}
	if start < len(text) && (whole || len(tallies[0].counts) == 0) {
		flush(len(text))
	}
	return tallies
}

// isWeakComma reports whether the comma at i stands between digits or before a blank.
func isWeakComma(text string, i int) bool {
	if i+1 >= len(text) {
		return false
	}
	return text[i+1] == ' ' || i > 0 && allDigits(text[i-1:i]) && allDigits(text[i+1:i+2])
}
