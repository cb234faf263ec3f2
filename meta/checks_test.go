package meta

import (
	"math"
	"strings"
	"testing"

	"steelyard/meta/evidence"
)

// The reference results of testdata/checks were computed in 40-digit arithmetic
// from the formulas of the methods; see the README there.

var checkNames = []string{"bcg_lor", "bcg_lrr", "betablocker_lor", "aspirin_lor", "eight_schools"}

// reference is what a NAME.json holds.
type reference struct {
	K                int
	Common           block
	Q                float64
	DF               int                `json:"Q_df"`
	P                float64            `json:"Q_p"`
	I2               float64            `json:"I2_percent"`
	H2               float64            `json:"H2"`
	HeterogeneityLn  float64            `json:"ln_evidence_ratio_heterogeneity_chi2"`
	Tau2             map[string]float64 `json:"tau2"`
	QProfile         [2]float64         `json:"tau2_q_profile_95"`
	Random           map[string]block
	I2Tau            map[string]float64 `json:"I2_from_tau2_percent"`
	LeaveOneOut      []refit            `json:"leave_one_out_reml"`
	CumulativeByDate []refit            `json:"cumulative_reml"`
	Studies          []string           // in date order, which weights and refits follow
}

// block is the result at one τ².
type block struct {
	Estimate, SE, Z, P float64
	Low                float64      `json:"ci_low"`
	High               float64      `json:"ci_high"`
	Ln                 float64      `json:"ln_evidence_ratio_normal"`
	Steps              float64      `json:"steps_normal"`
	WeightsPercent     []float64    `json:"weights_percent"`
	Plain              studentBlock `json:"hartung_knapp"`
	Floor              studentBlock `json:"hartung_knapp_floor"`
	TwoLess            [2]float64   `json:"prediction_interval_df_k_minus_2"`
	OneLess            [2]float64   `json:"prediction_interval_df_k_minus_1"`
}

// studentBlock is a Hartung–Knapp result.
type studentBlock struct {
	SE, T, DF, P float64
	Low          float64 `json:"ci_low"`
	High         float64 `json:"ci_high"`
	Z            float64 `json:"z_of_equal_p"`
	Matched      float64 `json:"ln_evidence_ratio_matched"`
	MatchedSteps float64 `json:"steps_matched"`
	Student      float64 `json:"ln_evidence_ratio_t"`
	StudentSteps float64 `json:"steps_t"`
}

// refit is the result for some of the studies.
type refit struct {
	N, Omitted         int
	Tau2, Estimate, SE float64
	HK                 *studentBlock
	Ln                 float64 `json:"ln_er_normal"`
	CommonEstimate     float64 `json:"common_estimate"`
	CommonLn           float64 `json:"common_ln_er"`
}

// closed is the tolerance for closed forms, and for all that follows from a root:
// the roots are solved closely enough to keep it.
const closed = 1e-9

// tauKey returns the name of an estimator in the reference files.
func tauKey(tau TauMethod) string {
	if tau == RestrictedML {
		return "restricted_maximum_likelihood"
	}
	return strings.ReplaceAll(tau.String(), "-", "_")
}

// readReference reads a reference and its studies, in the order of the reference.
func readReference(t testing.TB, name string) (studies, reference) {
	t.Helper()
	var want reference
	readJSON(t, name, &want)
	return readStudies(t, name).inOrderOf(t, want.Studies), want
}

func TestReferenceFits(t *testing.T) {
	for _, name := range checkNames {
		d, want := readReference(t, name)
		for tau := DerSimonianLaird; tau <= RestrictedML; tau++ {
			t.Run(name+"/"+tau.String(), func(t *testing.T) {
				c := checker{t, closed}
				f := mustFit(t, with(tau, Wald), d.y, d.s)
				c.near("τ²", f.Mean.Tau2, want.Tau2[tauKey(tau)])
				c.near("I² by τ", 100*f.Heterogeneity.I2Tau.Value, want.I2Tau[tauKey(tau)])
				compareBlock(c, Model{Level: 0.95, Tau: tau}, d, want.Random[tauKey(tau)])
			})
		}
		t.Run(name+"/common", func(t *testing.T) {
			compareBlock(checker{t, closed}, Model{Level: 0.95, Effects: CommonEffect}, d, want.Common)
		})
		t.Run(name+"/heterogeneity", func(t *testing.T) { compareHeterogeneity(checker{t, closed}, d, want) })
	}
}

// compareBlock checks Wald, both Hartung–Knapp intervals and the predictions.
func compareBlock(c checker, m Model, d studies, want block) {
	c.t.Helper()
	m.Interval = Wald
	f := mustFit(c.t, m, d.y, d.s)
	c.near("estimate", f.Mean.Estimate, want.Estimate)
	c.near("se", f.Mean.SE, want.SE)
	c.near("z", f.Mean.Statistic, want.Z)
	c.near("p", math.Exp(f.Mean.LnP), want.P)
	c.near("low", f.Mean.Low, want.Low)
	c.near("high", f.Mean.High, want.High)
	c.near("ln evidence", f.Mean.Evidence.Ln(), want.Ln)
	c.near("steps", f.Mean.Evidence.Steps(), want.Steps)
	if len(want.WeightsPercent) != len(d.y) {
		c.t.Fatalf("%d reference weights for %d studies", len(want.WeightsPercent), len(d.y))
	}
	for i, w := range want.WeightsPercent {
		c.near("weight", 100*f.Weights[i], w)
	}
	m.Interval = HartungKnapp
	compareStudent(c, m, d, want.Plain)
	m.Interval = HartungKnappFloor
	compareStudent(c, m, d, want.Floor)
	if m.Effects == CommonEffect {
		if f.Prediction != nil {
			c.t.Errorf("prediction interval %v for a common effect", *f.Prediction)
		}
		return
	}
	comparePredictions(c, m, d, want)
}

