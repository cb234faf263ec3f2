package sparse

import (
	"math"
	"testing"

	"steelyard/meta/effect"
)

// Source: evidence_extra.csv, 40-digit arithmetic over bcg_counts, each at the
// tolerance given there.
func TestBCGAgainstCheckValues(t *testing.T) {
	tables := bcg(t)
	or := mustFit(t, Model{Method: MantelHaenszel}, tables).Mean
	rr := mustFit(t, Model{Method: MantelHaenszel, Measure: effect.RiskRatio}, tables).Mean
	rd := mustFit(t, Model{Method: MantelHaenszel, Measure: effect.RiskDifference}, tables).Mean
	peto := mustFit(t, Model{Method: Peto}, tables).Mean
	got := map[string]float64{
		"mantel_haenszel_log_odds_ratio":                      or.Estimate,
		"mantel_haenszel_log_odds_ratio_se":                   or.SE,
		"mantel_haenszel_log_risk_ratio":                      rr.Estimate,
		"mantel_haenszel_log_risk_ratio_se":                   rr.SE,
		"mantel_haenszel_risk_difference_greenland_robins":    rd.Estimate,
		"mantel_haenszel_risk_difference_greenland_robins_se": rd.SE,
		"peto_log_odds_ratio":                                 peto.Estimate,
		"peto_log_odds_ratio_se":                              peto.SE,
	}
	found := 0
	for _, r := range records(t, "evidence_extra.csv") {
		if have, ok := got[r["form"]]; ok {
			found++
			value, tol := number(t, r["value"]), number(t, r["tolerance"])
			compare(t, want{r["form"], have, value, tol * math.Abs(value)})
		}
	}
	if found != len(got) {
		t.Errorf("%d of %d values found in the check file", found, len(got))
	}
}

// Sources: odds ratio and limits from a general statistics environment, 12
// digits (README of the check values); Q about the Mantel–Haenszel estimate
// 163.94 on 12 df [memory], Everitt & Hothorn's handbook, recalculated 163.9426;
// risk ratio (0.5881, 0.6862), risk difference and Peto (0.5746, 0.6738)
// [recalc].
func TestBCGAgainstPublished(t *testing.T) {
	tables := bcg(t)
	or := mustFit(t, Model{Method: MantelHaenszel}, tables)
	rr := mustFit(t, Model{Method: MantelHaenszel, Measure: effect.RiskRatio}, tables).Mean
	rd := mustFit(t, Model{Method: MantelHaenszel, Measure: effect.RiskDifference}, tables).Mean
	peto := mustFit(t, Model{Method: Peto}, tables).Mean
	compare(t,
		want{"odds ratio", math.Exp(or.Mean.Estimate), 0.622874024574, 6e-13},
		want{"low", math.Exp(or.Mean.Low), 0.574770322480, 6e-13},
		want{"high", math.Exp(or.Mean.High), 0.675003623733, 6e-13},
		want{"Q", or.Heterogeneity.Q, 163.9426, 5e-5},
		want{"df", float64(or.Heterogeneity.DF), 12, 0},
		want{"risk ratio", math.Exp(rr.Estimate), 0.6353, 5e-5},
		want{"risk ratio low", math.Exp(rr.Low), 0.5881, 5e-5},
		want{"risk ratio high", math.Exp(rr.High), 0.6862, 5e-5},
		want{"risk difference", rd.Estimate, -0.003288, 5e-7},
		want{"Peto", math.Exp(peto.Estimate), 0.6222, 5e-5},
		want{"Peto low", math.Exp(peto.Low), 0.5746, 5e-5},
		want{"Peto high", math.Exp(peto.High), 0.6738, 5e-5},
	)
}

