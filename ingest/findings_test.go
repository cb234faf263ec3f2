package ingest

import (
	"slices"
	"strings"
	"testing"
	"time"

	"github.com/xuri/excelize/v2"

	"steelyard/meta/review"
)

// counts is a table of counts with a good row, rows to be tried, and columns for
// date and acceptance.
func counts(rows ...[]any) table {
	head := table{{"study", "year", "events treated", "total treated", "events control", "total control", "accept"}, {"Good", 2001, 3, 40, 5, 41}}
	return append(head, rows...)
}

// results is the same for reported results.
func results(rows ...[]any) table {
	head := table{{"study", "odds ratio", "ci low", "ci high", "ci level", "se", "p"}, {"Good", 0.5, 0.25, 1, 0.95, 0.35}}
	return append(head, rows...)
}

// dated is a table with a date and a year.
func dated(rows ...[]any) table {
	return append(table{{"study", "year", "date", "estimate", "se"}}, rows...)
}

// means is the same for means.
func means(rows ...[]any) table {
	head := table{{"study", "mean treated", "sd treated", "total treated", "mean control", "sd control", "total control"}, {"Good", 1, 2, 30, 3, 4, 31}}
	return append(head, rows...)
}

// TestFindings wants each fault of a sheet to be found at its place, in text and
// workbook, and every row to be kept.
func TestFindings(t *testing.T) {
	for _, tt := range []struct {
		name string
		rows table
		want []string
		word string // of the message of the first finding
	}{
		{"nothing", counts(), nil, ""},
		{"bound", counts([]any{"A", 2002, "<3", 40, 5, 41}), []string{"error F6 C3"}, "bound"},
		{"footnote mark", counts([]any{"A", 2002, "12*", 40, 5, 41}), []string{"error F6 C3"}, "mark"},
		{"not significant", counts([]any{"A", 2002, "NS", 40, 5, 41}), []string{"error F6 C3"}, "not significant"},
		{"percentage", counts([]any{"A", 2002, "12.5%", 40, 5, 41}), []string{"error F6 C3"}, "percentage"},
		{"count and percentage", counts([]any{"A", 2002, "5 (12.5%)", 40, 5, 41}), []string{"error F6 C3"}, "more than one number"},
		{"two numbers", counts([]any{"A", 2002, "3 of 12", 40, 5, 41}), []string{"error F6 C3"}, "two numbers"},
		{"word", counts([]any{"A", 2002, "three", 40, 5, 41}), []string{"error F6 C3"}, "not a number"},
		{"not a number at all", counts([]any{"A", 2002, "NaN", 40, 5, 41}), []string{"error F6 C3"}, "not a number"},
		{"infinite", counts([]any{"A", 2002, 3, "inf", 5, 41}), []string{"error F6 D3"}, "not a number"},
		{"missing word", counts([]any{"A", 2002, "n/a", 40, 5, 41}), []string{"warning F6 C3"}, "missing"},
		{"day and month", counts([]any{"A", 2002, "3-Dec", 40, 5, 41}), []string{"error F1 C3"}, "date"},
		{"month and year", counts([]any{"A", 2002, "Dec-03", 40, 5, 41}), []string{"error F1 C3"}, "date"},
		{"day in full", counts([]any{"A", 2002, "03/12/2015", 40, 5, 41}), []string{"error F1 C3"}, "date"},
		{"too large", results([]any{"A", "1e200", "", "", "", 1}), []string{"error F11 B3"}, "too large"},
		{"beyond all numbers", results([]any{"A", "1e999", "", "", "", 1}), []string{"error F6 B3"}, "not a number"},
		{"two faults of a row", counts([]any{"A", 2002, "<3", 40, "x", 41}), []string{"error F6 C3", "error F6 E3"}, "bound"},
		{"year", counts([]any{"A", 215, 3, 40, 5, 41}), []string{"warning F12 B3"}, "date"},
		{"year too early", counts([]any{"A", 1066, 3, 40, 5, 41}), []string{"warning F12 B3"}, "year"},
		{"column without header", append(table{{"study", "y", nil, "se"}}, []any{"A", 1, 7, 1}), []string{"warning F9 C:C"}, "no header"},
		{"year of an old trial", counts([]any{"A", 1809, 3, 40, 5, 41}), nil, ""},
		{"year with a capital O", counts([]any{"A", "20O5", 3, 40, 5, 41}), []string{"warning F12 B3"}, "not read as a date"},
		{"year and date agree", dated([]any{"A", 2001, "2001-03-04", 1, 2}), nil, ""},
		{"year against date", dated([]any{"A", 2001, "2005-03-04", 1, 2}), []string{"warning F12 B2"}, "not that of the date 2005-03-04"},
		{"year with a capital O beside a date", dated([]any{"A", "20O1", "2001-03-04", 1, 2}), []string{"warning F12 B2"}, "not read as a date"},
		{"year too late", counts([]any{"A", 3015, 3, 40, 5, 41}), []string{"warning F12 B3"}, "year"},
		{"year with letter", counts([]any{"A", "2015a", 3, 40, 5, 41}), []string{"note F12 B3"}, "2015"},
		{"events above total", counts([]any{"A", 2002, 42, 40, 5, 41}), []string{"error C1 C3"}, "42 events among 40"},
		{"negative count", counts([]any{"A", 2002, -3, 40, 5, 41}), []string{"error C1 C3"}, "-3"},
		{"broken count", counts([]any{"A", 2002, 3.5, 40, 5, 41}), []string{"error C2 C3"}, "whole"},
		{"empty arm", counts([]any{"A", 2002, 0, 0, 5, 41}), []string{"error C1 D3"}, "people"},
		{"broken total", counts([]any{"A", 2002, 3, 40, 5, 41.5}), []string{"error C2 F3"}, "whole"},
		{"no sd", means([]any{"A", 1, 0, 30, 3, 4, 31}), []string{"error M6 C3"}, "standard deviation"},
		{"negative sd", means([]any{"A", 1, 2, 30, 3, -4, 31}), []string{"error M6 F3"}, "cannot be below 0"},
		{"no se", results([]any{"A", 0.5, "", "", "", 0}), []string{"error M6 F3"}, "standard error"},
		{"negative se", results([]any{"A", 0.5, "", "", "", -1}), []string{"error M6 F3"}, "cannot be below 0"},
		{"limits swapped", results([]any{"A", 0.5, 1, 0.25}), []string{"error I1 C3"}, "swapped"},
		{"limits equal", results([]any{"A", 0.5, 0.25, 0.25}), []string{"error I1 C3"}, "both limits are 0.25"},
		{"estimate outside", results([]any{"A", 1.5, 0.25, 1}), []string{"error I1 B3"}, "outside"},
		{"ratio below zero", results([]any{"A", -0.22, "", "", "", 0.1}), []string{"error I4 B3"}, "logarithm"},
		{"level as percentage", results([]any{"A", 0.5, 0.25, 1, 95}), []string{"error I6 E3"}, "95% is written 0.95"},
		{"level of nought", results([]any{"A", 0.5, 0.25, 1, 0}), []string{"error I6 E3"}, "fraction"},
		{"bound of p", results([]any{"A", 0.5, 0.25, 1, "", "", "<0.001"}), []string{"warning F6 G3"}, "bound"},
		{"p above one", results([]any{"A", 0.5, 0.25, 1, "", "", 1.5}), []string{"error I8 G3"}, "p-value"},
		{"total row", counts([]any{"Total (95% CI)", "", 3, 40, 5, 41}), []string{"error F10 A3"}, "total"},
		{"pooled row", counts([]any{"Pooled estimate", "", 3, 40, 5, 41}), []string{"error F10 A3"}, "total"},
		{"no name", counts([]any{"", 2002, 3, 40, 5, 41}), []string{"error F9 A3"}, "names no study"},
		{"no number", counts([]any{"A", 2002}), []string{"error F9 3:3"}, "no number"},
		{"heading", counts([]any{"Drug X"}, []any{"B", 2002, 3, 40, 5, 41}), []string{"error F9 3:3"}, "if it is a heading"},
		{"level of the header", table{{"study", "HR", "90% CI low", "90% CI high"}, {"A", 0.8, 0.6, 1.07}}, []string{"note I6 C:C"}, "a 90% interval"},
		{"usual level of the header", table{{"study", "HR", "95% CI low", "95% CI high"}, {"A", 0.8, 0.6, 1.07}}, nil, ""},
		{"same row twice", counts([]any{"Good", 2001, 3, 40, 5, 41}), []string{"error D1 A3"}, "row 2"},
		{"same name twice", counts([]any{"Good", 2001, 4, 40, 5, 41}), []string{"warning D5 A3"}, "row 2"},
		{"same row in other letters", counts([]any{" GOOD. ", 2001, 3, 40, 5, 41}), []string{"error D1 A3"}, "row 2"},
		{"same name in other letters", counts([]any{"(good)", 2001, 4, 40, 5, 41}), []string{"warning D5 A3"}, `row 2 too as "Good"`},
		{"same name, another year", counts([]any{"Good", 2004, 4, 40, 5, 41}), nil, ""},
		{"same row, another year", counts([]any{"Good", 2004, 3, 40, 5, 41}), []string{"error D1 A3"}, "row 2"},
		{"same name in one of two years", counts([]any{"Good", 2004, 4, 40, 5, 41}, []any{"good", 2004, 6, 40, 5, 41}), []string{"warning D5 A4"}, "row 3"},
		{"sum of the others", counts([]any{"B", 2002, 7, 50, 9, 51}, []any{"Both", "", 10, 90, 14, 92}), []string{"error F10 A4"}, "other 2 rows"},
		{"sum of the others but one", counts([]any{"B", 2002, 7, 50, 9, 51}, []any{"Both", "", 10, 90, 14, 94}), nil, ""},
		{"sum beside a total by name", counts([]any{"B", 2002, 7, 50, 9, 51}, []any{"Total", "", 10, 90, 14, 92}), []string{"error F10 A4"}, "total of other rows"},
		{"sum accepted", counts([]any{"B", 2002, 7, 50, 9, 51}, []any{"Both", "", 10, 90, 14, 92, "F10 a chance"}), []string{"error F10 A4 accepted"}, ""},
		{"count with a decimal point proved", counts([]any{"A", 2002, "2.000", 40, 5, 41}, []any{"B", 2002, "2.5", 40, 5, 41}), []string{"error C2 C4"}, "whole"},
		{"count with a short point", counts([]any{"A", 2002, "2.0", 40, 5, 41}), nil, ""},
		{"second table", counts([]any{"Study", "Year", "Events treated", "Total treated", "Mean control", "SD control"}, []any{"B", 2001, 3, 40, 5, 41}),
			[]string{"error F9 3:3"}, "A3:F4"},
		{"header repeated", counts([]any{"study", "year", "events treated", "total treated", "events control", "total control", "accept"}, []any{"B", 2001, 3, 40, 5, 41}),
			[]string{"note F9 3:3"}, "repeated"},
		{"header repeated below a gap", counts([]any{}, []any{"study", "year", "events treated", "total treated", "events control", "total control", "accept"}, []any{"B", 2001, 3, 40, 5, 41}),
			[]string{"warning F9 4:4"}, "another outcome"},
		{"header repeated below a title", counts([]any{"Deaths"}, []any{"study", "year", "events treated", "total treated", "events control", "total control", "accept"}, []any{"B", 2001, 3, 40, 5, 41}),
			[]string{"error F9 3:3", "warning F9 4:4"}, "heading"},
		{"narrow second table", counts([]any{}, []any{"Study", "mean difference", "se"}, []any{"B", 1.5, 0.5}),
			[]string{"error F9 4:4"}, "A4:C5"},
		{"study of that name", counts([]any{"Trial", 2001, 3, 40, 5, 41}), nil, ""},
		{"accepted", counts([]any{"A", 2002, 3.5, 40, 5, 41, "C2 corrected for clusters"}), []string{"error C2 C3 accepted"}, ""},
		{"accepted with colon, two rules", counts([]any{"A", 2002, 3.5, 40, 42, 41, "C2: clusters; c1: recurrent events"}), []string{"error C2 C3 accepted", "error C1 E3", "warning F9 G3"}, ""},
		{"accepted with a semicolon in the reason", counts([]any{"A", 2002, 3.5, 40, 5, 41, "C2 asked the author; corrected for clusters"}), []string{"error C2 C3 accepted"}, ""},
		{"accepted without reason", counts([]any{"A", 2002, 3.5, 40, 5, 41, "C2"}), []string{"error C2 C3", "warning F9 G3"}, ""},
		{"accepted in vain", counts([]any{"A", 2002, 3, 40, 5, 41, "F6 fine"}), []string{"note F9 G3"}, "nothing to accept"},
		{"accepted no rule", counts([]any{"A", 2002, 3, 40, 5, 41, "all fine"}), []string{"note F9 G3"}, "names no rule"},
		{"accepted without a rule", counts([]any{"A", 2002, 3.5, 40, 42, 41, "author; confirmed"}), []string{"error C2 C3", "error C1 E3", "note F9 G3"}, `accept it by writing "C2 reason" in the accept column`},
		{"accepted by a rule that is none", counts([]any{"A", 2002, 3, 40, 5, 41, "Z3 fine; C99 fine"}), []string{"warning F9 G3", "warning F9 G3"}, "no rule"},
		{"accepted with a comma", counts([]any{"A", 2002, 3.5, 40, 5, 41, "c2, corrected"}), []string{"error C2 C3 accepted"}, ""},
		{"accepted in vain again", counts([]any{"A", 2002, 3, 0, 5, 41, "C1 they said so"}), []string{"error C1 D3", "warning F9 G3"}, "write how many were analysed"},
		{"accepted twin", counts([]any{"Good", 2001, 3, 40, 5, 41, "D1 another trial of that name"}), []string{"error D1 A3 accepted"}, ""},
	} {
		t.Run(tt.name, func(t *testing.T) {
			for name, data := range map[string][]byte{"a.csv": tt.rows.csv(t), "a.xlsx": tt.rows.xlsx(t)} {
				x := mustRead(t, data, name, Options{})
				if got := said(x); !slices.Equal(got, tt.want) {
					t.Errorf("%s: findings %q, want %q", name, got, tt.want)
				}
				if len(x.Findings) > 0 && !strings.Contains(x.Findings[0].Message, tt.word) {
					t.Errorf("%s: %q lacks %q", name, x.Findings[0].Message, tt.word)
				}
				for _, f := range x.Findings {
					if f.Place.File != name || strings.Contains(f.Message, name) || f.Message == "" {
						t.Errorf("%s: place %+v, message %q", name, f.Place, f.Message)
					}
				}
			}
		})
	}
}

