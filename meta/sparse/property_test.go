package sparse

import (
	"errors"
	"math"
	"slices"
	"testing"

	"pgregory.net/rapid"

	"steelyard/meta"
	"steelyard/meta/choice"
	"steelyard/meta/effect"
)

// expected reports whether an error is one of those that Fit promises for legal
// tables.
func expected(err error) bool {
	var boundary *BoundaryError
	var unbounded *UnboundedError
	if errors.As(err, &boundary) && boundary.OneSided != nil {
		o := boundary.OneSided
		for _, x := range []float64{o.Limit, o.Statistic, o.LnP, o.Evidence.Ln()} {
			if math.IsNaN(x) || math.IsInf(x, 0) {
				return false
			}
		}
	}
	return errors.Is(err, ErrNothingToCompare) || errors.Is(err, ErrNoVariance) || boundary != nil || errors.As(err, &unbounded)
}

// drawModel draws any model.
func drawModel(t *rapid.T) Model {
	m := rapid.SampledFrom(everyModel).Draw(t, "model")
	if m.Method == MantelHaenszel {
		m.Measure = rapid.SampledFrom([]effect.Measure{effect.OddsRatio, effect.RiskRatio, effect.RiskDifference}).Draw(t, "measure")
	}
	m.Level = rapid.SampledFrom([]float64{0.5, 0.9, 0.95, 0.999}).Draw(t, "level")
	m.Null = rapid.SampledFrom([]float64{0, 0.3, -1}).Draw(t, "null")
	return m
}

// checkSound checks what holds of every result: finite numbers, an interval
// round the estimate, shares that sum to 1 and are 0 for silent tables.
func checkSound(t rapid.TB, m Model, tables []effect.Table) (*Result, error) {
	r, err := m.Fit(tables)
	if err != nil {
		if r != nil || !expected(err) {
			t.Fatalf("%+v of %v: %v beside %v", m, tables, r, err)
		}
		return nil, err
	}
	if !r.finite() || r.Mean.Low > r.Mean.Estimate || r.Mean.High < r.Mean.Estimate || r.Mean.LnP > 0 || r.Mean.Tau2 < 0 || r.Mean.Q < 0 {
		t.Fatalf("%+v of %v: %+v", m, tables, r)
	}
	if r.Mean.K != len(tables)-len(r.Tally.Silent) || r.Mean.K != r.Tally.Used() {
		t.Fatalf("%+v of %v: K %d, tally %+v", m, tables, r.Mean.K, r.Tally)
	}
	sum := 0.0
	for i, w := range r.Weights {
		sum += w
		if w < 0 || slices.Contains(r.Tally.Silent, i) && w != 0 {
			t.Fatalf("%+v of %v: weights %v, silent %v", m, tables, r.Weights, r.Tally.Silent)
		}
	}
	if !near(sum, 1, 1e-12) || len(r.Weights) != len(tables) {
		t.Fatalf("%+v of %v: weights %v", m, tables, r.Weights)
	}
	return r, nil
}

// Exchanging the arms, and with them the sign of the null, turns every result
// round; so does exchanging events and non-events for the odds ratio.
func TestSwappedArms(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		m, tables := drawModel(t), drawTables(t, 5, 60)
		turned := m
		turned.Null = -m.Null
		a, errA := checkSound(t, m, tables)
		b, errB := checkSound(t, turned, swapped(tables))
		mirrored(t, tables, a, b, errA, errB)
		if m.Measure != effect.Unspecified && m.Measure != effect.OddsRatio {
			return
		}
		other := slices.Clone(tables)
		for i, x := range other {
			other[i].Events1, other[i].Events2 = x.Total1-x.Events1, x.Total2-x.Events2
		}
		c, errC := checkSound(t, turned, other)
		mirrored(t, tables, a, c, errA, errC)
	})
}

// mirrored checks that one result is the other turned round.
func mirrored(t rapid.TB, tables []effect.Table, a, b *Result, errA, errB error) {
	if errA != nil || errB != nil {
		var boundaryA, boundaryB *BoundaryError
		if errors.As(errA, &boundaryA) && errors.As(errB, &boundaryB) {
			if boundaryA.Toward != -boundaryB.Toward || boundaryA.OneSided != nil && !near(boundaryA.OneSided.Limit, -boundaryB.OneSided.Limit, 1e-8*(1+math.Abs(boundaryA.OneSided.Limit))) {
				t.Fatalf("%v: %v, turned %v", tables, errA, errB)
			}
			return
		}
		if (errA == nil) != (errB == nil) {
			t.Fatalf("%v: %v, turned %v", tables, errA, errB)
		}
		return
	}
	x, y := a.Mean, b.Mean
	tol := 1e-6 * (1 + x.SE)
	if !near(x.Estimate, -y.Estimate, tol) || !near(x.Low, -y.High, 1e-5*(1+x.High-x.Low)) || !near(x.SE, y.SE, 1e-5*(1+x.SE)) || !near(x.LnP, y.LnP, 1e-5*(1-x.LnP)) || !near(x.Q, y.Q, 1e-6*(1+x.Q)) {
		t.Fatalf("%v: %+v, turned %+v", tables, x, y)
	}
}

