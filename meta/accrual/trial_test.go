package accrual

import (
	"context"
	"errors"
	"math"
	"reflect"
	"testing"

	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
)

func mustForesee(t testing.TB, q Trial, se float64) *Outlook {
	t.Helper()
	o, err := q.Foresee(background, se)
	if err != nil {
		t.Fatal(err)
	}
	return o
}

// beyond returns P(|Z| ≥ c) for Z ~ N(m, sd²).
func beyond(c, m, sd float64) float64 {
	return numeric.NormalTail((c-m)/sd) + numeric.NormalTail((c+m)/sd)
}

// TestCommonEffectClosedForm: with a common effect and total weight W the updated
// z is N(mean·√(W+w), w/W), w the weight of the next study, so that every number
// has a closed form.
func TestCommonEffectClosedForm(t *testing.T) {
	y, s := []float64{0.3, 0.5, -0.1}, []float64{0.2, 0.4, 0.25}
	const null = 0.05
	var total, sum float64
	for i := range y {
		w := 1 / (s[i] * s[i])
		total, sum = total+w, sum+w*y[i]
	}
	q := Trial{Y: y, SE: s, Model: meta.Model{Effects: meta.CommonEffect, Level: 0.9, Null: null}, Steps: []float64{1, 2, -0.5},
		Important: &meta.Limits{Low: -0.4, High: 0.4}}
	for _, se := range []float64{0.05, 0.2, 2} {
		w := 1 / (se * se)
		m, sd := (sum/total-null)*math.Sqrt(total+w), math.Sqrt(w/total)
		o := mustForesee(t, q, se)
		half := 1.6448536269514722 / math.Sqrt(total+w) // half-width of the 90 % interval
		// The updated mean is N(mean, sd²/(W+w)).
		mean, spread := sum/total, sd/math.Sqrt(total+w)
		between := func(a, b float64) float64 {
			return max(0, numeric.NormalTail((a-mean)/spread)-numeric.NormalTail((b-mean)/spread))
		}
		// The evidence for a zone that is symmetrical falls as the mean leaves 0.
		zone := evidence.Region{{Low: -0.4, High: 0.4}}
		zoneSteps := func(mean float64) float64 {
			r, err := evidence.Location{Estimate: mean, SE: 1 / math.Sqrt(total+w), DF: math.Inf(1)}.Region(zone, zone.Complement())
			if err != nil {
				t.Fatal(err)
			}
			return r.Steps()
		}
		turn, err := numeric.Root(func(mean float64) float64 { return zoneSteps(mean) - 1 }, 0, 0.5, 1e-10)
		if err != nil {
			t.Fatal(err)
		}
		for name, pair := range map[string][2]float64{
			"zone 1 step":   {o.Zone.Passing[0].Value.Value, between(-turn, turn)},
			"1 step":        {o.Passing[0].Value.Value, beyond(criticalZ(1), m, sd)},
			"2 steps":       {o.Passing[1].Value.Value, beyond(criticalZ(2), m, sd)},
			"½ step for H0": {o.Passing[2].Value.Value, 1 - beyond(criticalZ(-0.5), m, sd)},
			"excludes null": {o.ExcludesNull.Value, beyond(1.6448536269514722, m, sd)},
			"inside zone":   {o.Zone.Inside.Value, between(-0.4+half, 0.4-half)},
			"outside zone":  {o.Zone.Outside.Value, 1 - between(-0.4-half, 0.4+half)},
			"expected":      {o.Expected.Value, 0.5 * (m*m + sd*sd - 1 - math.Ln2) / evidence.LnStep},
			"median of low": {o.Spread[2].Low, mean - half},
			"95 % estimate": {o.Spread[4].Estimate, mean + 1.6448536269514722*spread},
		} {
			tolerance := 1e-8
			if name == "expected" || name[0] == 'm' || name == "95 % estimate" {
				tolerance = 1e-3 // read off the grid
			}
			if !(math.Abs(pair[0]-pair[1]) <= tolerance) {
				t.Errorf("se = %v, %s: %.10g, closed form %.10g", se, name, pair[0], pair[1])
			}
		}
	}
}

