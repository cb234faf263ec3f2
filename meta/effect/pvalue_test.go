package effect

import (
	"math"
	"slices"
	"testing"

	"pgregory.net/rapid"

	"steelyard/meta/numeric"
)

// Source: 40-digit arithmetic by python3 mpmath, from the definitions; the
// second set far in the tails, where no p-value fits in a number.
func TestCombine(t *testing.T) {
	for _, tt := range []struct {
		studies          []Signed
		stouffer, fisher Combined
	}{
		{[]Signed{{1.5, 40}, {2.2, 100}, {-0.3, 60}},
			Combined{2.062138544608791628568, -3.23921763384796790724}, Combined{2.036689682775429610704, -3.177706312795367743467}},
		{[]Signed{{40, 10}, {38, 1000}, {41, 90}},
			Combined{51.77301859603566272876, -1344.395760487409422208}, Combined{68.64832586418389806237, -2360.751322160581757376}},
	} {
		for name, f := range map[string]func([]Signed) (Combined, Conversion, error){"Stouffer": Stouffer, "Fisher": Fisher} {
			want := tt.stouffer
			if name == "Fisher" {
				want = tt.fisher
			}
			got, step, err := f(tt.studies)
			if err != nil || !relative(got.Z, want.Z, 1e-11) || !relative(got.LnP, want.LnP, 1e-11) || len(step.From) != 6 || step.To[1].Value != got.LnP {
				t.Errorf("%s of %v: %+v, %v; want %+v", name, tt.studies, got, err, want)
			}
		}
	}
}

// Source: closed forms. One study alone: Stouffer's z is its own, and so is
// Fisher's p, as chi-square on 2 df has the tail exp(−x/2). Two equal ones: z·√2
// by Stouffer; p²(1 − 2 ln p) one-sided by Fisher. Studies that cancel out: p 1.
func TestCombineClosedForms(t *testing.T) {
	for _, z := range []float64{-30, -1.3, 0.7, 2, 12} {
		for _, f := range []func([]Signed) (Combined, Conversion, error){Stouffer, Fisher} {
			got, _, err := f([]Signed{{z, 55}})
			if err != nil || !relative(got.Z, z, 1e-12) {
				t.Errorf("one study of z %v: %+v, %v", z, got, err)
			}
		}
	}
	got, _, err := Stouffer([]Signed{{1.1, 9}, {1.1, 9}})
	if err != nil || !relative(got.Z, 1.1*math.Sqrt2, 1e-14) || !relative(got.LnP, math.Log(math.Erfc(1.1)), 1e-12) {
		t.Errorf("%+v, %v", got, err)
	}
	p := math.Erfc(1.1/math.Sqrt2) / 2
	got, _, err = Fisher([]Signed{{1.1, 9}, {1.1, 900}})
	if err != nil || !relative(got.LnP, math.Log(2*p*p*(1-2*math.Log(p))), 1e-12) {
		t.Errorf("%+v, %v", got, err)
	}
	for _, f := range []func([]Signed) (Combined, Conversion, error){Stouffer, Fisher} {
		if got, _, err := f([]Signed{{0, 9}, {0, 9}}); err != nil || got.Z != 0 || got.LnP != 0 {
			t.Errorf("%+v, %v; want 0 and p 1", got, err)
		}
	}
}

// tied reports that neither direction has the smaller p-value by Fisher's method.
func tied(studies []Signed) bool {
	var difference numeric.Sum
	for _, s := range studies {
		difference.Add(numeric.LogNormalTail(s.Z) - numeric.LogNormalTail(-s.Z))
	}
	return math.Abs(difference.Value()) < 1e-9
}

