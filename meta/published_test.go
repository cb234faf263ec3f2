package meta

import (
	"math"
	"testing"
)

// Expected numbers are those of testdata/checks/PUBLISHED.md, whose marks stand
// beside them: [seen] in a source, [memory] recalled, [recalc] computed there from
// the published data by other code. Tolerances are half a unit of the last digit.

func TestPublishedBCG(t *testing.T) {
	// PUBLISHED.md §1 [recalc]; van Houwelingen, Arends & Stijnen (2002), Statistics
	// in Medicine 21:589-624, [memory], agree to the digits they print.
	for _, tt := range []struct {
		data                                     string
		tau                                      TauMethod
		tau2, mean, se, low, high                float64
		hkSE, hkLow, hkHigh, predLow, predHigh   float64
		tau2Digits, meanDigits, seDigits, digits int
	}{
		{"bcg_lor", DerSimonianLaird, 0.366343, -0.74739, 0.19226, -1.1242, -0.3706, 0.18724, -1.1553, -0.3394, -2.1452, 0.6504, 6, 5, 5, 4},
		{"bcg_lor", PauleMandel, 0.341205, -0.74546, 0.18679, -1.1116, -0.3794, 0.18679, -1.1524, -0.3385, -2.0953, 0.6043, 6, 5, 5, 4},
		{"bcg_lor", RestrictedML, 0.337772, -0.745178, 0.186028, -1.10979, -0.38057, 0.186726, -1.15202, -0.33834, -2.08828, 0.59793, 6, 6, 6, 5},
		{"bcg_lor", MaximumLikelihood, 0.302457, -0.741967, 0.177953, -1.09075, -0.39318, 0.186014, -1.14726, -0.33668, -2.01421, 0.53028, 6, 6, 6, 5},
		{"bcg_lor", HedgesOlkin, 0.349453, -0.74612, 0.18861, -1.1158, -0.3765, 0.18694, -1.1534, -0.3388, -2.1118, 0.6196, 6, 5, 5, 4},
		{"bcg_lor", SidikJonkman, 0.368420, -0.74754, 0.19271, -1.1252, -0.3698, 0.18727, -1.1556, -0.3395, -2.1492, 0.6541, 6, 5, 5, 4},
		{"bcg_lrr", DerSimonianLaird, 0.308760, -0.71412, 0.17874, -1.0644, -0.3638, 0.18070, -1.1078, -0.3204, -1.9988, 0.5706, 6, 5, 5, 4},
		{"bcg_lrr", PauleMandel, 0.318068, -0.71497, 0.18089, -1.0695, -0.3604, 0.18089, -1.1091, -0.3208, -2.0186, 0.5886, 6, 5, 5, 4},
		{"bcg_lrr", RestrictedML, 0.313243, -0.714532, 0.179782, -1.06690, -0.36217, 0.180792, -1.10844, -0.32062, -2.00838, 0.57931, 6, 6, 6, 5},
		{"bcg_lrr", MaximumLikelihood, 0.280028, -0.711199, 0.171897, -1.04811, -0.37429, 0.180042, -1.10348, -0.31892, -1.93582, 0.51342, 6, 6, 6, 5},
		{"bcg_lrr", HedgesOlkin, 0.328564, -0.71588, 0.18328, -1.0751, -0.3567, 0.18110, -1.1105, -0.3213, -2.0404, 0.6087, 6, 5, 5, 4},
		{"bcg_lrr", SidikJonkman, 0.345516, -0.71725, 0.18706, -1.0839, -0.3506, 0.18143, -1.1125, -0.3219, -2.0749, 0.6404, 6, 5, 5, 4},
	} {
		t.Run(tt.data+"/"+tt.tau.String(), func(t *testing.T) {
			d := readStudies(t, tt.data)
			f := mustFit(t, with(tt.tau, Wald), d.y, d.s)
			printed(t, "τ²", f.Mean.Tau2, tt.tau2, tt.tau2Digits)
			printed(t, "mean", f.Mean.Estimate, tt.mean, tt.meanDigits)
			printed(t, "se", f.Mean.SE, tt.se, tt.seDigits)
			printed(t, "low", f.Mean.Low, tt.low, tt.digits)
			printed(t, "high", f.Mean.High, tt.high, tt.digits)
			printed(t, "prediction low", f.Prediction.Low, tt.predLow, tt.digits)
			printed(t, "prediction high", f.Prediction.High, tt.predHigh, tt.digits)
			hk := mustPool(t, with(tt.tau, HartungKnapp), d.y, d.s)
			printed(t, "Hartung–Knapp se", hk.SE, tt.hkSE, tt.seDigits)
			printed(t, "Hartung–Knapp low", hk.Low, tt.hkLow, tt.digits)
			printed(t, "Hartung–Knapp high", hk.High, tt.hkHigh, tt.digits)
		})
	}
	profile := mustFit(t, Model{Level: 0.95, Interval: ProfileLikelihood, TauInterval: TauProfileLikelihood},
		readStudies(t, "bcg_lor").y, readStudies(t, "bcg_lor").s)
	printed(t, "profile low [memory]", profile.Mean.Low, -1.13, 2)
	printed(t, "profile high [memory]", profile.Mean.High, -0.37, 2)
	printed(t, "τ² low [memory: 0.12]", profile.Tau2.Low, 0.12, 2)
	printed(t, "τ² high [memory]", profile.Tau2.High, 0.89, 2)
}

