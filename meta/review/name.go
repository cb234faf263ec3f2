package review

import (
	"strings"
	"unicode"
	"unicode/utf8"

	"steelyard/meta/letters"
)

// joinedLetters are letters that no decomposition takes apart.
var joinedLetters = strings.NewReplacer("ß", "ss", "æ", "ae", "œ", "oe", "ø", "o", "ł", "l", "đ", "d", "ð", "d", "þ", "th", "ı", "i")

// FoldName brings a study's name to the form in which names are compared: small
// letters without accents and digits, in words, whatever stands between them. A
// name without letters and digits stays as it is.
func FoldName(name string) string {
	if folded(name) {
		return name
	}
	if plain, ok := foldASCII(name); ok {
		return plain
	}
	bare := strings.Map(func(r rune) rune {
		if unicode.Is(unicode.Mn, r) {
			return -1
		}
		return r
	}, letters.Decomposed(name))
	words := strings.FieldsFunc(joinedLetters.Replace(strings.ToLower(bare)), func(r rune) bool {
		return !unicode.IsLetter(r) && !unicode.IsDigit(r) && !unicode.IsMark(r)
	})
	if len(words) == 0 {
		return name
	}
	return strings.Join(words, " ")
}

// folded reports whether a name is plainly in that form already.
func folded(name string) bool {
	for i := 0; i < len(name); i++ {
		c := name[i]
		if !('a' <= c && c <= 'z' || '0' <= c && c <= '9' || c == ' ' && 0 < i && i < len(name)-1 && name[i-1] != ' ') {
			return false
		}
	}
	return name != ""
}

// foldASCII is FoldName for the names that have ASCII letters and digits alone, as
// most do; ok is false for others.
func foldASCII(name string) (plain string, ok bool) {
	bare := make([]byte, 0, 64)
	for i := 0; i < len(name); i++ {
		c := name[i]
		if 'A' <= c && c <= 'Z' {
			c += 'a' - 'A'
		}
		switch {
		case c >= utf8.RuneSelf:
			return "", false
		case 'a' <= c && c <= 'z' || '0' <= c && c <= '9':
			bare = append(bare, c)
		case len(bare) > 0 && bare[len(bare)-1] != ' ':
			bare = append(bare, ' ')
		}
	}
	plain = strings.TrimSuffix(string(bare), " ")
	return plain, plain != ""
}
