package main

import (
	"encoding/csv"
	"encoding/json"
	"math"
	"os"
	"slices"
	"strconv"
	"strings"
	"testing"
)

// near reports whether got is want to a relative tolerance, absolute near 0.
func near(got, want, tolerance float64) bool {
	return math.Abs(got-want) <= tolerance*max(1, math.Abs(want))
}

// reference is the part of a check file that pool prints. Source: 40-digit
// arithmetic, testdata/checks/README.md.
type reference struct {
	Common struct {
		Estimate, SE float64
		LnNormal     float64 `json:"ln_evidence_ratio_normal"`
	}
	Q      float64
	QP     float64   `json:"Q_p"`
	LnChi2 float64   `json:"ln_evidence_ratio_heterogeneity_chi2"`
	Limits []float64 `json:"tau2_q_profile_95"`
	Tau2   map[string]float64
	Random map[string]struct {
		Estimate, SE, Z, P float64
		Low                float64      `json:"ci_low"`
		High               float64      `json:"ci_high"`
		LnNormal           float64      `json:"ln_evidence_ratio_normal"`
		Weights            []float64    `json:"weights_percent"`
		HartungKnapp       hartungKnapp `json:"hartung_knapp"`
		HartungKnappFloor  hartungKnapp `json:"hartung_knapp_floor"`
		Prediction         []float64    `json:"prediction_interval_df_k_minus_2"`
		PredictionOneLess  []float64    `json:"prediction_interval_df_k_minus_1"`
	}
}

type hartungKnapp struct {
	SE, T, P float64
	Low      float64 `json:"ci_low"`
	High     float64 `json:"ci_high"`
	Ln       float64 `json:"ln_evidence_ratio_matched"`
	Steps    float64 `json:"steps_matched"`
	LnT      float64 `json:"ln_evidence_ratio_t"`
}

// tauFlags names the estimators as the check files and as the flags do.
var tauFlags = map[string]string{
	"dersimonian_laird":             "dersimonian-laird",
	"two_step_dersimonian_laird":    "two-step-dersimonian-laird",
	"hedges_olkin":                  "hedges-olkin",
	"hunter_schmidt":                "hunter-schmidt",
	"sidik_jonkman":                 "sidik-jonkman",
	"paule_mandel":                  "paule-mandel",
	"maximum_likelihood":            "maximum-likelihood",
	"restricted_maximum_likelihood": "restricted-ml",
}

// TestPoolReference pools the published data sets end to end, counts included,
// and compares every number that pool prints with the 40-digit reference.
func TestPoolReference(t *testing.T) {
	for _, set := range []struct{ check, file, measure string }{
		{"bcg_lor", "bcg_counts", "odds ratio"},
		{"bcg_lrr", "bcg_counts", "risk ratio"},
		{"bcg_lor", "bcg_lor", "odds ratio"},
		{"betablocker_lor", "betablocker_lor", "odds ratio"},
		{"aspirin_lor", "aspirin_lor", "odds ratio"},
		{"eight_schools", "eight_schools", "mean difference"},
	} {
		raw, err := os.ReadFile(data + "checks/" + set.check + ".json")
		if err != nil {
			t.Fatal(err)
		}
		var want reference
		if err := json.Unmarshal(raw, &want); err != nil {
			t.Fatal(err)
		}
		if len(want.Random) != len(tauFlags) {
			t.Fatalf("%s has %d estimators, the test knows %d", set.check, len(want.Random), len(tauFlags))
		}
		for name, w := range want.Random {
			args := []string{data + "checks/" + set.file + ".csv", "--measure", set.measure, "--tau", tauFlags[name]}
			where := strings.Join(args[2:], " ") + " " + set.file
			compare := func(what string, got, want, tolerance float64) {
				t.Helper()
				if !near(got, want, tolerance) {
					t.Errorf("%s: %s = %v, want %v", where, what, got, want)
				}
			}
			o := pooled(t, args...).Outcomes[0]
			const iterative = 1e-7
			compare("estimate", o.Pooled.Estimate, w.Estimate, iterative)
			compare("se", o.Pooled.SE, w.HartungKnappFloor.SE, iterative)
			compare("t", o.Pooled.Statistic, w.HartungKnappFloor.T, iterative)
			compare("p", o.Pooled.P, w.HartungKnappFloor.P, iterative)
			compare("low", o.Pooled.Low, w.HartungKnappFloor.Low, iterative)
			compare("high", o.Pooled.High, w.HartungKnappFloor.High, iterative)
			compare("ln evidence", o.Pooled.LnEvidence, w.HartungKnappFloor.Ln, iterative)
			compare("steps", o.Pooled.Steps, w.HartungKnappFloor.Steps, iterative)
			compare("tau2", o.Tau.Tau2, want.Tau2[name], iterative)
			compare("tau2 low", o.Tau.Low, want.Limits[0], iterative)
			compare("tau2 high", *o.Tau.High, want.Limits[1], iterative)
			compare("Q", o.Heterogeneity.Q, want.Q, 1e-9)
			compare("Q p", o.Heterogeneity.P, want.QP, 1e-9)
			compare("Q evidence", o.Heterogeneity.LnEvidence, want.LnChi2, 1e-9)
			compare("common estimate", o.Other.Estimate, want.Common.Estimate, 1e-9)
			compare("common evidence", o.Other.LnEvidence, want.Common.LnNormal, 1e-9)
			// The references stand in the order of years, the sheet in its own.
			var weights []float64
			for _, study := range o.Studies {
				weights = append(weights, 100*study.Weight)
			}
			for i, weight := range slices.Sorted(slices.Values(weights)) {
				compare("weight", weight, slices.Sorted(slices.Values(w.Weights))[i], iterative)
			}
			if !o.Prediction.Widened {
				compare("prediction low", o.Prediction.Low, w.Prediction[0], iterative)
				compare("prediction high", o.Prediction.High, w.Prediction[1], iterative)
			}
			o = pooled(t, append(args, "--interval", "wald", "--prediction", "k-minus-1")...).Outcomes[0]
			compare("Wald low", o.Pooled.Low, w.Low, iterative)
			compare("Wald evidence", o.Pooled.LnEvidence, w.LnNormal, iterative)
			compare("prediction k-1", o.Prediction.High, w.PredictionOneLess[1], iterative)
			o = pooled(t, append(args, "--interval", "hartung-knapp", "--evidence", "student-t")...).Outcomes[0]
			compare("no floor, high", o.Pooled.High, w.HartungKnapp.High, iterative)
			compare("Student-t evidence", o.Pooled.LnEvidence, w.HartungKnapp.LnT, iterative)
		}
	}
}

