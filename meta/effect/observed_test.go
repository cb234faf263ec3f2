package effect

import (
	"math"
	"testing"

	"pgregory.net/rapid"
)

// Source: evidence_extra.csv (40-digit arithmetic), sums over bcg_counts.
func TestFromObservedExpected(t *testing.T) {
	want := map[string]float64{}
	for _, r := range records(t, "evidence_extra.csv") {
		if r["arg1"] == "bcg_counts" {
			want[r["form"]] = number(t, r["value"])
		}
	}
	e, steps, err := FromObservedExpected(OddsRatio, want["peto_observed_minus_expected"], want["peto_variance"])
	if err != nil || !relative(e.Y, want["peto_log_odds_ratio"], 1e-12) || !relative(e.SE, want["peto_log_odds_ratio_se"], 1e-12) || len(steps) != 1 {
		t.Errorf("%+v, %v; want %v", e, err, want)
	}
}

// Source: magnesium trial 8 (LIMIT-2), 90/1159 against 118/1157 [seen]: O−E
// −14.0898, V 47.3503 on a general numerical library to 4 decimals [recalc].
func TestFromPeto(t *testing.T) {
	e, steps, err := FromPeto(Table{90, 1159, 118, 1157})
	if err != nil || !relative(e.Y, -14.0898/47.3503, 5e-6) || !relative(e.SE, 1/math.Sqrt(47.3503), 2e-6) || len(steps) != 2 {
		t.Errorf("%+v, %+v, %v", e, steps, err)
	}
	whole, _, err := ClusterTable(Table{90, 1159, 118, 1157}, 1)
	if err != nil {
		t.Fatal(err)
	}
	if same, _, err := FromPetoEffective(whole); err != nil || same != e {
		t.Errorf("%+v, %v; want %+v", same, err, e)
	}
}

// Source: Tierney et al., Trials 2007;8:16 [seen, in a summary]: hazard ratio
// 0.88 with V 128.81, interval 0.74 to 1.05; O−E −16.466 [recalc].
func TestHazardPublished(t *testing.T) {
	byVariance, steps, err := FromHazardVariance(0.88, 128.81)
	if err != nil || len(steps) != 2 {
		t.Fatal(steps, err)
	}
	byObserved, _, err := FromObservedExpected(HazardRatio, -16.466, 128.81)
	if err != nil || !relative(byObserved.Y, byVariance.Y, 5e-5) || byObserved.SE != byVariance.SE {
		t.Errorf("%+v, %v; want %+v", byObserved, err, byVariance)
	}
	for sign, want := range map[float64]float64{-1: 0.74, 1: 1.05} {
		if got := ToReader(HazardRatio, byVariance.Y+sign*1.959963984540054*byVariance.SE); !(math.Abs(got-want) <= 0.005) {
			t.Errorf("limit %v, want %v", got, want)
		}
	}
	byLimits, _, err := FromLimits(HazardRatio, 0.88, 0.74, 1.05, 0.95)
	if err != nil || !relative(byLimits.SE, byVariance.SE, 0.02) {
		t.Errorf("se from limits %v, from V %v", byLimits.SE, byVariance.SE)
	}
}

// Source: closed forms: 200 events in equal arms have V 50, in arms of 2 : 1
// 200·2/9; 80 and 120 events 80·120/200 = 48. z of p 0.003 is
// 2.967737925341783325804 in 40-digit arithmetic by python3 mpmath.
func TestHazardFromEvents(t *testing.T) {
	variance := func(v float64, step Conversion, err error) float64 {
		if err != nil || len(step.To) != 1 || step.To[0].Value != v {
			t.Errorf("%v, %+v, %v", v, step, err)
		}
		return v
	}
	for _, tt := range []struct{ got, want float64 }{
		{variance(VarianceFromTotals(200, 310, 310)), 50},
		{variance(VarianceFromTotals(200, 400, 200)), 400 / 9.},
		{variance(VarianceFromShares(200, 0.5, 0.5)), 50},
		{variance(VarianceFromShares(200, 2/3., 1/3.)), 400 / 9.},
		{variance(VarianceFromEvents(80, 120)), 48},
	} {
		if !relative(tt.got, tt.want, 1e-14) {
			t.Errorf("variance %v, want %v", tt.got, tt.want)
		}
	}
	const z = 2.967737925341783325804
	for d, sign := range map[Direction]float64{Higher: 1, Lower: -1} {
		e, steps, err := FromHazardP(0.003, d, 50)
		if err != nil || !relative(e.Y, sign*z/math.Sqrt(50), 1e-12) || !relative(e.SE, 1/math.Sqrt(50), 1e-15) || len(steps) != 2 {
			t.Errorf("%v: %+v, %+v, %v", d, e, steps, err)
		}
	}
	// One-sided: half that p for lower is the same.
	signed, _, err := SignedZOneSided(0.0015, Lower)
	if err != nil {
		t.Fatal(err)
	}
	if e, _, err := FromHazardZ(signed, 50); err != nil || !relative(e.Y, -z/math.Sqrt(50), 1e-12) {
		t.Errorf("%+v, %v", e, err)
	}
}

// A hazard ratio made into p and O−E comes back by every route.
func TestHazardRoutes(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		y := rapid.Float64Range(-2, 2).Filter(func(y float64) bool { return math.Abs(y) > 1e-3 }).Draw(t, "y")
		v := rapid.Float64Range(1, 300).Draw(t, "variance")
		direction := Higher
		if y < 0 {
			direction = Lower
		}
		byVariance, _, err := FromHazardVariance(math.Exp(y), v)
		if err != nil || !near(byVariance.Y, y, 1e-14) {
			t.Fatal(byVariance, err)
		}
		byObserved, _, err := FromObservedExpected(HazardRatio, y*v, v)
		if err != nil || !relative(byObserved.Y, y, 1e-13) || byObserved.SE != byVariance.SE {
			t.Fatal(byObserved, err)
		}
		p := math.Erfc(math.Abs(y) * math.Sqrt(v) / math.Sqrt2)
		if p < 1e-290 {
			return
		}
		byP, _, err := FromHazardP(p, direction, v)
		if err != nil || !near(byP.Y, y, 1e-9) || byP.SE != byVariance.SE {
			t.Fatal(byP, err)
		}
		byEstimate, _, err := FromP(HazardRatio, math.Exp(y), p, math.Inf(1))
		if err != nil || !relative(byEstimate.SE, byVariance.SE, 1e-6) {
			t.Fatal(byEstimate, byVariance, err)
		}
	})
}

// Source: Chinn (2000) and Cochrane Handbook 10.6: the factor is √3/π = 0.5513
// (closed form; 1/1.814).
func TestLogistic(t *testing.T) {
	e, steps, err := StandardisedFromOdds(Estimate{Y: math.Log(2), SE: 0.3})
	factor := math.Sqrt(3) / math.Pi
	if err != nil || !relative(e.Y, factor*math.Ln2, 1e-15) || !relative(e.SE, factor*0.3, 1e-15) || len(steps) != 1 || !(math.Abs(1/factor-1.814) < 5e-4) {
		t.Errorf("%+v, %v", e, err)
	}
	back, _, err := OddsFromStandardised(e)
	if err != nil || !relative(back.Y, math.Ln2, 1e-15) || !relative(back.SE, 0.3, 1e-15) {
		t.Errorf("%+v, %v", back, err)
	}
}