// The order of the tables does not matter, and a table that carries nothing
// changes no digit.
func TestOrderAndSilentTables(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		m, tables := drawModel(t), drawTables(t, 5, 60)
		a, errA := checkSound(t, m, tables)
		turned := slices.Clone(tables)
		slices.Reverse(turned)
		b, errB := checkSound(t, m, turned)
		if (errA == nil) != (errB == nil) {
			t.Fatalf("%v: %v; in reverse %v", tables, errA, errB)
		}
		if errA != nil {
			return
		}
		tol := 1e-6 * (1 + a.Mean.SE)
		if !near(a.Mean.Estimate, b.Mean.Estimate, tol) || !near(a.Mean.LnP, b.Mean.LnP, 1e-5*(1-a.Mean.LnP)) {
			t.Fatalf("%v: %+v; in reverse %+v", tables, a.Mean, b.Mean)
		}
		if m.Measure == effect.RiskDifference {
			return
		}
		more, err := m.Fit(append(slices.Clone(tables), effect.Table{Events1: 0, Total1: 40, Events2: 0, Total2: 30}))
		if err != nil || more.Mean != a.Mean || more.Tally.NoEvents != a.Tally.NoEvents+1 || len(more.Tally.Silent) != len(a.Tally.Silent)+1 {
			t.Fatalf("%v: %+v; with an empty table %+v, %v", tables, a, more, err)
		}
	})
}

// Every table twice leaves the estimate as it is; the information, and with it
// the variance of Mantel–Haenszel, Peto and the logistic model, changes by 2.
func TestDuplicates(t *testing.T) {
	for name, tables := range map[string][]effect.Table{"magnesium": magnesium, "thin": thin, "BCG": bcg(t)} {
		twice := append(slices.Clone(tables), tables...)
		for _, m := range everyModel {
			one, two := mustFit(t, m, tables).Mean, mustFit(t, m, twice).Mean
			if m.Method == BinomialNormal && m.Effects == meta.RandomEffects && one.Tau2 > 0 {
				compare(t, want{name + " τ²", two.Tau2, one.Tau2, 1e-6})
			}
			compare(t,
				want{name + " " + m.Method.String(), two.Estimate, one.Estimate, 1e-7},
				want{name + " variance", two.SE * two.SE * 2, one.SE * one.SE, 1e-6},
			)
		}
	}
}

// A wider level gives a wider interval, and the interval excludes the null
// exactly where p is below 1 − level. Evidence and statistic of Location agree.
func TestLevelAndP(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		m, tables := drawModel(t), drawTables(t, 4, 60)
		r, err := checkSound(t, m, tables)
		if err != nil {
			return
		}
		wider := m
		wider.Level = 1 - (1-m.Level)/3
		if w, err := wider.Fit(tables); err == nil && (w.Mean.Low > r.Mean.Low+1e-9 || w.Mean.High < r.Mean.High-1e-9) {
			t.Fatalf("%v: %+v at %v, %+v at %v", tables, r.Mean, m.Level, w.Mean, wider.Level)
		}
		margin := r.Mean.LnP - math.Log(1-m.Level)
		outside := m.Null < r.Mean.Low || m.Null > r.Mean.High
		if math.Abs(margin) > 1e-4 && outside != (margin < 0) && m.Level > 0.5 {
			t.Fatalf("%+v of %v: ln p %v, limits %v to %v", m, tables, r.Mean.LnP, r.Mean.Low, r.Mean.High)
		}
		if z := (r.Location.Estimate - m.Null) / r.Location.SE; math.Abs(r.Mean.Statistic) > 1e-5 && !near(z, r.Mean.Statistic, 1e-9*(1+math.Abs(z))) {
			t.Fatalf("%+v of %v: statistic %v, located at %v", m, tables, r.Mean.Statistic, z)
		}
	})
}

// Refit gives the mean of Fit.
func TestRefit(t *testing.T) {
	for _, m := range everyModel {
		a, err := m.Refit(magnesium)
		if b := mustFit(t, m, magnesium).Mean; err != nil || a != b {
			t.Errorf("%v: %+v, %v; Fit %+v", m.Method, a, err, b)
		}
	}
}

