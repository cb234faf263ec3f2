package sparse

import (
	"fmt"
	"math"
	"slices"

	"steelyard/meta"
	"steelyard/meta/choice"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
)

// Method is a way to pool 2×2 tables.
type Method int

// The methods.
const (
	MantelHaenszel Method = iota
	Peto
	ConditionalExact
	BinomialNormal
)

var methodNames = choice.Of[Method]("method for 2×2 tables",
	"mantel-haenszel", "peto", "conditional-exact", "binomial-normal")

// String returns the method's name, such as "mantel-haenszel".
func (m Method) String() string { return methodNames.String(m) }

// MethodNames returns the names of all methods.
func MethodNames() []string { return methodNames.All() }

// ParseMethod returns the method that text names.
func ParseMethod(text string) (Method, error) { return methodNames.Parse(text) }

// MarshalText writes the method's name.
func (m Method) MarshalText() ([]byte, error) { return []byte(m.String()), nil }

// UnmarshalText reads a method's name.
func (m *Method) UnmarshalText(text []byte) (err error) {
	*m, err = ParseMethod(string(text))
	return err
}

// Model says how tables are pooled. The zero Measure is the odds ratio; only
// MantelHaenszel takes others (risk ratio, risk difference). Effects matters to
// BinomialNormal alone: the other methods have a common effect.
type Model struct {
	Method  Method
	Measure effect.Measure
	Effects meta.Effects
	Level   float64 // of every interval, such as 0.95; strictly between 0 and 1
	Null    float64 // the effect under H0, on the analysis scale
}

// Result is a pooled result with all that belongs beside it.
type Result struct {
	Model         Model // as resolved: the effects model really used
	Mean          meta.Mean
	Location      evidence.Location // the estimate as evidence about regions needs it
	Heterogeneity *Heterogeneity    // nil if fewer than two tables can differ
	Tau2          *meta.Limits      // of τ² by profile likelihood; nil for a common effect
	Weights       []float64         // per table given, summing to 1; 0 for one that carries nothing
	Tally         Tally
}

// Scatter says which statistic measures the heterogeneity.
type Scatter int

// AboutEstimate is Σ(yᵢ − estimate)²/vᵢ over the tables' own estimates; for
// Peto Σ(O−E)²/V − (Σ(O−E))²/ΣV, which is the same for his estimates.
// LikelihoodRatio is twice the log of the likelihood with an odds ratio for each
// table over that with a common one.
const (
	AboutEstimate Scatter = iota
	LikelihoodRatio
)

var scatterNames = choice.Of[Scatter]("heterogeneity statistic", "about-estimate", "likelihood-ratio")

// String returns "about-estimate" or "likelihood-ratio".
func (s Scatter) String() string { return scatterNames.String(s) }

// MarshalText writes the name of the statistic.
func (s Scatter) MarshalText() ([]byte, error) { return []byte(s.String()), nil }

// Heterogeneity measures how the tables scatter. Q is taken as chi-square with
// DF degrees of freedom, one less than the Tables it uses.
type Heterogeneity struct {
	Scatter  Scatter
	Q        float64
	DF       int
	LnP      float64
	Tables   int
	Evidence evidence.Ratio // chi-square form: unrelated effects against one common effect
}

// Fit pools the tables, treated against control. The slice is not modified.
//
// It returns ErrNothingToCompare if no table carries information; a *TableError
// for a table that fails its Check; a *SettingError for settings out of range; a
// *BoundaryError if the ratio is estimated as 0 or infinite; ErrNoVariance; and
// an *UnboundedError where BinomialNormal has no largest likelihood or no limit.
// A nil error guarantees finite numbers throughout; the degrees of freedom of
// the mean alone are +Inf, for a normal law.
func (m Model) Fit(tables []effect.Table) (*Result, error) { return m.fit(tables, everything) }

// Refit is Fit for the mean alone. It spares what only Fit returns.
func (m Model) Refit(tables []effect.Table) (meta.Mean, error) {
	return m.mean(tables, meanOnly)
}

// mean returns the mean of a fit.
func (m Model) mean(tables []effect.Table, d detail) (meta.Mean, error) {
	r, err := m.fit(tables, d)
	if err != nil {
		return meta.Mean{}, err
	}
	return r.Mean, nil
}

// detail is how much of a result is worked out.
type detail int

// From the estimate with its evidence, whose limits are those of a normal law
// where others cost much, to everything.
const (
	pointOnly detail = iota
	meanOnly
	everything
)

func (m Model) fit(tables []effect.Table, d detail) (*Result, error) {
	m, err := m.resolve()
	if err != nil {
		return nil, err
	}
	used, tally, err := take(m.Measure, tables)
	if err != nil {
		return nil, err
	}
	var r *Result
	switch m.Method {
	case MantelHaenszel:
		r, err = m.mantelHaenszel(used)
	case Peto:
		r, err = m.peto(used)
	case ConditionalExact:
		r, err = m.conditionalExact(used)
	default:
		r, err = m.binomialNormal(used, d)
	}
	if boundary, ok := err.(*BoundaryError); ok {
		boundary.Method, boundary.Measure, boundary.Tally = m.Method, m.Measure, tally
	}
	if err != nil {
		return nil, err
	}
	r.Mean.K, r.Tally = len(used), tally
	r.Mean = r.Mean.Located(r.Location)
	r.Weights = tally.spread(r.Weights)
	if !r.finite() {
		return nil, &SettingError{Problem: fmt.Sprintf("null %v lies too far from the estimate to be compared with it: correct it", m.Null)}
	}
	return r, nil
}

