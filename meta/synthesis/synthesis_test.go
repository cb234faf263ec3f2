package synthesis

import (
	"context"
	"errors"
	"math"
	"strings"
	"testing"

	"steelyard/meta"
	"steelyard/meta/choice"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/review"
)

// sheet builds an extraction from rows of name, outcome and numbers.
type sheet struct{ review.Extraction }

func (s *sheet) row(name, outcome string, numbers map[review.Field]float64) *review.Study {
	place := review.Place{File: "t.csv", Row: len(s.Studies) + 2}
	study := review.Study{Name: name, Outcome: outcome, Row: place}
	for f := review.NoField; int(f) < review.FieldCount; f++ {
		if v, ok := numbers[f]; ok {
			study.Numbers = append(study.Numbers, review.Number{Field: f, Value: v, Place: review.Spot{Row: place.Row, Col: int(f)}})
		}
	}
	s.Studies = append(s.Studies, study)
	return &s.Studies[len(s.Studies)-1]
}

func counts(e1, n1, e2, n2 float64) map[review.Field]float64 {
	return map[review.Field]float64{review.EventsTreated: e1, review.TotalTreated: n1, review.EventsControl: e2, review.TotalControl: n2}
}

func estimate(y, se float64) map[review.Field]float64 {
	return map[review.Field]float64{review.Estimate: y, review.StandardError: se}
}

func planOf(t *testing.T, settings ...string) *review.Plan {
	t.Helper()
	plan := &review.Plan{}
	for i := 0; i < len(settings); i += 2 {
		if err := plan.Set(settings[i], "", review.Value{Text: settings[i+1], From: review.FromFlag}); err != nil {
			t.Fatal(err)
		}
	}
	return plan
}

func runOne(t *testing.T, s *sheet, settings ...string) (*Synthesis, *Outcome) {
	t.Helper()
	got, err := Run(context.Background(), &s.Extraction, planOf(t, settings...), Want{})
	if err != nil {
		t.Fatal(err)
	}
	return got, &got.Outcomes[0]
}

// TestMixedKinds: counts, a ratio with limits, a ratio with the standard error of
// its logarithm, and a logarithm, all of one table, give one estimate. The values
// are the closed forms of the log risk ratio of 10 of 100 against 20 of 100.
func TestMixedKinds(t *testing.T) {
	y := math.Log(0.5)
	se := math.Sqrt(1/10. - 1/100. + 1/20. - 1/100.)
	const z = 1.959963984540054 // standard normal, 97.5%
	limits := map[review.Field]float64{review.Estimate: 0.5, review.LimitLow: math.Exp(y - z*se), review.LimitHigh: math.Exp(y + z*se)}
	logs := map[review.Field]float64{review.AnalysisEstimate: y, review.AnalysisLow: y - z*se, review.AnalysisHigh: y + z*se}
	var s sheet
	s.row("counts", "", counts(10, 100, 20, 100))
	s.row("limits", "", limits)
	s.row("se", "", estimate(0.5, se))
	s.row("log", "", map[review.Field]float64{review.AnalysisEstimate: y, review.StandardError: se})
	s.row("log limits", "", logs)
	_, o := runOne(t, &s)
	if o.Analysis.Measure != effect.RiskRatio || len(o.Studies) != 5 || len(o.Notes) != 1 {
		t.Fatalf("measure %v, %d studies, notes %q", o.Analysis.Measure, len(o.Studies), o.Notes)
	}
	for _, study := range o.Studies {
		if math.Abs(study.Estimate.Y-y) > 1e-12 || math.Abs(study.Estimate.SE-se) > 1e-9 {
			t.Errorf("%s: %v, want %v, %v", study.Source.Name, study.Estimate, y, se)
		}
		if got, want := study.Converted(), study.Basis != FromCounts; got != want {
			t.Errorf("%s: converted %v, want %v", study.Source.Name, got, want)
		}
	}
	if got := o.Result.Fit.Mean.Estimate; math.Abs(got-y) > 1e-12 {
		t.Errorf("pooled %v, want %v", got, y)
	}
	if o.Counts.Participants != 200 || o.Counts.Events != 30 {
		t.Errorf("counts %+v", o.Counts)
	}
}

