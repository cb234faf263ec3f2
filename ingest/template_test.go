package ingest

import (
	"bytes"
	"context"
	"errors"
	"slices"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"

	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// everyTemplate calls try for each measure with each kind of numbers, and with
// all its kinds at once.
func everyTemplate(t *testing.T, try func(t *testing.T, m effect.Measure, kinds []Kind, data []byte)) {
	tried := 0
	for _, name := range effect.MeasureNames() {
		m, err := effect.ParseMeasure(name)
		if err != nil {
			t.Fatal(err)
		}
		sets := [][]Kind{KindsOf(m)}
		for _, k := range KindsOf(m) {
			sets = append(sets, []Kind{k})
		}
		for _, kinds := range sets {
			data, err := Template(m, kinds...)
			if err != nil {
				t.Fatalf("%s from %v: %v", m, kinds, err)
			}
			tried++
			try(t, m, kinds, data)
		}
	}
	if tried < 2*len(effect.MeasureNames()) {
		t.Errorf("%d templates were tried, too few", tried)
	}
}

// opened opens a workbook with the library that writes it.
func opened(t testing.TB, data []byte) *excelize.File {
	t.Helper()
	f, err := excelize.OpenReader(bytes.NewReader(data))
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { _ = f.Close() })
	return f
}

// fill writes a study into each of the rows given, with the examples of the help
// as texts and the values as numbers, and returns the workbook.
func fill(t testing.TB, data []byte, m effect.Measure, kinds []Kind, rows ...int) []byte {
	t.Helper()
	f := opened(t, data)
	fields, err := templateFields(m, kinds)
	if err != nil {
		t.Fatal(err)
	}
	for i, row := range rows {
		for col, field := range fields {
			cell := cellAt(col+1, row)
			switch value, isNumber := handValues[field]; {
			case isNumber:
				err = f.SetCellValue(studiesSheet, cell, value)
			case field == review.StudyName:
				err = f.SetCellStr(studiesSheet, cell, "Trial "+string(rune('A'+i)))
			case field != review.Accept:
				err = f.SetCellStr(studiesSheet, cell, helpFor(field, m).example)
			}
			if err != nil {
				t.Fatal(err)
			}
		}
	}
	return saved(t, f)
}

// handValues are numbers that go together and suit every measure.
var handValues = map[review.Field]float64{
	review.EventsTreated: 12, review.TotalTreated: 60, review.EventsControl: 20, review.TotalControl: 61, review.Events: 32, review.Total: 121,
	review.PersonTimeTreated: 120.5, review.PersonTimeControl: 118, review.PersonTime: 238.5,
	review.MeanTreated: 4.25, review.SDTreated: 2.1, review.SETreated: 0.27, review.MeanControl: 5, review.SDControl: 2.3, review.SEControl: 0.29,
	review.BaselineMeanTreated: 6.1, review.BaselineSDTreated: 2, review.BaselineMeanControl: 6, review.BaselineSDControl: 2.2,
	review.MedianTreated: 4, review.Q1Treated: 2.5, review.Q3Treated: 5.5, review.MinTreated: 0.5, review.MaxTreated: 9,
	review.MedianControl: 5, review.Q1Control: 3.5, review.Q3Control: 6.5, review.MinControl: 1, review.MaxControl: 10,
	review.WithinCorrelation: 0.6, review.SDDifference: 1.9, review.Coefficient: 0.31, review.ObservedMinusExpected: -5.2, review.Variance: 7.9,
	review.Estimate: 0.71, review.StandardError: 0.12, review.LimitLow: 0.49, review.LimitHigh: 0.98, review.LimitLevel: 0.9,
	review.TestStatistic: -2.4, review.PValue: 0.03, review.PSides: 2, review.ClusterSize: 18.5, review.ICC: 0.02, review.DesignEffect: 1.35,
	review.RandomisedTreated: 63, review.RandomisedControl: 62, review.ReportedEstimate: 0.61, review.ReportedLow: 0.33, review.ReportedHigh: 0.93, review.ReportedP: 0.11,
}

