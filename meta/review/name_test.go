package review

import (
	"strings"
	"testing"
)

// TestFoldName wants the same name however it is typed, and other names apart.
func TestFoldName(t *testing.T) {
	for _, name := range []string{"Adams 2001", "ADAMS 2001", "Adams (2001)", "Adams, 2001", " Ádams  2001 ", "adams\u00a02001", "Ａdams-2001", "adams 2001"} {
		if got := FoldName(name); got != "adams 2001" {
			t.Errorf("%q is folded to %q", name, got)
		}
	}
	for name, want := range map[string]string{"Müller": "muller", "Ørsted & Weiß": "orsted weiss", "Łukasz": "lukasz", "?": "?", "Adams 2001a": "adams 2001a", "田中": "田中", "محمد 2010": "محمد 2010"} {
		if got := FoldName(name); got != want {
			t.Errorf("%q is folded to %q, want %q", name, got, want)
		}
	}
}

// TestFoldASCII: the quick way for plain names gives what the general one does.
func TestFoldASCII(t *testing.T) {
	for _, name := range []string{"Smith 2001", "smith, j. (2001)", "  A--B  ", "O'Neill", "...", "", "x", "Ünlü 2003"} {
		general := FoldName(name + "\u0301") // an accent, which is taken off, takes the general way
		if name == "" || name == "..." {
			general = name
		}
		if plain, ok := foldASCII(name); ok && plain != general || !ok && strings.ContainsAny(name, "abxs") {
			t.Errorf("%q is folded to %q (%v), want %q", name, plain, ok, general)
		}
		if got := FoldName(name); got != general {
			t.Errorf("%q is folded to %q, want %q", name, got, general)
		}
	}
}
