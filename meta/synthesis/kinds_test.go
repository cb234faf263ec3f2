package synthesis

import (
	"context"
	"encoding/json"
	"math"
	"strconv"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"steelyard/meta/effect"
	"steelyard/meta/review"
)

type numbers = map[review.Field]float64

// with returns several sets of numbers as one.
func with(sets ...numbers) numbers {
	all := numbers{}
	for _, set := range sets {
		for f, v := range set {
			all[f] = v
		}
	}
	return all
}

// remarked adds context to a row: pairs of field and text.
func remarked(row *review.Study, f review.Field, text string) *review.Study {
	row.Remarks = append(row.Remarks, review.Remark{Header: f.String(), Text: text})
	return row
}

// TestPreference: a row that gives several kinds of numbers is taken by the first
// of the table that suits the measure, whatever stands beside it.
func TestPreference(t *testing.T) {
	means := numbers{review.MeanTreated: 10, review.SDTreated: 2, review.MeanControl: 9, review.SDControl: 2, review.TotalTreated: 30, review.TotalControl: 30}
	reported := numbers{review.Estimate: 1.5, review.StandardError: 0.2, review.LimitLow: 1, review.LimitHigh: 2.25, review.TestStatistic: 2, review.PValue: 0.05}
	oneArm := numbers{review.Events: 3, review.Total: 50, review.PersonTime: 60}
	for _, c := range []struct {
		name    string
		numbers numbers
		measure string
		want    Basis
	}{
		{"counts before reported", with(counts(3, 30, 5, 30), reported), "risk ratio", FromCounts},
		{"means before reported", with(means, reported), "mean difference", FromMeans},
		{"means beside counts", with(means, counts(3, 30, 5, 30)), "mean difference", FromMeans},
		{"counts beside means", with(means, counts(3, 30, 5, 30)), "odds ratio", FromCounts},
		{"counts without use", with(counts(3, 30, 5, 30), reported), "hazard ratio", FromEstimateSE},
		{"counts taken approximately", counts(3, 30, 5, 30), "standardised mean difference", FromCountsAsMeans},
		{"reported before an approximation", with(counts(3, 30, 5, 30), reported), "standardised mean difference", FromEstimateSE},
		{"means taken approximately", means, "odds ratio", FromMeansAsCounts},
		{"se before limits", reported, "odds ratio", FromEstimateSE},
		{"limits before t", with(reported, numbers{review.StandardError: math.NaN()}), "odds ratio", FromEstimateLimits},
		{"one arm", oneArm, "proportion", FromOneArm},
		{"one arm with time", oneArm, "rate", FromOneArmTime},
		{"one arm beside reported", with(oneArm, reported), "hazard ratio", FromEstimateSE},
		{"one arm beside reported, no measure", with(oneArm, reported), "", FromEstimateSE},
		{"observed before reported", with(reported, numbers{review.ObservedMinusExpected: 2, review.Variance: 5}), "hazard ratio", FromObserved},
	} {
		for f, v := range c.numbers {
			if math.IsNaN(v) {
				delete(c.numbers, f)
			}
		}
		var s sheet
		s.row("a", "", c.numbers)
		var settings []string
		if c.measure != "" {
			settings = []string{"measure", c.measure}
		}
		_, o := runOne(t, &s, settings...)
		if len(o.Studies) != 1 || o.Studies[0].Basis != c.want {
			t.Errorf("%s: %v %s, want %v", c.name, o.Studies, o.Problem, c.want)
		}
	}
}

