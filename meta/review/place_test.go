package review

import (
	"slices"
	"testing"

	"steelyard/meta/choice"
)

func TestPlace(t *testing.T) {
	for _, c := range []struct {
		place      Place
		cell, full string
	}{
		{Place{File: "a.xlsx", Sheet: "Data", Row: 7, Col: 3}, "C7", "Data!C7"},
		{Place{File: "a.csv", Row: 7, Col: 3}, "C7", "a.csv!C7"},
		{Place{File: "a.csv", Row: 7}, "7:7", "a.csv row 7"},
		{Place{Sheet: "Data", Col: 28}, "AB:AB", "Data column AB"},
		{Place{File: "a.csv"}, "", "a.csv"},
		{Place{Row: 1, Col: 1}, "A1", "A1"},
		{Place{}, "", ""},
	} {
		if got := c.place.Cell(); got != c.cell {
			t.Errorf("%+v: cell %q, want %q", c.place, got, c.cell)
		}
		if got := c.place.String(); got != c.full {
			t.Errorf("%+v: %q, want %q", c.place, got, c.full)
		}
	}
}

// TestColumnLetters: the last column of a workbook is XFD, 16,384 (ECMA-376).
func TestColumnLetters(t *testing.T) {
	for col, want := range map[int]string{0: "", 1: "A", 26: "Z", 27: "AA", 52: "AZ", 702: "ZZ", 703: "AAA", 16384: "XFD"} {
		if got := ColumnLetters(col); got != want {
			t.Errorf("column %d is %q, want %q", col, got, want)
		}
	}
}

func TestDate(t *testing.T) {
	dates := []Date{{}, {Year: 1999}, {Year: 2001}, {2001, 2, 0}, {2001, 2, 3}, {2001, 12, 1}}
	for i, want := range []string{"", "1999", "2001", "2001-02", "2001-02-03", "2001-12-01"} {
		if got := dates[i].String(); got != want {
			t.Errorf("%+v is %q, want %q", dates[i], got, want)
		}
	}
	if !slices.IsSortedFunc(dates, Date.Compare) {
		t.Error("an unknown part does not sort first")
	}
}

// TestFields: every field has a name of its own that reads back.
func TestFields(t *testing.T) {
	names := FieldNames()
	if len(names) < 30 {
		t.Fatalf("only %d fields have names", len(names))
	}
	for i, name := range names {
		f, err := ParseField(choice.Fold(name))
		if err != nil || f != Field(i+1) {
			t.Errorf("%q reads as field %d, %v; want %d", name, f, err, i+1)
		}
	}
	if StudyName.Numeric() || Accept.Numeric() || !Estimate.Numeric() || !SEControl.Numeric() {
		t.Error("the numbers do not begin at the estimate")
	}
}
