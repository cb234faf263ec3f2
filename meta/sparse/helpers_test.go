package sparse

import (
	"encoding/csv"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"testing"

	"pgregory.net/rapid"

	"steelyard/meta"
	"steelyard/meta/effect"
)

// tablesOf returns tables from rows of events and total, treated and control.
func tablesOf(rows ...[4]float64) []effect.Table {
	out := make([]effect.Table, len(rows))
	for i, r := range rows {
		out[i] = effect.Table{Events1: r[0], Total1: r[1], Events2: r[2], Total2: r[3]}
	}
	return out
}

// records reads a file of check values and returns its rows by column name.
func records(t testing.TB, name string) []map[string]string {
	t.Helper()
	f, err := os.Open(filepath.Join("..", "..", "testdata", "checks", name))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil || len(rows) < 2 {
		t.Fatalf("%s: %d rows, %v", name, len(rows), err)
	}
	out := make([]map[string]string, 0, len(rows))
	for _, row := range rows[1:] {
		record := map[string]string{}
		for i, cell := range row {
			record[rows[0][i]] = cell
		}
		out = append(out, record)
	}
	return out
}

func number(t testing.TB, text string) float64 {
	t.Helper()
	x, err := strconv.ParseFloat(text, 64)
	if err != nil {
		t.Fatal(err)
	}
	return x
}

// bcg returns the thirteen tables of bcg_counts.csv: Colditz et al., JAMA
// 1994;271:698-702.
func bcg(t testing.TB) []effect.Table {
	t.Helper()
	var out []effect.Table
	for _, r := range records(t, "bcg_counts.csv") {
		out = append(out, effect.Table{
			Events1: number(t, r["events treated"]), Total1: number(t, r["total treated"]),
			Events2: number(t, r["events control"]), Total2: number(t, r["total control"]),
		})
	}
	return out
}

// magnesium are the trials of intravenous magnesium in myocardial infarction
// [seen]: BUGS Examples, "Magnesium"; the last is LIMIT-2.
var magnesium = tablesOf([4]float64{1, 40, 2, 36}, [4]float64{9, 135, 23, 135}, [4]float64{2, 200, 7, 200}, [4]float64{1, 48, 1, 46},
	[4]float64{10, 150, 8, 148}, [4]float64{1, 59, 9, 56}, [4]float64{1, 25, 3, 23}, [4]float64{90, 1159, 118, 1157})

// betaBlockers are the trials after myocardial infarction [seen]: BUGS Examples,
// "Blocker"; Yusuf et al. (1985).
var betaBlockers = tablesOf([4]float64{3, 38, 3, 39}, [4]float64{7, 114, 14, 116}, [4]float64{5, 69, 11, 93}, [4]float64{102, 1533, 127, 1520},
	[4]float64{28, 355, 27, 365}, [4]float64{4, 59, 6, 52}, [4]float64{98, 945, 152, 939}, [4]float64{60, 632, 48, 471},
	[4]float64{25, 278, 37, 282}, [4]float64{138, 1916, 188, 1921}, [4]float64{64, 873, 52, 583}, [4]float64{45, 263, 47, 266},
	[4]float64{9, 291, 16, 293}, [4]float64{57, 858, 45, 883}, [4]float64{25, 154, 31, 147}, [4]float64{33, 207, 38, 213},
	[4]float64{28, 251, 12, 122}, [4]float64{8, 151, 6, 154}, [4]float64{6, 174, 3, 134}, [4]float64{32, 209, 40, 218},
	[4]float64{27, 391, 43, 364}, [4]float64{22, 680, 39, 674})

// thin are invented tables with single zeros, one double zero and few events.
var thin = tablesOf([4]float64{0, 50, 3, 48}, [4]float64{1, 60, 0, 61}, [4]float64{2, 100, 7, 98},
	[4]float64{0, 30, 0, 31}, [4]float64{5, 120, 4, 60}, [4]float64{1, 40, 6, 39})

func mustFit(t testing.TB, m Model, tables []effect.Table) *Result {
	t.Helper()
	if m.Level == 0 {
		m.Level = 0.95
	}
	r, err := m.Fit(tables)
	if err != nil {
		t.Fatalf("%v of %v: %v", m.Method, tables, err)
	}
	return r
}

// near reports whether got is within an absolute tolerance of want; NaN is never
// near.
func near(got, want, tol float64) bool { return math.Abs(got-want) <= tol }

// want is a number expected of a result.
type want struct {
	name           string
	got, want, tol float64
}

func compare(t testing.TB, wants ...want) {
	t.Helper()
	for _, w := range wants {
		if !near(w.got, w.want, w.tol) {
			t.Errorf("%s = %.16g, want %.16g ± %g", w.name, w.got, w.want, w.tol)
		}
	}
}

// everyModel are all models of the odds ratio.
var everyModel = []Model{
	{Method: MantelHaenszel, Level: 0.95},
	{Method: Peto, Level: 0.95},
	{Method: ConditionalExact, Level: 0.95},
	{Method: BinomialNormal, Level: 0.95, Effects: meta.CommonEffect},
	{Method: BinomialNormal, Level: 0.95},
}

// drawTable draws a legal table, zero cells and full arms being likely.
func drawTable(t *rapid.T, most int) effect.Table {
	arm := func(which string) (events, total float64) {
		n := rapid.IntRange(1, most).Draw(t, "total "+which)
		e := rapid.OneOf(rapid.IntRange(0, min(2, n)), rapid.IntRange(0, n), rapid.Just(n)).Draw(t, "events "+which)
		return float64(e), float64(n)
	}
	var x effect.Table
	x.Events1, x.Total1 = arm("treated")
	x.Events2, x.Total2 = arm("control")
	return x
}

func drawTables(t *rapid.T, mostTables, most int) []effect.Table {
	k := rapid.IntRange(1, mostTables).Draw(t, "tables")
	out := make([]effect.Table, k)
	for i := range out {
		out[i] = drawTable(t, most)
	}
	return out
}

// swapped returns the tables with the arms exchanged.
func swapped(tables []effect.Table) []effect.Table {
	out := make([]effect.Table, len(tables))
	for i, x := range tables {
		out[i] = effect.Table{Events1: x.Events2, Total1: x.Total2, Events2: x.Events1, Total2: x.Total1}
	}
	return out
}
