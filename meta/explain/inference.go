package explain

import (
	"math"

	"steelyard/meta"
	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
)

// critical returns the multiple of a standard error that an interval reaches.
func (st *state) critical(level float64) float64 { return numeric.StudentCritical(1-level, st.df) }

// row returns Lᵀc for the row c of columns as given, the intercept's 1 put before
// it: its length is the model's standard error of the fitted value.
func (st *state) row(columns []float64) (fit, se float64) {
	p := len(st.beta)
	scaled := make([]float64, p)
	for j := range scaled {
		value := 1.0
		if j > 0 {
			value = columns[j-1]
		}
		scaled[j] = value / st.scale[j]
		fit += scaled[j] * st.beta[j]
	}
	for j := range p {
		sum := 0.0
		for i := 0; i <= j; i++ {
			sum += st.inverse.at(i, j) * scaled[i]
		}
		se = math.Hypot(se, sum)
	}
	return fit, se
}

// coefficients fills in the coefficients in given units.
func (r *Regression) coefficients(m *system, d *Design) {
	st := &r.state
	critical := st.critical(r.Model.Level)
	names := []string{interceptName}
	for _, c := range d.Columns() {
		names = append(names, c.Name)
	}
	for j, name := range names {
		se := 0.0
		for i := j; i < m.p; i++ {
			se = math.Hypot(se, st.inverse.at(j, i))
		}
		unit := st.unit / st.scale[j]
		c := Coefficient{Name: name, Estimate: st.beta[j] * unit, SE: se * math.Sqrt(st.factor) * unit, DF: st.df}
		against := 0.0
		if j == 0 {
			c.Estimate += st.centre
			against = r.Model.Null
		}
		c.Statistic = (c.Estimate - against) / c.SE
		c.Low, c.High = c.Estimate-critical*c.SE, c.Estimate+critical*c.SE
		c.LnP = min(0, math.Ln2+numeric.LogStudentTail(math.Abs(c.Statistic), st.df))
		c.Evidence = weighT(c.Statistic, st.df, r.Model.Evidence)
		r.Coefficients = append(r.Coefficients, c)
	}
}

// weighT returns the evidence of t in the model's form; normal with infinite df.
func weighT(t, df float64, form evidence.Form) evidence.Ratio {
	if form == evidence.StudentForm && !math.IsInf(df, 1) {
		return evidence.Student(t, df)
	}
	return evidence.Matched(t, df)
}

// tests fills in the tests of the terms and of all together.
func (r *Regression) tests(d *Design) {
	from := 1
	for _, t := range d.Terms {
		r.Terms = append(r.Terms, r.test(t.Name, from, len(t.Columns)))
		from += len(t.Columns)
	}
	r.Whole = r.test("all covariates", 1, from-1)
}

// test weighs the columns from one on, a number of them.
func (r *Regression) test(name string, from, count int) Test {
	t := Test{Name: name, DF1: float64(count), DF2: r.state.df, columnFrom: from}
	t.F = r.state.quadratic(from, count) / float64(count)
	t.LnP, t.Evidence = weighF(t.F, t.DF1, t.DF2, r.Model.Evidence)
	return t
}

// weighF returns ln p and the evidence of F in the model's form.
func weighF(f, df1, df2 float64, form evidence.Form) (lnP float64, ratio evidence.Ratio) {
	if math.IsInf(df2, 1) {
		return min(0, numeric.LogChiSquareTail(df1*f, df1)), evidence.ChiSquare(df1*f, df1)
	}
	lnP = min(0, numeric.LogFTail(f, df1, df2))
	if form == evidence.StudentForm {
		return lnP, evidence.F(f, df1, df2)
	}
	return lnP, evidence.MatchedF(f, df1, df2)
}

// quadratic returns βᵀC⁻¹β for the coefficients from one on, C their part of the
// covariance R⁻¹R⁻ᵀ times the variance factor: the triangle of that part of R⁻ᵀ
// solves for it.
func (st *state) quadratic(from, count int) float64 {
	p := len(st.beta)
	part := make([][]float64, count)
	for j := range part {
		part[j] = make([]float64, p)
		for i := from + j; i < p; i++ {
			part[j][i] = st.inverse.at(from+j, i)
		}
	}
	factor(part, count)
	root := newTriangle(count)
	root.take(part)
	z := append([]float64(nil), st.beta[from:from+count]...)
	root.solveTransposed(z)
	sum := 0.0
	for _, x := range z {
		sum += x * x
	}
	return sum / st.factor
}

// residual describes the scatter about the regression.
func (m *system) residual(zero moments, tau2, level float64) (Residual, error) {
	df := m.df()
	square := m.unit * m.unit
	r := Residual{
		Q: zero.q, DF: m.k - m.p, LnP: min(0, numeric.LogChiSquareTail(zero.q, df)),
		Tau2: tau2 * square, Evidence: evidence.ChiSquare(zero.q, df),
	}
	if zero.q > 0 {
		r.I2Q = max(0, (zero.q-df)/zero.q)
	}
	typical := df / zero.trace
	r.I2Tau = tau2 / (tau2 + typical)
	var err error
	if r.Limits.Low, err = m.whereQ(numeric.ChiSquareUpperQuantile((1-level)/2, df)); err != nil {
		return r, err
	}
	r.Limits.High, err = m.whereQ(numeric.ChiSquareQuantile((1-level)/2, df))
	r.Limits = meta.Limits{Low: r.Limits.Low * square, High: r.Limits.High * square}
	return r, err
}

// Fitted is the effect that a regression expects at some covariates.
type Fitted struct {
	Estimate   float64
	SE         float64 // that the interval uses
	Low, High  float64
	Prediction *meta.Limits // of the true effect of one setting there; nil for a common effect or too few studies
}

// At returns what the regression expects where the columns have these values, in
// the order of Design.Columns; Design.Row makes them. The prediction interval is
//
//	fit ± t·√(τ² + se²)
//
// on k − p − 1 or k − p degrees of freedom, with the larger of the model's standard
// error and the interval's own where it would otherwise lie inside the interval.
func (r *Regression) At(columns []float64) Fitted {
	st := &r.state
	fit, se := st.row(columns)
	own := se * math.Sqrt(st.factor)
	half := st.critical(r.Model.Level) * own
	f := Fitted{Estimate: st.centre + fit*st.unit, SE: own * st.unit, Low: st.centre + (fit-half)*st.unit, High: st.centre + (fit+half)*st.unit}
	df := r.DF - 1
	if r.Model.Prediction == meta.PredictionOneLess {
		df = r.DF
	}
	if r.Model.Effects == meta.CommonEffect || df < 1 {
		return f
	}
	critical := numeric.StudentCritical(1-r.Model.Level, df)
	reach := critical * math.Hypot(math.Sqrt(st.tau2), se)
	if reach < half {
		reach = max(half, critical*math.Hypot(math.Sqrt(st.tau2), own))
	}
	f.Prediction = &meta.Limits{Low: st.centre + (fit-reach)*st.unit, High: st.centre + (fit+reach)*st.unit}
	return f
}