// TestUnreadableIsNotZero keeps blank, missing and unreadable apart from 0.
func TestUnreadableIsNotZero(t *testing.T) {
	rows := counts([]any{"A", 2002, "<3", 40, nil, 41}, []any{"B", 2002, 0, 40, 0, 41})
	x := mustRead(t, rows.csv(t), "a.csv", Options{})
	for _, f := range []review.Field{review.EventsTreated, review.EventsControl, review.MeanTreated} {
		if n, ok := x.Studies[1].Number(f); ok {
			t.Errorf("%s of the row without it is %v", f, n.Value)
		}
	}
	if n, ok := x.Studies[2].Number(review.EventsTreated); !ok || n.Value != 0 {
		t.Errorf("a 0 is not kept: %v %v", n.Value, ok)
	}
}

// TestPlaceKeepsText keeps a cell's text as stored beside its number.
func TestPlaceKeepsText(t *testing.T) {
	x := mustRead(t, []byte("study,y,se\nA, −0·50 ,0.250\n"), "a.csv", Options{})
	n := x.Studies[0].Numbers
	if n[0].Value != -0.5 || n[0].Place.Text != " −0·50 " || n[1].Place.Text != "0.250" || n[1].Place.In(x.Studies[0].Row).String() != "a.csv!C2" {
		t.Errorf("numbers %+v", n)
	}
	if got := said(x); !slices.Equal(got, []string{"note F5 B2"}) {
		t.Errorf("findings %q", got)
	}
}