// TestPoolDemo compares the invented workbook's first outcome with numbers from
// general-purpose numerical libraries (numpy and scipy: bounded minimisation of
// the restricted likelihood, their t and chi-square distributions).
func TestPoolDemo(t *testing.T) {
	d := pooled(t, data+"demo.xlsx", "--outcome", "flare within 24 weeks")
	o := d.Outcomes[0]
	for _, c := range []struct {
		what      string
		got, want float64
	}{
		{"estimate", o.Pooled.Estimate, -0.3425008237310572},
		{"se", o.Pooled.SE, 0.08470373294667473},
		{"t", o.Pooled.Statistic, -4.043515106313895},
		{"low", o.Pooled.Low, -0.5378279821588514},
		{"high", o.Pooled.High, -0.14717366530326298},
		{"p", o.Pooled.P, 0.003717543135705264},
		{"ln evidence", o.Pooled.LnEvidence, 3.3618636556020753},
		{"tau", math.Sqrt(o.Tau.Tau2), 0.13457403179249472},
		{"tau high", math.Sqrt(*o.Tau.High), 0.47984032225013},
		{"Q", o.Heterogeneity.Q, 10.923071305294467},
		{"I²", o.Heterogeneity.I2Tau.Value, 0.2908843220227741},
		{"I² high", o.Heterogeneity.I2Tau.High, 0.8391051301052189},
		{"prediction low", o.Prediction.Low, -0.7185050221828095},
		{"prediction high", o.Prediction.High, 0.033503374720695034},
		{"weight of the first", o.Studies[0].Weight, 0.06391131556025532},
		{"doubter's prior", o.Doubter.Prior, 0.3971331663811526},
		{"posterior from 0.2", o.Posterior[0].Posterior, 0.8782080533218474},
	} {
		if !near(c.got, c.want, 1e-7) {
			t.Errorf("%s = %v, want %v", c.what, c.got, c.want)
		}
	}
	if o.K != 9 || o.Participants != 1871 || o.Better != "lower" || o.Measure != "risk ratio" {
		t.Errorf("k %d, participants %d, better %q, measure %q", o.K, o.Participants, o.Better, o.Measure)
	}
}

