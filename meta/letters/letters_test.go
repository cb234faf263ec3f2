package letters

import "testing"

// TestForms holds the examples of Unicode Standard Annex 15 (its figures 3 to 6).
func TestForms(t *testing.T) {
	for _, c := range []struct{ text, composed, decomposed string }{
		{"plain", "plain", "plain"},
		{"\u00c5", "\u00c5", "A\u030a"},
		{"\u212b", "\u00c5", "A\u030a"},
		{"\u00f4", "\u00f4", "o\u0302"},
		{"s\u0307\u0323", "\u1e69", "s\u0323\u0307"},
		{"\ufb01", "\ufb01", "fi"},
		{"2\u2075", "2\u2075", "25"},
		{"\u1e9b\u0323", "\u1e9b\u0323", "s\u0323\u0307"},
	} {
		if got := Composed(c.text); got != c.composed {
			t.Errorf("%+q composed is %+q, want %+q", c.text, got, c.composed)
		}
		if got := Decomposed(c.text); got != c.decomposed {
			t.Errorf("%+q decomposed is %+q, want %+q", c.text, got, c.decomposed)
		}
	}
}