func TestRefused(t *testing.T) {
	good := magnesium
	for _, m := range everyModel {
		for _, bad := range [][]effect.Table{nil, tablesOf([4]float64{0, 10, 0, 12}), tablesOf([4]float64{10, 10, 12, 12}, [4]float64{0, 5, 0, 5})} {
			if r, err := m.Fit(bad); !errors.Is(err, ErrNothingToCompare) || r != nil {
				t.Errorf("%v of %v: %v, %v", m.Method, bad, r, err)
			}
		}
		var table *TableError
		var input *effect.InputError
		if _, err := m.Fit(append(slices.Clone(good), effect.Table{Events1: 3, Total1: 2, Events2: 0, Total2: 4})); !errors.As(err, &table) || table.Index != 8 || !errors.As(err, &input) {
			t.Errorf("%v of 3 events in 2 people: %v", m.Method, err)
		}
		var setting *SettingError
		for _, level := range []float64{0, 1, math.NaN(), -1} {
			m := m
			m.Level = level
			if _, err := m.Fit(good); !errors.As(err, &setting) {
				t.Errorf("%v at level %v: %v", m.Method, level, err)
			}
		}
		for _, null := range []float64{math.NaN(), math.Inf(1), -1e9} {
			m := m
			m.Null = null
			if _, err := m.Fit(good); !errors.As(err, &setting) {
				t.Errorf("%v with null %v: %v", m.Method, null, err)
			}
		}
		if m.Method != MantelHaenszel {
			m.Measure = effect.RiskRatio
		} else {
			m.Measure = effect.HazardRatio
		}
		var measure *effect.MeasureError
		if _, err := m.Fit(good); !errors.As(err, &measure) {
			t.Errorf("%v of a %v: %v", m.Method, m.Measure, err)
		}
	}
	var unknown *choice.UnknownError
	if _, err := (Model{Method: 9, Level: 0.95}).Fit(good); !errors.As(err, &unknown) {
		t.Errorf("method 9: %v", err)
	}
	risks := Model{Method: MantelHaenszel, Measure: effect.RiskDifference, Level: 0.95}
	if _, err := risks.Fit(tablesOf([4]float64{0, 10, 12, 12})); !errors.Is(err, ErrNoVariance) {
		t.Errorf("risk difference of none against all: %v", err)
	}
	risks.Measure = effect.RiskRatio
	var boundary *BoundaryError
	if _, err := risks.Fit(tablesOf([4]float64{0, 10, 3, 12})); !errors.As(err, &boundary) || boundary.Toward != -1 || boundary.OneSided != nil || boundary.Measure != effect.RiskRatio {
		t.Errorf("risk ratio of none against some: %v", err)
	}
}

// A risk difference counts tables without events. Source: with arms of 100 and
// differences 0 and −0.1 it is −0.05 with variance (0.1·0.9/100)/4.
func TestRiskDifferenceOfEmptyTables(t *testing.T) {
	r := mustFit(t, Model{Method: MantelHaenszel, Measure: effect.RiskDifference}, tablesOf([4]float64{0, 100, 0, 100}, [4]float64{0, 100, 10, 100}))
	compare(t,
		want{"difference", r.Mean.Estimate, -0.05, 1e-15}, want{"variance", r.Mean.SE * r.Mean.SE, 0.1 * 0.9 / 400, 1e-15},
		want{"tables", float64(r.Mean.K), 2, 0}, want{"without events", float64(r.Tally.NoEvents), 1, 0},
	)
	if r.Heterogeneity != nil || len(r.Tally.Silent) != 0 {
		t.Errorf("%+v, %+v", r.Heterogeneity, r.Tally)
	}
}

// FuzzFit: legal tables never lead to a panic, to a NaN, or to an error that Fit
// does not promise, whatever their size.
func FuzzFit(f *testing.F) {
	f.Add(uint8(0), uint32(0), uint32(50), uint32(3), uint32(48), uint32(1), uint32(60), uint32(0), uint32(61), uint32(2), uint32(9))
	f.Add(uint8(4), uint32(505), uint32(88391), uint32(499), uint32(88391), uint32(0), uint32(1), uint32(1), uint32(1), uint32(1), uint32(3))
	f.Add(uint8(3), uint32(200000), uint32(200000), uint32(1), uint32(200000), uint32(0), uint32(200000), uint32(7), uint32(9), uint32(4), uint32(4))
	f.Add(uint8(2), uint32(0), uint32(10), uint32(5), uint32(10), uint32(5), uint32(10), uint32(0), uint32(10), uint32(0), uint32(7))
	f.Fuzz(func(t *testing.T, which uint8, e1, n1, e2, n2, e3, n3, e4, n4, e5, n5 uint32) {
		table := func(e1, n1, e2, n2 uint32) effect.Table {
			n1, n2 = n1%200000+1, n2%200000+1
			return effect.Table{Events1: float64(e1 % (n1 + 1)), Total1: float64(n1), Events2: float64(e2 % (n2 + 1)), Total2: float64(n2)}
		}
		m := everyModel[int(which)%len(everyModel)]
		tables := []effect.Table{table(e1, n1, e2, n2), table(e3, n3, e4, n4), table(e5, n5, e1, n3)}
		for k := 1; k <= len(tables); k++ {
			if _, err := checkSound(t, m, tables[:k]); err != nil {
				_ = err.Error()
			}
		}
	})
}
