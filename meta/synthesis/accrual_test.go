package synthesis

import (
	"bytes"
	"context"
	"encoding/csv"
	"encoding/json"
	"errors"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"

	"github.com/santhosh-tekuri/jsonschema/v6"

	"steelyard/meta"
	"steelyard/meta/choice"
	"steelyard/meta/review"
)

// bcg returns the log risk ratios of 13 trials in the order of their numbers with
// their years, and the reference values that the README of testdata/checks
// describes.
func bcg(t *testing.T) (*sheet, bcgReference) {
	t.Helper()
	folder := filepath.Join("..", "..", "testdata", "checks")
	text, err := os.ReadFile(filepath.Join(folder, "bcg_lrr.csv"))
	if err != nil {
		t.Fatal(err)
	}
	rows, err := csv.NewReader(bytes.NewReader(text)).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var s sheet
	for _, row := range rows[1:] {
		y, err1 := strconv.ParseFloat(row[1], 64)
		se, err2 := strconv.ParseFloat(row[2], 64)
		year, err3 := strconv.Atoi(row[3])
		if err := errors.Join(err1, err2, err3); err != nil {
			t.Fatal(err)
		}
		s.row(row[0], "", map[review.Field]float64{review.AnalysisEstimate: y, review.StandardError: se}).Date.Year = year
	}
	var want bcgReference
	if text, err = os.ReadFile(filepath.Join(folder, "bcg_lrr.json")); err == nil {
		err = json.Unmarshal(text, &want)
	}
	if err != nil {
		t.Fatal(err)
	}
	return &s, want
}

// bcgReference holds the 40-digit refits by restricted ML with Hartung–Knapp; the
// trials stand in the order of their years.
type bcgReference struct {
	Cumulative  []bcgRefit `json:"cumulative_reml"`
	LeaveOneOut []bcgRefit `json:"leave_one_out_reml"`
	Studies     []string
}

type bcgRefit struct {
	Tau2, Estimate float64
	HK             *struct {
		SE      float64
		Low     float64 `json:"ci_low"`
		Matched float64 `json:"ln_evidence_ratio_matched"`
		Steps   float64 `json:"steps_matched"`
	}
}

// accrued runs an analysis with everything wanted.
func accrued(t *testing.T, s *sheet, want Want, settings ...string) *Outcome {
	t.Helper()
	got, err := Run(context.Background(), &s.Extraction, planOf(t, settings...), want)
	if err != nil {
		t.Fatal(err)
	}
	return &got.Outcomes[0]
}

func everything() Want {
	below := 1.0
	return Want{Cumulative: true, LeaveOneOut: true, Influence: true, Subsets: &SubsetsWanted{}, Further: Further{Below: &below}}
}

func nearly(t *testing.T, name string, got, want float64) {
	t.Helper()
	if !(math.Abs(got-want) <= 1e-9*math.Abs(want)) {
		t.Errorf("%s = %.15g, want %.15g", name, got, want)
	}
}

