package explain

import (
	"fmt"
	"math"

	"steelyard/meta"
	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
)

// Subgroups compares groups of studies.
type Subgroups struct {
	Groups []Subgroup
	Shared bool    // the groups share one τ²
	Tau2   float64 // shared; 0 where each group has its own
	Limits meta.Limits
	Test   Between
}

// Subgroup is one group of studies with its result.
type Subgroup struct {
	Group
	Fit     *meta.Fit // of the group alone; nil where τ² is shared
	Mean    meta.Mean
	Weights []float64 // of its studies within it, summing to 1
	// Against is the group's effect less that of the first group; nil for that one.
	Against *Difference
}

// Difference is a difference between two effects on the analysis scale: for ratios
// the logarithm of a ratio of ratios.
type Difference struct {
	Estimate, Low, High float64
	DF                  float64 // +Inf for a normal interval
}

// Between is the test between subgroups. Q is Σu(m − m̄)², u the inverse squares of
// the model's own standard errors, chi-square with groups − 1 degrees of freedom. F
// agrees with the groups' intervals: beside Student's t it is Welch's test for
// separate τ², and Knapp and Hartung's F of a regression for a shared one; else
// Q/DF1.
type Between struct {
	Q, LnPQ  float64
	F        float64
	DF1, DF2 float64 // DF2 is +Inf where DF1·F is chi-square
	LnP      float64
	Evidence evidence.Ratio
}

// Fitter pools some of the studies, by their indices, by the model of the groups.
type Fitter func(rows []int) (*meta.Fit, error)

// Check returns a *DesignError for groups that cannot be compared: fewer than two,
// or one for each study.
func Check(column string, groups []Group, k int) error {
	switch {
	case len(groups) < 2:
		return &DesignError{column, fmt.Sprintf("all %d studies are in one group: there is nothing to compare", k)}
	case len(groups) == k:
		return &DesignError{column, fmt.Sprintf("%d different entries in %d studies leave a group for each: name a column of fewer, or regress on one of numbers with --on", k, k)}
	}
	return nil
}

// Separate compares groups of which each has a τ² of its own. s are the standard
// errors of all studies, from which the model's own come; nil where the fits are not of
// inverse variances, so that theirs stand in.
func Separate(groups []Group, s []float64, fit Fitter, model meta.Model) (*Subgroups, error) {
	result := &Subgroups{}
	own := make([]float64, len(groups)) // the model's standard errors
	for i, g := range groups {
		f, err := fit(g.Rows)
		if err != nil {
			return nil, fmt.Errorf("group %q: %w", g.Name, err)
		}
		own[i] = f.Mean.SE
		if s != nil {
			own[i] = modelSE(s, g.Rows, f.Mean.Tau2)
		}
		result.Groups = append(result.Groups, Subgroup{Group: g, Fit: f, Mean: f.Mean, Weights: f.Weights})
	}
	result.Test = welch(result.Groups, own, model)
	first := result.Groups[0].Mean
	for i := range result.Groups[1:] {
		g := &result.Groups[i+1]
		g.Against = apart(first, g.Mean, model.Level)
	}
	return result, nil
}

// modelSE returns 1/√Σ1/(s² + τ²) of some studies.
func modelSE(s []float64, rows []int, tau2 float64) float64 {
	var weight numeric.Sum
	for _, row := range rows {
		weight.Add(1 / (s[row]*s[row] + tau2))
	}
	return 1 / math.Sqrt(weight.Value())
}

// apart returns the difference of two independent means, its degrees of freedom by
// Welch and Satterthwaite.
func apart(a, b meta.Mean, level float64) *Difference {
	va, vb := a.SE*a.SE, b.SE*b.SE
	df := (va + vb) * (va + vb) / (va*va/a.DF + vb*vb/b.DF)
	if math.IsNaN(df) {
		df = math.Inf(1)
	}
	half := numeric.StudentCritical(1-level, df) * math.Sqrt(va+vb)
	d := b.Estimate - a.Estimate
	return &Difference{Estimate: d, Low: d - half, High: d + half, DF: df}
}

// welch tests whether means with standard errors differ. The F is Welch's, with the
// standard errors of the intervals and their degrees of freedom νᵢ:
//
//	F = Q/(G − 1) / (1 + 2(G − 2)/(G² − 1)·Λ),  Λ = Σ(1 − u/Σu)²/ν
//
// on G − 1 and (G² − 1)/(3Λ) degrees of freedom. With every ν infinite it is
// Q/(G − 1).
//
// Source: Welch (1951), Biometrika 38:330-336.
func welch(groups []Subgroup, own []float64, model meta.Model) Between {
	n := float64(len(groups))
	means, interval := make([]float64, len(groups)), make([]float64, len(groups))
	for i, g := range groups {
		means[i], interval[i] = g.Mean.Estimate, g.Mean.SE
	}
	b := Between{DF1: n - 1, DF2: math.Inf(1)}
	b.Q, _ = scatterOf(means, own)
	b.LnPQ = min(0, numeric.LogChiSquareTail(b.Q, b.DF1))
	q, weights := scatterOf(means, interval)
	var lambda numeric.Sum
	for i, g := range groups {
		if df := g.Mean.DF; !math.IsInf(df, 1) {
			lambda.Add((1 - weights[i]) * (1 - weights[i]) / df)
		}
	}
	b.F = q / b.DF1 / (1 + 2*(n-2)/(n*n-1)*lambda.Value())
	if lambda.Value() > 0 {
		b.DF2 = (n*n - 1) / (3 * lambda.Value())
	}
	b.LnP, b.Evidence = weighF(b.F, b.DF1, b.DF2, model.Evidence)
	return b
}

