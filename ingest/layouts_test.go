package ingest

import (
	"slices"
	"testing"

	"steelyard/meta/review"
)

// TestLayoutsOfCounts reads one table in the layouts that reviewers use, as text
// and as workbook, and wants the same studies.
func TestLayoutsOfCounts(t *testing.T) {
	a := []any{"Halvorsen 2009", 2009, 11, 41, 19, 40, "high"}
	b := []any{"Okwuosa 2012", 2012, 2, 17, 7, 18, "some concerns"}
	want := []string{
		"Halvorsen 2009||2009||unspecified||events treated=11|total treated=41|events control=19|total control=40|risk of bias: high",
		"Okwuosa 2012||2012||unspecified||events treated=2|total treated=17|events control=7|total control=18|risk of bias: some concerns",
	}
	for _, layout := range []struct {
		name   string
		rows   table
		merges []string
	}{
		{"field names", table{{"study", "date", "events treated", "total treated", "events control", "total control", "risk of bias"}, a, b}, nil},
		{"case and punctuation", table{{"STUDY", "Year", "Events_Treated", "Total (treated)", "events-control", "  Total.Control ", "Risk-of-Bias"}, a, b}, nil},
		{"trade words", table{{"First author", "Year of publication", "Events, intervention", "n (intervention)", "Placebo events", "Placebo n", "RoB"}, a, b}, nil},
		{"title rows", table{{"A review of nothing"}, {}, {"made up", "", "2 rows"}, {"Trial", "Year", "Events treatment", "N treatment", "Events control", "N control", "Risk of bias"}, a, b}, nil},
		{"two rows with groups", table{
			{"Study", "Year", "Treated", nil, "Control", nil, "Risk of bias"},
			{nil, nil, "Events", "Total", "Events", "Total"}, a, b},
			[]string{"A1:A2", "B1:B2", "C1:D1", "E1:F1", "G1:G2"}},
		{"two rows, rest in the lower", table{
			{"A review"},
			{nil, nil, "Intervention", nil, "Usual care"},
			{"Study", "Year", "n", "N", "n", "N", "Risk of bias"}, a, b},
			[]string{"C2:D2", "E2:F2"}},
		{"arms named by the reviewer", table{
			{"Study", "Year", "Brindle", nil, "Without", nil, "Risk of bias"},
			{nil, nil, "Events", "Total", "Events", "Total"}, a, b},
			[]string{"C1:D1", "E1:F1"}},
		{"quantities over arms", table{
			{"Study", "Year", "Events", nil, "Total", nil, "Risk of bias"},
			{nil, nil, "Brindle", "Nothing", "Brindle", "Nothing"},
			{a[0], a[1], a[2], a[4], a[3], a[5], a[6]}, {b[0], b[1], b[2], b[4], b[3], b[5], b[6]}},
			[]string{"C1:D1", "E1:F1"}},
		{"row of units", table{
			{"Study", "Year", "Events treated", "Total treated", "Events control", "Total control", "Risk of bias"},
			{nil, nil, "people", "people", "people", "people"}, a, b}, nil},
		{"footnote below", table{
			{"Study", "Year", "Events treated", "Total treated", "Events control", "Total control", "Risk of bias"},
			a, b, {}, {"* all numbers are made up"}}, nil},
	} {
		t.Run(layout.name, func(t *testing.T) {
			for name, data := range map[string][]byte{"trials.csv": layout.rows.csv(t), "trials.xlsx": layout.rows.xlsx(t, layout.merges...)} {
				x := mustRead(t, data, name, Options{})
				if got := lines(x); !slices.Equal(got, want) {
					t.Errorf("%s:\n got %q\nwant %q", name, got, want)
				}
				for _, f := range x.Findings {
					if f.Severity != review.Note {
						t.Errorf("%s: %s at %s: %s", name, f.Severity, f.Place, f.Message)
					}
				}
			}
		})
	}
}

