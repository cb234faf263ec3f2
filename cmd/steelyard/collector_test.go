package main

import (
	"os"
	"path/filepath"
	"testing"
)

// TestOnlySmallFiles wants a large file, or none, to leave the collector as it is.
func TestOnlySmallFiles(t *testing.T) {
	large := filepath.Join(t.TempDir(), "large.csv")
	if err := os.WriteFile(large, make([]byte, smallInput+1), 0o600); err != nil {
		t.Fatal(err)
	}
	small := data + "checks/bcg_counts.csv"
	for _, c := range []struct {
		args []string
		want bool
	}{
		{[]string{"pool", small}, true},
		{[]string{"pool", small, "--tau", "paule-mandel"}, true},
		{[]string{"check", small, "--compare", large}, false},
		{[]string{"bulk", large}, false},
		{[]string{"pool", "-"}, false},
		{[]string{"pool", t.TempDir()}, false},
	} {
		if got := onlySmallFiles(c.args); got != c.want {
			t.Errorf("%v: %v, want %v", c.args, got, c.want)
		}
	}
}