// printed checks a value against one printed to a number of decimals.
func printed(t *testing.T, name string, got, want float64, decimals int) {
	t.Helper()
	if !within(got, want, 0.5*math.Pow10(-decimals)*(1+1e-9)) {
		t.Errorf("%s = %.10g, printed %.*f", name, got, decimals, want)
	}
}

// TestPublishedCumulative follows PUBLISHED.md §1 [recalc]: log risk ratios by
// DerSimonian and Laird, by year, then trial number, with evidence
// exp((z² − 1)/2)/√2.
func TestPublishedCumulative(t *testing.T) {
	d := readStudies(t, "bcg_lrr")
	order := []int{1, 2, 6, 3, 10, 9, 12, 5, 7, 11, 13, 4, 8}
	want := [][5]float64{ // ratio, low, high, z, evidence
		{0.4109, 0.1343, 1.2574, -1.559, 1.445},
		{0.2658, 0.1341, 0.5268, -3.797, 578.7},
		{0.3823, 0.2419, 0.6042, -4.118, 2063},
		{0.3858, 0.2687, 0.5540, -5.158, 2.574e5},
		{0.3331, 0.2260, 0.4909, -5.557, 2.178e6},
		{0.3852, 0.2773, 0.5350, -5.690, 4.612e6},
		{0.4075, 0.2873, 0.5780, -5.035, 1.368e5},
		{0.4575, 0.3253, 0.6434, -4.495, 1.048e4},
		{0.4261, 0.3041, 0.5971, -4.956, 9.241e4},
		{0.4656, 0.3441, 0.6299, -4.957, 9.288e4},
		{0.5025, 0.3748, 0.6738, -4.599, 1.682e4},
		{0.4538, 0.3296, 0.6247, -4.845, 5.357e4},
		{0.4896, 0.3449, 0.6950, -3.995, 1254},
	}
	var y, s []float64
	for i, trial := range order {
		y, s = append(y, d.y[trial-1]), append(s, d.s[trial-1])
		mean := mustPool(t, with(DerSimonianLaird, Wald), y, s)
		printed(t, "ratio", math.Exp(mean.Estimate), want[i][0], 4)
		printed(t, "low", math.Exp(mean.Low), want[i][1], 4)
		printed(t, "high", math.Exp(mean.High), want[i][2], 4)
		printed(t, "z", mean.Statistic, want[i][3], 3)
		if !near(mean.Evidence.Odds(), want[i][4], 5e-4) {
			t.Errorf("evidence after %d studies = %v, printed %v", i+1, mean.Evidence.Odds(), want[i][4])
		}
	}
}

func TestPublishedBetaBlockers(t *testing.T) {
	d := readStudies(t, "betablocker_lor") // PUBLISHED.md §3 [recalc]
	common := mustFit(t, Model{Level: 0.95, Effects: CommonEffect}, d.y, d.s)
	printed(t, "common mean", common.Mean.Estimate, -0.25992, 5)
	printed(t, "common se", common.Mean.SE, 0.05031, 5)
	printed(t, "odds ratio", math.Exp(common.Mean.Estimate), 0.7711, 4)
	printed(t, "odds ratio, low", math.Exp(common.Mean.Low), 0.6987, 4)
	printed(t, "odds ratio, high", math.Exp(common.Mean.High), 0.8510, 4)
	printed(t, "Q", common.Heterogeneity.Q, 23.2623, 4)
	printed(t, "p of Q", math.Exp(common.Heterogeneity.LnP), 0.330, 3)
	printed(t, "I²", 100*common.Heterogeneity.I2Q.Value, 9.73, 2)
	printed(t, "Q-profile high", common.Tau2.High, 0.081306, 6)
	for tau, want := range map[TauMethod]float64{
		DerSimonianLaird: 0.006309, PauleMandel: 0.005233, RestrictedML: 0.014189,
		MaximumLikelihood: 0.010255, HedgesOlkin: 0, SidikJonkman: 0.046281,
	} {
		printed(t, "τ² by "+tau.String(), mustPool(t, with(tau, Wald), d.y, d.s).Tau2, want, 6)
	}
	plain := mustPool(t, with(RestrictedML, HartungKnapp), d.y, d.s)
	printed(t, "Hartung–Knapp low", plain.Low, -0.36486, 5)
	printed(t, "Hartung–Knapp high", plain.High, -0.13013, 5)
	floor := mustFit(t, at95, d.y, d.s)
	printed(t, "floor low", floor.Mean.Low, -0.37338, 5)
	printed(t, "floor high", floor.Mean.High, -0.12161, 5)
	printed(t, "prediction low", floor.Prediction.Low, -0.52621, 5)
	printed(t, "prediction high", floor.Prediction.High, 0.03123, 5)
}