// TestSwappedArms lets a word such as "without" in the first group make it the
// control arm.
func TestSwappedArms(t *testing.T) {
	rows := table{
		{"Study", "Without brindle", nil, "Brindle", nil},
		{nil, "Events", "Total", "Events", "Total"},
		{"A", 19, 40, 11, 41},
	}
	want := []string{"A||||unspecified||events treated=11|total treated=41|events control=19|total control=40"}
	for name, data := range map[string][]byte{"a.csv": rows.csv(t), "a.xlsx": rows.xlsx(t, "B1:C1", "D1:E1")} {
		x := mustRead(t, data, name, Options{})
		if got := lines(x); !slices.Equal(got, want) {
			t.Errorf("%s: %q, want %q", name, got, want)
		}
		if got := said(x); !slices.Equal(got, []string{"note F9 1:1"}) {
			t.Errorf("%s: the guess of the arms is not said: %q", name, got)
		}
	}
}

// TestKindsOfNumbers reads the other sets of number columns.
func TestKindsOfNumbers(t *testing.T) {
	for _, tt := range []struct {
		name string
		rows table
		want string
	}{
		{"means", table{{"Study", "Mean treated", "SD treated", "N treated", "Mean control", "SD control", "N control"}, {"A", 1.5, 2, 30, 1.25, 2.5, 31}},
			"A||||unspecified||total treated=30|total control=31|mean treated=1.5|sd treated=2|mean control=1.25|sd control=2.5"},
		{"means with standard errors", table{{"Study", "Mean treated", "SEM treated", "N treated", "Mean control", "Standard error control", "N control"}, {"A", 1.5, 0.2, 30, 1.25, 0.25, 31}},
			"A||||unspecified||total treated=30|total control=31|mean treated=1.5|se treated=0.2|mean control=1.25|se control=0.25"},
		{"estimate and se", table{{"Study", "Estimate", "Standard error"}, {"A", 28, 15}}, "A||||unspecified||estimate=28|se=15"},
		{"analysis scale", table{{"study", "y", "se"}, {"A", -0.5, 0.25}}, "A||||unspecified||analysis estimate=-0.5|se=0.25"},
		{"ratio with limits", table{{"Study", "Hazard ratio", "Lower 95% CI", "Upper 95% CI"}, {"A", 0.71, 0.49, 1.02}},
			"A||||hazard ratio||estimate=0.71|ci low=0.49|ci high=1.02|ci level=0.95"},
		{"limits that name the measure", table{{"Study", "OR", "OR 90% CI low", "OR 90% CI high"}, {"A", 0.71, 0.49, 1.02}},
			"A||||odds ratio||estimate=0.71|ci low=0.49|ci high=1.02|ci level=0.9"},
		{"logarithm of a ratio", table{{"Study", "ln(OR)", "SE(lnOR)"}, {"A", -0.5, 0.25}}, "A||||odds ratio||analysis estimate=-0.5|se=0.25"},
		{"logarithm with plain limits", table{{"Study", "log risk ratio", "lower limit", "upper limit"}, {"A", -0.5, -1, 0}},
			"A||||risk ratio||analysis estimate=-0.5|analysis ci low=-1|analysis ci high=0"},
		{"level in a column", table{{"Study", "SMD", "CI low", "CI high", "CI level"}, {"A", 0.5, 0.1, 0.9, 0.9}},
			"A||||standardised mean difference||estimate=0.5|ci low=0.1|ci high=0.9|ci level=0.9"},
		{"estimate and p", table{{"Study", "Mean difference", "P-value"}, {"A", 0.5, 0.04}}, "A||||mean difference||estimate=0.5|p=0.04"},
		{"measure in a column", table{{"Study", "Effect", "SE", "Measure", "Better"}, {"A", 0.5, 0.1, "HR", "lower is better"}},
			"A||||hazard ratio|lower|estimate=0.5|se=0.1"},
		{"logged measure in a column", table{{"Study", "Effect", "SE", "Measure"}, {"A", -0.5, 0.1, "log odds ratio"}},
			"A||||odds ratio||analysis estimate=-0.5|se=0.1"},
	} {
		t.Run(tt.name, func(t *testing.T) {
			for name, data := range map[string][]byte{"a.csv": tt.rows.csv(t), "a.xlsx": tt.rows.xlsx(t)} {
				if got := lines(mustRead(t, data, name, Options{})); !slices.Equal(got, []string{tt.want}) {
					t.Errorf("%s:\n got %q\nwant %q", name, got, tt.want)
				}
			}
		})
	}
}