// TestRoundTrip: limits at any level, of any measure, give back the effect, its
// standard error and, pooled alone at that level, the same limits.
func TestRoundTrip(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		m := rapid.SampledFrom([]effect.Measure{effect.OddsRatio, effect.RiskRatio, effect.HazardRatio, effect.RateRatio, effect.RatioOfMeans,
			effect.RiskDifference, effect.MeanDifference, effect.StandardisedMeanDifference, effect.Correlation, effect.Proportion}).Draw(t, "measure")
		y, se := rapid.Float64Range(-2, 2).Draw(t, "y"), rapid.Float64Range(0.01, 1).Draw(t, "se")
		level := rapid.Float64Range(0.3, 0.999).Draw(t, "level")
		if m == effect.RiskDifference {
			y /= 2 // beyond 1 there is no difference of risks
		}
		low, high := studyInterval(effect.Estimate{Y: y, SE: se}, level)
		plan := &review.Plan{}
		for setting, value := range map[string]string{"measure": m.String(), "level": strconv.FormatFloat(level, 'g', -1, 64)} {
			if err := plan.Set(setting, "", review.Value{Text: value}); err != nil {
				t.Fatal(err)
			}
		}
		d := derivation{measure: m, row: &review.Study{Numbers: []review.Number{
			{Field: review.Estimate, Value: effect.ToReader(m, y)}, {Field: review.LimitLow, Value: effect.ToReader(m, low)},
			{Field: review.LimitHigh, Value: effect.ToReader(m, high)}, {Field: review.LimitLevel, Value: level},
		}}}
		study, err := d.study()
		if err != nil {
			t.Fatal(err)
		}
		if math.Abs(study.Estimate.Y-y) > 1e-9 || math.Abs(study.Estimate.SE/se-1) > 1e-6 {
			t.Fatalf("%v: %v, want %v (%v)", m, study.Estimate, y, se)
		}
		if a, b := studyInterval(study.Estimate, level); math.Abs(a-low) > 1e-6 || math.Abs(b-high) > 1e-6 {
			t.Fatalf("%v: limits %v to %v, want %v to %v", m, a, b, low, high)
		}
	})
}

// TestStudentLimits: limits of a mean difference with the number of people are ones
// of Student's t: with 25 and 22 people, t(0.975, 45) = 2.014103 (tables).
func TestStudentLimits(t *testing.T) {
	var s sheet
	s.row("a", "", numbers{review.Estimate: 3, review.LimitLow: 3 - 2.014103, review.LimitHigh: 3 + 2.014103, review.TotalTreated: 25, review.TotalControl: 22})
	_, o := runOne(t, &s, "measure", "mean difference")
	if se := o.Studies[0].Estimate.SE; math.Abs(se-1) > 1e-6 {
		t.Errorf("se %v, want 1", se)
	}
}

// TestSkewedMedian warns of a median far from the middle of its quartiles, and
// hears the reviewer's reason for keeping it.
func TestSkewedMedian(t *testing.T) {
	arm := numbers{review.MedianTreated: 5, review.Q1Treated: 4, review.Q3Treated: 12, review.TotalTreated: 40,
		review.MeanControl: 7, review.SDControl: 3, review.TotalControl: 41}
	var s sheet
	s.row("plain", "", arm)
	remarked(s.row("kept", "", arm), review.Accept, "M15 no other numbers")
	got, o := runOne(t, &s)
	if len(o.Studies) != 2 || !o.Studies[0].Converted() {
		t.Fatalf("%+v", o)
	}
	if len(got.Findings) != 2 || got.Findings[0].Rule != "M15" || got.Findings[0].Accepted != "" || got.Findings[1].Accepted != "no other numbers" ||
		!strings.Contains(got.Findings[0].Message, "converted is no") {
		t.Errorf("findings %+v", got.Findings)
	}
	if o.Result.Without != nil {
		t.Error("every study is converted, yet there is a result without them")
	}
}

// TestMixedScores warns of changes beside final values as standardised
// differences, and not as mean differences.
func TestMixedScores(t *testing.T) {
	means := numbers{review.MeanTreated: 10, review.SDTreated: 2, review.MeanControl: 9, review.SDControl: 2, review.TotalTreated: 30, review.TotalControl: 30}
	for _, c := range []struct {
		measure, second string
		want            int
	}{{"standardised mean difference", "final", 1}, {"standardised mean difference", "change", 0}, {"mean difference", "final", 0}} {
		var s sheet
		remarked(s.row("a", "", means), review.ResultType, "change")
		remarked(s.row("b", "", means), review.ResultType, c.second)
		got, _ := runOne(t, &s, "measure", c.measure)
		if len(got.Findings) != c.want || (c.want == 1 && got.Findings[0].Rule != "M11") {
			t.Errorf("%+v: findings %+v", c, got.Findings)
		}
	}
}