// TestSpreadBetweenStudiesCounts: with equal standard errors the updated mean is
// the plain one whatever τ² is, and restricted likelihood gives τ² = S² − s², so
// that y_new has the variance S²/k + S². By hand: S² = 4, variance 16/3.
func TestSpreadBetweenStudiesCounts(t *testing.T) {
	q := Trial{Y: []float64{0, 2, 4}, SE: []float64{1, 1, 1}, Model: meta.Model{Level: 0.95}}
	want := 2 + 1.6448536269514722*math.Sqrt(16./3)/4
	sure := mustForesee(t, q, 1)
	drawn, err := q.Simulate(background, 1, Draws{N: 20_000, Seed: 2})
	if err != nil {
		t.Fatal(err)
	}
	if got := sure.Spread[4].Estimate; math.Abs(got-want) > 1e-3 {
		t.Errorf("95 %% of updated means lie below %v, want %v", got, want)
	}
	if got := drawn.Spread[4].Estimate; math.Abs(got-want) > 0.04 { // 4·√(0.05·0.95/20,000)·sd/(4·φ(1.645)) = 0.035
		t.Errorf("95 %% of simulated means lie below %v, want %v", got, want)
	}
}

// TestQuadratureMatchesSimulation: every number within four Monte-Carlo errors.
func TestQuadratureMatchesSimulation(t *testing.T) {
	const n = 8_000
	for _, c := range []struct {
		data     string
		se       float64
		interval meta.IntervalMethod
		zone     meta.Limits
	}{
		{"bcg_lor", 0.1, meta.DefaultInterval, meta.Limits{Low: -0.5, High: 0.5}},
		{"aspirin_lor", 0.05, meta.DefaultInterval, meta.Limits{Low: -0.25, High: math.Inf(1)}},
		{"aspirin_lor", 0.3, meta.Wald, meta.Limits{Low: -0.2, High: 0.2}},
		{"eight_schools", 4, meta.HartungKnapp, meta.Limits{Low: -20, High: 20}},
	} {
		y, s := readStudies(t, c.data)
		q := Trial{Y: y, SE: s, Model: meta.Model{Level: 0.95, Interval: c.interval}, Important: &c.zone, Steps: []float64{-0.4, 0.5, 1, 2, 3}}
		sure := mustForesee(t, q, c.se)
		drawn, err := q.Simulate(background, c.se, Draws{N: n, Seed: 12})
		if err != nil {
			t.Fatal(err)
		}
		check := func(name string, sure, drawn Value) {
			t.Helper()
			if sure.Error != 0 || !fourErrors(drawn, sure.Value, n) {
				t.Errorf("%s, se %v, %s: by quadrature %v, simulated %v ± %v", c.data, c.se, name, sure.Value, drawn.Value, drawn.Error)
			}
		}
		check("expected steps", sure.Expected, drawn.Expected)
		check("excludes the null", sure.ExcludesNull, drawn.ExcludesNull)
		check("inside the zone", sure.Zone.Inside, drawn.Zone.Inside)
		check("outside the zone", sure.Zone.Outside, drawn.Zone.Outside)
		for i := range sure.Passing {
			check("passing", sure.Passing[i].Value, drawn.Passing[i].Value)
			check("zone passing", sure.Zone.Passing[i].Value, drawn.Zone.Passing[i].Value)
		}
		width := drawn.Spread[4].Steps - drawn.Spread[0].Steps
		reach := drawn.Spread[4].Estimate - drawn.Spread[0].Estimate
		for i, p := range sure.Spread {
			d := drawn.Spread[i]
			// Quantiles of 8,000 draws lie within 0.03 of the spread of their own.
			if math.Abs(p.Steps-d.Steps) > 0.04*width || math.Abs(p.Estimate-d.Estimate) > 0.04*reach ||
				math.Abs(p.Low-d.Low) > 0.05*reach || math.Abs(p.High-d.High) > 0.05*reach {
				t.Errorf("%s, se %v: percentile %+v, simulated %+v", c.data, c.se, p, d)
			}
		}
	}
}

