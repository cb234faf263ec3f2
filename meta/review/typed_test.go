package review

import "testing"

// TestDecimals counts the decimals of numbers as they are typed.
func TestDecimals(t *testing.T) {
	for _, tt := range []struct {
		text  string
		value float64
		want  int
	}{
		{"0.70", 0.7, 2}, {"12", 12, 0}, {"−0·420", -0.42, 3}, {"0,5", 0.5, 1}, {"1,234", 1234, 0}, {"1e-3", 0.001, 3}, {"1.5e1", 15, 0}, {"", 0.25, 2}, {" 0.1 ", 0.1, 1},
	} {
		n := Number{Value: tt.value, Place: Spot{Text: tt.text}}
		if got := n.Decimals(); got != tt.want {
			t.Errorf("%q: %d decimals, want %d", tt.text, got, tt.want)
		}
	}
	if h := (Number{Value: 0.7, Place: Spot{Text: "0.70"}}).HalfUnit(); h != 0.005 {
		t.Errorf("half a unit of 0.70 is %v, want 0.005", h)
	}
}