// TestMeans: a mean difference with standard errors of means equals the one with
// the SDs they come from (SD = SE·√n).
func TestMeans(t *testing.T) {
	arm := func(sd1, sd2 review.Field, a, b float64) map[review.Field]float64 {
		return map[review.Field]float64{review.MeanTreated: 10, sd1: a, review.TotalTreated: 25, review.MeanControl: 12, sd2: b, review.TotalControl: 36}
	}
	var s sheet
	s.row("sd", "", arm(review.SDTreated, review.SDControl, 5, 6))
	s.row("se", "", arm(review.SETreated, review.SEControl, 1, 1))
	_, o := runOne(t, &s)
	want := effect.Estimate{Y: -2, SE: math.Sqrt(5*5/25. + 6*6/36.)}
	for _, study := range o.Studies {
		if math.Abs(study.Estimate.Y-want.Y) > 1e-12 || math.Abs(study.Estimate.SE-want.SE) > 1e-12 {
			t.Errorf("%s: %v, want %v", study.Source.Name, study.Estimate, want)
		}
	}
	if o.Analysis.Measure != effect.MeanDifference || len(o.Studies[1].Conversions) != len(o.Studies[0].Conversions)+2 {
		t.Errorf("measure %v, conversions %v", o.Analysis.Measure, o.Studies[1].Conversions)
	}
}

// TestBlockedRows: rows with an error stay out and are named; an accepted error
// lets its row in; the filter's rows are not errors.
func TestBlockedRows(t *testing.T) {
	var s sheet
	s.row("good", "", estimate(1, 1))
	bad := s.row("bad", "", estimate(9, 1)).Row
	accepted := s.row("accepted", "", estimate(2, 1)).Row
	s.row("empty", "", nil)
	old := s.row("old", "", estimate(3, 1))
	old.Remarks = []review.Remark{{Header: "setting", Text: "attic"}}
	s.Columns = []review.Column{{Header: "setting"}}
	s.Findings = []review.Finding{
		{Severity: review.Error, Rule: "C1", Place: bad, Message: "wrong"},
		{Severity: review.Error, Rule: "I1", Place: accepted, Message: "odd", Accepted: "checked"},
		{Severity: review.Error, Rule: "C1", Place: review.Place{File: "t.plan.csv", Row: 2}, Message: "another file"},
	}
	got, o := runOne(t, &s, "where", "setting is not attic")
	names := ""
	for _, study := range o.Studies {
		names += study.Source.Name + " "
	}
	if names != "good accepted " || o.Counts.Wrong != 2 || o.Counts.Rows != 4 || len(o.Excluded) != 3 {
		t.Errorf("pooled %q, counts %+v, excluded %+v", names, o.Counts, o.Excluded)
	}
	if len(got.Findings) != 4 {
		t.Errorf("%d findings, want the sheet's three and one for the empty row", len(got.Findings))
	}
}

// TestRefusals: an outcome that cannot be pooled says why.
func TestRefusals(t *testing.T) {
	for _, c := range []struct {
		name, says string
		build      func(s *sheet)
		settings   []string
	}{
		{"measures differ", "different measures", func(s *sheet) {
			s.row("a", "", estimate(0.5, 1)).Measure = effect.OddsRatio
			s.row("b", "", estimate(0.5, 1)).Measure = effect.RiskRatio
		}, nil},
		{"a column is wrong", "decimal", func(s *sheet) {
			s.row("a", "", estimate(0.5, 1))
			s.Findings = []review.Finding{{Severity: review.Error, Rule: "F3", Place: review.Place{Col: 2}, Message: "decimal marks"}}
		}, nil},
		{"the plan is wrong", "tua", func(s *sheet) {
			s.row("a", "", estimate(0.5, 1))
			s.Findings = []review.Finding{{Severity: review.Error, Rule: review.RulePlan, Place: review.Place{Sheet: "plan", Row: 3}, Message: "tua is unknown"}}
		}, nil},
		{"no row is left", "its one row cannot be pooled", func(s *sheet) { s.row("a", "", nil) }, nil},
		{"a difference of risks beyond 1", "0.05", func(s *sheet) { s.row("a", "", estimate(5, 1)) }, []string{"measure", "risk difference"}},
		{"a column is unknown", "does not have", func(s *sheet) { s.row("a", "", estimate(1, 1)) }, []string{"where", "yaer > 2"}},
		{"null of a ratio", "null", func(s *sheet) { s.row("a", "", estimate(1, 1)) }, []string{"measure", "odds ratio", "null", "-1"}},
		{"important beside the null", "both sides", func(s *sheet) { s.row("a", "", estimate(1, 1)) }, []string{"important", "2, 3"}},
		{"means as risk ratio", "risk ratio", func(s *sheet) {
			s.row("a", "", map[review.Field]float64{review.MeanTreated: 1, review.SDTreated: 1, review.TotalTreated: 9, review.MeanControl: 1, review.SDControl: 1, review.TotalControl: 9})
		}, []string{"measure", "risk ratio"}},
		{"tau against interval", "maximum-likelihood", func(s *sheet) {
			s.row("a", "", estimate(1, 1))
			s.row("b", "", estimate(2, 1))
		}, []string{"tau", "paule-mandel", "interval", "profile-likelihood"}},
	} {
		var s sheet
		c.build(&s)
		_, o := runOne(t, &s, c.settings...)
		if o.Result != nil || !strings.Contains(o.Problem, c.says) {
			t.Errorf("%s: result %v, problem %q, want it to say %q", c.name, o.Result, o.Problem, c.says)
		}
	}
}

