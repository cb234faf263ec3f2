package choice

import (
	"errors"
	"testing"
)

type colour int

var colours = Of[colour]("colour", "", "deep red", "green").With(map[string]colour{"scarlet": 1})

func TestNames(t *testing.T) {
	for text, want := range map[string]colour{"deep red": 1, "Deep_Red": 1, " DEEP-RED ": 1, "deep  red": 1, "green": 2, "Scarlet": 1, "deep\u00a0red": 1} {
		if got, err := colours.Parse(text); err != nil || got != want {
			t.Errorf("%q = %v, %v; want %v", text, got, err, want)
		}
	}
	for _, text := range []string{"", " ", "red", "deepred"} {
		_, err := colours.Parse(text)
		var unknown *UnknownError
		if !errors.As(err, &unknown) || len(unknown.Valid) != 2 {
			t.Errorf("%q: %v, want an UnknownError that lists two names", text, err)
		}
	}
	if _, err := colours.Parse("blue"); err.Error() != `"blue" is not a known colour; use one of: deep red, green` {
		t.Errorf("message: %v", err)
	}
	if colours.String(2) != "green" || colours.String(0) != "" || colours.String(9) != "colour 9" || colours.String(-1) != "colour -1" {
		t.Error("a value has another name than its own")
	}
	if all := colours.All(); len(all) != 2 || all[0] != "deep red" {
		t.Errorf("all names: %q", all)
	}
}