// TestTemplateFilledInByHandHasNoFinding: whatever the measure and the numbers,
// what is typed into a template is what is read, without a finding.
func TestTemplateFilledInByHandHasNoFinding(t *testing.T) {
	everyTemplate(t, func(t *testing.T, m effect.Measure, kinds []Kind, data []byte) {
		x, plan, err := Read(context.Background(), fill(t, data, m, kinds, 2, 3, 7), "filled.xlsx", Options{})
		if err != nil {
			t.Fatalf("%s from %v: %v", m, kinds, err)
		}
		for _, f := range x.Findings {
			t.Errorf("%s from %v: %s at %s: %s", m, kinds, f.Rule, f.Place, f.Message)
		}
		if len(x.Studies) != 3 || x.Studies[2].Row.Row != 7 || x.Source.Sheet != studiesSheet {
			t.Fatalf("%s from %v: %d studies of sheet %q, want those of rows 2, 3 and 7", m, kinds, len(x.Studies), x.Source.Sheet)
		}
		checkFilled(t, &x.Studies[1], m, kinds)
		if v := plan.Value(review.SettingMeasure, ""); m != effect.Unspecified && (v.Text != m.String() || v.From != review.FromSheet) {
			t.Errorf("%s: the plan's measure is %q from %s", m, v.Text, v.From)
		}
	})
}

func checkFilled(t *testing.T, s *review.Study, m effect.Measure, kinds []Kind) {
	t.Helper()
	fields, err := templateFields(m, kinds)
	if err != nil {
		t.Fatal(err)
	}
	numbers := 0
	for _, field := range fields {
		if !field.Numeric() {
			continue
		}
		numbers++
		if n, ok := s.Number(field); !ok || n.Value != handValues[field] || handValues[field] == 0 {
			t.Errorf("%s from %v: %s = %v, want %v", m, kinds, field, n.Value, handValues[field])
		}
	}
	if numbers < 2 || len(s.Numbers) != numbers {
		t.Errorf("%s from %v: %d numbers read, %d columns of them", m, kinds, len(s.Numbers), numbers)
	}
	if s.Name != "Trial B" || s.Outcome != "flare within 24 weeks" || s.Date != (review.Date{Year: 2016, Month: 3}) || s.Better != review.BetterLower {
		t.Errorf("%s from %v: study %q, outcome %q, date %s, better %q", m, kinds, s.Name, s.Outcome, s.Date, s.Better)
	}
	if r, ok := s.Remark("risk of bias"); !ok || r.Text != "low" {
		t.Errorf("%s from %v: risk of bias %q", m, kinds, r.Text)
	}
}

// TestTemplateColumnsAreKnown: each column is headed by the name of a field and
// recognised as that, has help with an example, a drop-down or a limit if it takes
// a number, and no table of columns names a field twice.
func TestTemplateColumnsAreKnown(t *testing.T) {
	everyTemplate(t, func(t *testing.T, m effect.Measure, kinds []Kind, data []byte) {
		fields, err := templateFields(m, kinds)
		if err != nil {
			t.Fatal(err)
		}
		f := opened(t, data)
		comments, err := f.GetComments(studiesSheet)
		if err != nil {
			t.Fatal(err)
		}
		if len(comments) != len(fields) {
			t.Errorf("%s: %d comments on %d columns", m, len(comments), len(fields))
		}
		checked := validated(t, f, studiesSheet)
		for i, field := range fields {
			header, err := f.GetCellValue(studiesSheet, cellAt(i+1, 1))
			if err != nil {
				t.Fatal(err)
			}
			known, err := review.ParseField(header)
			if understood, ok := recognise(header); err != nil || known != field || !ok || understood.field != field {
				t.Errorf("%s: column %d is headed %q, want that of %s to be recognised", m, i+1, header, field)
			}
			help := helpFor(field, m)
			if help.text == "" || help.example == "" {
				t.Errorf("%s: no help for %s", m, field)
			}
			if (field.Numeric() || help.choices != nil) && checked[cellAt(i+1, 2)+":"+cellAt(i+1, templateRows)] == nil {
				t.Errorf("%s: neither limit nor list for %s", m, field)
			}
			if !field.Numeric() && !keepsText(t, f, review.ColumnLetters(i+1)) {
				t.Errorf("%s: a program may turn what is typed into %s into a date", m, field)
			}
			if slices.Index(fields, field) != i {
				t.Errorf("%s: %s stands twice", m, field)
			}
		}
	})
	for field := range helpOfField {
		used := slices.Contains(leadingFields, field) || slices.Contains(trailingFields, field)
		for _, c := range kindTable {
			used = used || slices.Contains(c.fields, field)
		}
		if !used {
			t.Errorf("there is help for %s, which no template has", field)
		}
	}
}