// TestDecimalMarks decides by column what a comma means.
func TestDecimalMarks(t *testing.T) {
	for _, tt := range []struct {
		name, text string
		want       []string
		value      float64 // of the first number of the first row
	}{
		{"comma", "study;y;se\nA;0,5;0,25\nB;1,125;1\n", []string{"note F3 B:B", "note F3 C:C"}, 0.5},
		{"ambiguous", "study;y;se\nA;1;1\nB;1,234;1\n", []string{"warning F3 B:B", "error F3 B3"}, 1},
		{"thousands", "study;y;se\nA;1,234;1\nB;1,234,567;1\n", nil, 1234},
		{"mixed", "study;y;se\nA;1;1\nB;0,5;1\nC;0.5;1\n", []string{"error F4 B3", "error F4 B4"}, 1},
	} {
		x := mustRead(t, []byte(tt.text), "a.csv", Options{})
		got := slices.DeleteFunc(said(x), func(s string) bool { return s == "note F5 " }) // the delimiter
		if !slices.Equal(got, tt.want) {
			t.Errorf("%s: findings %q, want %q", tt.name, got, tt.want)
		}
		if v := x.Studies[0].Numbers[0].Value; v != tt.value {
			t.Errorf("%s: read as %v, want %v", tt.name, v, tt.value)
		}
	}
}

