// Package meta pools estimates with known standard errors: it knows only pairs
// (y, s) on the analysis scale, and models for them.
package meta

import (
	"steelyard/meta/choice"
	"steelyard/meta/evidence"
)

// Effects says whether the studies share one effect or scatter around a mean.
type Effects int

// RandomEffects is the default; CommonEffect sets the spread τ² to 0.
const (
	RandomEffects Effects = iota
	CommonEffect
)

var effectsNames = choice.Of[Effects]("effects model", "random", "common").
	With(map[string]Effects{"fixed": CommonEffect})

// String returns "random" or "common".
func (e Effects) String() string { return effectsNames.String(e) }

// EffectsNames returns the names of all effects models.
func EffectsNames() []string { return effectsNames.All() }

// ParseEffects returns the effects model that text names.
func ParseEffects(text string) (Effects, error) { return effectsNames.Parse(text) }

// MarshalText writes the name of the effects model.
func (e Effects) MarshalText() ([]byte, error) { return []byte(e.String()), nil }

// UnmarshalText reads the name of an effects model.
func (e *Effects) UnmarshalText(text []byte) (err error) {
	*e, err = ParseEffects(string(text))
	return err
}

// TauMethod is an estimator of the between-study variance τ².
type TauMethod int

// The estimators of τ². DefaultTau is RestrictedML, except where the interval
// method brings its own: MaximumLikelihood beside ProfileLikelihood and
// DerSimonianLaird beside HenmiCopas.
const (
	DefaultTau TauMethod = iota
	DerSimonianLaird
	TwoStepDerSimonianLaird
	HedgesOlkin
	HunterSchmidt
	SidikJonkman
	PauleMandel
	MaximumLikelihood
	RestrictedML
)

var tauNames = choice.Of[TauMethod]("estimator of τ²",
	"", "dersimonian-laird", "two-step-dersimonian-laird", "hedges-olkin", "hunter-schmidt",
	"sidik-jonkman", "paule-mandel", "maximum-likelihood", "restricted-ml",
).With(map[string]TauMethod{"restricted-maximum-likelihood": RestrictedML})

// String returns the estimator's name, such as "restricted-ml".
func (t TauMethod) String() string { return tauNames.String(t) }

// TauNames returns the names of all estimators.
func TauNames() []string { return tauNames.All() }

// ParseTau returns the estimator that text names.
func ParseTau(text string) (TauMethod, error) { return tauNames.Parse(text) }

// MarshalText writes the name of the estimator.
func (t TauMethod) MarshalText() ([]byte, error) { return []byte(t.String()), nil }

// UnmarshalText reads the name of an estimator.
func (t *TauMethod) UnmarshalText(text []byte) (err error) {
	*t, err = ParseTau(string(text))
	return err
}

// IntervalMethod is a way to an interval for the mean effect.
type IntervalMethod int

// The interval methods. DefaultInterval is HartungKnappFloor for random effects
// of two studies or more, and Wald for a common effect or a single study.
const (
	DefaultInterval IntervalMethod = iota
	Wald
	HartungKnapp
	HartungKnappFloor
	ProfileLikelihood
	HenmiCopas
)

var intervalNames = choice.Of[IntervalMethod]("interval method",
	"", "wald", "hartung-knapp", "hartung-knapp-floor", "profile-likelihood", "henmi-copas")

// String returns the method's name, such as "hartung-knapp-floor".
func (m IntervalMethod) String() string { return intervalNames.String(m) }

// IntervalNames returns the names of all interval methods.
func IntervalNames() []string { return intervalNames.All() }

// ParseInterval returns the interval method that text names.
func ParseInterval(text string) (IntervalMethod, error) { return intervalNames.Parse(text) }

// MarshalText writes the name of the interval method.
func (m IntervalMethod) MarshalText() ([]byte, error) { return []byte(m.String()), nil }

// UnmarshalText reads the name of an interval method.
func (m *IntervalMethod) UnmarshalText(text []byte) (err error) {
	*m, err = ParseInterval(string(text))
	return err
}

// PredictionMethod is a way to an interval for the effect in a new setting.
type PredictionMethod int

// The prediction intervals: Student's t on k−2 (the default) or k−1 degrees of
// freedom, or the parametric bootstrap for few studies.
const (
	PredictionTwoLess PredictionMethod = iota
	PredictionOneLess
	PredictionBootstrap
)

