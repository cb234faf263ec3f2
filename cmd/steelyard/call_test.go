package main

import (
	"bytes"
	"context"
	"encoding/json"
	"flag"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"steelyard/meta/synthesis"
)

var update = flag.Bool("update", false, "rewrite golden files, the README and its figures")

// data is the folder of published data, seen from this package.
const data = "../../testdata/"

// call runs one call of the program and returns what it wrote.
func call(t testing.TB, stdin string, args ...string) (stdout, stderr string, code int) {
	t.Helper()
	var out, errs bytes.Buffer
	code = run(context.Background(), append([]string{"steelyard"}, args...), streams{in: strings.NewReader(stdin), out: &out, err: &errs})
	return out.String(), errs.String(), code
}

// pooled runs pool with JSON and returns its document.
func pooled(t testing.TB, args ...string) synthesis.Document {
	t.Helper()
	stdout, stderr, code := call(t, "", append([]string{"pool", "--format", "json"}, args...)...)
	if code != codeDone && code != codeData {
		t.Fatalf("pool %v: exit %d, %s", args, code, stderr)
	}
	var d synthesis.Document
	if err := json.Unmarshal([]byte(stdout), &d); err != nil {
		t.Fatalf("pool %v: %v", args, err)
	}
	return d
}

// golden compares text with a file under testdata/golden, or rewrites that with
// -update. A missing file fails.
func golden(t *testing.T, name, got string) {
	t.Helper()
	path := filepath.Join("testdata", "golden", name)
	if *update {
		if err := os.MkdirAll(filepath.Dir(path), 0o755); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(path, []byte(got), 0o644); err != nil {
			t.Fatal(err)
		}
		return
	}
	want, err := os.ReadFile(path)
	if err != nil {
		t.Fatalf("%v; write it with: make golden", err)
	}
	if got != string(want) {
		t.Errorf("%s differs:\n%s", name, firstDifference(string(want), got))
	}
}

// firstDifference shows the first line in which two texts differ.
func firstDifference(want, got string) string {
	w, g := strings.Split(want, "\n"), strings.Split(got, "\n")
	for i := range max(len(w), len(g)) {
		var a, b string
		if i < len(w) {
			a = w[i]
		}
		if i < len(g) {
			b = g[i]
		}
		if a != b {
			return "want: " + a + "\ngot:  " + b
		}
	}
	return "(no line differs)"
}
