package meta

// Fit pools the estimates y with standard errors s, on the analysis scale, and
// returns the result with all that belongs beside it. Neither slice is modified
// or kept. Errors are those of Pooler.Pool; a nil error guarantees finite
// numbers throughout, except for degrees of freedom, which are +Inf for a normal
// law.
func (m Model) Fit(y, s []float64) (*Fit, error) {
	var p Pooler
	mean, err := p.Pool(m, y, s)
	if err != nil {
		return nil, err
	}
	limits, err := p.tau2Limits()
	if err != nil {
		return nil, err
	}
	f := &Fit{
		Model:         p.model,
		Mean:          mean,
		Tau2:          p.data.squares(limits),
		Heterogeneity: p.heterogeneity(limits),
		Weights:       p.weights(),
		Predictors:    p.predictors(),
		Prediction:    p.prediction(),
	}
	f.Caveats = p.caveats(m, f)
	if !f.finite() {
		return nil, errOutOfRange
	}
	return f, nil
}

// squares turns limits in squared working units into those of the estimates.
func (d *sample) squares(l Limits) Limits {
	return Limits{Low: l.Low * d.unit * d.unit, High: l.High * d.unit * d.unit}
}

// finite reports whether all numbers beside the mean are finite.
func (f *Fit) finite() bool {
	h := f.Heterogeneity
	ok := allFinite(f.Tau2.Low, f.Tau2.High, h.Q, h.LnP, h.I2Q.Value, h.I2Q.Low, h.I2Q.High,
		h.I2Tau.Value, h.I2Tau.Low, h.I2Tau.High, h.H2, h.H2Tau, h.Typical, h.Evidence.Ln())
	if f.Prediction != nil {
		ok = ok && allFinite(f.Prediction.Low, f.Prediction.High)
	}
	for _, b := range f.Predictors {
		ok = ok && allFinite(b.Estimate, b.SE)
	}
	return ok && allFinite(f.Weights...)
}