// keepsText reports whether a column's cells keep what is typed: number format 49
// is "@" (ISO/IEC 29500, 18.8.30).
func keepsText(t testing.TB, f *excelize.File, column string) bool {
	t.Helper()
	id, err := f.GetColStyle(studiesSheet, column)
	if err != nil {
		t.Fatal(err)
	}
	style, err := f.GetStyle(id)
	if err != nil {
		t.Fatal(err)
	}
	return style.NumFmt == 49
}

// validated returns the data validations of a sheet by their range.
func validated(t testing.TB, f *excelize.File, sheet string) map[string]*excelize.DataValidation {
	t.Helper()
	all, err := f.GetDataValidations(sheet)
	if err != nil {
		t.Fatal(err)
	}
	byRange := map[string]*excelize.DataValidation{}
	for _, v := range all {
		byRange[v.Sqref] = v
	}
	return byRange
}

// offered returns the texts of the drop-down of a range, nil if it has none.
func offered(t testing.TB, f *excelize.File, sheet, cells string) []string {
	t.Helper()
	v := validated(t, f, sheet)[cells]
	if v == nil || v.Type != "list" {
		return nil
	}
	reference := strings.NewReplacer("$", "", "'", "", "<formula1>", "", "</formula1>", "").Replace(v.Formula1)
	list, from, _ := strings.Cut(reference, "!")
	if list == reference { // another program's spelling: lists.A1:A4
		list, from, _ = strings.Cut(reference, ".")
	}
	first, last, _ := strings.Cut(from, ":")
	col, row, err := excelize.CellNameToCoordinates(first)
	if err != nil {
		t.Fatalf("%s: %v", v.Formula1, err)
	}
	_, end, err := excelize.CellNameToCoordinates(last)
	if err != nil {
		t.Fatalf("%s: %v", v.Formula1, err)
	}
	var texts []string
	for ; row <= end; row++ {
		text, err := f.GetCellValue(list, cellAt(col, row))
		if err != nil {
			t.Fatal(err)
		}
		texts = append(texts, text)
	}
	return texts
}

// TestTemplateDropDowns: the lists offer what the program knows, and a number's
// cell refuses what cannot be.
func TestTemplateDropDowns(t *testing.T) {
	data, err := Template(effect.RiskRatio, Counts, Estimates)
	if err != nil {
		t.Fatal(err)
	}
	checkDropDowns(t, opened(t, data))
}

func checkDropDowns(t *testing.T, f *excelize.File) {
	t.Helper()
	if visible, err := f.GetSheetVisible(listsSheet); err != nil || visible {
		t.Errorf("the sheet of lists is visible (%v)", err)
	}
	column := func(field review.Field) string {
		fields, err := templateFields(effect.RiskRatio, []Kind{Counts, Estimates})
		if err != nil {
			t.Fatal(err)
		}
		i := slices.Index(fields, field) + 1
		return cellAt(i, 2) + ":" + cellAt(i, templateRows)
	}
	for field, want := range map[review.Field][]string{
		review.BetterField: {"lower", "higher"}, review.RiskOfBias: {"low", "some concerns", "high"}, review.Adjusted: {"yes", "no"},
	} {
		if got := offered(t, f, studiesSheet, column(field)); !slices.Equal(got, want) {
			t.Errorf("%s offers %q, want %q", field, got, want)
		}
	}
	for field, want := range map[review.Field][2]string{review.EventsTreated: {"whole", "greaterThanOrEqual"}, review.Estimate: {"decimal", "greaterThan"}, review.PValue: {"decimal", ""}} {
		v := validated(t, f, studiesSheet)[column(field)]
		if v == nil || v.Type != want[0] || (v.Operator != want[1] && !(want[1] == "" && v.Operator == "between")) {
			t.Errorf("%s is limited by %+v, want %v", field, v, want)
		}
	}
	for i, s := range review.Settings() {
		if got := offered(t, f, planSheet, cellAt(2, i+2)); !slices.Equal(got, s.Values) {
			t.Errorf("the setting %s offers %q, want %q", s.Name, got, s.Values)
		}
	}
	// NEEDS of a certainty table: GRADE's five reasons to move down, three to move up, four levels.
	for cells, want := range map[string][]string{
		"B2:B500": {"risk of bias", "inconsistency", "indirectness", "imprecision", "publication bias", "large effect", "dose gradient", "opposing confounding"},
		"C2:C500": {"high", "moderate", "low", "very low", "down one", "down two", "up one"},
	} {
		got := offered(t, f, judgementSheet, cells)
		for _, text := range want {
			if !slices.Contains(got, text) {
				t.Errorf("judgement!%s offers %q, without %q", cells, got, text)
			}
		}
	}
}