// Turning every study turns the answer; the order does not matter; z and ln p
// agree; Stouffer's weights do not depend on the unit of n.
func TestCombineProperties(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		studies := rapid.SliceOfN(rapid.Custom(func(t *rapid.T) Signed {
			return Signed{rapid.Float64Range(-40, 40).Draw(t, "z"), float64(rapid.IntRange(1, 5000).Draw(t, "n"))}
		}), 1, 12).Draw(t, "studies")
		turned, backwards := make([]Signed, 0, len(studies)), slices.Clone(studies)
		for _, s := range studies {
			turned = append(turned, Signed{-s.Z, s.N})
		}
		slices.Reverse(backwards)
		for name, f := range map[string]func([]Signed) (Combined, Conversion, error){"Stouffer": Stouffer, "Fisher": Fisher} {
			a, _, err := f(studies)
			b, _, errB := f(turned)
			c, _, errC := f(backwards)
			if err != nil || errB != nil || errC != nil {
				t.Fatal(name, err, errB, errC)
			}
			if name == "Fisher" && tied(studies) && near(math.Abs(b.Z), math.Abs(a.Z), 1e-10) {
				b.Z = -a.Z // the sign says nothing
			}
			if !near(b.Z, -a.Z, 1e-10) || !near(b.LnP, a.LnP, 1e-10) || !near(c.Z, a.Z, 1e-10) || !near(c.LnP, a.LnP, 1e-10) {
				t.Fatalf("%s: %+v, turned %+v, backwards %+v", name, a, b, c)
			}
			if size := math.Abs(a.Z); size < 35 && !near(a.LnP, math.Log(math.Erfc(size/math.Sqrt2)), 1e-9) {
				t.Fatalf("%s: %+v, p of z is %v", name, a, math.Erfc(size/math.Sqrt2))
			}
		}
	})
}

// Source: 40-digit arithmetic by python3 mpmath: upper quantile of 0.0015 and of
// 0.2; t(20) with upper tail 0.012.
func TestSignedZ(t *testing.T) {
	const z, z20, t012 = 2.967737925341783325804, 0.8416212335729142051787, 2.442415117254487305976
	one := func(x float64, step Conversion, err error) float64 {
		if err != nil || step.To[0].Value != x {
			t.Errorf("%v, %+v, %v", x, step, err)
		}
		return x
	}
	for _, tt := range []struct{ got, want float64 }{
		{one(SignedZ(0.003, Higher)), z}, {one(SignedZ(0.003, Lower)), -z}, {one(SignedZ(1, Higher)), 0},
		{one(SignedZOneSided(0.0015, Higher)), z}, {one(SignedZOneSided(0.0015, Lower)), -z},
		{one(SignedZOneSided(0.8, Higher)), -z20}, {one(SignedZOneSided(0.8, Lower)), z20},
	} {
		if !near(tt.got, tt.want, 1e-13) {
			t.Errorf("z %v, want %v", tt.got, tt.want)
		}
	}
	for _, tt := range []struct {
		estimate, p float64
		tested      Direction
	}{{1.2, 0.012, Higher}, {-1.2, 0.012, Lower}, {-1.2, 0.988, Higher}, {1.2, 0.988, Lower}} {
		se, step, err := SEFromOneSidedP(tt.estimate, tt.p, 20, tt.tested)
		if err != nil || !relative(se, 1.2/t012, 1e-12) || step.To[1].Value != se {
			t.Errorf("%+v: se %v, %v; want %v", tt, se, err, 1.2/t012)
		}
	}
	e, steps, err := FromOneSidedP(MeanDifference, -1.2, 0.012, 20, Lower)
	if err != nil || e.Y != -1.2 || !relative(e.SE, 1.2/t012, 1e-12) || len(steps) != 1 {
		t.Errorf("%+v, %v", e, err)
	}
	e, steps, err = FromP(OddsRatio, 0.5, 0.003, math.Inf(1))
	if err != nil || !relative(e.Y, -math.Ln2, 1e-15) || !relative(e.SE, math.Ln2/z, 1e-12) || len(steps) != 2 {
		t.Errorf("%+v, %v", e, err)
	}
	e, steps, err = FromT(Correlation, 0.6, 2)
	if err != nil || !relative(e.Y, math.Ln2, 1e-15) || !relative(e.SE, math.Ln2/2, 1e-15) || len(steps) != 2 {
		t.Errorf("%+v, %v", e, err)
	}
}
