package missing

import (
	"encoding/csv"
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"testing"

	"steelyard/meta"
	"steelyard/meta/effect"
)

const checksFolder = "../../testdata/checks/"

// columnsOf returns numeric columns of a file of check values by their heads.
func columnsOf(t testing.TB, name string, heads ...string) [][]float64 {
	t.Helper()
	f, err := os.Open(filepath.Join(checksFolder, name))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	lines, err := csv.NewReader(f).ReadAll()
	if err != nil || len(lines) < 2 {
		t.Fatalf("%s: %d lines, %v", name, len(lines), err)
	}
	out := make([][]float64, len(heads))
	for i, head := range heads {
		for j, have := range lines[0] {
			if have != head {
				continue
			}
			for _, line := range lines[1:] {
				x, err := strconv.ParseFloat(line[j], 64)
				if err != nil {
					t.Fatal(err)
				}
				out[i] = append(out[i], x)
			}
		}
		if out[i] == nil {
			t.Fatalf("%s has no column %q", name, head)
		}
	}
	return out
}

func pairs(t testing.TB, name string) (y, s []float64) {
	t.Helper()
	c := columnsOf(t, name+".csv", "y", "se")
	return c[0], c[1]
}

// bcg returns the tables of the thirteen trials of BCG vaccine: Colditz et al.,
// JAMA 1994;271:698-702.
func bcg(t testing.TB) []effect.Table {
	t.Helper()
	c := columnsOf(t, "bcg_counts.csv", "events treated", "total treated", "events control", "total control")
	tables := make([]effect.Table, len(c[0]))
	for i := range tables {
		tables[i] = effect.Table{Events1: c[0][i], Total1: c[1][i], Events2: c[2][i], Total2: c[3][i]}
	}
	return tables
}

// checkValue reads a number of a check file by its path.
func checkValue(t testing.TB, name string, path ...string) float64 {
	t.Helper()
	data, err := os.ReadFile(checksFolder + name + ".json")
	if err != nil {
		t.Fatal(err)
	}
	var v any
	if err := json.Unmarshal(data, &v); err != nil {
		t.Fatal(err)
	}
	for _, key := range path {
		v = v.(map[string]any)[key]
	}
	return v.(float64)
}

var plain = meta.Model{Level: 0.95}

func near(t *testing.T, what string, got, want, relTol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= relTol*math.Max(math.Abs(want), 1e-300)) {
		t.Errorf("%s: %.17g, want %.17g", what, got, want)
	}
}