// TestFiveOutcomes keeps the outcomes of one sheet apart, in their order.
func TestFiveOutcomes(t *testing.T) {
	rows := table{{"Study", "Outcome", "Effect", "SE"}}
	outcomes := []string{"death", "stroke", "pain", "quality of life", "serious harm"}
	for _, study := range []string{"A", "B", "C"} {
		for i, outcome := range outcomes {
			rows = append(rows, []any{study, outcome, float64(i) + 0.5, 0.25})
		}
	}
	for name, data := range map[string][]byte{"a.csv": rows.csv(t), "a.xlsx": rows.xlsx(t)} {
		x := mustRead(t, data, name, Options{})
		if got := x.Outcomes(); !slices.Equal(got, outcomes) {
			t.Errorf("%s: outcomes %q, want %q", name, got, outcomes)
		}
		if len(x.Studies) != 15 || len(x.Findings) != 0 {
			t.Errorf("%s: %d studies and findings %q, want 15 and none", name, len(x.Studies), said(x))
		}
		for i, s := range x.Studies {
			if s.Row.Row != i+2 || s.Numbers[0].Place.Row != i+2 || s.Numbers[0].Place.Col != 3 {
				t.Errorf("%s: study %d has the place %s and its estimate %s", name, i, s.Row, s.Numbers[0].Place)
			}
		}
	}
}

// TestStoredDigits takes a workbook's numbers as stored, not as shown.
func TestStoredDigits(t *testing.T) {
	rows := table{{"study", "y", "se"}, {"A", -0.93869414087, 0.25}}
	x := mustRead(t, rows.xlsx(t), "a.xlsx", Options{})
	if n := x.Studies[0].Numbers[0]; n.Value != -0.93869414087 || n.Place.Text != "-0.93869414087" {
		t.Errorf("%v as %q", n.Value, n.Place.Text)
	}
}

// TestStudyID takes the identifier for the name when nothing else names the study.
func TestStudyID(t *testing.T) {
	x := mustRead(t, []byte("Study ID,y,se\nA 17,1,1\n"), "a.csv", Options{})
	if got := lines(x); !slices.Equal(got, []string{"A 17||||unspecified||analysis estimate=1|se=1"}) {
		t.Errorf("alone: %q", got)
	}
	x = mustRead(t, []byte("Study ID,Study,y,se\n17,A,1,1\n"), "a.csv", Options{})
	if got := lines(x); !slices.Equal(got, []string{"A|17|||unspecified||analysis estimate=1|se=1"}) {
		t.Errorf("beside a name: %q", got)
	}
}

// TestGroupEndsWithItsMerge keeps a group from reaching over a column beside it.
func TestGroupEndsWithItsMerge(t *testing.T) {
	rows := table{{"Study", "Result", nil, nil}, {nil, "Estimate", "SE", "Latitude"}, {"A", 1, 2, 3}}
	x := mustRead(t, rows.xlsx(t, "B1:C1"), "a.xlsx", Options{})
	if got := lines(x); !slices.Equal(got, []string{"A||||unspecified||estimate=1|se=2|Latitude: 3"}) {
		t.Errorf("%q", got)
	}
}

// TestColumns lists the columns as they were understood.
func TestColumns(t *testing.T) {
	rows := table{{"Trial", "Treated", nil, "Control", nil, "Latitude"}, {nil, "Events", "N", "Events", "N"}, {"A", 1, 20, 2, 21, 44}}
	for name, data := range map[string][]byte{"a.csv": rows.csv(t), "a.xlsx": rows.xlsx(t, "A1:A2", "B1:C1", "D1:E1", "F1:F2")} {
		var got []string
		for _, c := range mustRead(t, data, name, Options{}).Columns {
			got = append(got, c.Header+" = "+c.Field.String()+" "+c.Place.Cell())
		}
		want := []string{"Trial = study A1", "Treated Events = events treated B2", "Treated N = total treated C2", "Control Events = events control D2", "Control N = total control E2", "Latitude =  F1"}
		if !slices.Equal(got, want) {
			t.Errorf("%s: %q, want %q", name, got, want)
		}
	}
}