// TestRaggedRow refuses a row with more cells than the header.
func TestRaggedRow(t *testing.T) {
	x := mustRead(t, []byte("study,y,se\nA,1,1\nSmith, J,1,1\n"), "a.csv", Options{})
	if got := said(x); !slices.Contains(got, "error F9 D3") {
		t.Errorf("findings %q", got)
	}
}

// TestTwinHeaders refuses two columns for one number, naming both, and lets a
// choice settle it.
func TestTwinHeaders(t *testing.T) {
	rows := table{{"study", "odds ratio", "OR", "se", "note", "comment"}, {"A", 0.5, 0.6, 0.25, "x", "y"}}
	x := mustRead(t, rows.csv(t), "a.csv", Options{})
	if got := said(x); !slices.Equal(got, []string{"error F9 C:C", "warning F9 F:F"}) {
		t.Errorf("findings %q", got)
	}
	if m := x.Findings[0].Message; !strings.Contains(m, `"odds ratio" (column B)`) || !strings.Contains(m, `"OR" (column C)`) {
		t.Errorf("message %q", m)
	}
	x = mustRead(t, rows.csv(t), "a.csv", Options{Columns: map[string]string{"estimate": "OR"}})
	if n, _ := x.Studies[0].Number(review.Estimate); n.Value != 0.6 || x.Studies[0].Measure.String() != "odds ratio" {
		t.Errorf("estimate %v (%s), want 0.6 (odds ratio)", n.Value, x.Studies[0].Measure)
	}
}

