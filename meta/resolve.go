package meta

import (
	"fmt"
	"math"

	"steelyard/meta/evidence"
)

// Resolve returns the model with every default replaced by the method it stands
// for with k studies. A common effect and a single study have no estimator of
// τ²: Tau stays DefaultTau there. A single study is given its Wald interval
// whatever was asked for.
//
// It returns a *ModelError for settings that do not go together or lie outside
// their range.
func (m Model) Resolve(k int) (Model, error) {
	if err := m.check(); err != nil {
		return m, err
	}
	if k == 1 {
		m.Tau, m.Interval = DefaultTau, Wald
		return m, nil
	}
	if m.Effects == CommonEffect {
		m.Tau = DefaultTau
		if m.Interval == DefaultInterval {
			m.Interval = Wald
		}
		return m, nil
	}
	if m.Interval == DefaultInterval {
		m.Interval = HartungKnappFloor
	}
	if m.Tau == DefaultTau {
		m.Tau = RestrictedML
		if own := ownTau(m.Interval); own != DefaultTau {
			m.Tau = own
		}
	}
	return m, nil
}

// ownTau returns the estimator of τ² that belongs to an interval method, or
// DefaultTau where any will do.
func ownTau(method IntervalMethod) TauMethod {
	switch method {
	case ProfileLikelihood:
		return MaximumLikelihood
	case HenmiCopas:
		return DerSimonianLaird
	}
	return DefaultTau
}

// check returns a *ModelError for the first fault of the settings.
func (m Model) check() error {
	switch {
	case !(m.Level > 0 && m.Level < 1):
		return &ModelError{Problem: fmt.Sprintf("level %v is not strictly between 0 and 1: give a fraction such as 0.95", m.Level)}
	case math.IsNaN(m.Null) || math.IsInf(m.Null, 0):
		return &ModelError{Problem: fmt.Sprintf("null %v is not a finite number: give the effect under no effect, on the analysis scale", m.Null)}
	case m.Effects < RandomEffects || m.Effects > CommonEffect:
		return unknown(m.Effects.String(), EffectsNames())
	case m.Tau < DefaultTau || m.Tau > RestrictedML:
		return unknown(m.Tau.String(), TauNames())
	case m.Interval < DefaultInterval || m.Interval > HenmiCopas:
		return unknown(m.Interval.String(), IntervalNames())
	case m.Prediction < PredictionTwoLess || m.Prediction > PredictionBootstrap:
		return unknown(m.Prediction.String(), PredictionNames())
	case m.TauInterval < QProfile || m.TauInterval > TauProfileLikelihood:
		return &ModelError{Problem: fmt.Sprintf("interval for τ² %d is unknown: use the Q-profile or the profile likelihood", int(m.TauInterval))}
	case m.Evidence != evidence.Empirical && m.Evidence != evidence.StudentForm:
		return &ModelError{Problem: fmt.Sprintf("the evidence %v is none that a model weighs by itself: use empirical or student-t", m.Evidence)}
	}
	return m.checkPairs()
}

// checkPairs returns a *ModelError for settings that do not go together.
func (m Model) checkPairs() error {
	own := ownTau(m.Interval)
	switch {
	case own == DefaultTau:
		return nil
	case m.Effects == CommonEffect && m.Interval == HenmiCopas:
		return &ModelError{Problem: "the interval henmi-copas allows for spread between studies, which a common effect excludes: use wald, or random effects"}
	case m.Effects == RandomEffects && m.Tau != DefaultTau && m.Tau != own:
		return &ModelError{Problem: fmt.Sprintf(
			"the interval %v rests on its own estimate of τ², %v, not %v: leave the estimator unset, or use hartung-knapp-floor", m.Interval, own, m.Tau)}
	}
	return nil
}

// unknown reports a value outside its enumeration.
func unknown(text string, valid []string) error {
	return &ModelError{Problem: fmt.Sprintf("%s is unknown: use one of %v", text, valid)}
}
