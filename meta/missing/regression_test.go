package missing

import (
	"errors"
	"math"
	"testing"

	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
)

// TestEggerAgainstChecks compares with the 40-digit values of the check files.
func TestEggerAgainstChecks(t *testing.T) {
	for _, name := range []string{"bcg_lor", "bcg_lrr", "betablocker_lor", "aspirin_lor", "eight_schools"} {
		y, s := pairs(t, name)
		r, err := Egger(plain, y, s)
		if err != nil {
			t.Fatal(err)
		}
		near(t, name+" intercept", r.Slope.Estimate, checkValue(t, name, "egger", "intercept"), 1e-12)
		near(t, name+" se", r.Slope.SE, checkValue(t, name, "egger", "se"), 1e-12)
		near(t, name+" t", r.Slope.Statistic, checkValue(t, name, "egger", "t"), 1e-12)
		near(t, name+" df", r.Slope.DF, checkValue(t, name, "egger", "df"), 0)
		near(t, name+" p", math.Exp(r.Slope.LnP), checkValue(t, name, "egger", "p"), 1e-11)
	}
}

// TestMixedAgainstReference compares with the restricted likelihood maximised, and
// the line solved by normal equations, in 40 digits with mpmath.
func TestMixedAgainstReference(t *testing.T) {
	for name, want := range map[string][5]float64{
		"bcg_lor":         {0.33558558830215733, -0.74895924902885766, 0.99112730518975472, -0.53968056959788966, 0.33160930760656877},
		"betablocker_lor": {0.014397410351843871, 0.23068162096762499, 0.51467835208831086, -0.30032435483512968, 0.13276164128116016},
		"aspirin_lor":     {0.015276630019354621, -1.3422688551392701, 1.0143855527435308, 0.024777148079881483, 0.14489084374958482},
	} {
		y, s := pairs(t, name)
		r, err := EggerMixed(plain, y, s)
		if err != nil {
			t.Fatal(err)
		}
		near(t, name+" τ²", r.Tau2, want[0], 3e-7)
		near(t, name+" slope", r.Slope.Estimate, want[1], 3e-7)
		near(t, name+" slope's se", r.Slope.SE, want[2], 3e-7)
		near(t, name+" limit", r.Limit.Estimate, want[3], 3e-7)
		near(t, name+" limit's se", r.Limit.SE, want[4], 3e-7)
	}
}

// TestCountsAgainstReference compares Peters' and Harbord's lines with normal
// equations in 40 digits with mpmath, Harbord's written as score over root of
// information on that root; p by the incomplete beta function.
func TestCountsAgainstReference(t *testing.T) {
	peters, err := Peters(plain, bcg(t))
	if err != nil {
		t.Fatal(err)
	}
	near(t, "Peters' slope", peters.Slope.Estimate, -563.68820391334305, 1e-11)
	near(t, "its se", peters.Slope.SE, 413.72334002077544, 1e-11)
	near(t, "its p", math.Exp(peters.Slope.LnP), 0.20029179228413553, 1e-11)
	near(t, "its limit", peters.Limit.Estimate, -0.4293084258019743, 1e-11)
	near(t, "the limit's se", peters.Limit.SE, 0.17162283028052108, 1e-11)
	harbord, err := Harbord(plain, bcg(t))
	if err != nil {
		t.Fatal(err)
	}
	near(t, "Harbord's slope", harbord.Slope.Estimate, -2.0929915407942364, 1e-11)
	near(t, "its se", harbord.Slope.SE, 1.6657654417806171, 1e-11)
	near(t, "its p", math.Exp(harbord.Slope.LnP), 0.23497195212206587, 1e-11)
	near(t, "its limit", harbord.Limit.Estimate, -0.23084262324944055, 1e-11)
	near(t, "the limit's se", harbord.Limit.SE, 0.24419854927003671, 1e-11)
}

// TestEmptyTablesLeftOut wants tables without events, or with nothing but events, in
// neither test.
func TestEmptyTablesLeftOut(t *testing.T) {
	tables := append(bcg(t), effect.Table{Total1: 50, Total2: 50}, effect.Table{Events1: 9, Total1: 9, Events2: 8, Total2: 8})
	for _, test := range []func(meta.Model, []effect.Table) (*Regression, error){Peters, Harbord} {
		with, err := test(plain, tables)
		without, _ := test(plain, bcg(t))
		if err != nil || with.Slope != without.Slope || with.Slope.K != 13 {
			t.Errorf("%+v, %v; want %+v", with, err, without)
		}
	}
}