// TestWorkbookCells finds the faults that only a workbook's cells can have.
func TestWorkbookCells(t *testing.T) {
	f := excelize.NewFile()
	defer f.Close()
	counts([]any{"A", 2002, 1, 40, 5, 41}, []any{"B", 2002, 2, 40, 5, 41}, []any{"C", 2002, nil, 40, 5, 41}, []any{"D", 2002, 4, 40, 5, 41},
		[]any{nil, 2002, 6, 40, 5, 41}, []any{"F", 2002, 7, 40, 5, 41}).fill(t, f, "Sheet1")
	style, err := f.NewStyle(&excelize.Style{NumFmt: 14})
	for _, step := range []error{err,
		f.SetCellValue("Sheet1", "C3", time.Date(2016, 12, 3, 0, 0, 0, 0, time.UTC)),
		f.SetCellStyle("Sheet1", "C3", "C3", style),
		f.SetCellBool("Sheet1", "C4", true),
		f.SetCellFormula("Sheet1", "C5", "1+2"),
		f.MergeCell("Sheet1", "A6", "A7"),
		f.MergeCell("Sheet1", "E6", "E7"),
		f.SetRowVisible("Sheet1", 8, false),
		f.SetColVisible("Sheet1", "F", false),
	} {
		if step != nil {
			t.Fatal(step)
		}
	}
	x := mustRead(t, saved(t, f), "a.xlsx", Options{})
	want := []string{"warning F9 F:F", "note F9 A6", "error F1 C3", "error F6 C4", "error F9 C5", "error F9 E6", "error F9 E7", "warning F9 8:8", "warning D5 A7"}
	if got := said(x); !slices.Equal(got, want) {
		t.Errorf("findings\n %q, want\n %q", got, want)
	}
	if got := x.Studies[5].Name; got != "D" {
		t.Errorf("the merged name reads %q, want D", got)
	}
}

