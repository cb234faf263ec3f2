package grid

import (
	"bytes"
	"strconv"
	"strings"
	"unicode/utf8"
)

// textPlace is where a text of XML stands, on which it depends what it may hold.
type textPlace int

const (
	characterData  textPlace = iota // between tags: entities, but no "]]>"
	attributeValue                  // entities
	plainSection                    // in <![CDATA[ ]]>: neither
)

// decode returns text with its entities decoded and every line end as "\n". It
// refuses characters that XML does not have. The result lies in b or in s.scratch.
func (s *xmlScanner) decode(b []byte, place textPlace) ([]byte, error) {
	if isPlain(b) {
		return b, nil
	}
	out := s.scratch[:0]
	for i := 0; i < len(b); {
		switch c := b[i]; {
		case c == '&' && place != plainSection:
			r, size := entity(b[i:])
			if size == 0 {
				return nil, s.syntax("invalid character entity")
			}
			out = utf8.AppendRune(out, r)
			i += size
		case c == '\r':
			out = append(out, '\n')
			i++
			if i < len(b) && b[i] == '\n' {
				i++
			}
		case c == ']' && place == characterData && bytes.HasPrefix(b[i:], []byte("]]>")):
			return nil, s.syntax("unescaped ]]> not in CDATA section")
		case c < utf8.RuneSelf:
			if !isXMLChar(rune(c)) {
				return nil, s.syntax("illegal character code %U", rune(c))
			}
			out = append(out, c)
			i++
		default:
			r, size := utf8.DecodeRune(b[i:])
			if r == utf8.RuneError && size == 1 {
				return nil, s.syntax("invalid UTF-8")
			}
			if !isXMLChar(r) {
				return nil, s.syntax("illegal character code %U", r)
			}
			out = append(out, b[i:i+size]...)
			i += size
		}
	}
	s.scratch = out
	return out, nil
}

// isPlain reports whether text stands for itself, as most does.
func isPlain(b []byte) bool {
	for _, c := range b {
		if c < ' ' && c != '\n' && c != '\t' || c >= utf8.RuneSelf || c == '&' || c == ']' {
			return false
		}
	}
	return true
}

// isXMLChar reports whether a character may stand in XML 1.0 (section 2.2).
func isXMLChar(r rune) bool {
	return r == '\t' || r == '\n' || r == '\r' || ' ' <= r && r <= 0xd7ff || 0xe000 <= r && r <= 0xfffd || 0x10000 <= r && r <= 0x10ffff
}

// entity decodes a character reference or one of the five entities of XML at the
// start of b; size is 0 if there is none.
func entity(b []byte) (r rune, size int) {
	const longest = 12 // more zeros before a number are hardly honest
	end := bytes.IndexByte(b[:min(len(b), longest)], ';')
	if end < 2 {
		return 0, 0
	}
	name := string(b[1:end])
	if digits, numeric := strings.CutPrefix(name, "#"); numeric {
		base := 10
		if hex, ok := strings.CutPrefix(digits, "x"); ok {
			digits, base = hex, 16
		}
		n, err := strconv.ParseUint(digits, base, 32)
		if err != nil || !isXMLChar(rune(n)) || n > 0x10ffff {
			return 0, 0
		}
		return rune(n), end + 1
	}
	switch name {
	case "lt":
		return '<', end + 1
	case "gt":
		return '>', end + 1
	case "amp":
		return '&', end + 1
	case "apos":
		return '\'', end + 1
	case "quot":
		return '"', end + 1
	}
	return 0, 0
}