func TestUnitDoesNotMatter(t *testing.T) {
	y, s := readStudies(t, "aspirin_lor")
	q := Trial{Y: y, SE: s, Model: meta.Model{Level: 0.95, Null: -0.02}}
	want := mustForesee(t, q, 0.1)
	moved := Trial{Model: meta.Model{Level: 0.95, Null: 7 - 5*-0.02}}
	for i := range y {
		moved.Y, moved.SE = append(moved.Y, 7-5*y[i]), append(moved.SE, 5*s[i])
	}
	got := mustForesee(t, moved, 0.5)
	for i := range want.Passing {
		if math.Abs(got.Passing[i].Value.Value-want.Passing[i].Value.Value) > 1e-8 {
			t.Errorf("%v, before %v", got.Passing[i], want.Passing[i])
		}
	}
	if math.Abs(got.Expected.Value-want.Expected.Value) > 1e-8 || math.Abs(got.ExcludesNull.Value-want.ExcludesNull.Value) > 1e-8 {
		t.Errorf("expected %v and %v, excludes the null %v and %v", got.Expected, want.Expected, got.ExcludesNull, want.ExcludesNull)
	}
}

func TestTrialWorkersDoNotMatter(t *testing.T) {
	y, s := readStudies(t, "aspirin_lor")
	q := Trial{Y: y, SE: s, Model: meta.Model{Level: 0.95}}
	var all []*Outlook
	for _, workers := range []int{1, 3} {
		o, err := q.Simulate(background, 0.1, Draws{N: 2000, Seed: 1, Work: meta.Work{Workers: workers}})
		if err != nil {
			t.Fatal(err)
		}
		all = append(all, o)
	}
	if !reflect.DeepEqual(all[0], all[1]) {
		t.Errorf("%+v and %+v", *all[0], *all[1])
	}
}

// TestSmallestSize: with a common effect the chance has a closed form, so that the
// size found is the first whose chance suffices.
func TestSmallestSize(t *testing.T) {
	y, s := []float64{0.2, 0.3}, []float64{0.2, 0.2}
	q := Trial{Y: y, SE: s, Model: meta.Model{Effects: meta.CommonEffect, Level: 0.95}}
	design := Design{Measure: effect.MeanDifference, SD: 1}
	goal := func(o *Outlook) float64 { return o.Passing[1].Value.Value }
	exact := func(size float64) float64 {
		w, total := size/4, 50.0 // 1/(sd²(2/size + 2/size)), and 2/0.2²
		return beyond(criticalZ(2), 0.25*math.Sqrt(total+w), math.Sqrt(w/total))
	}
	got, err := q.SmallestSize(background, design.SizeToSE, goal, 0.8)
	if err != nil {
		t.Fatal(err)
	}
	if !got.Found || !(exact(got.Size) >= 0.8 && exact(got.Size-1) < 0.8) || got.At.Size != got.Size {
		t.Errorf("%+v: chance %v there, %v with one person fewer", *got, exact(got.Size), exact(got.Size-1))
	}
	points, err := q.Curve(background, design.SizeToSE, []float64{100, 400, got.Size})
	if err != nil {
		t.Fatal(err)
	}
	for _, p := range points {
		if math.Abs(goal(p.Outlook)-exact(p.Size)) > 1e-8 {
			t.Errorf("size %v: chance %v, closed form %v", p.Size, goal(p.Outlook), exact(p.Size))
		}
	}
	// Already there: the smallest size searched.
	if got, err = q.SmallestSize(background, design.SizeToSE, func(*Outlook) float64 { return 1 }, 0.8); err != nil || !got.Found || got.Size != smallestTrial {
		t.Errorf("a goal that is met: %+v, %v", got, err)
	}
}

