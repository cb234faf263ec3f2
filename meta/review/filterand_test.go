package review

import (
	"strconv"
	"testing"

	"pgregory.net/rapid"
)

// TestAnd wants the joined filter, and what its text reads as, to keep just the rows
// that both keep.
func TestAnd(t *testing.T) {
	filters := rapid.SampledFrom([]string{
		"year >= 2010", "risk of bias is high or year < 2000", "sheet row is not 7", "sheet row != 7 and sheet row != 9",
		`study is not "Smith and Wesson" or sheet row is 3`, "year = 2010 and sheet row > 2 or year is blank or sheet row is 1",
	})
	rapid.Check(t, func(t *rapid.T) {
		a, b := filters.Draw(t, "a"), filters.Draw(t, "b")
		f, g := parsed(t, a), parsed(t, b)
		both := f.And(g)
		again := parsed(t, both.String())
		row := map[string]string{
			"year":         rapid.SampledFrom([]string{"", "1999", "2010", "2015"}).Draw(t, "year"),
			"risk-of-bias": rapid.SampledFrom([]string{"", "low", "high"}).Draw(t, "risk"),
			"study":        rapid.SampledFrom([]string{"Smith and Wesson", "Jones"}).Draw(t, "study"),
			"sheet-row":    strconv.Itoa(rapid.IntRange(1, 10).Draw(t, "row")),
		}
		cell := func(column string) string { return row[column] }
		want := f.Match(cell) && g.Match(cell)
		if both.Match(cell) != want || again.Match(cell) != want {
			t.Fatalf("%q and %q: %q keeps %v: %v, read again %v; want %v", a, b, both, row, both.Match(cell), again.Match(cell), want)
		}
	})
	f := parsed(t, "year >= 2010")
	if f.And(nil) != f || (*Filter)(nil).And(f) != f {
		t.Error("a missing filter changes another")
	}
}

func parsed(t interface{ Fatal(...any) }, text string) *Filter {
	f, err := ParseFilter(text)
	if err != nil {
		t.Fatal(err)
	}
	return f
}

// TestRowColumn wants a filter to know a row by its number in the sheet, unless the
// sheet has a column of that name.
func TestRowColumn(t *testing.T) {
	f := parsed(t, "sheet row is not 7")
	s := &Study{Row: Place{Row: 7}}
	if f.Match(s.Cell) {
		t.Error("row 7 is kept")
	}
	s.Remarks = []Remark{{Header: "Sheet row", Text: "12"}}
	if !f.Match(s.Cell) {
		t.Error("the sheet's own column is not asked")
	}
}
