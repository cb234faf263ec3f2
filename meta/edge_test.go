package meta

import (
	"errors"
	"math"
	"slices"
	"strings"
	"testing"
)

func TestOneStudy(t *testing.T) {
	for interval := DefaultInterval; interval <= HenmiCopas; interval++ {
		f := mustFit(t, with(DefaultTau, interval), []float64{0.5}, []float64{0.2})
		c := checker{t, 1e-14}
		c.near("estimate", f.Mean.Estimate, 0.5)
		c.near("se", f.Mean.SE, 0.2)
		c.near("high", f.Mean.High, 0.5+0.2*1.959963984540054)
		c.near("ln evidence", f.Mean.Evidence.Ln(), (2.5*2.5-1-math.Ln2)/2)
		if f.Model.Interval != Wald || f.Model.Tau != DefaultTau || !math.IsInf(f.Mean.DF, 1) {
			t.Errorf("%v: model %+v, df %v", interval, f.Model, f.Mean.DF)
		}
		if f.Mean.Tau2 != 0 || f.Tau2 != (Limits{}) || f.Prediction != nil || f.Weights[0] != 1 {
			t.Errorf("%v: τ² %v, limits %v, prediction %v, weights %v", interval, f.Mean.Tau2, f.Tau2, f.Prediction, f.Weights)
		}
		h := f.Heterogeneity
		if h.Q != 0 || h.DF != 0 || h.LnP != 0 || h.I2Q != (Share{}) || h.H2 != 1 || h.H2Tau != 1 || !near(h.Typical, 0.04, 1e-14) {
			t.Errorf("%v: heterogeneity %+v", interval, h)
		}
		if !hasCaveat(f, SingleStudy) || hasCaveat(f, WaldForSingleStudy) != (interval > Wald) {
			t.Errorf("%v: caveats %v", interval, f.Caveats)
		}
	}
}

func TestTwoStudies(t *testing.T) {
	f := mustFit(t, at95, []float64{1, 2}, []float64{1, 1})
	i := slices.IndexFunc(f.Caveats, func(c Caveat) bool { return c.Kind == TwoStudies })
	if i < 0 {
		t.Fatalf("caveats %v", f.Caveats)
	}
	// One df: t at 95 % is tan(0.475π) = 12.7062.
	checker{t, 1e-10}.near("half-width", f.Caveats[i].Size, math.Tan(0.475*math.Pi))
	checker{t, 1e-10}.near("high", f.Mean.High, 1.5+math.Tan(0.475*math.Pi)/math.Sqrt2)
	if text := f.Caveats[i].Text(); !strings.Contains(text, "12.7 standard errors") {
		t.Errorf("caveat %q", text)
	}
	wald := mustFit(t, with(DefaultTau, Wald), []float64{1, 2}, []float64{1, 1})
	if hasCaveat(wald, TwoStudies) || !hasCaveat(wald, FewStudies) {
		t.Errorf("caveats beside Wald %v", wald.Caveats)
	}
}

// TestEqualEstimates: nothing scatters, so τ² is 0 by every estimator, and every
// interval keeps the width of the common effect, or of Student's t by it.
func TestEqualEstimates(t *testing.T) {
	tenth, fifth := 0.1, 0.2 // variables, as the sum of the constants is exact
	y, s := []float64{0.3, 0.3, tenth + fifth}, []float64{0.1, 0.2, 0.2}
	if y[2] == y[0] {
		t.Fatal("the last estimate should differ by rounding")
	}
	se := 1 / math.Sqrt(150)
	for tau := DerSimonianLaird; tau <= RestrictedML; tau++ {
		if mean := mustPool(t, with(tau, Wald), y, s); mean.Tau2 > 1e-30 || !near(mean.SE, se, 1e-12) {
			t.Errorf("%v: τ² = %v, se = %v, want 0 and %v", tau, mean.Tau2, mean.SE, se)
		}
	}
	for _, interval := range []IntervalMethod{HartungKnapp, HartungKnappFloor, ProfileLikelihood, HenmiCopas} {
		f := mustFit(t, with(DefaultTau, interval), y, s)
		if !near(f.Mean.SE, se, 1e-12) || !(f.Mean.High-f.Mean.Low > 2*se) {
			t.Errorf("%v: %+v", interval, f.Mean)
		}
		if fallback := interval == HartungKnapp; hasCaveat(f, FloorForEqualEstimates) != fallback || fallback && f.Model.Interval != HartungKnappFloor {
			t.Errorf("%v: interval %v, caveats %v", interval, f.Model.Interval, f.Caveats)
		}
		if f.Tau2 != (Limits{}) || !hasCaveat(f, LessScatterThanExpected) || !hasCaveat(f, TauZero) {
			t.Errorf("%v: τ² limits %v, caveats %v", interval, f.Tau2, f.Caveats)
		}
	}
	m := at95
	m.Prediction = PredictionBootstrap
	f := mustFit(t, m, y, s)
	if f.Prediction.Low > f.Mean.Low || f.Prediction.High < f.Mean.High {
		t.Errorf("bootstrap prediction %v inside %v to %v", *f.Prediction, f.Mean.Low, f.Mean.High)
	}
}

