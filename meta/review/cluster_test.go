package review

import "testing"

func TestNamesCluster(t *testing.T) {
	for text, want := range map[string]bool{"": false, "yes": false, "No": false, "1": false, "TRUE": false, "yes, by ward": false, "not stated": false, " ": false, "Leeds": true, "2": true, "Yesterday group": true} {
		if got := NamesCluster(text); got != want {
			t.Errorf("%q: %v", text, got)
		}
	}
}