// TestAccrualOfReference: sheet to result, 40-digit values.
func TestAccrualOfReference(t *testing.T) {
	s, want := bcg(t)
	o := accrued(t, s, everything(), review.SettingInterval, "hartung-knapp", review.SettingMeasure, "risk ratio", review.SettingTies, "file")
	for i, entry := range o.Accrual.Cumulative {
		w := want.Cumulative[i]
		if got := o.names(entry.Entered); len(got) != 1 || got[0] != want.Studies[i] || entry.At != want.Studies[i][:4] {
			t.Errorf("step %d: %v at %s, want %s", i, got, entry.At, want.Studies[i])
		}
		nearly(t, "τ²", entry.Mean.Tau2, w.Tau2)
		nearly(t, "estimate", entry.Mean.Estimate, w.Estimate)
		if w.HK != nil {
			nearly(t, "se", entry.Mean.SE, w.HK.SE)
			nearly(t, "low", entry.Mean.Low, w.HK.Low)
			nearly(t, "evidence", entry.Mean.Evidence.Ln(), w.HK.Matched)
		}
		for _, b := range entry.Posterior { // Bayes: the odds are multiplied by the ratio
			odds := b.Prior / (1 - b.Prior) * math.Exp(entry.Mean.Evidence.Ln())
			nearly(t, "posterior", b.Posterior, odds/(1+odds))
		}
		if len(entry.Posterior) != 4 {
			t.Errorf("%d posteriors, want those of the 4 default priors", len(entry.Posterior))
		}
	}
	last := o.Accrual.Cumulative[12]
	if last.Mean != o.Result.Fit.Mean || *last.Prediction != *o.Result.Fit.Prediction {
		t.Errorf("last step %+v, whole %+v", last.Mean, o.Result.Fit.Mean)
	}
	for i, w := range want.LeaveOneOut {
		row := slices.IndexFunc(o.Studies, func(s Study) bool { return s.Source.Name == want.Studies[i] })
		got := o.Accrual.LeaveOneOut[row]
		nearly(t, "estimate without", got.Mean.Estimate, w.Estimate)
		nearly(t, "steps without", got.Mean.Evidence.Steps(), w.HK.Steps)
		nearly(t, "carried", got.Carried, o.Result.Fit.Mean.Evidence.Steps()-w.HK.Steps)
		if o.Accrual.Influence[row].Omission != got {
			t.Errorf("influence of %s: %+v, want %+v", want.Studies[i], o.Accrual.Influence[row].Omission, got)
		}
	}
	if tipping := o.Accrual.Tipping; !tipping.Found || !tipping.Exact || tipping.Mean.Evidence.Steps() >= 1 {
		t.Errorf("tipping set %+v", tipping)
	}
	if subsets := o.Accrual.Subsets; subsets.Count != 8191 || !subsets.Every || subsets.With != nil || subsets.Chosen != -1 {
		t.Errorf("%d subsets", subsets.Count)
	}
}

func TestNothingAccruesUnasked(t *testing.T) {
	s, _ := bcg(t)
	if o := accrued(t, s, Want{}); o.Accrual != nil {
		t.Errorf("%+v", o.Accrual)
	}
	if o := accrued(t, s, Want{LeaveOneOut: true}); o.Accrual.Cumulative != nil || o.Accrual.LeaveOneOut == nil || o.Accrual.Tipping != nil || o.Accrual.Influence != nil || o.Accrual.Subsets != nil {
		t.Errorf("%+v", o.Accrual)
	}
}

// orderOf describes an order: names joined by + where they enter together.
func orderOf(o *Outcome) string {
	var steps []string
	for _, entry := range o.Accrual.Cumulative {
		steps = append(steps, strings.Join(o.names(entry.Entered), "+"))
	}
	return strings.Join(steps, " ")
}