// Source: beta-blocker trials, recalculated on a general numerical library
// [recalc], printed to the digits checked.
func TestBetaBlockers(t *testing.T) {
	or := mustFit(t, Model{Method: MantelHaenszel}, betaBlockers).Mean
	rr := mustFit(t, Model{Method: MantelHaenszel, Measure: effect.RiskRatio}, betaBlockers).Mean
	rd := mustFit(t, Model{Method: MantelHaenszel, Measure: effect.RiskDifference}, betaBlockers).Mean
	peto := mustFit(t, Model{Method: Peto}, betaBlockers)
	compare(t,
		want{"odds ratio", math.Exp(or.Estimate), 0.7702, 5e-5},
		want{"low", math.Exp(or.Low), 0.6984, 5e-5},
		want{"high", math.Exp(or.High), 0.8494, 5e-5},
		want{"risk ratio", math.Exp(rr.Estimate), 0.7908, 5e-5},
		want{"risk difference", rd.Estimate, -0.02088, 5e-6},
		want{"risk difference se", rd.SE, 0.00399, 5e-6},
		want{"Peto", math.Exp(peto.Mean.Estimate), 0.7708, 5e-5},
		want{"Peto low", math.Exp(peto.Mean.Low), 0.6992, 5e-5},
		want{"Peto high", math.Exp(peto.Mean.High), 0.8497, 5e-5},
		want{"Peto Q", peto.Mean.Q, 23.252, 5e-4},
		want{"ΣV", 1 / (peto.Mean.SE * peto.Mean.SE), 403.940, 5e-4},
	)
}

// Sources: Teo et al., BMJ 1991;303:1499-1503 [seen]: odds reduced by 55 %, p <
// 0.001; Egger & Davey Smith, BMJ 1995;310:752-754 [seen]: cumulatively seven
// small trials sufficed for P < 0.001; z, odds ratios and limits [recalc].
func TestMagnesiumCumulative(t *testing.T) {
	peto := Model{Method: Peto, Level: 0.95}
	for i, w := range [][4]float64{
		{-0.679, 0.4515, 0.0454, 4.4901}, {-2.713, 0.3787, 0.1878, 0.7638}, {-3.186, 0.3654, 0.1967, 0.6789}, {-3.116, 0.3823, 0.2088, 0.7000},
		{-2.385, 0.5373, 0.3225, 0.8951}, {-3.219, 0.4586, 0.2853, 0.7372}, {-3.390, 0.4496, 0.2832, 0.7138}, {-3.522, 0.6468, 0.5076, 0.8243},
	} {
		m, err := peto.Refit(magnesium[:i+1])
		if err != nil {
			t.Fatal(err)
		}
		compare(t,
			want{"z", m.Statistic, w[0], 5.01e-4}, want{"odds ratio", math.Exp(m.Estimate), w[1], 5e-5},
			want{"low", math.Exp(m.Low), w[2], 5e-5}, want{"high", math.Exp(m.High), w[3], 5e-5},
		)
		if first := m.LnP < math.Log(0.001); first != (i >= 6) {
			t.Errorf("after %d trials p = %.5f", i+1, math.Exp(m.LnP))
		}
	}
	seven, err := peto.Refit(magnesium[:7])
	if err != nil {
		t.Fatal(err)
	}
	or := mustFit(t, Model{Method: MantelHaenszel}, magnesium).Mean
	compare(t,
		want{"reduction in %", 100 * (1 - math.Exp(seven.Estimate)), 55, 0.5},
		want{"p", math.Exp(seven.LnP), 0.00070, 5e-6},
		want{"Mantel–Haenszel", math.Exp(or.Estimate), 0.6441, 5e-5},
		want{"low", math.Exp(or.Low), 0.5034, 5e-5},
		want{"high", math.Exp(or.High), 0.8243, 5e-5},
	)
}

// Source: ISIS-2, Lancet 1988;ii:349-360, five-week vascular deaths with the
// odds reductions printed beside them [memory]: streptokinase 25 % (SD 4),
// aspirin 23 % (SD 4), both 42 % (SD 5); each 2p < 0.00001. An SD there is the
// reduction over z.
func TestISIS2(t *testing.T) {
	for _, tt := range []struct {
		name          string
		table         [4]float64
		reduction, sd float64
	}{
		{"streptokinase", [4]float64{791, 8592, 1029, 8595}, 25, 4},
		{"aspirin", [4]float64{804, 8587, 1016, 8600}, 23, 4},
		{"both", [4]float64{343, 4292, 568, 4300}, 42, 5},
	} {
		m := mustFit(t, Model{Method: Peto}, tablesOf(tt.table)).Mean
		reduction := 100 * (1 - math.Exp(m.Estimate))
		compare(t,
			want{tt.name, reduction, tt.reduction, 0.5},
			want{tt.name + " sd", reduction / -m.Statistic, tt.sd, 0.5},
		)
		if !(m.LnP < math.Log(1e-5)) {
			t.Errorf("%s: p = %g", tt.name, math.Exp(m.LnP))
		}
	}
}