// TestNoSizeSuffices: where studies differ widely one more cannot settle the mean,
// however large.
func TestNoSizeSuffices(t *testing.T) {
	y, s := []float64{-2, 2, -1, 1.5}, []float64{0.2, 0.2, 0.2, 0.2}
	q := Trial{Y: y, SE: s, Model: meta.Model{Level: 0.95}}
	design := Design{Measure: effect.OddsRatio, ControlRisk: 0.2}
	got, err := q.SmallestSize(background, design.SizeToSE, func(o *Outlook) float64 { return o.ExcludesNull.Value }, 0.8)
	if err != nil {
		t.Fatal(err)
	}
	if got.Found || got.Size != 0 || !(got.At.Outlook.ExcludesNull.Value < 0.1) {
		t.Errorf("%+v", *got)
	}
}

// TestDesigns: by hand from the Cochrane Handbook's variances.
func TestDesigns(t *testing.T) {
	for _, c := range []struct {
		d      Design
		n1, n2 float64
		want   float64
	}{
		// Control 20 of 100, odds 1/4; an odds ratio of 2 gives odds 1/2, 1/3 of 90: 30.
		{Design{Measure: effect.OddsRatio, Effect: math.Ln2, ControlRisk: 0.2}, 90, 100, math.Sqrt(1./30 + 1./60 + 1./20 + 1./80)},
		// A risk ratio of ½: 10 of 100 against 20 of 100.
		{Design{Measure: effect.RiskRatio, Effect: -math.Ln2, ControlRisk: 0.2}, 100, 100, math.Sqrt(1./10 - 1./100 + 1./20 - 1./100)},
		{Design{Measure: effect.RiskDifference, Effect: 0.1, ControlRisk: 0.2}, 50, 100, math.Sqrt(0.3*0.7/50 + 0.2*0.8/100)},
		{Design{Measure: effect.MeanDifference, SD: 3}, 9, 18, 3 * math.Sqrt(1./9+1./18)},
		{Design{Measure: effect.StandardisedMeanDifference, Effect: 0.5}, 20, 30, math.Sqrt(50./600 + 0.25/(2*(50-3.94)))},
	} {
		got, err := c.d.SE(c.n1, c.n2)
		if err != nil || math.Abs(got-c.want) > 1e-14 {
			t.Errorf("%+v: %v, want %v (%v)", c.d, got, c.want, err)
		}
	}
	if n1, n2 := (Design{Ratio: 2}).Arms(90); n1 != 60 || n2 != 30 {
		t.Errorf("two treated per control: %v and %v", n1, n2)
	}
	var input *InputError
	for _, d := range []Design{{Measure: effect.RiskRatio, Effect: 2, ControlRisk: 0.5}, {Measure: effect.RiskDifference, Effect: 0.6, ControlRisk: 0.5},
		{Measure: effect.OddsRatio}, {Measure: effect.MeanDifference}, {Measure: effect.OddsRatio, ControlRisk: 0.1, Effect: math.NaN()},
		{Measure: effect.MeanDifference, SD: 1, Ratio: -1}} {
		if se, err := d.SizeToSE(100); !errors.As(err, &input) {
			t.Errorf("%+v: %v, %v", d, se, err)
		}
	}
	var measure *effect.MeasureError
	if _, err := (Design{Measure: effect.Correlation}).SizeToSE(100); !errors.As(err, &measure) {
		t.Errorf("correlation: %v", err)
	}
}