// scatterOf returns Σu(m − m̄)² and the shares of u = 1/se².
func scatterOf(means, se []float64) (q float64, shares []float64) {
	var total, sum, squares numeric.Sum
	for i, m := range means {
		u := 1 / (se[i] * se[i])
		total.Add(u)
		sum.Add(u * (m - means[0]))
	}
	mean := sum.Value() / total.Value()
	for i, m := range means {
		u := 1 / (se[i] * se[i])
		d := m - means[0] - mean
		squares.Add(u * d * d)
		shares = append(shares, u/total.Value())
	}
	return squares.Value(), shares
}

// Shared compares groups that share one τ², estimated by the model's method from the
// scatter of the studies about the means of their groups: the regression on
// indicators of the groups. Intervals are on k − groups degrees of freedom. The
// model's interval is settled as by Resolve.
//
// It returns a *DesignError where there are no more studies than groups.
func Shared(groups []Group, y, s []float64, model meta.Model) (*Subgroups, error) {
	model, err := Resolve(model)
	if err != nil {
		return nil, err
	}
	columns := make([]Column, len(groups))
	for i, g := range groups {
		columns[i] = Column{Name: g.Name, Values: make([]float64, len(y))}
		for _, row := range g.Rows {
			columns[i].Values[row] = 1
		}
	}
	m, err := newSystem(y, s, columns, false)
	if err != nil {
		return nil, err
	}
	tau2, err := m.estimate(model.Tau)
	if err != nil {
		return nil, err
	}
	zero := m.fit(0)
	residual, err := m.residual(zero, tau2, model.Level)
	if err != nil {
		return nil, err
	}
	model, st := m.settle(model, tau2)
	result := &Subgroups{Shared: true, Tau2: residual.Tau2, Limits: residual.Limits}
	own := make([]float64, len(groups))
	for i, g := range groups {
		own[i] = math.Abs(st.inverse.at(i, i)) * st.unit
		mean := meta.Mean{
			K: len(g.Rows), Estimate: st.centre + st.beta[i]*st.unit, SE: own[i] * math.Sqrt(st.factor),
			DF: st.df, Tau2: residual.Tau2, Q: groupQ(y, s, g.Rows),
		}
		result.Groups = append(result.Groups, Subgroup{Group: g, Mean: inferred(mean, model), Weights: weightsOf(s, g.Rows, residual.Tau2)})
	}
	result.Test = sharedTest(result.Groups, own, &st, model)
	for i := range result.Groups[1:] {
		g := &result.Groups[i+1]
		d := g.Mean.Estimate - result.Groups[0].Mean.Estimate
		half := st.critical(model.Level) * math.Hypot(g.Mean.SE, result.Groups[0].Mean.SE)
		g.Against = &Difference{Estimate: d, Low: d - half, High: d + half, DF: st.df}
	}
	return result, nil
}

// inferred adds what follows from a mean's estimate, standard error and degrees of
// freedom.
func inferred(m meta.Mean, model meta.Model) meta.Mean {
	half := numeric.StudentCritical(1-model.Level, m.DF) * m.SE
	m.Low, m.High = m.Estimate-half, m.Estimate+half
	m.Statistic = (m.Estimate - model.Null) / m.SE
	m.LnP = min(0, math.Ln2+numeric.LogStudentTail(math.Abs(m.Statistic), m.DF))
	m.Evidence = weighT(m.Statistic, m.DF, model.Evidence)
	return m.Located(evidence.Location{Estimate: m.Estimate, SE: m.SE, DF: m.DF, Form: model.Evidence})
}

// sharedTest tests between groups that share τ² and the variance factor.
func sharedTest(groups []Subgroup, own []float64, st *state, model meta.Model) Between {
	means := make([]float64, len(groups))
	for i, g := range groups {
		means[i] = g.Mean.Estimate
	}
	b := Between{DF1: float64(len(groups) - 1), DF2: st.df}
	b.Q, _ = scatterOf(means, own)
	b.LnPQ = min(0, numeric.LogChiSquareTail(b.Q, b.DF1))
	b.F = b.Q / b.DF1 / st.factor
	b.LnP, b.Evidence = weighF(b.F, b.DF1, b.DF2, model.Evidence)
	return b
}

// groupQ returns Cochran's Q of some studies.
func groupQ(y, s []float64, rows []int) float64 {
	means, se := make([]float64, len(rows)), make([]float64, len(rows))
	for i, row := range rows {
		means[i], se[i] = y[row], s[row]
	}
	q, _ := scatterOf(means, se)
	return q
}

// weightsOf returns the weights of some studies, summing to 1.
func weightsOf(s []float64, rows []int, tau2 float64) []float64 {
	all := make([]float64, len(rows))
	se := modelSE(s, rows, tau2)
	for i, row := range rows {
		all[i] = se * se / (s[row]*s[row] + tau2)
	}
	return all
}