// TestErrorValueCell refuses the stored error of a formula.
func TestErrorValueCell(t *testing.T) {
	x := mustRead(t, withErrorCell(t), "a.xlsx", Options{})
	if got := said(x); !slices.Equal(got, []string{"error F9 B2"}) {
		t.Errorf("findings %q", got)
	}
	if f := x.Findings[0]; f.Place.Text != "#DIV/0!" || !strings.Contains(f.Message, "#DIV/0!") {
		t.Errorf("%+v", f)
	}
}

// TestDates reads dates of every length, from text and from date cells.
func TestDates(t *testing.T) {
	rows := table{{"study", "date", "y", "se"}, {"A", 2004, 1, 1}, {"B", "2004-08", 1, 2}, {"C", "2004-08-15", 1, 3}, {"D 2004", "2004b", 1, 4}, {"E", "2004b", 1, 5},
		{"F", time.Date(2004, 8, 15, 0, 0, 0, 0, time.UTC), 1, 6}, {"G", "2004-02-30", 1, 7}, {"H", "15.8.04", 1, 8}}
	x := mustRead(t, rows.xlsx(t), "a.xlsx", Options{})
	var got []string
	for _, s := range x.Studies {
		got = append(got, s.Name+" "+s.Date.String())
	}
	want := []string{"A 2004", "B 2004-08", "C 2004-08-15", "D 2004b 2004", "E 2004b 2004", "F 2004-08-15", "G ", "H "}
	if !slices.Equal(got, want) {
		t.Errorf("got %q, want %q", got, want)
	}
	if got := said(x); !slices.Equal(got, []string{"note F12 B5", "note F12 B6", "warning F12 B8", "warning F12 B9"}) {
		t.Errorf("findings %q", got)
	}
}

// TestOneOutcomeInTwoSpellings does not split an outcome at its capitals.
func TestOneOutcomeInTwoSpellings(t *testing.T) {
	rows := table{{"study", "outcome", "y", "se"}, {"A", "Death", 1, 1}, {"B", "death ", 2, 1}, {"C", nil, 2, 1}}
	x := mustRead(t, rows.csv(t), "a.csv", Options{})
	if got := x.Outcomes(); !slices.Equal(got, []string{"Death", ""}) {
		t.Errorf("outcomes %q", got)
	}
	if got := said(x); !slices.Equal(got, []string{"note F9 B3", "error F9 B4"}) {
		t.Errorf("findings %q", got)
	}
}

// TestYearBesideDate wants filters on the year to look at the year's own column,
// and the year to stand in for a date that is missing or cannot be read.
func TestYearBesideDate(t *testing.T) {
	data := dated([]any{"A", 2001, "2005-03-04", 1, 2}, []any{"B", 2005, "5/6/2005", 1, 2}, []any{"C", 1999, "", 1, 2}, []any{"D", "", "2004-02", 1, 2}).csv(t)
	x := mustRead(t, data, "a.csv", Options{})
	for i, want := range []struct{ year, date string }{{"2001", "2005-03-04"}, {"2005", "2005"}, {"1999", "1999"}, {"2004", "2004-02"}} {
		s := &x.Studies[i]
		if got := s.Cell("year"); got != want.year {
			t.Errorf("%s: year %q, want %q", s.Name, got, want.year)
		}
		if got := s.Date.String(); got != want.date || s.Cell("date") != want.date {
			t.Errorf("%s: date %q, want %q", s.Name, got, want.date)
		}
	}
}