// TestPoolLast checks that a result does not depend on where it is printed:
// pooling one outcome of three gives the bytes of its part of the whole.
func TestPoolLast(t *testing.T) {
	all := pooled(t, data+"demo.xlsx")
	if len(all.Outcomes) != 3 {
		t.Fatalf("%d outcomes, want 3", len(all.Outcomes))
	}
	for _, want := range all.Outcomes {
		one := pooled(t, data+"demo.xlsx", "--outcome", strings.ToUpper(want.Outcome))
		a, _ := json.Marshal(want)
		b, _ := json.Marshal(one.Outcomes[0])
		if string(a) != string(b) {
			t.Errorf("%s differs when pooled alone", want.Outcome)
		}
	}
}

func TestGoldenAnswers(t *testing.T) {
	for name, args := range map[string][]string{
		"pool-bcg.txt":        {"pool", data + "checks/bcg_counts.csv"},
		"pool-bcg-or.txt":     {"pool", data + "checks/bcg_counts.csv", "--measure", "odds ratio", "--better", "lower", "--important", "0.8"},
		"pool-demo.txt":       {"pool", data + "demo.xlsx"},
		"pool-methods.txt":    {"pool", data + "demo.xlsx", "--outcome", "serious harm", "--method", "binomial-normal", "--all-methods"},
		"pool-schools.txt":    {"pool", data + "checks/eight_schools.csv", "--measure", "mean difference", "--effects", "common"},
		"weigh-ratio.txt":     {"weigh", "--ratio", "--estimate", "0.71", "--ci-low", "0.58", "--ci-high", "0.86", "--important", "0.8"},
		"weigh-named.txt":     {"weigh", "--t", "3.4", "--df", "9", "--categories"},
		"weigh-z.txt":         {"weigh", "--z", "2"},
		"weigh-f.txt":         {"weigh", "--f", "4.1", "--df", "2", "--df2", "30"},
		"cumulative.txt":      {"cumulative", data + "demo.xlsx"},
		"cumulative-bcg.txt":  {"cumulative", data + "checks/bcg_counts.csv", "--order", "latitude", "--ties", "file"},
		"looks.txt":           {"cumulative", data + "checks/bcg_counts.csv", "--looks", "1000"},
		"leave-one-out.txt":   {"leave-one-out", data + "demo.xlsx", "--below", "2"},
		"influence.txt":       {"influence", data + "checks/bcg_counts.csv"},
		"next-trial.txt":      {"next-trial", data + "demo.xlsx", "--outcome", "flare within 24 weeks", "--arms", "200,100", "--control-risk", "0.4"},
		"help-next-trial.txt": {"next-trial", "--help"},
		"subsets.txt":         {"subsets", data + "demo.xlsx", "--outcome", "flare within 24 weeks"},
		"help-cumulative.txt": {"cumulative", "--help"},
		"help.txt":            {"--help"},
		"help-pool.txt":       {"pool", "--help"},
		"help-weigh.txt":      {"weigh", "--help"},
		"help-chart.txt":      {"chart", "--help"},
		"help-forest.txt":     {"chart", "forest", "--help"},
	} {
		stdout, stderr, code := call(t, "", args...)
		if code != codeDone || stderr != "" {
			t.Errorf("%v: exit %d, stderr %q", args, code, stderr)
		}
		golden(t, name, stdout)
		for i, line := range strings.Split(stdout, "\n") {
			if n := len([]rune(line)); n > 100 {
				t.Errorf("%s, line %d is %d characters wide", name, i+1, n)
			}
		}
	}
}

// TestPoolCommonEvidence: under a common effect the evidence integrated over τ is
// the normal form; the 40-digit values stand in the *.integrated.csv files.
func TestPoolCommonEvidence(t *testing.T) {
	for name, measure := range map[string]string{"bcg_lor": "odds ratio", "aspirin_lor": "odds ratio", "eight_schools": "mean difference"} {
		raw, err := os.ReadFile(data + "checks/" + name + ".integrated.csv")
		if err != nil {
			t.Fatal(err)
		}
		rows, err := csv.NewReader(strings.NewReader(string(raw))).ReadAll()
		if err != nil {
			t.Fatal(err)
		}
		column := slices.Index(rows[0], "ln_er_effect_common")
		if column < 0 || len(rows) < 2 {
			t.Fatalf("%s: no row of ln_er_effect_common", name)
		}
		got := pooled(t, data+"checks/"+name+".csv", "--measure", measure, "--effects", "common").Outcomes[0].Pooled.LnEvidence
		for _, row := range rows[1:] {
			want, err := strconv.ParseFloat(row[column], 64)
			if err != nil || !near(got, want, 1e-9) {
				t.Errorf("%s, %s: %v, want %v (%v)", name, row[0], got, want, err)
			}
		}
	}
}
