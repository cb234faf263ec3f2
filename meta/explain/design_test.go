package explain

import (
	"reflect"
	"strings"
	"testing"
)

func TestParseTerms(t *testing.T) {
	for text, want := range map[string][][]string{
		"latitude":                        {{"latitude"}},
		"latitude, year":                  {{"latitude"}, {"year"}},
		"a*b, c":                          {{"a"}, {"b"}, {"c"}, {"a", "b"}},
		"a, a, B * A, a*b":                {{"a"}, {"B"}, {"B", "A"}},
		`"dose, mg" * "a*b",risk of bias`: {{"dose, mg"}, {"a*b"}, {"risk of bias"}, {"dose, mg", "a*b"}},
	} {
		got, err := ParseTerms(text)
		if err != nil || !reflect.DeepEqual(got, want) {
			t.Errorf("%s: %q (%v), want %q", text, got, err, want)
		}
	}
	for text, want := range map[string]string{
		"": "missing", "a,,b": "missing", "a*": "missing", "a*b*c": "multiplies 3", "a*A": "itself", `"a, b`: "not closed",
	} {
		if _, err := ParseTerms(text); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%q: error %v, want %q", text, err, want)
		}
	}
}

func TestReadCovariate(t *testing.T) {
	c, err := ReadCovariate("allocation", texts("alternate", "random", "Random ", "systematic", "random", "alternate"), "")
	if err != nil {
		t.Fatal(err)
	}
	if want := []string{"random", "alternate", "systematic"}; !reflect.DeepEqual(c.Levels, want) || !reflect.DeepEqual(c.Index, []int{1, 0, 0, 2, 0, 1}) {
		t.Errorf("levels %v, index %v", c.Levels, c.Index)
	}
	if c, err = ReadCovariate("dose", texts("1", "2", "1", "3"), "2"); err != nil || c.Levels[0] != "2" || c.Values != nil {
		t.Errorf("numbers with a reference are categories: %+v, %v", c, err)
	}
	if c, err = ReadCovariate("year", texts("2001", "2003", "2005"), ""); err != nil || c.Mean != 2003 || c.Levels != nil {
		t.Errorf("%+v, %v", c, err)
	}
	for _, bad := range []struct {
		cells     []Cell
		reference string
		want      []string
	}{
		{texts("7", "7", "7"), "", []string{`"7" in all 3`}},
		{texts("a", "a", "A"), "", []string{"in all 3"}},
		{texts("a", "b", "c"), "", []string{"3 different texts in 3 studies"}},
		{texts("1", "2", "c. 3", "4"), "", []string{"3 of 4 cells", `trial 3 (S!B4) "c. 3"`}},
		{texts("a", "b", "a"), "d", []string{`no study has the reference "d"`, "a; b"}},
		{nil, "", []string{"no study"}},
	} {
		_, err := ReadCovariate("kind", bad.cells, bad.reference)
		for _, part := range append(bad.want, `"kind"`) {
			if err == nil || !strings.Contains(err.Error(), part) {
				t.Errorf("error %v lacks %q", err, part)
			}
		}
	}
}

// The columns of an interaction are the products of those of its parts.
func TestDesignOfAnInteraction(t *testing.T) {
	kind, err := ReadCovariate("kind", texts("a", "b", "a", "c", "b", "a"), "")
	if err != nil {
		t.Fatal(err)
	}
	year := numbers(t, "year", []float64{2000, 2001, 2002, 2003, 2004, 2008})
	d := designed(t, "year*kind", kind, year)
	var names []string
	for _, c := range d.Columns() {
		names = append(names, c.Name)
	}
	if want := []string{"year", "kind: b", "kind: c", "year × kind: b", "year × kind: c"}; !reflect.DeepEqual(names, want) {
		t.Fatalf("columns %q", names)
	}
	columns := d.Columns()
	if want := []float64{0, -2, 0, 0, 1, 0}; !reflect.DeepEqual(columns[3].Values, want) { // the mean year is 2003
		t.Errorf("product %v, want %v", columns[3].Values, want)
	}
	row, err := d.Row([]Point{{Covariate: "Year", Number: 2010}, {Covariate: "kind", Level: "B"}})
	if want := []float64{7, 1, 0, 7, 0}; err != nil || !reflect.DeepEqual(row, want) {
		t.Errorf("row %v (%v), want %v", row, err, want)
	}
	if row, err = d.Row(nil); err != nil || !reflect.DeepEqual(row, make([]float64, 5)) {
		t.Errorf("at means and references: %v, %v", row, err)
	}
	for _, points := range [][]Point{{{Covariate: "dose"}}, {{Covariate: "kind", Level: "d"}}} {
		if _, err := d.Row(points); err == nil {
			t.Errorf("%v was taken", points)
		}
	}
}