// TestTemplatePlan: the plan as it comes is all defaults, every default may be
// written into it, and the example of a planned run waits behind its "#".
func TestTemplatePlan(t *testing.T) {
	data, err := Template(effect.OddsRatio)
	if err != nil {
		t.Fatal(err)
	}
	filled := fill(t, data, effect.OddsRatio, nil, 2, 3)
	_, plan, err := Read(context.Background(), filled, "a.xlsx", Options{})
	if err != nil {
		t.Fatal(err)
	}
	for _, s := range review.Settings() {
		if v := plan.Value(s.Name, ""); s.Name != review.SettingMeasure && (v.Text != s.Default || v.From != review.FromDefault) {
			t.Errorf("%s is %q from %s in a template", s.Name, v.Text, v.From)
		}
	}
	if len(plan.Runs) != 0 {
		t.Errorf("the example runs: %+v", plan.Runs)
	}
	f := opened(t, filled)
	last := len(review.Settings()) + 2
	for i, s := range review.Settings() {
		if name, err := f.GetCellValue(planSheet, cellAt(1, i+2)); err != nil || name != s.Name {
			t.Errorf("row %d of the plan is %q, want %s", i+2, name, s.Name)
		}
		if meaning, err := f.GetCellValue(planSheet, cellAt(6, i+2)); err != nil || !strings.Contains(meaning, s.Meaning) {
			t.Errorf("%s is explained by %q", s.Name, meaning)
		}
		if s.Default != "" {
			if err := f.SetCellStr(planSheet, cellAt(2, i+2), s.Default); err != nil {
				t.Fatal(err)
			}
		}
	}
	if err := f.SetCellStr(planSheet, cellAt(1, last), planRun); err != nil {
		t.Fatal(err)
	}
	x, plan, err := Read(context.Background(), saved(t, f), "a.xlsx", Options{})
	if err != nil || len(x.Findings) != 0 {
		t.Fatalf("the defaults written out: %v, findings %+v", err, x.Findings)
	}
	if v := plan.Value(review.SettingTau, ""); v.From != review.FromSheet || len(plan.Runs) != 1 || plan.Runs[0].Name != "without high risk of bias" {
		t.Errorf("tau from %s, runs %+v", v.From, plan.Runs)
	}
}

// TestTemplateUnfilled: an empty template is no error of the file; the message
// says what to do.
func TestTemplateUnfilled(t *testing.T) {
	everyTemplate(t, func(t *testing.T, m effect.Measure, kinds []Kind, data []byte) {
		x, _, err := Read(context.Background(), data, "empty.xlsx", Options{})
		if !errors.Is(err, ErrNoStudies) || x != nil || !strings.HasPrefix(err.Error(), "empty.xlsx, studies: the header stands in row 1") {
			t.Errorf("%s from %v: %v, want a message about studies", m, kinds, err)
		}
	})
}

// TestTemplateBytes: the same call gives the same bytes.
func TestTemplateBytes(t *testing.T) {
	first, err := Template(effect.HazardRatio)
	if err != nil {
		t.Fatal(err)
	}
	for range 10 {
		if again, err := Template(effect.HazardRatio); err != nil || !bytes.Equal(again, first) {
			t.Fatalf("another call gives other bytes (%v)", err)
		}
	}
}

// TestKinds: kinds are read by name, and those that do not make a measure are
// refused with the ones that do.
func TestKindsOfTemplates(t *testing.T) {
	kinds, err := ParseKinds("Counts, estimates,counts")
	if err != nil || !slices.Equal(kinds, []Kind{Counts, Estimates}) {
		t.Errorf("kinds %v, %v", kinds, err)
	}
	if _, err := ParseKinds("counts,medals"); err == nil || !strings.Contains(err.Error(), "counts, means, changes, medians") {
		t.Errorf("error %v, want the kinds listed", err)
	}
	_, err = Template(effect.OddsRatio, Means)
	var kind *KindError
	if !errors.As(err, &kind) || !strings.Contains(err.Error(), "means") || !strings.Contains(err.Error(), "counts, estimates") {
		t.Errorf("error %v, want the kinds of an odds ratio", err)
	}
}
