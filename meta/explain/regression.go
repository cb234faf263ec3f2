package explain

import (
	"fmt"
	"math"

	"steelyard/meta"
	"steelyard/meta/evidence"
)

// Regression is a meta-regression: effects yᵢ ~ N(xᵢβ, vᵢ + τ²), fitted by weighted
// least squares at an estimate of τ². Everything is on the analysis scale and in the
// units of the covariates.
type Regression struct {
	Model        meta.Model // as resolved: the methods really used
	K            int
	DF           float64       // k − number of coefficients
	Coefficients []Coefficient // the intercept first
	Terms        []Test
	Whole        Test // of all terms together
	Residual     Residual
	Without      float64   // τ² without covariates, of the same studies
	R2           *float64  // share of that which the covariates take away, at least 0; nil where it is 0
	Fitted       []Fitted  // of each study
	Permutation  *Permuted // nil unless asked for
	state        state
}

// Coefficient is what one unit of a column changes, or the intercept: the effect
// where numbers are at their means and categories at their references.
type Coefficient struct {
	Name      string
	Estimate  float64
	SE        float64 // that the interval uses
	Statistic float64 // against 0; of the intercept against the model's null
	DF        float64 // +Inf for a normal statistic
	LnP       float64
	Low, High float64
	Evidence  evidence.Ratio
}

// Test is a test that all coefficients of a term, or of the model, are 0: F with DF1
// and DF2 degrees of freedom; with DF2 infinite, DF1·F is chi-square.
type Test struct {
	Name       string
	F          float64
	DF1, DF2   float64
	LnP        float64
	Evidence   evidence.Ratio
	PermutedP  float64 // of the permutation test; 0 without one
	columnFrom int     // first column, the intercept being 0
}

// Residual says how the studies scatter about the regression.
type Residual struct {
	Q      float64 // at τ² = 0
	DF     int
	LnP    float64
	Tau2   float64
	Limits meta.Limits // of τ², by the Q-profile
	I2Q    float64     // (Q − df)/Q
	I2Tau  float64     // τ²/(τ² + typical v), typical v = (k − p)/tr P
	// Evidence is in the chi-square form: unrelated effects against effects on the
	// regression.
	Evidence evidence.Ratio
}

// state is what predicts from a fitted regression, in working units.
type state struct {
	beta         []float64
	inverse      triangle // R⁻¹: the coefficients' covariance is R⁻¹R⁻ᵀ
	scale        []float64
	centre, unit float64
	tau2         float64 // working units
	factor       float64 // of Hartung and Knapp, 1 for a normal interval
	df           float64 // of the interval
}

// Resolve returns the model that a regression can use: the interval is Wald's or
// one of Hartung and Knapp's, by default that with the floor (Wald's for a common
// effect), the prediction interval that of Student's t, and the evidence in the
// empirical or the Student-t form. Others have no form for regressions.
func Resolve(model meta.Model) (meta.Model, error) {
	if model.Interval == meta.ProfileLikelihood || model.Interval == meta.HenmiCopas {
		if model.Tau == meta.DefaultTau && model.Interval == meta.ProfileLikelihood {
			model.Tau = meta.MaximumLikelihood
		}
		model.Interval = meta.DefaultInterval
	}
	if model.Prediction == meta.PredictionBootstrap {
		model.Prediction = meta.PredictionTwoLess
	}
	if model.Evidence != evidence.StudentForm {
		model.Evidence = evidence.Empirical
	}
	return model.Resolve(2)
}

// Regress fits a regression of the estimates y, with standard errors s, on a design
// with a row for each. Neither slice is modified or kept.
//
// The variance factor of Hartung and Knapp is q = Q(τ²)/(k − p), with the floor at
// least 1, and t and F have k − p degrees of freedom.
//
// It returns a *DesignError for columns that are constant, determined by others, or
// too many for the studies, and the errors of meta.Pooler for unusable estimates.
//
// Sources: Knapp & Hartung (2003), Statistics in Medicine 22:2693-2710; floor:
// Röver, Knapp & Friede (2015), BMC Medical Research Methodology 15:99; R²:
// Raudenbush (1994) in The Handbook of Research Synthesis.
func Regress(model meta.Model, y, s []float64, d *Design) (*Regression, error) {
	if len(y) != d.K {
		return nil, &DesignError{"", fmt.Sprintf("%d estimates beside covariates of %d studies: give one row for each", len(y), d.K)}
	}
	model, err := Resolve(model)
	if err != nil {
		return nil, err
	}
	m, err := newSystem(y, s, d.Columns(), true)
	if err != nil {
		return nil, err
	}
	tau2, err := m.estimate(model.Tau)
	if err != nil {
		return nil, err
	}
	zero := m.fit(0)
	r := &Regression{K: m.k, DF: m.df()}
	r.Model, r.state = m.settle(model, tau2)
	if r.Residual, err = m.residual(zero, tau2, model.Level); err != nil {
		return nil, err
	}
	r.coefficients(m, d)
	r.tests(d)
	if err := r.withoutCovariates(y, s); err != nil {
		return nil, err
	}
	columns := d.Columns()
	row := make([]float64, len(columns))
	for i := range y {
		for j := range columns {
			row[j] = columns[j].Values[i]
		}
		r.Fitted = append(r.Fitted, r.At(row))
	}
	if !r.finite() {
		return nil, &meta.InputError{Index: -1, Problem: "the result exceeds the range of numbers: use another unit for the estimates or the covariates"}
	}
	return r, nil
}

// settle fits at τ² and returns the model really used with what inference needs. A
// regression that meets every estimate would have intervals of no length: the floor
// stands in.
func (m *system) settle(model meta.Model, tau2 float64) (meta.Model, state) {
	final := m.fit(tau2)
	st := state{
		beta: append([]float64(nil), m.beta...), inverse: m.r.inverse(), scale: m.scale,
		centre: m.centre, unit: m.unit, tau2: tau2, factor: 1, df: math.Inf(1),
	}
	q := final.q / m.df()
	if model.Interval == meta.HartungKnapp && q < 1e-20 {
		model.Interval = meta.HartungKnappFloor
	}
	switch model.Interval {
	case meta.HartungKnapp:
		st.factor, st.df = q, m.df()
	case meta.HartungKnappFloor:
		st.factor, st.df = max(1, q), m.df()
	}
	return model, st
}

// withoutCovariates compares τ² with that of the mean alone.
func (r *Regression) withoutCovariates(y, s []float64) error {
	if r.Model.Effects == meta.CommonEffect {
		return nil
	}
	plain := r.Model
	plain.Interval = meta.Wald
	var p meta.Pooler
	mean, err := p.Pool(plain, y, s)
	if err != nil {
		return err
	}
	r.Without = mean.Tau2
	if r.Without > 0 {
		share := max(0, 1-r.Residual.Tau2/r.Without)
		r.R2 = &share
	}
	return nil
}

func (r *Regression) finite() bool {
	all := []float64{r.Residual.Q, r.Residual.Tau2, r.Residual.Limits.High, r.Whole.F, r.Whole.LnP, r.Whole.Evidence.Ln()}
	for _, c := range r.Coefficients {
		all = append(all, c.Estimate, c.SE, c.Low, c.High, c.Statistic, c.LnP, c.Evidence.Ln())
	}
	for _, f := range r.Fitted {
		all = append(all, f.Estimate, f.Low, f.High)
	}
	for _, x := range all {
		if math.IsNaN(x) || math.IsInf(x, 0) {
			return false
		}
	}
	return true
}