func TestOrderOfAccrual(t *testing.T) {
	june := review.Date{Year: 1990, Month: 6}
	for _, tt := range []struct {
		name     string
		dates    []review.Date
		doses    []string
		settings []string
		order    string
		by, note string
	}{
		{"dates", []review.Date{{Year: 1999}, june, {Year: 1990}, {Year: 1980}}, nil, nil, "d c b a", "date", ""},
		{"ties together", []review.Date{{Year: 1999}, june, {Year: 1980}, june}, nil, nil, "c b+d a", "date", ""},
		{"ties by file", []review.Date{{Year: 1999}, june, {Year: 1980}, june}, nil, []string{review.SettingTies, "file"}, "c b d a", "date", ""},
		{"one undated", []review.Date{{}, june, {Year: 1980}, june}, nil, nil, "c b+d a", "date", "One study without a date enters last: a."},
		{"two undated", []review.Date{{}, june, {}, {Year: 1980}}, nil, nil, "d b a+c", "date", "2 studies without a date enter last: a, c."},
		{"two undated, by file", []review.Date{{}, june, {}, {Year: 1980}}, nil, []string{review.SettingTies, "file"}, "d b a c", "date", "2 studies"},
		{"no dates", make([]review.Date, 4), nil, nil, "a b c d", "file", "No study has a date: they enter in the order of the file."},
		{"year as column", []review.Date{{Year: 1999}, june, {Year: 1990}, {Year: 1980}}, nil, []string{review.SettingOrder, "Year"}, "d c b a", "date", ""},
		{"numbers", make([]review.Date, 4), []string{"10", "9.5", "-1", "1e1"}, []string{review.SettingOrder, "Dose"}, "c b a+d", "Dose", ""},
		{"a minus sign", make([]review.Date, 4), []string{"10", "9.5", "\u22121", "1e2"}, []string{review.SettingOrder, "dose"}, "c b a d", "dose", ""},
		{"texts", make([]review.Date, 4), []string{"Wave 10", "wave 9", "Wave 010", "first"}, []string{review.SettingOrder, "dose"}, "d b a+c", "dose", ""},
		{"numbers and a text", make([]review.Date, 4), []string{"x", "10", "9", "8"}, []string{review.SettingOrder, "dose"}, "d c b a", "dose", ""},
		{"dates as texts", make([]review.Date, 4), []string{"1990-12-01", "1990-02-11", "1989-12", "1990-2-3"}, []string{review.SettingOrder, "dose"}, "c d b a", "dose", ""},
		{"blank cells", make([]review.Date, 4), []string{"2", "", "1", "3"}, []string{review.SettingOrder, "dose"}, "c a d b", "dose", "One study without a value of \"dose\" enters last: b."},
		{"all blank", make([]review.Date, 4), make([]string, 4), []string{review.SettingOrder, "dose"}, "a b c d", "file", "No study has a value of \"dose\""},
		{"by estimate", make([]review.Date, 4), nil, []string{review.SettingOrder, "analysis estimate"}, "d a b c", "analysis estimate", ""},
	} {
		t.Run(tt.name, func(t *testing.T) {
			var s sheet
			s.Columns = []review.Column{{Header: "Dose"}, {Header: "Year", Field: review.DateField}, {Header: "logRR", Field: review.AnalysisEstimate}}
			for i, name := range []string{"a", "b", "c", "d"} {
				y := []float64{0.1, 0.2, 1.5, -3}[i]
				row := s.row(name, "", map[review.Field]float64{review.AnalysisEstimate: y, review.StandardError: 0.5})
				row.Date = tt.dates[i]
				if tt.doses != nil && tt.doses[i] != "" {
					row.Remarks = []review.Remark{{Header: "Dose", Text: tt.doses[i]}}
				}
			}
			o := accrued(t, &s, Want{Cumulative: true}, append(tt.settings, review.SettingMeasure, "mean difference")...)
			if got := orderOf(o); got != tt.order || o.Accrual.Order.By != tt.by {
				t.Errorf("order %q by %q, want %q by %q", got, o.Accrual.Order.By, tt.order, tt.by)
			}
			if notes := strings.Join(o.Notes, "\n"); !strings.Contains(notes, tt.note) || (tt.note == "") != (notes == "") {
				t.Errorf("notes %q, want %q", notes, tt.note)
			}
		})
	}
}

func TestUnknownOrderColumn(t *testing.T) {
	s, _ := bcg(t)
	s.Columns = []review.Column{{Header: "Latitude"}}
	o := accrued(t, s, Want{Cumulative: true}, review.SettingOrder, "longitude")
	if o.Result != nil || o.Accrual != nil || !strings.Contains(o.Problem, `no column "longitude"; its columns are: Latitude`) {
		t.Errorf("problem %q", o.Problem)
	}
	if o = accrued(t, s, Want{LeaveOneOut: true}, review.SettingOrder, "longitude"); o.Result == nil {
		t.Errorf("the order matters to the cumulative analysis only: %q", o.Problem)
	}
}