// TestConvertedFilter: a column of the sheet named "converted" is meant before the
// program's own word.
func TestConvertedFilter(t *testing.T) {
	var s sheet
	s.row("a", "", estimate(1, 1)).Remarks = []review.Remark{{Header: "converted", Text: "yes"}}
	s.row("b", "", numbers{review.Estimate: 1, review.PValue: 0.05}).Remarks = []review.Remark{{Header: "converted", Text: "no"}}
	s.Columns = []review.Column{{Header: "converted"}}
	if _, o := runOne(t, &s, "where", "converted is yes"); len(o.Studies) != 1 || o.Studies[0].Source.Name != "a" {
		t.Errorf("the sheet's column is not asked: %+v", o.Excluded)
	}
	s.Columns = nil
	if _, o := runOne(t, &s, "where", "converted is no"); len(o.Studies) != 1 || o.Studies[0].Source.Name != "a" || o.Counts.Rows != 1 || len(o.Excluded) != 1 {
		t.Errorf("%+v", o)
	}
}

// TestOneSidedP: p of one side 0.025 in the direction of the estimate is z = 1.96.
func TestOneSidedP(t *testing.T) {
	for direction, want := range map[string]float64{"": 2 / 1.959963984540054, "higher": 2 / 1.959963984540054} {
		var s sheet
		row := s.row("a", "", numbers{review.Estimate: 2, review.PValue: 0.025, review.PSides: 1})
		if direction != "" {
			remarked(row, review.Direction, direction)
		}
		_, o := runOne(t, &s, "measure", "mean difference")
		if len(o.Studies) != 1 || math.Abs(o.Studies[0].Estimate.SE-want) > 1e-9 {
			t.Errorf("direction %q: %+v %s, want se %v", direction, o.Studies, o.Problem, want)
		}
	}
}

// TestMeansTest takes two means with the test, the limits or the standard error of
// their difference, also as a standardised difference (one SD for both arms).
func TestMeansTest(t *testing.T) {
	means := numbers{review.MeanTreated: 4, review.MeanControl: 6, review.TotalTreated: 50, review.TotalControl: 50}
	for name, test := range map[string]numbers{
		"se":         {review.StandardError: 0.5},
		"t unsigned": {review.TestStatistic: 4},
		"t":          {review.TestStatistic: -4},
		"limits":     {review.LimitLow: -2 - 0.5*1.984467, review.LimitHigh: -2 + 0.5*1.984467}, // t(0.975, 98) of tables
	} {
		var s sheet
		s.row("a", "", with(means, test))
		_, o := runOne(t, &s)
		if len(o.Studies) != 1 || o.Studies[0].Basis != FromMeansTest || math.Abs(o.Studies[0].Estimate.Y+2) > 1e-12 || math.Abs(o.Studies[0].Estimate.SE-0.5) > 1e-6 {
			t.Errorf("%s: %+v %s", name, o.Studies, o.Problem)
		}
		_, o = runOne(t, &s, "measure", "standardised mean difference")
		g := effect.SmallSampleFactor(98) * -2 / 2.5 // SD = 0.5/√(2/50)
		if len(o.Studies) != 1 || math.Abs(o.Studies[0].Estimate.Y-g) > 1e-6 || !o.Studies[0].Converted() {
			t.Errorf("%s, standardised: %+v %s, want %v", name, o.Studies, o.Problem, g)
		}
	}
}

