package words

import (
	"strings"
	"testing"
)

// TestLines: counted by hand.
func TestLines(t *testing.T) {
	for _, c := range []struct {
		text    string
		letters float64
		want    int
	}{
		{"", 10, 1},
		{"one", 10, 1},
		{"five5 five5", 11, 1},
		{"five5 five5", 10.9, 2},
		{"five5\nfive5", 40, 2},
		{"a\n\nb", 40, 3},
		{"longer-than-a-line x", 5, 2},
		{strings.Repeat("é", 10) + " é", 12, 1},
	} {
		if got := Lines(c.text, c.letters); got != c.want {
			t.Errorf("Lines(%q, %v) = %d, want %d", c.text, c.letters, got, c.want)
		}
	}
}