// TestPETPEESEAgainstReference compares with normal equations in 40 digits with
// mpmath; the choice follows from the one-sided p of PET: 0.26 for BCG, 0.005 for
// beta blockers.
func TestPETPEESEAgainstReference(t *testing.T) {
	for name, want := range map[string]struct {
		pet, petSE, peese, peeseSE float64
		square                     bool
	}{
		"bcg_lor":         {-0.15709886273556455, 0.23717245127076111, -0.37861445512076821, 0.17025176683739916, false},
		"betablocker_lor": {-0.32921647279055498, 0.11710687645916642, -0.27916592590169792, 0.066352543298542623, true},
		"aspirin_lor":     {-0.059296655778010846, 0.068948088960839878, -0.079298706445934858, 0.04738449040904835, false},
	} {
		y, s := pairs(t, name)
		p, err := PETPEESE(plain, y, s)
		if err != nil {
			t.Fatal(err)
		}
		near(t, name+" PET", p.PET.Estimate, want.pet, 1e-11)
		near(t, name+" PET's se", p.PET.SE, want.petSE, 1e-11)
		near(t, name+" PEESE", p.PEESE.Estimate, want.peese, 1e-11)
		near(t, name+" PEESE's se", p.PEESE.SE, want.peeseSE, 1e-11)
		if p.Square != want.square {
			t.Errorf("%s: PEESE taken %v", name, p.Square)
		}
		if taken := p.Adjusted(); (taken == p.PEESE) != want.square {
			t.Errorf("%s: adjusted by the other line", name)
		}
	}
}

// TestPETOnTheOtherSide wants no PEESE where PET is far from the null on the side
// on which the effects do not lie: the mean of these is above 0, their line at 0 is
// far below it (closed form: y = −1 + 4s but for the last digit).
func TestPETOnTheOtherSide(t *testing.T) {
	s := []float64{0.3, 0.4, 0.5, 0.6, 0.7, 0.8}
	y := []float64{0.21, 0.59, 1.01, 1.39, 1.81, 2.19}
	p, err := PETPEESE(plain, y, s)
	if err != nil || p.Square || !(p.PET.Statistic < -20) {
		t.Errorf("%+v, %v", p, err)
	}
}

// TestEvidenceAgreesWithInterval: evidence is the form of the t and df printed.
func TestEvidenceAgreesWithInterval(t *testing.T) {
	y, s := pairs(t, "betablocker_lor")
	r, err := Egger(plain, y, s)
	if err != nil || r.Limit.Evidence != evidence.Matched(r.Limit.Statistic, 20) {
		t.Errorf("%v, %v", r.Limit.Evidence, err)
	}
	r, err = Egger(meta.Model{Level: 0.95, Evidence: evidence.StudentForm}, y, s)
	if err != nil || r.Limit.Evidence != evidence.Student(r.Limit.Statistic, 20) {
		t.Errorf("%v, %v", r.Limit.Evidence, err)
	}
}

// TestRefused: what cannot be computed is refused in words, never by NaN.
func TestRefused(t *testing.T) {
	nan := math.NaN()
	for _, c := range []struct {
		what string
		y, s []float64
		want error
	}{
		{"one study", []float64{1}, []float64{1}, ErrTooFew},
		{"two studies", []float64{1, 2}, []float64{1, 2}, ErrTooFew},
		{"alike", []float64{1, 2, 4}, []float64{0.5, 0.5, 0.5}, ErrAlike},
		{"on a line", []float64{1, 2, 3}, []float64{1, 2, 3}, ErrExactLine},
	} {
		if _, err := Egger(plain, c.y, c.s); !errors.Is(err, c.want) {
			t.Errorf("%s: %v", c.what, err)
		}
	}
	for _, c := range [][2][]float64{
		{{nan, 1, 2}, {1, 2, 3}}, {{0, 1, math.Inf(1)}, {1, 2, 3}}, {{0, 1, 2}, {1, 2, nan}}, {{0, 1, 2}, {1, 2, 0}},
		{{0, 1, 2}, {1, 2, -1}}, {{0, 1, 2}, {1, 2, math.Inf(1)}}, {{0, 1, 2}, {1, 2}},
	} {
		y, s := c[0], c[1]
		var input *InputError
		for what, err := range map[string]error{
			"Egger":       errorOf(Egger(plain, y, s)),
			"mixed":       errorOf(EggerMixed(plain, y, s)),
			"rank":        errorOf(BeggMazumdar(y, s)),
			"trim":        errorOf(TrimAndFill(plain, y, s, TrimAndFillL, Lower)),
			"PET–PEESE":   errorOf(PETPEESE(plain, y, s)),
			"selection":   errorOf(OneStep(plain, y, s, 0.025, Higher)),
			"of no value": &InputError{Index: -1},
		} {
			if !errors.As(err, &input) {
				t.Errorf("%v, %v: %s: %v", y, s, what, err)
			}
		}
	}
}

func errorOf[T any](_ T, err error) error { return err }

// TestHugeZ: estimates 20,000 standard errors from no effect stay numbers.
func TestHugeZ(t *testing.T) {
	y := []float64{20000, 20001, 20000.5, 20002, 19999, 20003}
	s := []float64{1, 1.2, 0.8, 1.5, 1.1, 2}
	r, err := Egger(plain, y, s)
	if err != nil || !(r.Limit.Evidence.Ln() > 10) {
		t.Errorf("%+v, %v", r, err)
	}
	if _, err := OneStep(plain, y, s, 0.025, Higher); !errors.Is(err, ErrOneSide) {
		t.Errorf("selection: %v", err)
	}
}
