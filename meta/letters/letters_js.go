//go:build js

package letters

import (
	"strings"
	"syscall/js"
	"unicode/utf8"
)

// Composed returns a text in normal form C: letters and their accents as one character
// where there is one.
func Composed(text string) string { return normalised(text, "NFC") }

// Decomposed returns a text in normal form KD: letters apart from their accents, and
// characters that are forms of others as those.
func Decomposed(text string) string { return normalised(text, "NFKD") }

var normalize = js.Global().Get("String").Get("prototype").Get("normalize")

// normalised asks the script's own method; texts of plain letters are in every form.
func normalised(text, form string) string {
	if strings.IndexFunc(text, func(r rune) bool { return r >= utf8.RuneSelf }) < 0 {
		return text
	}
	return normalize.Call("call", text, form).String()
}