func TestChosenStudy(t *testing.T) {
	s, _ := bcg(t)
	o := accrued(t, s, Want{Subsets: &SubsetsWanted{Study: "1980 TRIAL 8"}})
	if got := o.Accrual.Subsets; o.Studies[got.Chosen].Source.Name != "1980 trial 8" || got.With == nil {
		t.Errorf("chosen %d", got.Chosen)
	}
	_, err := Run(context.Background(), &s.Extraction, planOf(t), Want{Subsets: &SubsetsWanted{Study: "trial 99"}})
	var unknown *choice.UnknownError
	if !errors.As(err, &unknown) || len(unknown.Valid) != 13 {
		t.Errorf("error %v", err)
	}
}

func TestAccrualOfOneStudy(t *testing.T) {
	var s sheet
	s.row("only", "", map[review.Field]float64{review.AnalysisEstimate: 0.4, review.StandardError: 0.1})
	o := accrued(t, &s, everything())
	a := o.Accrual
	if len(a.Cumulative) != 1 || !a.Cumulative[0].Alone || a.LeaveOneOut != nil || a.Influence != nil || a.Tipping.Found || a.Subsets.Count != 1 {
		t.Errorf("%+v", a)
	}
	if !slices.Contains(o.Notes, "There is one study only: nothing can be left out.") {
		t.Errorf("notes %q", o.Notes)
	}
}

func TestAccrualEndsWithItsContext(t *testing.T) {
	s, _ := bcg(t)
	for name, want := range map[string]Want{
		"cumulative": {Cumulative: true}, "leave one out": {LeaveOneOut: true}, "influence": {Influence: true}, "subsets": {Subsets: &SubsetsWanted{}},
	} {
		ctx, stop := context.WithCancel(context.Background())
		want.Work = meta.Work{Workers: 1, Progress: func(int, int) { stop() }}
		if _, err := Run(ctx, &s.Extraction, planOf(t), want); !errors.Is(err, context.Canceled) {
			t.Errorf("%s: %v", name, err)
		}
	}
}

// TestAccrualDocument: every number of the JSON is that of the analysis, and the
// whole fits the schema.
func TestAccrualDocument(t *testing.T) {
	s, _ := bcg(t)
	want := everything()
	want.Subsets = &SubsetsWanted{Study: "1980 trial 8"}
	got, err := Run(context.Background(), &s.Extraction, planOf(t, review.SettingMeasure, "risk ratio", review.SettingImportant, "0.8"), want)
	if err != nil {
		t.Fatal(err)
	}
	text, err := json.Marshal(got.Document("test"))
	if err != nil {
		t.Fatal(err)
	}
	validate(t, text)
	var document struct {
		Outcomes []struct {
			Order       map[string]string
			Cumulative  []map[string]any
			LeaveOneOut []map[string]any `json:"leave_one_out"`
			Tipping     map[string]any   `json:"tipping_set"`
			Influence   []map[string]any
			Subsets     map[string]any
		}
	}
	if err := json.Unmarshal(text, &document); err != nil {
		t.Fatal(err)
	}
	d, a := document.Outcomes[0], got.Outcomes[0].Accrual
	tied := d.Cumulative[7] // two trials of 1973
	step := a.Cumulative[7]
	for name, value := range map[string]any{
		"study": "1973 trial 5; 1973 trial 7", "date": "1973", "k": float64(9), "estimate": step.Mean.Estimate, "se": step.Mean.SE, "df": 8.0,
		"ci_low": step.Mean.Low, "ci_high": step.Mean.High, "tau2": step.Mean.Tau2, "ln_evidence": step.Mean.Evidence.Ln(),
		"steps": step.Mean.Evidence.Steps(), "added_steps": *step.Added, "prediction_low": step.Prediction.Low, "prediction_high": step.Prediction.High,
	} {
		if tied[name] != value {
			t.Errorf("%s: %v, want %v", name, tied[name], value)
		}
	}
	if _, has := d.Cumulative[0]["added_steps"]; has || d.Cumulative[0]["own_effect"] != true || d.Order["by"] != "date" || d.Order["ties"] != "together" {
		t.Errorf("first %v, order %v", d.Cumulative[0], d.Order)
	}
	omission := a.Influence[3]
	for _, entry := range []map[string]any{d.LeaveOneOut[3], d.Influence[3]} {
		if entry["omitted"] != "1977 trial 4" || entry["estimate"] != omission.Mean.Estimate || entry["carried_steps"] != omission.Carried {
			t.Errorf("%v", entry)
		}
	}
	if d.Influence[3]["leverage"] != omission.Detail.Leverage || d.Influence[3]["pull"] != omission.Pull || d.Influence[3]["cooks_distance"] != omission.Detail.Cook {
		t.Errorf("%v", d.Influence[3])
	}
	if len(d.Tipping["remove"].([]any)) != len(a.Tipping.Rows) || d.Tipping["steps"] != a.Tipping.Mean.Evidence.Steps() {
		t.Errorf("%v", d.Tipping)
	}
	if d.Subsets["below_important"] != *a.Subsets.Sides.BelowZone || len(d.Subsets["words"].([]any)) != 10 {
		t.Errorf("%v", d.Subsets)
	}
}

