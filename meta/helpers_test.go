package meta

import (
	"encoding/csv"
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"testing"
)

// studies are the data of one check file.
type studies struct {
	names []string
	y, s  []float64
}

// checkFile returns a path in testdata/checks, whose README names the sources.
func checkFile(name string) string { return filepath.Join("..", "testdata", "checks", name) }

// readRows reads a CSV of testdata/checks without its header.
func readRows(t testing.TB, name string) [][]string {
	t.Helper()
	file, err := os.Open(checkFile(name))
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	rows, err := csv.NewReader(file).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	return rows[1:]
}

// readStudies reads NAME.csv: study, y, se.
func readStudies(t testing.TB, name string) studies {
	t.Helper()
	var d studies
	for _, row := range readRows(t, name+".csv") {
		d.names = append(d.names, row[0])
		d.y = append(d.y, number(t, row[1]))
		d.s = append(d.s, number(t, row[2]))
	}
	return d
}

// inOrderOf returns the studies in the order of names.
func (d studies) inOrderOf(t testing.TB, names []string) studies {
	t.Helper()
	var sorted studies
	for _, name := range names {
		i := slices.Index(d.names, name)
		if i < 0 {
			t.Fatalf("no study %q", name)
		}
		sorted.names = append(sorted.names, name)
		sorted.y, sorted.s = append(sorted.y, d.y[i]), append(sorted.s, d.s[i])
	}
	return sorted
}

// readJSON reads a reference file into v.
func readJSON(t testing.TB, name string, v any) {
	t.Helper()
	text, err := os.ReadFile(checkFile(name + ".json"))
	if err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal(text, v); err != nil {
		t.Fatal(err)
	}
}

func number(t testing.TB, text string) float64 {
	t.Helper()
	x, err := strconv.ParseFloat(text, 64)
	if err != nil {
		t.Fatal(err)
	}
	return x
}

// near reports whether got is within a relative tolerance of want; NaN is near
// nothing, and only 0 is near 0.
func near(got, want, tolerance float64) bool {
	return got == want || math.Abs(got-want) <= tolerance*math.Abs(want)
}

// within reports whether got is within an absolute tolerance of want.
func within(got, want, tolerance float64) bool {
	return got == want || math.Abs(got-want) <= tolerance
}

// checker reports differences from reference values by name.
type checker struct {
	t         *testing.T
	tolerance float64
}

func (c checker) near(name string, got, want float64) {
	c.t.Helper()
	if !near(got, want, c.tolerance) {
		c.t.Errorf("%s = %.17g, want %.17g ± %g relative", name, got, want, c.tolerance)
	}
}

func mustFit(t testing.TB, m Model, y, s []float64) *Fit {
	t.Helper()
	f, err := m.Fit(y, s)
	if err != nil {
		t.Fatalf("%+v: %v", m, err)
	}
	return f
}

func mustPool(t testing.TB, m Model, y, s []float64) Mean {
	t.Helper()
	var p Pooler
	mean, err := p.Pool(m, y, s)
	if err != nil {
		t.Fatalf("%+v: %v", m, err)
	}
	return mean
}

// without returns all studies but one.
func (d studies) without(omitted int) (y, s []float64) {
	return slices.Concat(d.y[:omitted], d.y[omitted+1:]), slices.Concat(d.s[:omitted], d.s[omitted+1:])
}

// at95 is the default model at 95 %.
var at95 = Model{Level: 0.95}

// with returns at95 with an estimator of τ² and an interval.
func with(tau TauMethod, interval IntervalMethod) Model {
	return Model{Level: 0.95, Tau: tau, Interval: interval}
}
