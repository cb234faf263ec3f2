package review

import (
	"strings"
	"testing"
)

func TestFilter(t *testing.T) {
	row := map[string]string{
		"risk-of-bias": "High", "year": "2010", "setting": "tube and mask", "dose": "0.50", "date": "2010-03", "blank": "",
	}
	cell := func(column string) string { return row[column] }
	for text, want := range map[string]bool{
		"risk of bias is high":                          true,
		"Risk_of_Bias IS HIGH":                          true,
		"risk of bias is not high":                      false,
		"risk of bias = high and year >= 2010":          true,
		"risk of bias = high and year > 2010":           false,
		"year < 2000 or year = 2010":                    true,
		"year < 2000 and dose = 0.5 or setting is tube": false,
		"year != 2011":                                  true,
		"dose is 0.5":                                   true, // as numbers
		"dose <= .5":                                    true,
		`setting is "tube and mask"`:                    true,
		"setting contains MASK":                         true,
		`setting contains "and mask"`:                   true,
		"blank is ":                                     true,
		"blank is not ":                                 false,
		"date >= 2010-02":                               true,
		"date > 2010-03":                                false,
		"risk of bias > 3":                              false, // text and number have no order
		"missing is x":                                  false,
		"missing is not x":                              true,
		`"risk of bias" is high`:                        true,
		"year >= 2010 and year <= 2010":                 true,
		"blank is blank":                                true,
		"Year IS NOT Blank":                             true,
		"missing is not blank":                          false,
		"blank is not blank or year is blank":           false,
		`setting is "blank"`:                            false,
		"dose (mg) is blank":                            true, // a name that holds parentheses
		"setting is tube or dose < 1":                   true,
		"risk of bias is high or nothing=1":             true,
	} {
		f, err := ParseFilter(text)
		if err != nil {
			t.Errorf("%s: %v", text, err)
			continue
		}
		if got := f.Match(cell); got != want {
			t.Errorf("%s = %v, want %v", text, got, want)
		}
		if f.String() != text && f.String()+" " != text {
			t.Errorf("%s is written %s", text, f)
		}
	}
	for _, bad := range []string{"", "year", "is high", "year >=", "year >> 3", "a is b and", "or a is b", "and",
		"(year > 2000)", "(year > 2000 or dose is 1) and setting is x", "year is (2000", "year is 2000)"} {
		if f, err := ParseFilter(bad); err == nil {
			t.Errorf("%q is read as %v", bad, f)
		}
	}
}

func FuzzFilter(f *testing.F) {
	for _, s := range []string{"a is b", `"x y" != 3 or z <= "4 and 5"`, "a is not b and c contains d", "≥ is ∞"} {
		f.Add(s, "3")
	}
	f.Fuzz(func(t *testing.T, text, value string) {
		filter, err := ParseFilter(text)
		if (filter == nil) == (err == nil) {
			t.Fatalf("%q: %v and %v", text, filter, err)
		}
		if filter == nil {
			return
		}
		all := func(string) string { return value }
		if first, again := filter.Match(all), filter.Match(all); first != again || len(filter.Columns()) == 0 {
			t.Errorf("%q matches %q differently, or looks at nothing", text, value)
		}
	})
}

// TestFilterUnmatched tells a value that some row has from one that none has.
func TestFilterUnmatched(t *testing.T) {
	rows := []map[string]string{{"risk-of-bias": "low", "year": "2010"}, {"risk-of-bias": "High", "year": ""}}
	cell := func(row int, column string) string { return rows[row][column] }
	for text, want := range map[string]string{
		"risk of bias is not high":               "",
		"risk of bias is not hihg":               "risk of bias is not hihg",
		"risk of bias is hi or year = 2010":      "risk of bias is hi",
		"risk of bias contains hi":               "",
		"year >= 1990":                           "",
		"year >= MCMXC and risk of bias is low":  "year >= MCMXC",
		"risk of bias > 1":                       "risk of bias > 1",
		"year is blank and risk of bias != high": "",
		"other is not blank":                     "",
	} {
		f, err := ParseFilter(text)
		if err != nil {
			t.Fatal(err)
		}
		if got := strings.Join(f.Unmatched(len(rows), cell), "; "); got != want {
			t.Errorf("%s: unmatched %q, want %q", text, got, want)
		}
	}
	_, err := ParseFilter("(year > 2000 or dose is 1) and setting is x")
	if err == nil || !strings.Contains(err.Error(), "no parentheses") {
		t.Errorf("error %v does not speak of parentheses", err)
	}
}