// TestCopiesOfOneStudy: n copies pool to the study with se/√n.
func TestCopiesOfOneStudy(t *testing.T) {
	y, s := slices.Repeat([]float64{-1.7}, 6), slices.Repeat([]float64{0.3}, 6)
	for _, m := range []Model{{Level: 0.95, Effects: CommonEffect}, with(RestrictedML, Wald), with(PauleMandel, HartungKnappFloor)} {
		mean := mustPool(t, m, y, s)
		if mean.Estimate != -1.7 || !near(mean.SE, 0.3/math.Sqrt(6), 1e-14) || mean.Q != 0 || mean.Tau2 != 0 {
			t.Errorf("%+v: %+v", m, mean)
		}
	}
}

// TestProfileOfCommonEffect: the likelihood is normal, so the ratio is Wald's.
func TestProfileOfCommonEffect(t *testing.T) {
	d := readStudies(t, "bcg_lor")
	wald := mustPool(t, Model{Level: 0.95, Effects: CommonEffect}, d.y, d.s)
	profile := mustPool(t, Model{Level: 0.95, Effects: CommonEffect, Interval: ProfileLikelihood}, d.y, d.s)
	if wald != profile {
		t.Errorf("profile %+v, Wald %+v", profile, wald)
	}
}

// TestI2Limits: the test-based limits by hand. Q = 20 on 9 df, z = 1.959964:
// ln H = ½ ln(20/9) = 0.399254, se = ½ ln(20/9)/(√40 − √17) = 0.181360.
func TestI2Limits(t *testing.T) {
	got := shareByQ(20, 10, 0.95)
	lnH, se, z := 0.399254, 0.181360, 1.959964
	c := checker{t, 1e-4}
	c.near("value", got.Value, 0.55)
	c.near("high", got.High, 1-math.Exp(-2*(lnH+z*se)))
	c.near("low", got.Low, 1-math.Exp(-2*(lnH-z*se)))

	// Q = 5 on 9 df: H is held at 1 and se = √((1 − 1/192)/16) = 0.249348.
	got = shareByQ(5, 10, 0.95)
	if got.Value != 0 || got.Low != 0 {
		t.Errorf("Q below its df: %+v", got)
	}
	c.near("high below df", got.High, 1-math.Exp(-2*z*0.249348))
	if got := shareByQ(0, 2, 0.95); got != (Share{0, 0, 1}) {
		t.Errorf("two equal estimates: %+v, want 0 to 1", got)
	}
}

func TestResolve(t *testing.T) {
	for _, tt := range []struct {
		name     string
		asked    Model
		k        int
		tau      TauMethod
		interval IntervalMethod
	}{
		{"default", at95, 5, RestrictedML, HartungKnappFloor},
		{"default, two studies", at95, 2, RestrictedML, HartungKnappFloor},
		{"one study", with(PauleMandel, HartungKnapp), 1, DefaultTau, Wald},
		{"common", Model{Level: 0.95, Effects: CommonEffect, Tau: PauleMandel}, 5, DefaultTau, Wald},
		{"profile", with(DefaultTau, ProfileLikelihood), 5, MaximumLikelihood, ProfileLikelihood},
		{"profile with its own", with(MaximumLikelihood, ProfileLikelihood), 5, MaximumLikelihood, ProfileLikelihood},
		{"Henmi–Copas", with(DefaultTau, HenmiCopas), 5, DerSimonianLaird, HenmiCopas},
		{"chosen", with(SidikJonkman, Wald), 5, SidikJonkman, Wald},
	} {
		t.Run(tt.name, func(t *testing.T) {
			got, err := tt.asked.Resolve(tt.k)
			if err != nil || got.Tau != tt.tau || got.Interval != tt.interval {
				t.Errorf("%v, %v, %v; want %v, %v", got.Tau, got.Interval, err, tt.tau, tt.interval)
			}
		})
	}
}

