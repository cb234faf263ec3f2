package sparse

import (
	"math"

	"steelyard/meta"
	"steelyard/meta/effect"
)

// Measures returns the measures that the method pools, the first being its own
// choice.
func (m Method) Measures() []effect.Measure {
	if m == MantelHaenszel {
		return []effect.Measure{effect.OddsRatio, effect.RiskRatio, effect.RiskDifference}
	}
	return []effect.Measure{effect.OddsRatio}
}

// Random reports whether the method can let effects vary between studies.
func (m Method) Random() bool { return m == BinomialNormal }

// Tables is the meta.Refit of 2×2 tables under a model: what pools any part of
// them. A Mean counts in K the tables that carry information.
type Tables struct {
	model  Model
	tables []effect.Table // all, shared by clones
	part   []effect.Table
}

// NewTables returns the Refit of tables under a model; the slice is kept and must
// not change. It returns the errors of Model.Fit for the whole set.
func NewTables(m Model, tables []effect.Table) (*Tables, error) {
	_, err := m.Refit(tables)
	return &Tables{model: m, tables: tables}, err
}

// K returns the number of tables.
func (t *Tables) K() int { return len(t.tables) }

// Clone returns a Refit of the same tables for another goroutine.
func (t *Tables) Clone() meta.Refit { return &Tables{model: t.model, tables: t.tables} }

// Mean pools the tables of the given rows; see meta.Refit. Errors are those of
// Model.Fit.
func (t *Tables) Mean(rows []int) (meta.Mean, error) {
	return t.model.Refit(t.choose(rows))
}

// Point is Mean without what only its interval needs; see meta.Sparing.
func (t *Tables) Point(rows []int) (meta.Mean, error) {
	return t.model.mean(t.choose(rows), pointOnly)
}

// choose returns the tables of the given rows, until the next choice.
func (t *Tables) choose(rows []int) []effect.Table {
	t.part = t.part[:0]
	for _, row := range rows {
		t.part = append(t.part, t.tables[row])
	}
	return t.part
}

// Pooled returns the result in the form that every pooling method shares. Its
// model names the interval where package meta has a name for it: the exact one
// has none. A spread without limits has those from 0 to +Inf.
func (r *Result) Pooled() *meta.Fit {
	m := r.Model
	f := &meta.Fit{
		Method: m.Method.String(),
		Model:  meta.Model{Effects: m.Effects, Level: m.Level, Null: m.Null},
		Mean:   r.Mean, Weights: r.Weights,
		Tau2: meta.Limits{High: math.Inf(1)},
	}
	switch m.Method {
	case MantelHaenszel, Peto:
		f.Model.Interval = meta.Wald
	case BinomialNormal:
		f.Model.Interval = meta.ProfileLikelihood
		if m.Effects == meta.RandomEffects {
			f.Model.Tau = meta.MaximumLikelihood
		}
	}
	if r.Tau2 != nil {
		f.Tau2 = *r.Tau2
	}
	f.Heterogeneity = meta.HeterogeneityOf(0, 0, m.Level)
	if h := r.Heterogeneity; h != nil {
		f.Heterogeneity = meta.HeterogeneityOf(h.Q, h.DF, m.Level)
	}
	f.Caveats = r.caveats()
	return f
}

// caveats returns what must be known beside the result.
func (r *Result) caveats() []meta.Caveat {
	var list []meta.Caveat
	k := r.Mean.K
	add := func(kind meta.CaveatKind, when bool) {
		if when {
			list = append(list, meta.Caveat{Kind: kind, K: k})
		}
	}
	random := r.Model.Effects == meta.RandomEffects
	add(meta.SingleStudy, k == 1)
	add(meta.FewStudies, random && k > 1 && k < 5)
	add(meta.TauZero, random && k > 1 && r.Mean.Tau2 == 0)
	return list
}
