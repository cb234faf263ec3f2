//go:build !js

package letters

import "golang.org/x/text/unicode/norm"

// Composed returns a text in normal form C: letters and their accents as one character
// where there is one.
func Composed(text string) string { return norm.NFC.String(text) }

// Decomposed returns a text in normal form KD: letters apart from their accents, and
// characters that are forms of others as those.
func Decomposed(text string) string { return norm.NFKD.String(text) }
