package missing

import (
	"math"

	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/numeric"
)

// Regression is a test of whether effects change with the size of studies, as the
// slope of a line, and the effect that the line gives for a study without error.
type Regression struct {
	Method     Method
	Slope      meta.Mean // asymmetry; its null is 0, and its unit that of the method's predictor
	Limit      meta.Mean // effect at an infinite size, on the analysis scale
	Dispersion float64   // factor by which the residuals exceed the sampling variances
	Tau2       float64   // between-study variance beside the line; 0 unless mixed effects
}

// Egger returns the classical regression test: y/s on 1/s, unweighted, whose
// intercept is Slope here, and whose slope is Limit; the line y = Limit + Slope·s
// with weights 1/s² is the same. Student's t on k − 2 degrees of freedom.
//
// Source: Egger, Davey Smith, Schneider & Minder (1997), BMJ 315:629-634.
func Egger(m meta.Model, y, s []float64) (*Regression, error) {
	if err := check(y, s); err != nil {
		return nil, err
	}
	return multiplicative(m, EggerClassical, y, s, reciprocalSquares(s))
}

// multiplicative fits a line whose residual variance is a multiple of 1/w.
func multiplicative(m meta.Model, method Method, y, x, w []float64) (*Regression, error) {
	l, err := fitLine(y, x, w)
	if err != nil {
		return nil, err
	}
	if l.scatterless(y, w) {
		return nil, ErrExactLine
	}
	r := &Regression{Method: method, Dispersion: l.rss / l.df}
	return r, r.infer(m, l, len(y))
}

// infer fills in slope and limit of a line with the regression's dispersion.
func (r *Regression) infer(m meta.Model, l line, k int) (err error) {
	if r.Slope, err = againstZero(m).StudentMean(k, l.slope, math.Sqrt(r.Dispersion*l.slopeVar), l.df); err != nil {
		return err
	}
	r.Limit, err = m.StudentMean(k, l.level, math.Sqrt(r.Dispersion*l.levelVar), l.df)
	r.Slope.Tau2, r.Limit.Tau2 = r.Tau2, r.Tau2
	return err
}

// EggerMixed returns the regression test with true effects that scatter around the
// line by τ², by restricted maximum likelihood. Standard errors have the factor of
// Knapp and Hartung, held at 1 or more; Student's t on k − 2 degrees of freedom.
//
// Sources: Sterne & Egger (2005), in Rothstein, Sutton & Borenstein (eds.),
// Publication Bias in Meta-Analysis, ch. 6; Knapp & Hartung (2003), Statistics in
// Medicine 22:2693-2710.
func EggerMixed(m meta.Model, y, s []float64) (*Regression, error) {
	if err := check(y, s); err != nil {
		return nil, err
	}
	mixed := mixedLine{y: y, x: s, v: make([]float64, len(s))}
	for i, x := range s {
		mixed.v[i] = x * x
	}
	tau2, err := mixed.restricted()
	if err != nil {
		return nil, err
	}
	l, err := mixed.at(tau2)
	if err != nil {
		return nil, err
	}
	r := &Regression{Method: EggerMixedEffects, Dispersion: max(1, l.rss/l.df), Tau2: tau2}
	return r, r.infer(m, l, len(y))
}

// mixedLine is a line around which true effects scatter.
type mixedLine struct{ y, x, v []float64 }

func (d mixedLine) at(tau2 float64) (line, error) {
	w := make([]float64, len(d.v))
	for i, v := range d.v {
		w[i] = 1 / (v + tau2)
	}
	return fitLine(d.y, d.x, w)
}

// lineScan is the number of values of τ at which the restricted likelihood is
// looked at before its highest hill is climbed.
const lineScan = 60

// restricted returns the τ² of the highest restricted likelihood, 0 included.
func (d mixedLine) restricted() (float64, error) {
	plain := make([]float64, len(d.y))
	for i := range plain {
		plain[i] = 1
	}
	l, err := fitLine(d.y, d.x, plain)
	if err != nil {
		return 0, err
	}
	deviance := func(tau float64) float64 {
		fit, err := d.at(tau * tau)
		if err != nil {
			return math.Inf(1)
		}
		var logs numeric.Sum
		for _, v := range d.v {
			logs.Add(math.Log(v + tau*tau))
		}
		return logs.Value() + fit.lnDet + fit.rss
	}
	tau, _, err := numeric.ScannedMinimum(deviance, 0, math.Sqrt(2*l.rss), lineScan)
	return tau * tau, err
}

// Peters returns the regression of the log odds ratio on one over the number of
// people, weighted by events × others / people. A table with a zero cell has 0.5
// added to each cell for its odds ratio; one without events, or with nothing but
// events, carries nothing and is left out: see Slope.K for how many are used.
//
// Source: Peters, Sutton, Jones, Abrams & Rushton (2006), JAMA 295:676-680.
func Peters(m meta.Model, tables []effect.Table) (*Regression, error) {
	var y, x, w []float64
	for _, t := range tables {
		e, _, err := effect.FromTable(effect.OddsRatio, t, effect.Half)
		people, events := t.Total1+t.Total2, t.Events1+t.Events2
		if err != nil || !(events > 0 && events < people) {
			continue
		}
		y, x, w = append(y, e.Y), append(x, 1/people), append(w, events*(people-events)/people)
	}
	return multiplicative(m, PetersTest, y, x, w)
}

// Harbord returns the regression of the score over its root of information on that
// root, unweighted: with score O − E of the treated arm's events and information V,
// both given the table's margins, it is Egger's regression of (O − E)/V with
// standard error 1/√V. Tables without information are left out.
//
// Source: Harbord, Egger & Sterne (2006), Statistics in Medicine 25:3443-3457.
func Harbord(m meta.Model, tables []effect.Table) (*Regression, error) {
	var y, s []float64
	for _, t := range tables {
		if e, _, err := effect.FromPeto(t); err == nil {
			y, s = append(y, e.Y), append(s, e.SE)
		}
	}
	if err := check(y, s); err != nil {
		return nil, err
	}
	return multiplicative(m, HarbordTest, y, s, reciprocalSquares(s))
}
