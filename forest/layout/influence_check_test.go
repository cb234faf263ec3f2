package layout

import (
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// checkGolden holds a page to the form of a file that was looked at.
func checkGolden(t *testing.T, name string, page Drawing, theme Theme) {
	t.Helper()
	got := written(t, page, theme)
	wellFormed(t, got)
	file := filepath.Join("testdata", name+".svg")
	if *update {
		if err := os.MkdirAll("testdata", 0o755); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(file, []byte(got), 0o644); err != nil {
			t.Fatal(err)
		}
		return
	}
	want, err := os.ReadFile(file)
	if err != nil {
		t.Fatalf("%v; run with -update, look at the file, and commit it", err)
	}
	if diff := cmp.Diff(strings.Split(string(want), "\n"), strings.Split(got, "\n")); diff != "" {
		t.Errorf("%s differs (-want +got):\n%s", file, diff)
	}
}
