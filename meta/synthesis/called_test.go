package synthesis

import "testing"

// TestCalled: an outcome without a name is not called by empty quotes.
func TestCalled(t *testing.T) {
	for name, want := range map[string]string{"": "the outcome", "serious harm": `outcome "serious harm"`} {
		if got := (&Outcome{Name: name}).Called(); got != want {
			t.Errorf("%q is called %q, want %q", name, got, want)
		}
	}
}
