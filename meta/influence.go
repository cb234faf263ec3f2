package meta

import (
	"context"
	"math"
)

// Influence says what one study does to the result. SE is the standard error that
// the interval uses, as in Mean.
type Influence struct {
	Omission
	Pull   float64 // (estimate − estimate without)/SE without
	Detail *Detail // nil where the method has no weights of its own, or Problem is set
}

// Detail holds the measures of influence that rest on the pairs (y, s): h is a
// study's weight, v its sampling variance, μ and τ² those of all studies, and an
// index i marks those without it. Variances of μ are the model's 1/Σw, whatever
// the interval uses; beside Henmi–Copas that of its own mean.
//
// Source: Viechtbauer & Cheung (2010), Research Synthesis Methods 1:112-125; the
// last two: Baujat, Mahé, Pignon & Hill (2002), Statistics in Medicine
// 21:2641-2652.
type Detail struct {
	Leverage        float64 // h = w/Σw, the diagonal of the hat matrix; they sum to 1
	Residual        float64 // (y − μᵢ)/√(v + τ²ᵢ + var μᵢ), studentised with the study deleted
	Shift           float64 // (μ − μᵢ)/√(h(v + τ²ᵢ)), the change of its own fitted value
	Cook            float64 // Cook's distance (μ − μᵢ)²/var μ
	CovarianceRatio float64 // var μᵢ/var μ; above 1: the study makes the mean more precise
	QShare          float64 // contribution to Cochran's Q: (y − common mean)²/v; they sum to Q
	CommonShift     float64 // (change of the common mean without it)²/its variance then
}

// Influences returns the influence of each study. It returns ErrTooFew for a
// single study, the error of pooling all studies, and the cause if ctx ends.
func Influences(ctx context.Context, r Refit, work Work) ([]Influence, error) {
	k := r.K()
	if k < 2 {
		return nil, ErrTooFew
	}
	all, err := r.Mean(allRows(k))
	if err != nil {
		return nil, err
	}
	var details []Detail
	var variance float64
	if p, ok := pairsOf(r); ok {
		details, variance = p.details(), p.pool.modelVariance()
	}
	list := make([]Influence, k)
	err = work.each(ctx, r, k, func(r Refit, i int) {
		o := &list[i]
		o.Row = i
		if o.Mean, o.Problem = r.Mean(otherRows(make([]int, 0, k), k, i)); o.Problem != nil {
			return
		}
		o.Carried = all.Evidence.Steps() - o.Mean.Evidence.Steps()
		change := all.Estimate - o.Mean.Estimate
		o.Pull = change / o.Mean.SE
		if p, ok := pairsOf(r); ok {
			d, without := &details[i], p.pool.modelVariance()
			total := p.s[i]*p.s[i] + o.Mean.Tau2
			d.Residual = (p.y[i] - o.Mean.Estimate) / math.Sqrt(total+without)
			d.Shift = change / math.Sqrt(d.Leverage*total)
			d.Cook = change * change / variance
			d.CovarianceRatio = without / variance
			o.Detail = d
		}
	})
	if err != nil {
		return nil, err
	}
	return list, nil
}

// modelVariance returns the model's variance of the mean, in squared units of the
// estimates.
func (p *Pooler) modelVariance() float64 {
	se := p.final.se()
	if p.model.Interval == HenmiCopas {
		se = p.answer.se
	}
	return se * se * p.data.unit * p.data.unit
}

// details returns what follows from the latest fit alone: leverage and, about the
// common mean, the contributions to Q and the shift of that mean.
func (p *Pairs) details() []Detail {
	list := make([]Detail, p.K())
	for i, w := range p.pool.weights() {
		list[i].Leverage = w
	}
	d := &p.pool.data
	zero := d.at(0)
	for i, w := range d.w {
		r := d.y[i] - zero.mean
		list[i].QShare = w * r * r
		list[i].CommonShift = commonShift(d, zero, i)
	}
	return list
}

// commonShift returns (m − mᵢ)²/var mᵢ of the common mean m: with r = y − m it is
// wr²·w/(W − w), as m − mᵢ = wr/(W − w) and var mᵢ = 1/(W − w).
func commonShift(d *sample, zero moments, i int) float64 {
	rest := 0.0 // W − w, without cancellation
	for j, w := range d.w {
		if j != i {
			rest += w
		}
	}
	w, r := d.w[i], d.y[i]-zero.mean
	return w * r * r * (w / rest)
}
