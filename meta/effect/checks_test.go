package effect

import (
	"encoding/csv"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"testing"
)

// records reads a file of check values and returns its rows by column name.
func records(t testing.TB, name string) []map[string]string {
	t.Helper()
	f, err := os.Open(filepath.Join("..", "..", "testdata", "checks", name))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	out := make([]map[string]string, 0, len(rows))
	for _, row := range rows[1:] {
		record := map[string]string{}
		for i, cell := range row {
			record[rows[0][i]] = cell
		}
		out = append(out, record)
	}
	if len(out) == 0 {
		t.Fatalf("%s holds no rows", name)
	}
	return out
}

// number reads a cell of a check file.
func number(t testing.TB, text string) float64 {
	t.Helper()
	x, err := strconv.ParseFloat(text, 64)
	if err != nil {
		t.Fatal(err)
	}
	return x
}

// bcgTables returns the thirteen tables of bcg_counts.csv.
func bcgTables(t testing.TB) []Table {
	t.Helper()
	var out []Table
	for _, r := range records(t, "bcg_counts.csv") {
		out = append(out, Table{
			Events1: number(t, r["events treated"]), Total1: number(t, r["total treated"]),
			Events2: number(t, r["events control"]), Total2: number(t, r["total control"]),
		})
	}
	return out
}

// near reports whether got is within a relative tolerance of want, or within
// the same absolute one where |want| < 1; NaN is never near.
func near(got, want, tol float64) bool {
	return math.Abs(got-want) <= tol*math.Max(1, math.Abs(want))
}

// relative reports whether got is within a relative tolerance of want.
func relative(got, want, tol float64) bool {
	return math.Abs(got-want) <= tol*math.Abs(want)
}
