package missing

import (
	"testing"

	"steelyard/meta"
)

// TestTrimAndFillAgainstReference compares with the count made by ranks of one list
// sorted by distance, and restricted maximum likelihood by bisection, in 40 digits
// with mpmath.
func TestTrimAndFillAgainstReference(t *testing.T) {
	common := meta.Model{Level: 0.95, Effects: meta.CommonEffect}
	for _, c := range []struct {
		name                 string
		model                meta.Model
		method               Method
		side                 Side
		missing              int
		centre, estimate, se float64
	}{
		{"bcg_lor", common, TrimAndFillL, Lower, 0, -0.43613907613641005, -0.43613907613641005, 0.042265456992996035},
		{"bcg_lor", common, TrimAndFillL, Higher, 4, -0.28410682841761286, -0.28410682841761286, 0.039793940956511754},
		{"bcg_lor", common, TrimAndFillR, Higher, 4, -0.28410682841761286, -0.28410682841761286, 0.039793940956511754},
		{"bcg_lor", plain, TrimAndFillL, Higher, 0, -0.74517777084369522, -0.74517777084369522, 0.18672618766206705},
		{"betablocker_lor", plain, TrimAndFillL, Lower, 1, -0.25240921115703852, -0.25245639096289467, 0.060142270566789631},
		{"betablocker_lor", plain, TrimAndFillR, Lower, 2, -0.25917992141551329, -0.25921147218375769, 0.059654821596620656},
		{"betablocker_lor", common, TrimAndFillR, Lower, 2, -0.26833006986275068, -0.26833006986275068, 0.049982452648795812},
		{"aspirin_lor", common, TrimAndFillL, Higher, 3, -0.089957844203651349, -0.089957844203651349, 0.031798620773236899},
		{"aspirin_lor", plain, TrimAndFillL, Higher, 3, -0.074123898576506558, -0.074258836878409921, 0.063298217626727988},
		{"aspirin_lor", plain, TrimAndFillR, Higher, 0, -0.14124314343846936, -0.14124314343846936, 0.070692820536651893},
	} {
		y, s := pairs(t, c.name)
		f, err := TrimAndFill(c.model, y, s, c.method, c.side)
		if err != nil {
			t.Fatal(err)
		}
		if f.Missing != c.missing || len(f.Y) != c.missing || f.Mean.K != len(y)+c.missing {
			t.Errorf("%s %v %v: %d missing, want %d", c.name, c.method, c.side, f.Missing, c.missing)
		}
		near(t, c.name+" centre", f.Centre, c.centre, 1e-9)
		near(t, c.name+" estimate", f.Mean.Estimate, c.estimate, 1e-9)
		near(t, c.name+" se", f.Mean.SE, c.se, 1e-9)
	}
}

// TestTrimSymmetric: nothing is missing from estimates that lie evenly about their
// mean, and turned round the same number is missing on the other side.
func TestTrimSymmetric(t *testing.T) {
	y, s := []float64{-2, -1, 0, 1, 2}, []float64{1, 0.7, 0.5, 0.7, 1}
	for _, side := range []Side{Lower, Higher} {
		f, err := TrimAndFill(plain, y, s, TrimAndFillL, side)
		if err != nil || f.Missing != 0 {
			t.Errorf("%v: %+v, %v", side, f, err)
		}
	}
}
