package synthesis

import (
	"context"
	"errors"
	"fmt"
	"math"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// carded runs a plan with the panel's part and returns the first outcome.
func carded(t testing.TB, x *review.Extraction, plan *review.Plan) *Outcome {
	t.Helper()
	s, err := Run(context.Background(), x, plan, Want{Further: Further{Panel: &PanelWanted{}}})
	if err != nil {
		t.Fatal(err)
	}
	return &s.Outcomes[0]
}

// oneEstimate is a sheet of one study with an estimate and its standard error, which
// has a normal law.
func oneEstimate(y, se float64) *sheet {
	var s sheet
	s.row("A", "", estimate(y, se))
	return &s
}

// inUnits is the evidence for |θ| < 1 over |θ| > 1 at z = 0. With erf(1) and erf(1/√2)
// for the masses, M is erf(1)/erf(1/√2) and erfc(1)/erfc(1/√2); the corrections 0.2022…
// and 0.5293… are reference values in 40-digit arithmetic (checks, evidence_extra.csv).
func inUnits() float64 {
	const within, outside = 0.20225806218268512, 0.52932445033158904
	half := 1 / math.Sqrt2
	return math.Log(math.Erf(1)/math.Erf(half)) - math.Log(math.Erfc(1)/math.Erfc(half)) - (within - outside)
}

// TestPanelRegionReference: the trivial zone of one standard error to each side has the
// reference evidence, on the outcome's own scale and per 1000 at a baseline.
func TestPanelRegionReference(t *testing.T) {
	s := oneEstimate(0, 0.1)
	for _, settings := range [][]string{
		{"measure", "mean difference", "important", "0.1"},
		{"measure", "risk difference", "baseline", "0.5", "important-per-1000", "100"},
		{"measure", "risk difference", "baseline", "0.5", "important", "0.1"},
	} {
		o := carded(t, &s.Extraction, planOf(t, settings...))
		z := o.Panel.Rows[0].Zone
		if z == nil || len(z.Regions) != 3 || z.Regions[1].Name != "trivial" {
			t.Fatalf("%v: %+v", settings, z)
		}
		if got := z.Regions[1].Evidence.Ln(); math.Abs(got-inUnits()) > 1e-9 {
			t.Errorf("%v: ln evidence for a trivial effect %v, want %v", settings, got, inUnits())
		}
		if got, want := z.Regions[1].Posterior, math.Erf(1/math.Sqrt2); math.Abs(got-want) > 1e-12 {
			t.Errorf("%v: probability %v, want %v", settings, got, want)
		}
		if math.Abs(z.Benefit.Ln()+z.Harm.Ln()) > 1e-9 { // by symmetry lower : trivial is the inverse of trivial : higher
			t.Errorf("%v: %v and %v", settings, z.Benefit.Ln(), z.Harm.Ln())
		}
	}
}

// brindle are the counts and the ratio of an invented outcome of nine trials, whose card
// was computed independently with general numerical libraries.
func brindle() *sheet {
	var s sheet
	for i, c := range [][4]float64{{11, 41, 19, 40}, {20, 75, 27, 74}, {2, 17, 7, 18}, {30, 98, 41, 101}, {44, 121, 38, 118}, {36, 158, 66, 160}, {23, 88, 35, 90}} {
		s.row(fmt.Sprintf("T%d", i), "", counts(c[0], c[1], c[2], c[3]))
	}
	s.row("T7", "", with(numbers{review.Estimate: 0.71, review.LimitLow: 0.49, review.LimitHigh: 1.02, review.TotalTreated: 131, review.TotalControl: 128}))
	s.row("T8", "", counts(50, 206, 74, 207))
	return &s
}

// TestPanelBrindle holds absolute effects, numbers needed, regions and settings to
// independently computed ones, to the digits given (invented data).
func TestPanelBrindle(t *testing.T) {
	o := carded(t, &brindle().Extraction, planOf(t, "measure", "risk ratio", "better", "lower", "baseline", "low 0.15, medium 0.3, high 0.45", "important-per-1000", "40"))
	for i, want := range []struct {
		difference, low, high   float64
		needed, least, most     float64
		benefit, harm, settings float64
	}{
		{-44, -62, -21, 23, 17, 49, 1.2, 1700, 0.58},
		{-87, -125, -41, 12, 9, 25, 6.9, 61, 0.87},
		{-131, -187, -62, 8, 6, 17, 14, 18, 0.92},
	} {
		r := o.Panel.Rows[i]
		d, n, z := r.Absolute.Difference, r.Needed, r.Zone
		for what, pair := range map[string][2]float64{
			"difference": {math.Round(1000 * d.Value), want.difference}, "low": {math.Round(1000 * d.Low), want.low}, "high": {math.Round(1000 * d.High), want.high},
			"needed": {math.Ceil(n.Value), want.needed}, "least": {math.Ceil(n.Low), want.least}, "most": {math.Ceil(n.High), want.most},
			"settings": {math.Round(100*z.Regions[0].Settings) / 100, want.settings},
		} {
			if pair[0] != pair[1] {
				t.Errorf("row %d: %s %v, want %v", i, what, pair[0], pair[1])
			}
		}
		for what, pair := range map[string][2]float64{"benefit": {z.Benefit.Odds(), want.benefit}, "harm": {z.Harm.Odds(), want.harm}} {
			if math.Abs(pair[0]/pair[1]-1) > 0.04 { // two digits are given
				t.Errorf("row %d: %s %v, want %v", i, what, pair[0], pair[1])
			}
		}
	}
	if m := o.Panel.Median; m == nil || math.Round(1000*m.Risk) != 389 || m.Studies != 8 || m.Used {
		t.Errorf("median %+v", m)
	}
}

// TestPanelInformation: p0 0.20 and a relative reduction of 25% need 902.6 people per
// arm; a reduction of 20% 1444.2; δ 0.2 standard deviations 392.4 (published checks
// [recalc]). An important difference goes before the reduction.
func TestPanelInformation(t *testing.T) {
	var s sheet
	s.row("A", "", counts(30, 200, 40, 200))
	s.row("B", "", counts(25, 210, 41, 190))
	for _, c := range []struct {
		settings []string
		perArm   float64
	}{
		{[]string{"baseline", "0.2"}, 902.6},
		{[]string{"baseline", "0.2", "reduction", "0.2"}, 1444.2},
		{[]string{"baseline", "0.2", "better", "lower", "important", "0.8"}, 1444.2},
		{[]string{"baseline", "0.2", "better", "lower", "important-per-1000", "50"}, 902.6},
	} {
		o := carded(t, &s.Extraction, planOf(t, append(c.settings, "measure", "risk ratio")...))
		a := o.Panel.Rows[0].Information
		if a == nil || math.Abs(a.PerArm-c.perArm) > 0.05 || a.People != 800 {
			t.Errorf("%v: %+v, want %v per arm", c.settings, a, c.perArm)
			continue
		}
		if got, want := a.Share(), 800/a.Total(); got != want {
			t.Errorf("%v: share %v, want %v", c.settings, got, want)
		}
	}
	m := oneEstimate(-3, 1)
	o := carded(t, &m.Extraction, planOf(t, "measure", "mean difference", "better", "lower", "important", "2", "standard-deviation", "10"))
	if a := o.Panel.Rows[0].Information; a == nil || math.Abs(a.PerArm-392.4) > 0.05 {
		t.Errorf("means: %+v", a)
	}
	o = carded(t, &m.Extraction, planOf(t, "measure", "mean difference", "better", "lower", "important", "2"))
	if a := o.Panel.Rows[0].Information; a != nil {
		t.Errorf("without a standard deviation: %+v", a)
	}
}

// TestPanelNullTrial: one study of a mean difference y with standard error s, a common
// effect and arms of standard deviation d: a null trial of n people has the variance
// 4d²/n, and the pooled limit crosses 0 at n = 4d²((y/(s²z))² − 1/s²).
func TestPanelNullTrial(t *testing.T) {
	const y, s, d, z = -0.5, 0.1, 1.0, 1.959963984540054
	one := oneEstimate(y, s)
	o := carded(t, &one.Extraction, planOf(t, "measure", "mean difference", "effects", "common", "standard-deviation", "1", "important", "0.2"))
	r := o.Panel.Rows[0]
	if r.Null == nil || r.Null.Crossed || r.Null.Trial == nil || !r.Null.Trial.Found {
		t.Fatalf("%+v", r.Null)
	}
	w := 1 / (s * s)
	want := 4 * d * d * ((w*y/z)*(w*y/z) - w)
	if got := r.Null.Trial.People; got < want || got > want+2 {
		t.Errorf("%v people, want the even number at or above %v", got, want)
	}
	if r.Zone.High.Trial != nil {
		t.Errorf("a null trial towards harm: %+v", r.Zone.High.Trial)
	}
	if r.Zone.Low.Trial == nil || r.Zone.Low.Trial.People >= r.Null.Trial.People {
		t.Errorf("the nearer threshold asks for %+v, none for %+v", r.Zone.Low.Trial, r.Null.Trial)
	}
	half := z * s
	if got := r.Null.High; math.Abs(got-(y+half)) > 1e-9 {
		t.Errorf("the upper limit lies %v from none, want %v", got, y+half)
	}
}

// TestPanelOutOfReach: a baseline of 20 per 1000 cannot have 40 fewer: that side is left
// out and the rest weighed.
func TestPanelOutOfReach(t *testing.T) {
	o := carded(t, &brindle().Extraction, planOf(t, "measure", "risk ratio", "better", "lower", "baseline", "0.02", "important-per-1000", "40"))
	z := o.Panel.Rows[0].Zone
	if z == nil || z.Benefit != nil || z.Harm == nil || z.Low != nil || z.High == nil || len(z.Regions) != 2 || z.Regions[0].Name != "trivial" {
		t.Fatalf("%+v", z)
	}
	if sum := z.Regions[0].Posterior + z.Regions[1].Posterior; math.Abs(sum-1) > 1e-12 {
		t.Errorf("the probabilities add up to %v", sum)
	}
	d := o.Panel.document(o)
	if d.Rows[0].Zone.Low != nil || d.Rows[0].Zone.LowPer1000 != nil || d.Rows[0].Zone.LnBenefit != nil {
		t.Errorf("%+v", d.Rows[0].Zone)
	}
}

// TestPanelWithoutAbsolute: measures without an absolute form say what to do; a missing
// baseline is offered from the control arms or asked for.
func TestPanelWithoutAbsolute(t *testing.T) {
	reported := oneEstimate(0.7, 0.2)
	var zeros sheet
	zeros.row("A", "", counts(3, 50, 0, 50))
	zeros.row("B", "", counts(2, 50, 0, 60))
	for _, c := range []struct {
		s       *sheet
		measure string
		says    string
	}{
		{reported, "standardised mean difference", "state one to read it in a unit"},
		{reported, "mean difference", "absolute already"},
		{reported, "correlation", "compares no groups"},
		{reported, "ratio of means", "multiply the mean"},
		{reported, "unspecified", "state it with --measure"},
		{reported, "hazard ratio", "no baseline risk is given and no study states the events"},
		{&zeros, "risk ratio", "the median risk of the control arms, 0, is none to start from"},
	} {
		o := carded(t, &c.s.Extraction, planOf(t, "measure", c.measure))
		if o.Panel == nil || !strings.Contains(o.Panel.NoAbsolute, c.says) || len(o.Panel.Rows) != 1 || o.Panel.Rows[0].Absolute != nil {
			t.Errorf("%s: %+v", c.measure, o.Panel)
		}
	}
	o := carded(t, &brindle().Extraction, planOf(t, "measure", "risk ratio"))
	if r := o.Panel.Rows[0]; r.Baseline.Name != MedianBaseline || !o.Panel.Median.Used || r.Absolute == nil {
		t.Errorf("%+v, %+v", r, o.Panel.Median)
	}
}

// TestPanelHigherIsBetter: the wanted side is the upper one.
func TestPanelHigherIsBetter(t *testing.T) {
	s := oneEstimate(0.1, 0.02)
	o := carded(t, &s.Extraction, planOf(t, "measure", "risk difference", "better", "higher", "baseline", "0.3", "important-per-1000", "-20, 50"))
	z := o.Panel.Rows[0].Zone
	if z.Regions[0].Name != "harm" || z.Regions[2].Name != "benefit" || !(z.Benefit.Ln() > 0) || !(z.Harm.Ln() > 0) {
		t.Errorf("%+v", z)
	}
	if z.Per1000.Low != -20 || z.Per1000.High != 50 || math.Abs(z.Limits.High-0.05) > 1e-12 {
		t.Errorf("%+v, %+v", z.Per1000, z.Limits)
	}
	if a := o.Panel.Rows[0].Information; math.Abs(a.To-0.35) > 1e-12 || !a.Important {
		t.Errorf("%+v", a)
	}
}

// TestPanelThreshold: what is known of when a threshold was agreed.
func TestPanelThreshold(t *testing.T) {
	day := func(y, m, d int) review.Date { return review.Date{Year: y, Month: m, Day: d} }
	result := func(plan string) *Earlier {
		e, err := ReadEarlier([]byte(`{"format": "steelyard/1", "plan": {`+plan+`}, "outcomes": [{"outcome": ""}]}`), "old.json")
		if err != nil {
			t.Fatal(err)
		}
		return e
	}
	for _, c := range []struct {
		from    review.From
		date    review.Date
		judged  review.Date
		earlier *Earlier
		want    []FlagKind
		late    bool
	}{
		{from: review.FromFlag, want: []FlagKind{FlagCalled}},
		{from: review.FromSheet, want: []FlagKind{FlagUndated}},
		{from: review.FromSheet, date: day(2024, 3, 4)},
		{from: review.FromSheet, date: day(2024, 3, 4), judged: day(2024, 5, 1)},
		{from: review.FromSheet, date: day(2024, 3, 4), judged: day(2024, 3, 0)},
		{from: review.FromSheet, date: day(2024, 6, 1), judged: day(2024, 5, 1), want: []FlagKind{FlagAfterJudgement}, late: true},
		{from: review.FromSheet, date: day(2024, 0, 0), earlier: result(`"important": {"value": "0.8", "from": "sheet"}`), want: []FlagKind{FlagKept}},
		{from: review.FromSheet, date: day(2024, 1, 1), earlier: result(`"important": {"value": "0.9", "from": "sheet"}`), want: []FlagKind{FlagChanged}, late: true},
		{from: review.FromSheet, date: day(2024, 1, 1), earlier: result(`"level": {"value": "0.95", "from": "default"}`), want: []FlagKind{FlagChanged}, late: true},
	} {
		plan := &review.Plan{}
		if err := plan.Set("important", "", review.Value{Text: "0.8", From: c.from, Date: c.date}); err != nil {
			t.Fatal(err)
		}
		x := brindle().Extraction
		if c.judged.Year != 0 {
			x.Judgements = []review.Judgement{{Domain: review.DomainCertainty, Rating: "low", Reason: "r", Date: c.judged}}
		}
		s, err := Run(context.Background(), &x, plan, Want{Further: Further{Panel: &PanelWanted{Earlier: c.earlier}}})
		if err != nil {
			t.Fatal(err)
		}
		var got []FlagKind
		late := false
		for _, f := range s.Outcomes[0].Panel.Threshold.Flags {
			got, late = append(got, f.Kind), late || f.Kind.Late()
		}
		if fmt.Sprint(got) != fmt.Sprint(c.want) || late != c.late {
			t.Errorf("%+v: %v, late %v", c, got, late)
		}
	}
	for _, bad := range []string{"", "study,y", `{"format": "other/2"}`} {
		if _, err := ReadEarlier([]byte(bad), "old.json"); err == nil || !strings.Contains(err.Error(), "old.json") {
			t.Errorf("%q: %v", bad, err)
		}
	}
}

// TestPanelDomains: weights by label add up, the result without high risk is that of the
// other studies, and small studies are counted.
func TestPanelDomains(t *testing.T) {
	s := brindle()
	for i := range s.Studies {
		label := []string{"low", "Low", "high", "some concerns"}[i%4]
		remarked(&s.Studies[i], review.RiskOfBias, label)
	}
	o := carded(t, &s.Extraction, planOf(t, "measure", "risk ratio"))
	e := o.Panel.Evidence
	total, studies := 0.0, 0
	for _, share := range e.RiskOfBias {
		total, studies = total+share.Weight, studies+share.Studies
	}
	if len(e.RiskOfBias) != 3 || math.Abs(total-1) > 1e-12 || studies != 9 {
		t.Errorf("labels %+v", e.RiskOfBias)
	}
	var y, se []float64
	for i, study := range o.Studies {
		if i%4 != 2 {
			y, se = append(y, study.Estimate.Y), append(se, study.Estimate.SE)
		}
	}
	want, err := (meta.Model{Level: 0.95}).Fit(y, se)
	if err != nil {
		t.Fatal(err)
	}
	if e.WithoutHigh == nil || math.Abs(e.WithoutHigh.Mean.Estimate-want.Mean.Estimate) > 1e-12 || e.WithoutHigh.Mean.K != 7 {
		t.Errorf("without high risk %+v", e.WithoutHigh)
	}
	// By hand: 81 and 35 people are fewer than 100; 413 of the 1871 are in the largest.
	if e.Small.Counted != 9 || e.Small.Below != 2 || math.Abs(e.Small.Largest-413.0/1871) > 1e-12 {
		t.Errorf("small studies %+v", e.Small)
	}
	if e.Scatter.Below != 8 || e.Scatter.Above != 1 {
		t.Errorf("scatter %+v", e.Scatter)
	}
}

// TestPanelSidesAgree: turning an odds ratio round, at the mirrored baseline, mirrors
// the card.
func TestPanelSidesAgree(t *testing.T) {
	rapid.Check(t, func(r *rapid.T) {
		y := rapid.Float64Range(-1, 1).Draw(r, "log odds ratio")
		se := rapid.Float64Range(0.05, 0.5).Draw(r, "se")
		p := rapid.Float64Range(0.1, 0.9).Draw(r, "baseline")
		row := func(y, p float64) PanelRow {
			s := oneEstimate(math.Exp(y), se)
			o := carded(t, &s.Extraction, planOf(t, "measure", "odds ratio", "baseline", fmt.Sprint(p), "important-per-1000", "30"))
			return o.Panel.Rows[0]
		}
		a, b := row(y, p), row(-y, 1-p)
		if math.Abs(a.Absolute.Difference.Value+b.Absolute.Difference.Value) > 1e-9 || math.Abs(a.Absolute.Difference.Low+b.Absolute.Difference.High) > 1e-9 {
			r.Fatalf("%+v and %+v", a.Absolute, b.Absolute)
		}
		last := len(b.Zone.Regions) - 1
		for i := range a.Zone.Regions {
			if math.Abs(a.Zone.Regions[i].Posterior-b.Zone.Regions[last-i].Posterior) > 1e-9 {
				r.Fatalf("region %d: %v and %v", i, a.Zone.Regions[i], b.Zone.Regions[last-i])
			}
		}
	})
}

// TestPanelEnds: an ended context ends the work.
func TestPanelEnds(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	o := &Outcome{Name: "a"}
	o.Analysis = Analysis{Measure: effect.RiskRatio, Model: meta.Model{Level: 0.95}}
	fit, err := o.Analysis.Model.Fit([]float64{-0.5}, []float64{0.1})
	if err != nil {
		t.Fatal(err)
	}
	o.Result = &Result{Fit: fit}
	o.Studies = []Study{{Source: &review.Study{}, Estimate: effect.Estimate{Y: -0.5, SE: 0.1}, Weight: 1}}
	plan := planOf(t, "baseline", "0.2")
	if err := o.examinePanel(ctx, &review.Extraction{}, plan, PanelWanted{}); !errors.Is(err, context.Canceled) {
		t.Errorf("error %v", err)
	}
}

// TestPanelMedianWithSilent: a study without events in either arm carries nothing about
// a ratio and counts for the median control risk: of 0, 0.1 and 0.2 that is 0.1.
func TestPanelMedianWithSilent(t *testing.T) {
	var s sheet
	s.row("A", "", counts(5, 50, 5, 50))
	s.row("B", "", counts(8, 50, 10, 50))
	s.row("C", "", counts(0, 50, 0, 50))
	o := carded(t, &s.Extraction, planOf(t, "measure", "risk ratio"))
	if m := o.Panel.Median; m == nil || m.Studies != 3 || math.Abs(m.Risk-0.1) > 1e-15 {
		t.Errorf("%+v", m)
	}
}

// TestPanelReduction: without an important difference the information size is for a
// relative change in the wanted direction, unless that leaves 0 to 1.
func TestPanelReduction(t *testing.T) {
	s := oneEstimate(0.1, 0.02)
	for _, c := range []struct {
		better, baseline string
		to               float64
	}{{"lower", "0.2", 0.15}, {"higher", "0.2", 0.25}, {"higher", "0.9", 0.675}} {
		o := carded(t, &s.Extraction, planOf(t, "measure", "risk difference", "better", c.better, "baseline", c.baseline))
		if a := o.Panel.Rows[0].Information; a == nil || a.Important || math.Abs(a.To-c.to) > 1e-12 {
			t.Errorf("%s from %s: %+v, want %v", c.better, c.baseline, a, c.to)
		}
	}
}

// TestPanelInformationBothSides: where no direction is better, the information size is
// that of the side that needs more people: (z.975 + z.80)² [p0(1-p0) + p1(1-p1)]/(p0-p1)²
// is 1503.06 for 30 against 50 per 1000, 1056.11 for 80; 6035.79 for 180 against 200,
// 2939.84 for 230.
func TestPanelInformationBothSides(t *testing.T) {
	for _, c := range []struct {
		baseline, better string
		to, perArm       float64
	}{
		{"0.05", "", 0.03, 1503.06}, {"0.2", "", 0.18, 6035.79}, {"0.05", "higher", 0.08, 1056.11}, {"0.2", "higher", 0.23, 2939.84}, {"0.05", "lower", 0.03, 1503.06},
	} {
		settings := []string{"measure", "risk ratio", "baseline", c.baseline, "important-per-1000", "-20, 30"}
		if c.better != "" {
			settings = append(settings, "better", c.better)
		}
		o := carded(t, &brindle().Extraction, planOf(t, settings...))
		a := o.Panel.Rows[0].Information
		if a == nil || !a.Important || math.Abs(a.To-c.to) > 1e-12 || math.Abs(a.PerArm-c.perArm) > 0.01 {
			t.Errorf("%+v: %+v", c, a)
		}
	}
}
