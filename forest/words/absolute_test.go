package words

import (
	"math"
	"testing"

	"steelyard/meta/panel"
)

// TestNeeded: the form through infinity of Altman (1998): 20 for one fewer, through
// infinity, to 40 for one more; and the published 77 (50 to 167) of GRADE guidelines 6.
func TestNeeded(t *testing.T) {
	for _, c := range []struct {
		d    panel.Range
		want string
	}{
		{panel.Range{Value: -0.013, Low: -0.020, High: -0.006}, "77 (50 to 167) for one fewer"},
		{panel.Range{Value: 0.013, Low: 0.006, High: 0.020}, "77 (50 to 167) for one more"},
		{panel.Range{Value: -0.01, Low: -0.05, High: 0.025}, "100 for one fewer (20 for one fewer, through infinity, to 40 for one more)"},
		{panel.Range{Value: 0, Low: -0.05, High: 0.05}, "infinite (20 for one fewer, through infinity, to 20 for one more)"},
		{panel.Range{Value: -0.02, Low: -0.04, High: 0}, "50 (25 to infinity) for one fewer"},
	} {
		if got := Needed(panel.NumberNeeded(c.d)); got != c.want {
			t.Errorf("%+v: %q, want %q", c.d, got, c.want)
		}
	}
}

// TestAbsoluteSmall: an interval within 2 per 1000 of none has decimals, a wider one
// whole numbers.
func TestAbsoluteSmall(t *testing.T) {
	if got := Absolute(-0.4, -0.6, -0.1); got != "0.4 fewer (0.1 to 0.6 fewer)" {
		t.Errorf("a small one: %q", got)
	}
	if got := Absolute(-0.4, -3, 0.2); got != "0 (0 to 3 fewer)" {
		t.Errorf("a small one of a wide interval: %q", got)
	}
	for value, want := range map[float64]string{-40: "40 fewer", -2: "2 fewer", 1.5: "1.5 more", -0.04: "0.04 fewer", 0: "0", math.NaN(): Missing} {
		if got := AbsoluteValue(value); got != want {
			t.Errorf("%v: %q, want %q", value, got, want)
		}
	}
}