func compareStudent(c checker, m Model, d studies, want studentBlock) {
	c.t.Helper()
	mean := mustPool(c.t, m, d.y, d.s)
	c.near("t se", mean.SE, want.SE)
	c.near("t", mean.Statistic, want.T)
	c.near("df", mean.DF, want.DF)
	c.near("t p", math.Exp(mean.LnP), want.P)
	c.near("t low", mean.Low, want.Low)
	c.near("t high", mean.High, want.High)
	c.near("matched", mean.Evidence.Ln(), want.Matched)
	c.near("matched steps", mean.Evidence.Steps(), want.MatchedSteps)
	m.Evidence = evidence.StudentForm
	student := mustPool(c.t, m, d.y, d.s)
	c.near("student", student.Evidence.Ln(), want.Student)
	c.near("student steps", student.Evidence.Steps(), want.StudentSteps)
}

// comparePredictions checks both Student-t forms. Where the printed interval was
// widened, the reference must lie inside the interval for the mean.
func comparePredictions(c checker, m Model, d studies, want block) {
	c.t.Helper()
	for method, limits := range map[PredictionMethod][2]float64{PredictionTwoLess: want.TwoLess, PredictionOneLess: want.OneLess} {
		m.Prediction = method
		f := mustFit(c.t, m, d.y, d.s)
		if f.Prediction.Widened {
			if limits[0] < f.Mean.Low || limits[1] > f.Mean.High {
				c.t.Errorf("%v: widened, though %v reaches beyond %v to %v", method, limits, f.Mean.Low, f.Mean.High)
			}
			continue
		}
		c.near(method.String()+" low", f.Prediction.Low, limits[0])
		c.near(method.String()+" high", f.Prediction.High, limits[1])
	}
}

func compareHeterogeneity(c checker, d studies, want reference) {
	c.t.Helper()
	f := mustFit(c.t, at95, d.y, d.s)
	h := f.Heterogeneity
	if f.Mean.K != want.K || h.DF != want.DF {
		c.t.Errorf("k = %d, df = %d; want %d, %d", f.Mean.K, h.DF, want.K, want.DF)
	}
	c.near("Q", h.Q, want.Q)
	c.near("p of Q", math.Exp(h.LnP), want.P)
	c.near("I²", 100*h.I2Q.Value, want.I2)
	c.near("H²", h.H2, want.H2)
	c.near("ln evidence of Q", h.Evidence.Ln(), want.HeterogeneityLn)
	c.near("Q-profile low", f.Tau2.Low, want.QProfile[0])
	c.near("Q-profile high", f.Tau2.High, want.QProfile[1])
	c.near("I² by τ, low", h.I2Tau.Low, want.QProfile[0]/(want.QProfile[0]+h.Typical))
	c.near("I² by τ, high", h.I2Tau.High, want.QProfile[1]/(want.QProfile[1]+h.Typical))
}

func TestReferenceSubsets(t *testing.T) {
	for _, name := range checkNames {
		d, want := readReference(t, name)
		var p Pooler
		t.Run(name+"/leave-one-out", func(t *testing.T) {
			if len(want.LeaveOneOut) != len(d.y) {
				t.Fatalf("%d references for %d studies", len(want.LeaveOneOut), len(d.y))
			}
			for _, w := range want.LeaveOneOut {
				y, s := d.without(w.Omitted)
				compareRefit(checker{t, closed}, &p, y, s, w)
			}
		})
		t.Run(name+"/cumulative", func(t *testing.T) {
			if len(want.CumulativeByDate) != len(d.y) {
				t.Fatalf("%d references for %d studies", len(want.CumulativeByDate), len(d.y))
			}
			for _, w := range want.CumulativeByDate {
				compareRefit(checker{t, closed}, &p, d.y[:w.N], d.s[:w.N], w)
			}
		})
	}
}

func compareRefit(c checker, p *Pooler, y, s []float64, want refit) {
	c.t.Helper()
	pool := func(m Model) Mean {
		mean, err := p.Pool(m, y, s)
		if err != nil {
			c.t.Fatal(err)
		}
		return mean
	}
	wald := pool(with(RestrictedML, Wald))
	c.near("τ²", wald.Tau2, want.Tau2)
	c.near("estimate", wald.Estimate, want.Estimate)
	c.near("se", wald.SE, want.SE)
	c.near("ln evidence", wald.Evidence.Ln(), want.Ln)
	common := pool(Model{Level: 0.95, Effects: CommonEffect})
	c.near("common estimate", common.Estimate, want.CommonEstimate)
	c.near("common ln evidence", common.Evidence.Ln(), want.CommonLn)
	if want.HK != nil {
		student := pool(with(RestrictedML, HartungKnapp))
		c.near("t se", student.SE, want.HK.SE)
		c.near("t low", student.Low, want.HK.Low)
		c.near("t high", student.High, want.HK.High)
		c.near("t p", math.Exp(student.LnP), want.HK.P)
		c.near("matched", student.Evidence.Ln(), want.HK.Matched)
	}
}