var predictionNames = choice.Of[PredictionMethod]("prediction interval", "k-minus-2", "k-minus-1", "bootstrap")

// String returns the method's name, such as "k-minus-2".
func (m PredictionMethod) String() string { return predictionNames.String(m) }

// PredictionNames returns the names of all prediction intervals.
func PredictionNames() []string { return predictionNames.All() }

// ParsePrediction returns the prediction interval that text names.
func ParsePrediction(text string) (PredictionMethod, error) { return predictionNames.Parse(text) }

// MarshalText writes the name of the prediction interval.
func (m PredictionMethod) MarshalText() ([]byte, error) { return []byte(m.String()), nil }

// UnmarshalText reads the name of a prediction interval.
func (m *PredictionMethod) UnmarshalText(text []byte) (err error) {
	*m, err = ParsePrediction(string(text))
	return err
}

// TauIntervalMethod is a way to an interval for τ².
type TauIntervalMethod int

// The intervals for τ²: the Q-profile (the default) or the profile likelihood.
const (
	QProfile TauIntervalMethod = iota
	TauProfileLikelihood
)

// Model says how estimates are pooled. The zero value, with Level set, is the
// default model.
type Model struct {
	Effects     Effects
	Tau         TauMethod
	Interval    IntervalMethod
	Prediction  PredictionMethod
	TauInterval TauIntervalMethod
	Evidence    evidence.Form // which form the evidence takes beside a Student-t interval
	Level       float64       // of every interval, such as 0.95; strictly between 0 and 1
	Null        float64       // the mean effect under H0, on the analysis scale
	Seed        uint64        // of the bootstrap prediction interval
}

// Mean is a pooled mean effect on the analysis scale. What its interval rests on
// differs by method: beside a profile likelihood SE is the model's 1/√Σw, and the
// Statistic the signed root of the likelihood ratio; beside Henmi–Copas LnP is
// that of its own law, not the normal one.
type Mean struct {
	K         int
	Estimate  float64
	SE        float64 // the standard error that the interval uses
	Statistic float64 // (Estimate − Null)/SE, or the signed root of the likelihood ratio
	DF        float64 // of the statistic; +Inf for a normal one
	LnP       float64 // natural log of the two-sided p-value
	Low, High float64
	Tau2      float64 // between-study variance used; 0 for a common effect
	Q         float64 // Cochran's Q
	Evidence  evidence.Ratio

	location evidence.Location // what Location returns
}

// Fit is a pooled result with all that belongs beside it. A method that pools
// counts and not pairs fills in what it has: no Predictors, no Prediction, limits
// of τ² from 0 to +Inf where it has none.
type Fit struct {
	Method        string // blank for the inverse variances of this package, else the method's own name
	Model         Model  // as resolved: the methods really used
	Mean          Mean
	Tau2          Limits // of τ² by the model's TauInterval, also beside a common effect
	Heterogeneity Heterogeneity
	Prediction    *Prediction // nil when there is none: fewer than 3 studies, or a common effect
	Weights       []float64   // per study, summing to 1
	Predictors    []Predictor // study-level estimates under the model
	Caveats       []Caveat
	Clustered     *Clustered // nil where every estimate is a study of its own
}

// Limits is an interval.
type Limits struct{ Low, High float64 }

// Heterogeneity measures how the estimates scatter. Where no sampling variances
// were pooled Typical is 0, and I2Tau and H2Tau say nothing; see HeterogeneityOf.
type Heterogeneity struct {
	Q        float64
	DF       int
	LnP      float64
	I2Q      Share          // (Q − df)/Q
	I2Tau    Share          // τ²/(τ² + typical v)
	H2       float64        // Q/df
	H2Tau    float64        // (τ² + typical v)/typical v
	Typical  float64        // typical sampling variance
	Evidence evidence.Ratio // chi-square form: k unrelated effects against one common effect
}

// Share is a fraction with its limits.
type Share struct{ Value, Low, High float64 }

// Prediction is an interval for the true effect in a new setting.
type Prediction struct {
	Low, High float64
	DF        float64 // of Student's t; +Inf for the bootstrap
	Method    PredictionMethod
	Widened   bool // the interval's own standard error was used: it exceeded the model's
}

// Predictor is one study's effect as estimated under the model (best linear
// unbiased prediction).
type Predictor struct{ Estimate, SE float64 }
