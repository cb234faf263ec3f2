package explain

import (
	"math"
	"testing"

	"steelyard/meta"
)

// At the limits of τ² the residual Q is the quantile of chi-square on 11 df: 21.920
// and 3.816 by published tables.
func TestLimitsOfTau2(t *testing.T) {
	y, s, x, _ := bcg(t)
	r, err := Regress(meta.Model{Level: 0.95}, y, s, designed(t, "latitude", numbers(t, "latitude", x)))
	if err != nil {
		t.Fatal(err)
	}
	q := func(tau2 float64) float64 { // closed form of the straight line
		var sw, swx, swy, sxx, sxy, syy float64
		for i := range y {
			w := 1 / (s[i]*s[i] + tau2)
			sw, swx, swy = sw+w, swx+w*x[i], swy+w*y[i]
		}
		for i := range y {
			w := 1 / (s[i]*s[i] + tau2)
			dx, dy := x[i]-swx/sw, y[i]-swy/sw
			sxx, sxy, syy = sxx+w*dx*dx, sxy+w*dx*dy, syy+w*dy*dy
		}
		return syy - sxy*sxy/sxx
	}
	near(t, "Q at the lower limit", q(r.Residual.Limits.Low), 21.920, 1e-4)
	near(t, "Q at the upper limit", q(r.Residual.Limits.High), 3.816, 2e-4)
	near(t, "I² by Q", r.Residual.I2Q, (25.09541766635601-11)/25.09541766635601, 1e-9) // Q as in TestCoefficientsOfBCG
}

// The intercept is tested against the model's null, the others against 0, and the
// null moves nothing else.
func TestNullOfTheIntercept(t *testing.T) {
	y, s, x, _ := bcg(t)
	d := designed(t, "latitude", numbers(t, "latitude", x))
	a, err := Regress(meta.Model{Level: 0.95}, y, s, d)
	if err != nil {
		t.Fatal(err)
	}
	b, err := Regress(meta.Model{Level: 0.95, Null: -0.5}, y, s, d)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "t of the intercept", b.Coefficients[0].Statistic, (a.Coefficients[0].Estimate+0.5)/a.Coefficients[0].SE, 1e-12)
	near(t, "t of the slope", b.Coefficients[1].Statistic, a.Coefficients[1].Statistic, 1e-12)
}

// Estimates on a line but for a scatter that their standard errors do not explain,
// under maximum likelihood: whatever τ² is, a prediction never lies inside the
// interval of the line.
func TestPredictionHoldsTheInterval(t *testing.T) {
	y := []float64{0.9, 2.2, 2.8, 4.3, 4.7, 6.3}
	s := []float64{0.12, 0.12, 0.12, 0.12, 0.12, 3}
	d := designed(t, "x", numbers(t, "x", []float64{1, 2, 3, 4, 5, 6}))
	for _, method := range []meta.TauMethod{meta.HedgesOlkin, meta.HunterSchmidt, meta.MaximumLikelihood} {
		r, err := Regress(meta.Model{Tau: method, Level: 0.95}, y, s, d)
		if err != nil {
			t.Fatal(err)
		}
		for i, f := range r.Fitted {
			if f.Prediction.Low > f.Low || f.Prediction.High < f.High {
				t.Errorf("%v, study %d: predicted %v, interval %v to %v", method, i+1, *f.Prediction, f.Low, f.High)
			}
			if math.IsNaN(f.SE) || f.SE <= 0 {
				t.Errorf("se %v", f.SE)
			}
		}
	}
}
