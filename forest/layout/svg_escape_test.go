package layout

import (
	"bytes"
	"encoding/xml"
	"testing"

	"pgregory.net/rapid"
)

// TestEscapes: cleaned text is escaped as encoding/xml escapes it.
func TestEscapes(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		text := rapid.OneOf(rapid.String(), rapid.StringMatching(`[&<>"'\t\n\r a-c]*`)).Draw(t, "text")
		text = Clean(text)
		var want bytes.Buffer
		if err := xml.EscapeText(&want, []byte(text)); err != nil {
			t.Fatal(err)
		}
		var s svg
		s.escaped(text)
		if got := s.out.String(); got != want.String() {
			t.Errorf("%q is escaped as %q, want %q", text, got, want.String())
		}
	})
}
