package bayes

import (
	"fmt"
	"math"

	"steelyard/meta"
	"steelyard/meta/evidence"
)

// Weighing says which evidence for an effect a pooled mean carries, and under
// which priors. The zero value is the evidence that meta.Model gives.
type Weighing struct {
	Form   evidence.Form
	Tau    TauPrior    // of the forms that integrate τ
	Effect EffectPrior // of the forms under a prior for the effect
}

// Own reports whether the form is one that meta.Model gives by itself.
func (w Weighing) Own() bool { return !w.Form.OverTau() && !w.Form.UnderPrior() }

// Check returns a *PriorError unless the priors that the form needs are valid.
func (w Weighing) Check() error {
	switch {
	case w.Form.OverTau():
		return w.Tau.Check()
	case w.Form == evidence.CauchyPriorForm && w.Effect.Kind != CauchyPrior, w.Form == evidence.NormalPriorForm && w.Effect.Kind != NormalPrior:
		return &PriorError{fmt.Sprintf("the form %v and the %v prior contradict each other: give the prior of the form", w.Form, w.Effect.Kind)}
	case w.Form.UnderPrior():
		return w.Effect.Check()
	}
	return nil
}

// Evidence returns the evidence for an effect of a mean that was pooled from the
// estimates y with standard errors s, against null; all are on the analysis scale.
//
// The forms that integrate τ are computed from y and s: Integrate with its
// standard corrections. Those under a prior for the effect weigh the mean as
// Matched places it, so that they agree with its interval, and ignore y and s.
// Own forms are returned as the mean carries them. It returns the errors of
// Integrate, Matched and Observation.Weigh.
func (w Weighing) Evidence(mean meta.Mean, null float64, y, s []float64) (evidence.Ratio, error) {
	switch {
	case w.Own():
		return mean.Evidence, nil
	case w.Form.UnderPrior():
		o, err := Matched(mean.Location(), null)
		if err != nil {
			return evidence.Ratio{}, err
		}
		return o.Weigh(w.Effect)
	}
	r, err := Integrate(y, s, null, w.Tau)
	if err != nil {
		return evidence.Ratio{}, err
	}
	ratio := r.Effect()
	if w.Form == evidence.AveragedForm {
		ratio = r.EffectAveraged()
	}
	if math.IsNaN(ratio.Ln()) || math.IsInf(ratio.Ln(), 0) {
		return evidence.Ratio{}, ErrOutOfRange
	}
	return ratio, nil
}

// Weighed is a meta.Refit whose means carry the evidence of a Weighing; the rest of
// them is that of the Refit it wraps.
type Weighed struct {
	pool         meta.Refit
	weighing     Weighing
	null         float64
	y, s         []float64 // all studies; empty where no form needs them; shared by clones
	partY, partS []float64
}

// NewWeighed returns the Refit whose means carry the evidence of w against null. y
// and s are the studies that r pools; they are kept and must not change. They may
// be nil for a form under a prior for the effect. It returns the error of
// Weighing.Check.
func NewWeighed(r meta.Refit, w Weighing, null float64, y, s []float64) (*Weighed, error) {
	if err := w.Check(); err != nil {
		return nil, err
	}
	return &Weighed{pool: r, weighing: w, null: null, y: y, s: s}, nil
}

// K returns the number of studies.
func (w *Weighed) K() int { return w.pool.K() }

// Pooling returns the Refit that pools; see meta.Reweighing.
func (w *Weighed) Pooling() meta.Refit { return w.pool }

// Clone returns a Refit of the same studies for another goroutine.
func (w *Weighed) Clone() meta.Refit {
	return &Weighed{pool: w.pool.Clone(), weighing: w.weighing, null: w.null, y: w.y, s: w.s}
}

// Mean pools the studies of the given rows; see meta.Refit. Errors are those of
// the Refit that pools and of Weighing.Evidence.
func (w *Weighed) Mean(rows []int) (meta.Mean, error) {
	mean, err := w.pool.Mean(rows)
	if err != nil {
		return mean, err
	}
	w.partY, w.partS = w.partY[:0], w.partS[:0]
	if w.weighing.Form.OverTau() {
		for _, row := range rows {
			w.partY, w.partS = append(w.partY, w.y[row]), append(w.partS, w.s[row])
		}
	}
	mean.Evidence, err = w.weighing.Evidence(mean, w.null, w.partY, w.partS)
	return mean, err
}

// Prediction returns the prediction interval beside the latest Mean, or nil where
// there is none.
func (w *Weighed) Prediction() *meta.Prediction {
	if f, ok := w.pool.(meta.Foreseeing); ok {
		return f.Prediction()
	}
	return nil
}