// TestImportant: one value is mirrored at the null on the analysis scale.
func TestImportant(t *testing.T) {
	for _, c := range []struct {
		measure effect.Measure
		values  []float64
		null    float64
		want    meta.Limits
	}{
		{effect.RiskRatio, []float64{0.8}, 0, meta.Limits{Low: math.Log(0.8), High: -math.Log(0.8)}},
		{effect.RiskRatio, []float64{1.25}, 0, meta.Limits{Low: -math.Log(1.25), High: math.Log(1.25)}},
		{effect.RiskRatio, []float64{1.2, 0.8}, 0, meta.Limits{Low: math.Log(0.8), High: math.Log(1.2)}},
		{effect.MeanDifference, []float64{-5}, 0, meta.Limits{Low: -5, High: 5}},
		{effect.MeanDifference, []float64{3}, 1, meta.Limits{Low: -1, High: 3}},
	} {
		got, err := important(c.measure, c.values, c.null)
		if err != nil || math.Abs(got.Low-c.want.Low) > 1e-15 || math.Abs(got.High-c.want.High) > 1e-15 {
			t.Errorf("%v %v: %v, %v, want %v", c.measure, c.values, got, err, c.want)
		}
	}
}

// TestRegions: the shares of belief and of settings each sum to 1, and the names
// follow the wanted direction.
func TestRegions(t *testing.T) {
	var s sheet
	for i, y := range []float64{-1, -0.4, -0.7, -0.2, -0.9} {
		s.row(string(rune('a'+i)), "", estimate(math.Exp(y), 0.2))
	}
	for better, names := range map[string]string{"lower": "benefit trivial harm", "higher": "harm trivial benefit", "": "lower trivial higher"} {
		settings := []string{"measure", "risk ratio", "important", "0.8"}
		if better != "" {
			settings = append(settings, "better", better)
		}
		_, o := runOne(t, &s, settings...)
		var got []string
		belief, share := 0.0, 0.0
		for _, r := range o.Result.Regions {
			got = append(got, r.Name)
			belief += r.Posterior
			share += r.Settings
		}
		if strings.Join(got, " ") != names || math.Abs(belief-1) > 1e-9 || math.Abs(share-1) > 1e-9 {
			t.Errorf("better %q: %v, belief %v, settings %v", better, got, belief, share)
		}
		p := o.Result.Fit.Prediction
		if in := o.settingsWithin(p.Low, p.High); math.Abs(in-0.95) > 1e-9 {
			t.Errorf("the 95%% prediction interval holds %v of settings", in)
		}
	}
}