func TestModelErrors(t *testing.T) {
	y, s := []float64{1, 2, 4}, []float64{1, 1, 1}
	for _, tt := range []struct {
		name   string
		m      Model
		remedy string
	}{
		{"level 0", Model{}, "fraction such as 0.95"},
		{"level 95", Model{Level: 95}, "fraction such as 0.95"},
		{"level NaN", Model{Level: math.NaN()}, "fraction such as 0.95"},
		{"null", Model{Level: 0.95, Null: math.Inf(1)}, "finite number"},
		{"far null", Model{Level: 0.95, Null: 1e200}, "correct it"},
		{"effects", Model{Level: 0.95, Effects: 9}, "random"},
		{"τ", Model{Level: 0.95, Tau: 99}, "restricted-ml"},
		{"interval", Model{Level: 0.95, Interval: -1}, "hartung-knapp-floor"},
		{"prediction", Model{Level: 0.95, Prediction: 7}, "k-minus-2"},
		{"τ interval", Model{Level: 0.95, TauInterval: 7}, "Q-profile"},
		{"evidence", Model{Level: 0.95, Evidence: 7}, "empirical"},
		{"profile with another τ", with(RestrictedML, ProfileLikelihood), "leave the estimator unset"},
		{"Henmi–Copas with another τ", with(PauleMandel, HenmiCopas), "leave the estimator unset"},
		{"Henmi–Copas with a common effect", Model{Level: 0.95, Effects: CommonEffect, Interval: HenmiCopas}, "use wald"},
	} {
		t.Run(tt.name, func(t *testing.T) {
			f, err := tt.m.Fit(y, s)
			var fault *ModelError
			if !errors.As(err, &fault) || f != nil {
				t.Fatalf("fit %v, error %v; want a ModelError", f, err)
			}
			if !strings.Contains(err.Error(), tt.remedy) {
				t.Errorf("%q does not say %q", err, tt.remedy)
			}
		})
	}
}

func TestInputErrors(t *testing.T) {
	for _, tt := range []struct {
		name  string
		y, s  []float64
		index int
		says  string
	}{
		{"lengths", []float64{1, 2}, []float64{1}, -1, "2 estimates but 1 standard errors"},
		{"NaN", []float64{1, math.NaN()}, []float64{1, 1}, 1, "study 2"},
		{"infinite", []float64{math.Inf(-1), 1}, []float64{1, 1}, 0, "not a finite number"},
		{"huge estimate", []float64{1, 1e308}, []float64{1, 1}, 1, "square of the estimate"},
		{"NaN se", []float64{1, 1}, []float64{1, math.NaN()}, 1, "standard error"},
		{"infinite se", []float64{1, 1}, []float64{math.Inf(1), 1}, 0, "not a finite number"},
		{"zero se", []float64{1, 1, 1}, []float64{1, 1, 0}, 2, "not above 0"},
		{"negative se", []float64{1, 1}, []float64{-1, 1}, 0, "not above 0"},
		{"huge se", []float64{1, 1}, []float64{1, 1e308}, 1, "exceeds the range"},
		{"tiny se", []float64{1, 1}, []float64{1, 1e-308}, 1, "falls below the range"},
		{"se too far apart", []float64{1, 1}, []float64{1e-20, 1e140}, 1, "leave one of them out"},
		{"estimates too far apart", []float64{0, 1e10}, []float64{1e-140, 1}, 1, "check both"},
	} {
		t.Run(tt.name, func(t *testing.T) {
			f, err := at95.Fit(tt.y, tt.s)
			var fault *InputError
			if !errors.As(err, &fault) || f != nil {
				t.Fatalf("fit %v, error %v; want an InputError", f, err)
			}
			if fault.Index != tt.index || !strings.Contains(err.Error(), tt.says) {
				t.Errorf("index %d, %q; want %d and %q", fault.Index, err, tt.index, tt.says)
			}
		})
	}
	if _, err := at95.Fit(nil, nil); !errors.Is(err, ErrNoStudies) {
		t.Errorf("no studies: %v", err)
	}
}

// TestEveryCaveatSpeaks: each kind has a name that parses back and a sentence.
func TestEveryCaveatSpeaks(t *testing.T) {
	names := CaveatNames()
	if len(names) != int(FewDegrees)+1 {
		t.Fatalf("%d names", len(names))
	}
	seen := map[string]bool{}
	for i, name := range names {
		kind, err := ParseCaveat(name)
		text := Caveat{Kind: kind, K: 3, Size: 12.7}.Text()
		if err != nil || kind != CaveatKind(i) || seen[text] || !strings.HasSuffix(text, ".") || strings.Contains(text, "%!") {
			t.Errorf("%q: %v, %v, %q", name, kind, err, text)
		}
		seen[text] = true
	}
}

func TestHandMadeMeanHasLocation(t *testing.T) {
	l := Mean{Estimate: 0.4, SE: 0.1}.Location()
	if l.Estimate != 0.4 || l.SE != 0.1 || !math.IsInf(l.DF, 1) {
		t.Errorf("location %+v", l)
	}
}
