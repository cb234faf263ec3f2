package formula

import (
	"math"
	"strings"
	"testing"
)

// grid is one sheet for tests: column A holds 1, 2, 3, B holds 10, 20, 30, C1 a text.
type grid struct{}

func (grid) Values(r Range) []Value {
	var all []Value
	for row := r.From.Row; row <= r.To.Row; row++ {
		for col := r.From.Col; col <= r.To.Col; col++ {
			switch {
			case col == 1 && row <= 3:
				all = append(all, Number(float64(row)))
			case col == 2 && row <= 3:
				all = append(all, Number(float64(10*row)))
			case col == 3 && row == 1:
				all = append(all, Text("yes"))
			default:
				all = append(all, Number(0))
			}
		}
	}
	return all
}

func (grid) Named(name string) (Range, bool) {
	return Range{Cell{Col: 1, Row: 1}, Cell{Col: 1, Row: 3}}, name == "y_1"
}

// TestEvaluate: arithmetic follows the precedence of spreadsheets, where a sign binds
// closer than a power; quantiles and tails are those of printed tables (to their
// digits), factorials and closed forms.
func TestEvaluate(t *testing.T) {
	for text, want := range map[string]float64{
		"1+2*3^2":                          19,
		"-2^2":                             4,
		"2^-1":                             0.5,
		"(1+2)*3-4/2":                      7,
		"1E-3*1000":                        1,
		"A1+$B$2":                          21,
		"'other sheet'!B3/3":               10,
		"SUM(A1:A3)":                       6,
		"SUM(A1:B3)":                       66,
		"SUMPRODUCT(A1:A3,B1:B3)":          140,
		"SUMPRODUCT((A1:A3<>2)*B1:B3)":     40,
		"SUMPRODUCT((y_1<=2)*1/(y_1+1)^2)": 1./4 + 1./9,
		"SUMPRODUCT((y_1-SUM(y_1)/3)^2)":   2,
		"MAX(0,-1,A1:A3)":                  3,
		"MIN(0,-1)":                        -1,
		"IF(A1=1,5,1/0)":                   5,
		"IF(OR(A1=2,A2=2),1,0)":            1,
		"IF(AND(A1=1,A2=3),1,0)":           0,
		`IF(C1="yes",1,2)`:                 1,
		"COUNT(y_1)":                       3,
		"INDEX(B1:B3,2)":                   20,
		"GAMMALN(5)":                       math.Log(24),
		"EXP(LN(7))":                       7,
		"ABS(-3)*SIGN(-2)":                 -3,
		"SIN(PI()/2)+ASIN(1)*2/PI()":       2,
		"TANH(ATANH(0.5))":                 0.5,
		"SQRT(16)":                         4,
		"NORMSINV(0.975)":                  1.959963984540054,
		"NORMSINV(0.025)":                  -1.959963984540054,
		"NORMSDIST(-1.959963984540054)":    0.025,
		"TINV(0.05,2)":                     0.95 * math.Sqrt(2/(1-0.95*0.95)),
		"TDIST(1,1,2)":                     0.5,
		"CHIINV(0.05,1)":                   3.841458820694124,
		"CHIDIST(3.841458820694124,1)":     0.05,
		"CHIDIST(2,2)":                     math.Exp(-1),
	} {
		e, err := Parse(text)
		if err != nil {
			t.Errorf("%s: %v", text, err)
			continue
		}
		v, err := e.Evaluate(grid{})
		if err != nil || v.IsText || math.Abs(v.Number-want) > 1e-13*math.Max(1, math.Abs(want)) {
			t.Errorf("%s is %+v, %v; want %v", text, v, err, want)
		}
	}
}

func TestEvaluateText(t *testing.T) {
	for text, want := range map[string]string{
		`IF(A1<2,"faint","fair")`: "faint",
		`"a ""b"""&C1`:            `a "b"yes`,
	} {
		e, err := Parse(text)
		if err != nil {
			t.Fatal(err)
		}
		if v, err := e.Evaluate(grid{}); err != nil || v.Text != want {
			t.Errorf("%s is %+v, %v; want %q", text, v, err, want)
		}
	}
}

// TestErrors: what a spreadsheet program would show as an error is one.
func TestErrors(t *testing.T) {
	for _, text := range []string{"1/0", "LN(0)", "SQRT(-1)", "NORMSINV(1)", "C1+1", "SUMPRODUCT(A1:A3,B1:B2)", "unknown_name", "NOFUNCTION(1)", "INDEX(A1:A3,4)", "GAMMALN(0)", "IF(A1:A3,1,2)", "TDIST(1,2,1)"} {
		e, err := Parse(text)
		if err == nil {
			_, err = e.Evaluate(grid{})
		}
		if err == nil {
			t.Errorf("%s has a value", text)
		}
	}
}

func TestParseErrors(t *testing.T) {
	for _, text := range []string{"", "1+", "(1", `"open`, "SUM(1", "1 2", "#REF!", "A1:", "'sheet", "1..2"} {
		if _, err := Parse(text); err == nil || !strings.HasPrefix(err.Error(), "formula") {
			t.Errorf("%q: %v", text, err)
		}
	}
}

// FuzzParse: no text makes the reader or the evaluator panic.
func FuzzParse(f *testing.F) {
	for _, text := range []string{"SUM(A1:A3)", "'a''b'!B2", "-2^-3", `IF(1,"x",y_1)`, "MAX()"} {
		f.Add(text)
	}
	f.Fuzz(func(t *testing.T, text string) {
		if e, err := Parse(text); err == nil {
			_, _ = e.Evaluate(grid{})
		}
	})
}