func TestWanted(t *testing.T) {
	var s sheet
	s.row("a", "Pain at 6 weeks", estimate(1, 1))
	s.row("b", "Harm", estimate(1, 1))
	got, err := Run(context.Background(), &s.Extraction, planOf(t), Want{Outcomes: []string{"harm", "PAIN_at 6 weeks"}})
	if err != nil || len(got.Outcomes) != 2 || got.Outcomes[0].Name != "Harm" {
		t.Errorf("%+v, %v", got, err)
	}
	_, err = Run(context.Background(), &s.Extraction, planOf(t), Want{Outcomes: []string{"death"}})
	var unknown *choice.UnknownError
	if !errors.As(err, &unknown) || len(unknown.Valid) != 2 {
		t.Errorf("an unknown outcome: %v", err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err := Run(ctx, &s.Extraction, planOf(t), Want{}); !errors.Is(err, context.Canceled) {
		t.Errorf("a cancelled run: %v", err)
	}
}

// TestIdleSettings: a setting that the model cannot use is named in a note.
func TestIdleSettings(t *testing.T) {
	for _, c := range []struct {
		settings []string
		says     string
	}{
		{[]string{"tau", "paule-mandel", "effects", "common"}, "a common effect has no τ²"},
		{[]string{"evidence", "student-t", "interval", "wald"}, "normal form"},
		{[]string{"evidence", "student-t"}, ""},
		{[]string{"tau", "paule-mandel"}, ""},
	} {
		var s sheet
		s.row("a", "", estimate(1, 1))
		s.row("b", "", estimate(2, 1))
		_, o := runOne(t, &s, append(c.settings, "measure", "mean difference")...)
		if got := strings.Join(o.Notes, " "); (c.says == "") != (got == "") || !strings.Contains(got, c.says) {
			t.Errorf("%v: notes %q, want %q", c.settings, got, c.says)
		}
	}
}

func TestStrayPlan(t *testing.T) {
	var s sheet
	s.row("a", "Pain", estimate(1, 1))
	plan := &review.Plan{}
	for _, outcome := range []string{"pain", "Death"} {
		if err := plan.Set("tau", outcome, review.Value{Text: "paule-mandel", From: review.FromSheet, Place: review.Place{Sheet: "plan", Row: 4, Col: 2}}); err != nil {
			t.Fatal(err)
		}
	}
	got, err := Run(context.Background(), &s.Extraction, plan, Want{})
	if err != nil || len(got.Findings) != 1 || got.Findings[0].Place.String() != "plan!B4" || !strings.Contains(got.Findings[0].Message, "Pain") {
		t.Errorf("findings %+v, %v", got.Findings, err)
	}
}

func TestArmNames(t *testing.T) {
	columns := func(headers ...string) []review.Column {
		fields := []review.Field{review.StudyName, review.EventsTreated, review.TotalTreated, review.EventsControl, review.TotalControl}
		var all []review.Column
		for i, h := range headers {
			all = append(all, review.Column{Header: h, Field: fields[i]})
		}
		return all
	}
	for _, c := range []struct {
		columns []review.Column
		arms    [2]string
		trials  bool
	}{
		{columns("Trial", "Brindle Events", "Brindle Total", "Without Events", "Without Total"), [2]string{"Brindle", "Without"}, true},
		{columns("study", "events treated", "total treated", "events control", "total control"), [2]string{"treated", "control"}, false},
		{columns("Study", "usual care events", "usual care n", "e", "n"), [2]string{"usual care", "control"}, false},
		{nil, [2]string{"treated", "control"}, false},
	} {
		if got := armNames(c.columns); got != c.arms || callsTrials(c.columns) != c.trials {
			t.Errorf("%v: %q, trials %v", c.columns, got, callsTrials(c.columns))
		}
	}
}

// TestWeighAgreesWithPool: one study weighed by its numbers has the evidence that
// pooling it alone gives.
func TestWeighAgreesWithPool(t *testing.T) {
	var s sheet
	s.row("a", "", estimate(0.7, 0.15))
	_, o := runOne(t, &s, "measure", "risk ratio", "important", "0.8")
	w, err := Weigh(Numbers{Statistic: Estimated, Value: 0.7, SE: 0.15, Ratio: true, Level: 0.95, Important: []float64{0.8}, Weighing: review.Weighing{Prior: []float64{0.5}}})
	if err != nil {
		t.Fatal(err)
	}
	if w.Evidence != o.Result.Fit.Mean.Evidence || math.Abs(w.Mean.Low-o.Result.Fit.Mean.Low) > 1e-12 || math.Abs(w.Mean.LnP-o.Result.Fit.Mean.LnP) > 1e-12 {
		t.Errorf("weighed %+v, pooled %+v", w.Mean, o.Result.Fit.Mean)
	}
	for i, r := range w.Regions {
		if r.Evidence != o.Result.Regions[i].Evidence {
			t.Errorf("region %s: %v, want %v", r.Name, r.Evidence, o.Result.Regions[i].Evidence)
		}
	}
	if got, want := w.Posterior[0].Posterior, evidence.Posterior(0.5, w.Evidence); got != want {
		t.Errorf("posterior %v, want %v", got, want)
	}
}
