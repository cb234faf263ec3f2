package meta

import "math"

// predictors returns the best linear unbiased prediction of each study's effect,
//
//	mean + λ(y − mean),  λ = τ²/(τ² + v),
//
// with variance λv + (1 − λ)²se², where mean and se are the model's at its τ².
// Beside Henmi–Copas that mean is the random-effects one.
func (p *Pooler) predictors() []Predictor {
	d, m := &p.data, p.final
	list := make([]Predictor, d.k())
	for i, v := range d.v {
		pull := v / (v + m.tau2) // 1 − λ
		keep := m.tau2 / (v + m.tau2)
		list[i] = Predictor{
			Estimate: d.place(m.mean*pull + d.y[i]*keep),
			SE:       d.unit * math.Sqrt(keep*v+pull*pull/m.w),
		}
	}
	return list
}

// weights returns each study's share in the estimate, summing to 1: those of the
// common effect beside Henmi–Copas, else those at the model's τ².
func (p *Pooler) weights() []float64 {
	tau2 := p.final.tau2
	if p.model.Interval == HenmiCopas {
		tau2 = 0
	}
	total := p.data.at(tau2).w
	shares := make([]float64, p.data.k())
	for i, w := range p.data.w {
		shares[i] = w / total
	}
	return shares
}