func TestTrialRefuses(t *testing.T) {
	good := Trial{Y: []float64{1, 2}, SE: []float64{1, 1}, Model: meta.Model{Level: 0.95}}
	var input *InputError
	for _, se := range []float64{0, -1, math.NaN(), math.Inf(1)} {
		if _, err := good.Foresee(background, se); !errors.As(err, &input) {
			t.Errorf("se %v: %v", se, err)
		}
	}
	for _, zone := range []meta.Limits{{Low: 1, High: 0}, {Low: math.Inf(-1), High: math.Inf(1)}, {Low: math.NaN(), High: 1}} {
		q := good
		q.Important = &zone
		if _, err := q.Foresee(background, 1); !errors.As(err, &input) {
			t.Errorf("zone %v: %v", zone, err)
		}
	}
	q := good
	q.Steps = []float64{math.Inf(1)}
	if _, err := q.Foresee(background, 1); !errors.As(err, &input) {
		t.Errorf("infinite steps: %v", err)
	}
	if _, err := (Trial{Model: good.Model}).Foresee(background, 1); !errors.Is(err, meta.ErrNoStudies) {
		t.Errorf("no studies: %v", err)
	}
	if _, err := good.SmallestSize(background, nil, nil, 1); !errors.As(err, &input) {
		t.Errorf("a chance of 1: %v", err)
	}
	if _, err := good.Simulate(background, 1, Draws{N: 5}); !errors.As(err, &input) {
		t.Errorf("5 draws: %v", err)
	}
	cause := errors.New("enough")
	ctx, cancel := context.WithCancelCause(background)
	cancel(cause)
	if _, err := good.Foresee(ctx, 1); !errors.Is(err, cause) {
		t.Errorf("after the end: %v", err)
	}
	if _, err := good.Simulate(ctx, 1, Draws{N: 500}); !errors.Is(err, cause) {
		t.Errorf("after the end: %v", err)
	}
}

// TestOneStudySoFar: a review of one study can be foreseen too, with τ² 0.
func TestOneStudySoFar(t *testing.T) {
	q := Trial{Y: []float64{0.4}, SE: []float64{0.2}, Model: meta.Model{Effects: meta.CommonEffect, Level: 0.95}}
	w, total := 100., 25.
	want := beyond(1.9599639845400545, 0.4*math.Sqrt(total+w), math.Sqrt(w/total))
	if got := mustForesee(t, q, 0.1).ExcludesNull.Value; math.Abs(got-want) > 1e-8 {
		t.Errorf("%v, closed form %v", got, want)
	}
}

// FuzzForesee: chances between 0 and 1 and finite numbers, or an error.
func FuzzForesee(f *testing.F) {
	f.Add(0.1, 0.5, -0.3, 0.2, 0.3, 0.25, 0.1, -0.2, 0.2, uint8(0))
	f.Add(1e9, -1e9, 0.0, 1e-6, 1.0, 1e6, 1e-3, 0.0, 1e-9, uint8(9))
	f.Add(0.0, 0.0, 0.0, 1.0, 1.0, 1.0, 1e12, -1.0, 1.0, uint8(3))
	f.Fuzz(func(t *testing.T, y1, y2, y3, s1, s2, s3, se, low, high float64, settings uint8) {
		q := Trial{Y: []float64{y1, y2, y3}, SE: []float64{s1, s2, s3}, Important: &meta.Limits{Low: low, High: high},
			Model: meta.Model{Level: 0.95, Effects: meta.Effects(settings & 1), Interval: meta.IntervalMethod(settings >> 1 & 3), Evidence: evidence.Form(settings >> 3 & 1)}}
		o, err := q.Foresee(background, se)
		if (o == nil) == (err == nil) {
			t.Fatalf("%v with error %v", o, err)
		}
		if err != nil {
			return
		}
		chances := []float64{o.ExcludesNull.Value, o.Zone.Inside.Value, o.Zone.Outside.Value}
		for i := range o.Passing {
			chances = append(chances, o.Passing[i].Value.Value, o.Zone.Passing[i].Value.Value)
		}
		for _, p := range chances {
			if !(p >= 0 && p <= 1) {
				t.Errorf("chances %v of %+v with %v", chances, q, se)
			}
		}
		for _, p := range o.Spread {
			for _, x := range []float64{o.Expected.Value, p.Steps, p.Estimate, p.Low, p.High} {
				if math.IsNaN(x) || math.IsInf(x, 0) {
					t.Errorf("%+v of %+v with %v", *o, q, se)
				}
			}
		}
	})
}

func BenchmarkForesee(b *testing.B) {
	y, s := readStudies(b, "bcg_lor")
	q := Trial{Y: y, SE: s, Model: meta.Model{Level: 0.95}}
	b.ReportAllocs()
	for b.Loop() {
		mustForesee(b, q, 0.1)
	}
}