// TestPublishedMagnesium: counts [seen] in BUGS Examples, results PUBLISHED.md §4
// [recalc]. The likelihood has its maximum at the boundary while the restricted
// one has it at 0.18.
func TestPublishedMagnesium(t *testing.T) {
	counts := [][4]float64{
		{1, 40, 2, 36}, {9, 135, 23, 135}, {2, 200, 7, 200}, {1, 48, 1, 46},
		{10, 150, 8, 148}, {1, 59, 9, 56}, {1, 25, 3, 23}, {90, 1159, 118, 1157},
	}
	var y, s []float64
	for _, c := range counts {
		a, b, e, f := c[0], c[1]-c[0], c[2], c[3]-c[2]
		y = append(y, math.Log(a*f/(b*e)))
		s = append(s, math.Sqrt(1/a+1/b+1/e+1/f))
	}
	common := mustFit(t, Model{Level: 0.95, Effects: CommonEffect}, y, s)
	printed(t, "common mean", common.Mean.Estimate, -0.40573, 5)
	printed(t, "common se", common.Mean.SE, 0.12825, 5)
	printed(t, "Q", common.Heterogeneity.Q, 10.0155, 4)
	printed(t, "I²", 100*common.Heterogeneity.I2Q.Value, 30.11, 2)
	printed(t, "Q-profile low", common.Tau2.Low, 0, 6)
	printed(t, "Q-profile high", common.Tau2.High, 2.075119, 6)
	for _, tt := range []struct {
		tau                   TauMethod
		tau2, mean            float64
		tau2Digits, meanDigit int
	}{
		{DerSimonianLaird, 0.124411, -0.58976, 6, 5},
		{PauleMandel, 0.112082, -0.58058, 6, 5},
		{RestrictedML, 0.182078, -0.624452, 6, 6},
		{MaximumLikelihood, 0, -0.40573, 12, 5},
	} {
		mean := mustPool(t, with(tt.tau, Wald), y, s)
		printed(t, "τ² by "+tt.tau.String(), mean.Tau2, tt.tau2, tt.tau2Digits)
		printed(t, "mean by "+tt.tau.String(), mean.Estimate, tt.mean, tt.meanDigit)
	}
	plain := mustPool(t, with(RestrictedML, HartungKnapp), y, s)
	printed(t, "Hartung–Knapp low", plain.Low, -1.22035, 5)
	printed(t, "Hartung–Knapp high", plain.High, -0.02855, 5)
	floor := mustPool(t, at95, y, s)
	printed(t, "floor low", floor.Low, -1.26308, 5)
	printed(t, "floor high", floor.High, 0.01417, 5)
}

// TestPublishedEightSchools: Rubin (1981), J Educ Stat 6:377-401, data [seen].
func TestPublishedEightSchools(t *testing.T) {
	full := []float64{28.39, 7.94, -2.75, 6.82, -0.64, 0.63, 18.01, 12.16}
	fullSE := []float64{14.9, 10.2, 16.3, 11.0, 9.4, 11.4, 10.4, 17.6}
	rounded := readStudies(t, "eight_schools")

	// Gelman et al., Bayesian Data Analysis, section 5.5 [memory].
	printed(t, "pooled, rounded data [memory]", mustPool(t, at95, rounded.y, rounded.s).Estimate, 7.7, 1)
	printed(t, "Q, full data [memory]", mustFit(t, at95, full, fullSE).Heterogeneity.Q, 4.6, 1)

	// PUBLISHED.md §6 [recalc].
	f := mustFit(t, with(RestrictedML, Wald), full, fullSE)
	printed(t, "mean", f.Mean.Estimate, 7.8705, 4)
	printed(t, "se", f.Mean.SE, 4.1656, 4)
	printed(t, "low", f.Mean.Low, -0.2938, 4)
	printed(t, "high", f.Mean.High, 16.0349, 4)
	printed(t, "Q", f.Heterogeneity.Q, 4.5633, 4)
	printed(t, "p of Q", math.Exp(f.Heterogeneity.LnP), 0.713, 3)
	printed(t, "Q-profile high", f.Tau2.High, 272.314, 3)
	for tau, want := range map[TauMethod]float64{
		DerSimonianLaird: 0, PauleMandel: 0, RestrictedML: 0, MaximumLikelihood: 0, HedgesOlkin: 0, SidikJonkman: 38.718,
	} {
		printed(t, "τ² by "+tau.String(), mustPool(t, with(tau, Wald), full, fullSE).Tau2, want, 3)
	}
	hk := mustPool(t, with(RestrictedML, HartungKnapp), full, fullSE)
	printed(t, "Hartung–Knapp se", hk.SE, 3.36329, 5)
	printed(t, "Hartung–Knapp low", hk.Low, -0.0824, 4)
	printed(t, "Hartung–Knapp high", hk.High, 15.8235, 4)
	printed(t, "τ² by sidik-jonkman, rounded data",
		mustPool(t, with(SidikJonkman, Wald), rounded.y, rounded.s).Tau2, 38.612, 3)
	printed(t, "Q-profile high, rounded data", mustFit(t, at95, rounded.y, rounded.s).Tau2.High, 270.367, 3)
}
