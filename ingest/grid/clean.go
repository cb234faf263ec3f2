package grid

import (
	"strings"
	"unicode"
	"unicode/utf8"
)

const removedCharacters = "control, invisible or direction-override characters were removed"

// cleanText returns text with line ends as "\n" and without control characters,
// invisible characters that only disturb matching, and characters that change
// the direction in which text is shown. removed says whether any was taken out.
func cleanText(text string) (cleaned string, removed bool) {
	if !hasUnwanted(text) && strings.IndexByte(text, '\r') < 0 {
		return text, false
	}
	var b strings.Builder
	b.Grow(len(text))
	for i, r := range text {
		switch {
		case r == '\r':
			if !strings.HasPrefix(text[i+1:], "\n") {
				b.WriteByte('\n')
			}
		case unwanted(r):
			removed = true
		default:
			b.WriteRune(r)
		}
	}
	return b.String(), removed
}

// hasUnwanted reports whether text holds a character that cleanText takes out.
func hasUnwanted(text string) bool {
	for i := 0; i < len(text); i++ {
		switch c := text[i]; {
		case c < ' ' && c != '\t' && c != '\n' && c != '\r', c == 0x7f:
			return true
		case c >= utf8.RuneSelf:
			r, size := utf8.DecodeRuneInString(text[i:])
			if unwanted(r) {
				return true
			}
			i += size - 1
		}
	}
	return false
}

// unwanted names the characters that cleanText takes out.
func unwanted(r rune) bool {
	switch {
	case r == '\t', r == '\n', r == '\r':
		return false
	case r < ' ', 0x7f <= r && r <= 0x9f: // control characters
		return true
	case 0x202a <= r && r <= 0x202e, 0x2066 <= r && r <= 0x2069: // direction embeddings, overrides, isolates
		return true
	case r == 0x200e, r == 0x200f, r == 0x061c: // direction marks
		return true
	case r == 0x200b, r == 0x2060, r == 0xfeff: // zero-width space, word joiner, byte order mark
		return true
	}
	return false
}

// isBlank reports whether text is white space alone, no-break spaces included.
func isBlank(text string) bool {
	if text == "" {
		return true
	}
	if c := text[0]; ' ' < c && c < utf8.RuneSelf {
		return false
	}
	return strings.TrimFunc(text, unicode.IsSpace) == ""
}
