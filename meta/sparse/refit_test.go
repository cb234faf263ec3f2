package sparse

import (
	"context"
	"testing"

	"steelyard/meta"
	"steelyard/meta/effect"
)

// TestTablesRefit: rows pool as their tables do, a clone likewise, and Point gives
// the estimate and evidence of Mean, bit for bit.
func TestTablesRefit(t *testing.T) {
	for _, method := range []Method{MantelHaenszel, Peto, ConditionalExact, BinomialNormal} {
		m := Model{Method: method, Level: 0.95}
		whole, err := NewTables(m, magnesium)
		if err != nil {
			t.Fatal(err)
		}
		clone := whole.Clone()
		for _, rows := range [][]int{{0, 1, 2, 3, 4, 5, 6, 7}, {1, 2, 7}, {1, 7}, {4}} {
			var part []effect.Table
			for _, row := range rows {
				part = append(part, magnesium[row])
			}
			want, err := m.Refit(part)
			if err != nil {
				t.Fatal(err)
			}
			got, err := whole.Mean(rows)
			if err != nil || got != want {
				t.Errorf("%s, %v: %+v, %v, want %+v", method, rows, got, err, want)
			}
			if got, err = clone.Mean(rows); err != nil || got != want {
				t.Errorf("%s, %v by a clone: %+v, %v", method, rows, got, err)
			}
			point, err := whole.Point(rows)
			if err != nil || point.Estimate != want.Estimate || point.Statistic != want.Statistic || point.Evidence != want.Evidence || point.Tau2 != want.Tau2 {
				t.Errorf("%s, %v: point %+v, %v, want %+v", method, rows, point, err, want)
			}
		}
		if whole.K() != len(magnesium) {
			t.Errorf("k = %d", whole.K())
		}
	}
}

// TestPooledForm: a result in the common form keeps its numbers, its weights and
// where its evidence stands.
func TestPooledForm(t *testing.T) {
	for _, method := range []Method{MantelHaenszel, Peto, ConditionalExact, BinomialNormal} {
		r := mustFit(t, Model{Method: method}, magnesium)
		f := r.Pooled()
		if f.Method != method.String() || f.Mean != r.Mean || f.Mean.Location() != r.Location || len(f.Weights) != len(magnesium) {
			t.Errorf("%s: %+v", method, f)
		}
		if f.Heterogeneity.Q != r.Heterogeneity.Q || f.Heterogeneity.LnP != r.Heterogeneity.LnP || f.Heterogeneity.Evidence != r.Heterogeneity.Evidence {
			t.Errorf("%s: %+v, want %+v", method, f.Heterogeneity, r.Heterogeneity)
		}
		if random := f.Model.Effects == meta.RandomEffects; random != (method == BinomialNormal) || random && f.Tau2 != *r.Tau2 {
			t.Errorf("%s: %v, τ² %v", method, f.Model.Effects, f.Tau2)
		}
	}
}

// TestSubsetsOfTables: the subsets are pooled without intervals, and the estimates
// over them are those of refits.
func TestSubsetsOfTables(t *testing.T) {
	few := magnesium[4:]
	m := Model{Method: BinomialNormal, Level: 0.95}
	r, err := NewTables(m, few)
	if err != nil {
		t.Fatal(err)
	}
	all, err := meta.AllSubsets(context.Background(), r, meta.SubsetOptions{})
	if err != nil {
		t.Fatal(err)
	}
	least := 1e300
	for mask := 1; mask < 1<<len(few); mask++ {
		var part []effect.Table
		for i, table := range few {
			if mask>>i&1 == 1 {
				part = append(part, table)
			}
		}
		mean, err := m.Refit(part)
		if err != nil {
			t.Fatal(err)
		}
		least = min(least, mean.Estimate)
	}
	if got := all.Estimate.Quantiles[0].Value; all.Count != 15 || all.Failed != 0 || got != least {
		t.Errorf("%d subsets, %d failed, least %v, want %v", all.Count, all.Failed, got, least)
	}
}