// fieldGroups are numbers that come together in a sheet.
var fieldGroups = [][]review.Field{
	{review.EventsTreated, review.EventsControl}, {review.TotalTreated, review.TotalControl}, {review.PersonTimeTreated, review.PersonTimeControl},
	{review.MeanTreated, review.MeanControl}, {review.SDTreated, review.SDControl, review.TotalTreated, review.TotalControl}, {review.SETreated, review.MeanLowControl, review.MeanHighControl},
	{review.MeanTreated, review.SDTreated, review.TotalTreated, review.MeanControl, review.SDControl, review.TotalControl},
	{review.MedianTreated, review.Q1Treated, review.Q3Treated, review.TotalTreated, review.MeanControl, review.SEControl, review.TotalControl},
	{review.MedianControl, review.MinControl, review.MaxControl, review.MedianTreated, review.Q1Treated, review.Q3Treated, review.MinTreated, review.MaxTreated},
	{review.BaselineMeanTreated, review.BaselineSDTreated, review.BaselineMeanControl, review.BaselineSDControl, review.WithinCorrelation},
	{review.SDDifference, review.Total}, {review.Coefficient, review.Total}, {review.Events, review.Total}, {review.Events, review.PersonTime},
	{review.ObservedMinusExpected, review.Variance}, {review.Estimate}, {review.AnalysisEstimate}, {review.StandardError},
	{review.LimitLow, review.LimitHigh}, {review.TestStatistic}, {review.PValue}, {review.PValue, review.PSides}, {review.ShareTreated, review.ShareControl},
	{review.ClusterSize, review.ICC}, {review.DesignEffect},
}

// TestAnyNumbers: whatever numbers a row holds, and whatever is asked of them,
// they give finite effects or reasons, and the document can be written.
func TestAnyNumbers(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		value := rapid.OneOf(rapid.SampledFrom([]float64{0, 1, -1, 0.5, 0.05, 2, 10, 40, 1e150, -1e150, 1e-300}), rapid.Float64Range(-5, 100),
			rapid.SampledFrom([]float64{3, 5, 8, 12, 20, 30}), rapid.SampledFrom([]float64{3, 5, 8, 12, 20, 30}), rapid.SampledFrom([]float64{0.2, 0.7, 0.9}))
		var s sheet
		for range rapid.IntRange(1, 4).Draw(t, "rows") {
			row := numbers{}
			for _, group := range rapid.SliceOfN(rapid.SampledFrom(fieldGroups), 1, 4).Draw(t, "groups") {
				for _, f := range group {
					row[f] = value.Draw(t, "value")
				}
			}
			for _, f := range rapid.SliceOfN(rapid.IntRange(int(review.Estimate), review.FieldCount-1), 0, 4).Draw(t, "others") {
				row[review.Field(f)] = value.Draw(t, "value")
			}
			study := s.row("a", "", row)
			remarked(study, review.Design, rapid.SampledFrom([]string{"", "parallel", "crossover", "cluster"}).Draw(t, "design"))
			remarked(study, review.Direction, rapid.SampledFrom([]string{"", "higher", "lower", "x"}).Draw(t, "direction"))
			study.Measure = effect.Measure(rapid.SampledFrom([]int{0, 0, 1, 4, 6, 7, 9}).Draw(t, "own"))
		}
		plan := &review.Plan{}
		if err := plan.Set("measure", "", review.Value{Text: rapid.SampledFrom(effect.MeasureNames()).Draw(t, "measure"), From: review.FromFlag}); err != nil {
			t.Fatal(err)
		}
		got, err := Run(context.Background(), &s.Extraction, plan, Want{})
		if err != nil {
			t.Fatal(err)
		}
		if _, err := json.Marshal(got.Document("test")); err != nil {
			t.Fatal(err)
		}
		o := &got.Outcomes[0]
		if len(o.Studies)+len(o.Excluded) != len(s.Studies) && o.Problem == "" {
			t.Fatalf("%d pooled and %d left out of %d", len(o.Studies), len(o.Excluded), len(s.Studies))
		}
		for _, study := range o.Studies {
			if !(study.Estimate.SE > 0) || math.IsInf(study.Estimate.SE, 0) || math.IsNaN(study.Estimate.Y) || math.IsInf(study.Estimate.Y, 0) {
				t.Fatalf("%v from %v", study.Estimate, study.Source.Numbers)
			}
		}
		for _, e := range o.Excluded {
			if e.Reason == "" {
				t.Fatal("a row is left out without a reason")
			}
		}
	})
}