// farthest is the largest null taken: no log ratio of counts comes near it.
const farthest = 100

// resolve checks the settings and fills in the default measure.
func (m Model) resolve() (Model, error) {
	if m.Measure == effect.Unspecified {
		m.Measure = effect.OddsRatio
	}
	switch {
	case m.Method < MantelHaenszel || m.Method > BinomialNormal:
		_, err := ParseMethod(m.Method.String())
		return m, err
	case !(m.Level > 0 && m.Level < 1):
		return m, &SettingError{Problem: fmt.Sprintf("level %v is not strictly between 0 and 1: give a fraction such as 0.95", m.Level)}
	case !(math.Abs(m.Null) <= farthest):
		return m, &SettingError{Problem: fmt.Sprintf("null %v is no effect on the analysis scale between -%d and %d: correct it", m.Null, farthest, farthest)}
	case m.Effects != meta.RandomEffects && m.Effects != meta.CommonEffect:
		_, err := meta.ParseEffects(m.Effects.String())
		return m, err
	}
	valid := m.Method.Measures()
	if slices.Contains(valid, m.Measure) {
		if !m.Method.Random() {
			m.Effects = meta.CommonEffect
		}
		return m, nil
	}
	return m, &effect.MeasureError{Measure: m.Measure, From: "2×2 tables by " + m.Method.String(), Valid: valid}
}

// wald returns the result of an estimate with a normal error.
func (m Model) wald(estimate, se float64) *Result {
	z := (estimate - m.Null) / se
	critical := numeric.NormalCritical(1 - m.Level)
	return &Result{
		Model: m,
		Mean: meta.Mean{
			Estimate: estimate, SE: se, Statistic: z, DF: math.Inf(1),
			LnP: lnTwoSided(z), Low: estimate - critical*se, High: estimate + critical*se,
			Evidence: evidence.Normal(z),
		},
		Location: evidence.Location{Estimate: estimate, SE: se, DF: math.Inf(1)},
	}
}

// lnTwoSided returns the log of the two-sided p-value of a normal statistic.
func lnTwoSided(z float64) float64 {
	return min(0, math.Ln2+numeric.LogNormalTail(math.Abs(z)))
}

// nearNull is the |z| below which the distance to the null says too little to
// divide by.
const nearNull = 1e-6

// rooted returns the result of an estimate whose evidence is taken at the signed
// root z of a likelihood ratio, with the limits given. Its Location has the
// standard error that places the estimate z of them from the null or, where
// estimate and null meet, the one that gives the interval its width.
func (m Model) rooted(estimate, se, z, low, high float64) *Result {
	r := m.wald(estimate, se)
	r.Mean.Statistic, r.Mean.LnP, r.Mean.Evidence = z, lnTwoSided(z), evidence.Normal(z)
	r.Mean.Low, r.Mean.High = low, high
	if math.Abs(z) > nearNull {
		r.Location.SE = (estimate - m.Null) / z
	} else {
		r.Location.SE = (high - low) / (2 * numeric.NormalCritical(1-m.Level))
	}
	return r
}

// signedRoot returns the signed root of a likelihood ratio, whose log is drop.
func signedRoot(drop, estimate, null float64) float64 {
	return math.Copysign(math.Sqrt(2*max(0, drop)), estimate-null)
}

// scattered returns the heterogeneity of a statistic from the given number of
// tables, or nil where fewer than two are left to differ.
func scattered(kind Scatter, q float64, tables int) *Heterogeneity {
	if tables < 2 {
		return nil
	}
	df := float64(tables - 1)
	return &Heterogeneity{
		Scatter: kind, Q: q, DF: tables - 1, Tables: tables,
		LnP: min(0, numeric.LogChiSquareTail(q, df)), Evidence: evidence.ChiSquare(q, df),
	}
}

// finite reports whether every number of the result but the degrees of freedom
// is finite and the standard errors are above 0.
func (r *Result) finite() bool {
	m := r.Mean
	numbers := []float64{m.Estimate, m.SE, m.Statistic, m.LnP, m.Low, m.High, m.Tau2, m.Q, m.Evidence.Ln(), r.Location.SE}
	if h := r.Heterogeneity; h != nil {
		numbers = append(numbers, h.Q, h.LnP, h.Evidence.Ln())
	}
	if r.Tau2 != nil {
		numbers = append(numbers, r.Tau2.Low, r.Tau2.High)
	}
	for _, x := range append(numbers, r.Weights...) {
		if math.IsNaN(x) || math.IsInf(x, 0) {
			return false
		}
	}
	return m.SE > 0 && r.Location.SE > 0
}