// validate checks a document against the schema made from the types.
func validate(t *testing.T, text []byte) {
	t.Helper()
	written, err := json.Marshal(Schema(Document{}))
	if err != nil {
		t.Fatal(err)
	}
	parsed, err := jsonschema.UnmarshalJSON(bytes.NewReader(written))
	if err != nil {
		t.Fatal(err)
	}
	compiler := jsonschema.NewCompiler()
	if err := compiler.AddResource("document.json", parsed); err != nil {
		t.Fatal(err)
	}
	schema, err := compiler.Compile("document.json")
	if err != nil {
		t.Fatal(err)
	}
	value, err := jsonschema.UnmarshalJSON(bytes.NewReader(text))
	if err != nil {
		t.Fatal(err)
	}
	if err := schema.Validate(value); err != nil {
		t.Error(err)
	}
}

// TestNothingIsWeighedWithoutANull: a rate has no value of no effect; estimates
// accrue, evidence does not.
func TestNothingIsWeighedWithoutANull(t *testing.T) {
	s, _ := bcg(t)
	got, err := Run(context.Background(), &s.Extraction, planOf(t, review.SettingMeasure, "rate"), everything())
	if err != nil {
		t.Fatal(err)
	}
	o := &got.Outcomes[0]
	a := o.Accrual
	if a == nil || a.Tipping != nil || a.Subsets != nil || a.Cumulative[5].Posterior != nil || a.LeaveOneOut[0].Mean.Estimate == 0 {
		t.Fatalf("%+v", a)
	}
	if notes := strings.Join(o.Notes, "\n"); !strings.Contains(notes, "no evidence to tip") {
		t.Errorf("notes %q", notes)
	}
	for _, part := range []any{o.accrualDocument().Cumulative, o.accrualDocument().LeaveOneOut, o.accrualDocument().Influence} {
		text, err := json.Marshal(part)
		if err != nil {
			t.Fatal(err)
		}
		if strings.Contains(string(text), "steps") || strings.Contains(string(text), "ln_evidence") || !strings.Contains(string(text), "tau2") {
			t.Errorf("%.300s", text)
		}
	}
}

func TestCompareText(t *testing.T) {
	ascending := []string{"", "9", "10", "010a", "a", "a2b", "a10b", "b"}
	for i, a := range ascending {
		for j, b := range ascending {
			if got := compareText(a, b); (got < 0) != (i < j) || (got > 0) != (i > j) {
				t.Errorf("%q against %q: %d", a, b, got)
			}
		}
	}
}
