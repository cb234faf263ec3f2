package missing

import (
	"errors"
	"math"
	"testing"

	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
)

// TestRankAgainstReference compares with S counted by hand of the formula and p from
// the exact law by a recursion in whole numbers (python; for the seven trials of
// aspirin also by all 5040 orders).
func TestRankAgainstReference(t *testing.T) {
	for name, want := range map[string][3]float64{
		"bcg_lor":         {2, 0.025641025641025641, 0.95236190796086629},
		"betablocker_lor": {21, 0.090909090909090909, 0.57700907638837678},
		"aspirin_lor":     {-9, -0.42857142857142857, 0.23888888888888889},
	} {
		y, s := pairs(t, name)
		r, err := BeggMazumdar(y, s)
		if err != nil || !r.Exact || r.Tied {
			t.Fatalf("%+v, %v", r, err)
		}
		near(t, name+" S", r.S, want[0], 0)
		near(t, name+" τ", r.Tau, want[1], 1e-14)
		near(t, name+" p", math.Exp(r.LnP), want[2], 1e-12)
		z := numeric.NormalFromLogTail(math.Log(want[2] / 2))
		near(t, name+" ln evidence", r.Evidence.Ln(), evidence.Normal(z).Ln(), 1e-10)
	}
}

// TestRankTies: with tied variances p is the normal one with Kendall's variance. The
// deviates ascend with y; the 4 of 6 pairs that differ in s all agree, so S = 4. By
// Kendall (1970) its variance with two ties of two in one variable is
// (4·3·13 − 2·(2·1·9))/18 = 20/3.
func TestRankTies(t *testing.T) {
	r, err := BeggMazumdar([]float64{0, 1, 5, 6}, []float64{1, 1, 2, 2})
	if err != nil || r.Exact || !r.Tied {
		t.Fatalf("%+v, %v", r, err)
	}
	near(t, "S", r.S, 4, 0)
	near(t, "τ", r.Tau, 4/math.Sqrt(6*4), 1e-14)
	near(t, "p", math.Exp(r.LnP), math.Erfc(4/math.Sqrt(20.0/3)/math.Sqrt2), 1e-12)
	if _, err := BeggMazumdar([]float64{0, 1, 5, 6}, []float64{1, 1, 1, 1}); !errors.Is(err, ErrAlike) {
		t.Errorf("equal variances: %v", err)
	}
}

// TestExactKendallTails: with all pairs in agreement p is 2/n!, at n = 100 too.
func TestExactKendallTails(t *testing.T) {
	for _, n := range []int{3, 10, 100} {
		lnFactorial, _ := math.Lgamma(float64(n) + 1)
		near(t, "ln p", lnExactKendall(n, float64(n*(n-1)/2)), math.Ln2-lnFactorial, 1e-10)
	}
	if lnExactKendall(10, 1) != 0 {
		t.Errorf("p at the middle is not 1: %v", lnExactKendall(10, 1))
	}
}
