package meta

import (
	"fmt"
	"math"
	"math/bits"
	"slices"
	"testing"

	"steelyard/meta/evidence"
)

// bruteSubset is one subset pooled on its own.
type bruteSubset struct {
	mask uint32
	mean Mean
}

// bruteSubsets pools every subset by handing its studies to a new Pooler.
func bruteSubsets(t testing.TB, m Model, y, s []float64) []bruteSubset {
	t.Helper()
	var all []bruteSubset
	var p Pooler
	for mask := uint32(1); mask < 1<<len(y); mask++ {
		var partY, partS []float64
		for i := range y {
			if mask>>i&1 == 1 {
				partY, partS = append(partY, y[i]), append(partS, s[i])
			}
		}
		mean, err := p.Pool(m, partY, partS)
		if err != nil {
			t.Fatal(err)
		}
		all = append(all, bruteSubset{mask, mean})
	}
	return all
}

// orderStatistic interpolates between the sorted values at (n − 1)·share.
func orderStatistic(values []float64, share float64) float64 {
	slices.Sort(values)
	rank := share * float64(len(values)-1)
	low, high := values[int(math.Floor(rank))], values[int(math.Ceil(rank))]
	return low + (rank-math.Floor(rank))*(high-low)
}

func shareOf(all []bruteSubset, holds func(b bruteSubset) bool) float64 {
	n := 0
	for _, b := range all {
		if holds(b) {
			n++
		}
	}
	return float64(n) / float64(len(all))
}

func valuesOf(all []bruteSubset, of func(m Mean) float64) []float64 {
	var values []float64
	for _, b := range all {
		values = append(values, of(b.mean))
	}
	return values
}

func estimateOf(m Mean) float64 { return m.Estimate }
func stepsOf(m Mean) float64    { return m.Evidence.Steps() }

func TestSubsetsAgainstBruteForce(t *testing.T) {
	y, s := drawn(10)
	zone := Limits{0.2, 0.9}
	chosen := 3
	models := everyModel()
	models["common, floor"] = Model{Level: 0.95, Effects: CommonEffect, Interval: HartungKnappFloor}
	models["dersimonian-laird, floor, null 0.5"] = Model{Level: 0.95, Tau: DerSimonianLaird, Null: 0.5}
	models["dersimonian-laird, plain, student-t"] = Model{Level: 0.95, Tau: DerSimonianLaird, Interval: HartungKnapp, Evidence: evidence.StudentForm}
	for name, m := range models {
		t.Run(name, func(t *testing.T) {
			all := bruteSubsets(t, m, y, s)
			got, err := AllSubsets(background, pairs(t, m, y, s), SubsetOptions{Important: &zone, Chosen: &chosen})
			if err != nil {
				t.Fatal(err)
			}
			if got.K != 10 || got.Count != 1023 || !got.Every || got.Failed != 0 {
				t.Errorf("%+v", got)
			}
			c := checker{t, closed}
			for _, q := range got.Estimate.Quantiles {
				c.near(fmt.Sprintf("quantile %v of the estimate", q.P), q.Value, orderStatistic(valuesOf(all, estimateOf), q.P))
			}
			for _, q := range got.Steps.Quantiles {
				c.near(fmt.Sprintf("quantile %v of the steps", q.P), q.Value, orderStatistic(valuesOf(all, stepsOf), q.P))
			}
			c.near("below the null", got.Sides.BelowNull, shareOf(all, func(b bruteSubset) bool { return b.mean.Estimate < m.Null }))
			c.near("above the null", got.Sides.AboveNull, shareOf(all, func(b bruteSubset) bool { return b.mean.Estimate > m.Null }))
			c.near("below the zone", *got.Sides.BelowZone, shareOf(all, func(b bruteSubset) bool { return b.mean.Estimate < zone.Low }))
			c.near("above the zone", *got.Sides.AboveZone, shareOf(all, func(b bruteSubset) bool { return b.mean.Estimate > zone.High }))
			for _, w := range got.Words {
				c.near(w.Favours.String()+" "+w.Word.String(), w.Share, shareOf(all, func(b bruteSubset) bool {
					return b.mean.Evidence.Favours() == w.Favours && b.mean.Evidence.Word() == w.Word
				}))
			}
			compareGrids(t, got, all, chosen)
		})
	}
}

// compareGrids counts the subsets into cells anew.
func compareGrids(t *testing.T, got *Subsets, all []bruteSubset, chosen int) {
	t.Helper()
	e, s := got.Grid.Estimate, got.Grid.Steps
	counts, holding := map[int]int{}, map[int]int{}
	for _, b := range all {
		i := int(math.Floor((b.mean.Estimate - e.Low) / (e.High - e.Low) * float64(e.Cells)))
		j := int(math.Floor((b.mean.Evidence.Steps() - s.Low) / (s.High - s.Low) * float64(s.Cells)))
		counts[i*s.Cells+j]++
		if b.mask>>chosen&1 == 1 {
			holding[i*s.Cells+j]++
		}
	}
	for cell, n := range got.Grid.Counts {
		if n != counts[cell] || got.With.Counts[cell] != holding[cell] || got.Without.Counts[cell] != n-holding[cell] {
			t.Fatalf("cell %d: %d, want %d; with %d, without %d", cell, n, counts[cell], got.With.Counts[cell], got.Without.Counts[cell])
		}
	}
	if got.Grid.Outside != 0 || len(holding) < 50 {
		t.Errorf("%d outside; %d cells hold study %d", got.Grid.Outside, len(holding), chosen)
	}
}

// TestSumsEqualRefits: what the sums give for a subset is what refitting gives,
// also where estimates carry an offset or one study is far more precise.
func TestSumsEqualRefits(t *testing.T) {
	y, s := drawn(12)
	offset, precise := slices.Clone(y), slices.Clone(s)
	for i := range y {
		offset[i] = 667.4 + 1e-3*y[i]
	}
	precise[4] = 1e-5
	small := slices.Clone(s)
	for i := range small {
		small[i] *= 1e-3
	}
	camps := studies{} // each agrees within its errors, far from the mean of both
	for i := range 10 {
		camps.y = append(camps.y, math.Copysign(100, float64(i%2)-0.5)+1e-4*y[i])
		camps.s = append(camps.s, 1e-4*s[i])
	}
	for name, d := range map[string]studies{
		"camps": camps, "plain": {y: y, s: s}, "offset": {y: offset, s: small}, "one precise": {y: y, s: precise}, "bcg": readStudies(t, "bcg_lor"),
	} {
		for _, m := range []Model{
			with(DerSimonianLaird, Wald), with(DerSimonianLaird, HartungKnapp), with(DerSimonianLaird, HartungKnappFloor),
			{Level: 0.95, Effects: CommonEffect}, {Level: 0.95, Effects: CommonEffect, Interval: HartungKnapp},
		} {
			m.Null = 0.1
			sums := newSubsetSums(pairs(t, m, d.y, d.s))
			if sums == nil {
				t.Fatalf("%s, %v: no sums", name, m.Interval)
			}
			taken := 0
			all := bruteSubsets(t, m, d.y, d.s)
			for _, b := range all {
				got, ok := sums.pool(b.mask)
				if !ok {
					continue
				}
				taken++
				ln := b.mean.Evidence.Ln()
				if !within(got.estimate, b.mean.Estimate, 1e-9*b.mean.SE+1e-15*math.Abs(b.mean.Estimate)) ||
					!within(got.statistic, b.mean.Statistic, 1e-9*(1+math.Abs(b.mean.Statistic))) || !within(got.ln, ln, 1e-9*(1+math.Abs(ln))) {
					t.Fatalf("%s, %v, subset %b: %+v, want %+v", name, m, b.mask, got, b.mean)
				}
			}
			if share := float64(taken) / float64(len(all)); share < 0.4 {
				t.Errorf("%s, %v: only %.2f of the subsets from sums", name, m.Interval, share)
			}
		}
	}
	for _, m := range []Model{at95, with(DefaultTau, ProfileLikelihood), with(DefaultTau, HenmiCopas), with(PauleMandel, Wald)} {
		if newSubsetSums(pairs(t, m, y, s)) != nil {
			t.Errorf("%+v: sums cannot serve it", m)
		}
	}
}

// TestMatchedCurve compares the polynomials with the evidence package.
func TestMatchedCurve(t *testing.T) {
	for _, df := range []float64{1, 2, 3, 5, 11, 23} {
		c := newMatchedCurve(df)
		for x := 0.0; x < 24; x += 0.0137 {
			statistic := c.statistic(x)
			if want := evidence.Matched(statistic, df).Ln(); !within(c.ln(statistic), want, 1e-10*(1+math.Abs(want))) {
				t.Fatalf("df %v, t %v: %.15g, want %.15g", df, statistic, c.ln(statistic), want)
			}
			if c.ln(statistic) != c.ln(-statistic) {
				t.Fatalf("df %v, t %v: not even", df, statistic)
			}
		}
	}
}

// TestManySubsets: beyond the number that is kept, quantiles come from a histogram
// within its resolution; shares stay exact.
func TestManySubsets(t *testing.T) {
	const k = 17
	y, s := drawn(k)
	m := with(DerSimonianLaird, Wald)
	all := bruteSubsets(t, m, y, s)
	chosen := k - 1
	got, err := AllSubsets(background, pairs(t, m, y, s), SubsetOptions{Chosen: &chosen})
	if err != nil {
		t.Fatal(err)
	}
	estimates, steps := valuesOf(all, estimateOf), valuesOf(all, stepsOf)
	for i, share := range quantileShares {
		if want := orderStatistic(estimates, share); !within(got.Estimate.Quantiles[i].Value, want, 1.5*got.Estimate.Resolution) {
			t.Errorf("quantile %v of the estimate: %v, want %v ± %v", share, got.Estimate.Quantiles[i].Value, want, got.Estimate.Resolution)
		}
		if want := orderStatistic(steps, share); !within(got.Steps.Quantiles[i].Value, want, 1.5*got.Steps.Resolution) {
			t.Errorf("quantile %v of the steps: %v, want %v ± %v", share, got.Steps.Quantiles[i].Value, want, got.Steps.Resolution)
		}
	}
	checker{t, closed}.near("below the null", got.Sides.BelowNull, shareOf(all, func(b bruteSubset) bool { return b.mean.Estimate < 0 }))
	total := got.Grid.Outside
	for _, n := range got.Grid.Counts {
		total += n
	}
	with := got.With.Outside
	for _, n := range got.With.Counts {
		with += n
	}
	if total != 1<<k-1 || with != 1<<(k-1) || got.Grid.Outside > total/100 {
		t.Errorf("%d in grids, %d with study %d, %d outside", total, with, chosen, got.Grid.Outside)
	}
}

// TestSubsetRangeMayBeExceeded: a histogram that saw too narrow a pilot still has
// the exact extremes, and quantiles between them.
func TestSubsetRangeMayBeExceeded(t *testing.T) {
	h := newHistogram(Limits{0, 1})
	for _, x := range []float64{-5, 0.25, 0.5, 0.75, 9} {
		h.add(x)
	}
	got := h.spread(5)
	want := map[float64]float64{0: -5, 0.25: 0.25, 0.5: 0.5, 0.75: 0.75, 1: 9}
	for _, q := range got.Quantiles {
		if x, ok := want[q.P]; ok && !within(q.Value, x, got.Resolution) {
			t.Errorf("quantile %v = %v, want %v", q.P, q.Value, x)
		}
		if q.Value < -5 || q.Value > 9 {
			t.Errorf("quantile %v = %v outside the extremes", q.P, q.Value)
		}
	}
}

// TestQuantilesWithinABin lie among the values there, and beyond the range between
// it and the extreme.
func TestQuantilesWithinABin(t *testing.T) {
	h := newHistogram(Limits{0, histogramBins}) // bins of width 1
	for i := range 11 {
		h.add(0.04 + 0.09*float64(i)) // all in the first
	}
	for _, q := range h.spread(11).Quantiles {
		if want := 0.04 + 0.9*q.P; !within(q.Value, want, 0.06) {
			t.Errorf("quantile %v = %v, want %v", q.P, q.Value, want)
		}
	}
	h = newHistogram(Limits{0, 1})
	for _, x := range []float64{-5, -4, -3, -2, -1, 0.5} {
		h.add(x)
	}
	if median := h.spread(6).Quantiles[5].Value; !within(median, -2.5, 0.6) {
		t.Errorf("median %v, want about -2.5", median)
	}
}

// TestSampledSubsetsOfTwo: each of the three subsets in a third of 30,000 draws,
// within 0.013 but once in a million.
func TestSampledSubsetsOfTwo(t *testing.T) {
	q := &subsetQuest{k: 2}
	drawn := map[string]int{}
	for i := range 30000 {
		drawn[fmt.Sprint(q.at(i, nil).rows)]++
	}
	for _, rows := range []string{"[0]", "[1]", "[0 1]"} {
		if !within(float64(drawn[rows])/30000, 1./3, 0.0135) {
			t.Errorf("%s in %d of 30000 draws", rows, drawn[rows])
		}
	}
}

// TestSampledSubsets: a sample is the same for a seed, another for another, never
// empty, and holds each study in about half of the draws: of 20,000 fair coins the
// share lies within 0.5 ± 0.018 but once in a million.
func TestSampledSubsets(t *testing.T) {
	for _, k := range []int{25, 64, 65, 130} {
		y, s := drawn(k)
		q := newSubsetQuest(pairs(t, with(DerSimonianLaird, Wald), y, s), SubsetOptions{Sample: 20000, Seed: 4})
		held := make([]int, k)
		for i := range q.count {
			rows := q.at(i, nil).rows
			if len(rows) == 0 || !slices.IsSorted(rows) || rows[len(rows)-1] >= k {
				t.Fatalf("k = %d, draw %d: %v", k, i, rows)
			}
			for _, row := range rows {
				held[row]++
			}
		}
		for row, n := range held {
			if !within(float64(n)/20000, 0.5, 0.018) {
				t.Errorf("k = %d: study %d in %d of 20000 draws", k, row, n)
			}
		}
	}
	y, s := drawn(30)
	r := pairs(t, with(DerSimonianLaird, Wald), y, s)
	sample := func(seed uint64) *Subsets {
		got, err := AllSubsets(background, r, SubsetOptions{Sample: 2000, Seed: seed})
		if err != nil {
			t.Fatal(err)
		}
		return got
	}
	one, two := sample(1), sample(2)
	if one.Every || one.Count != 2000 || sample(1).Estimate.Quantiles[5] != one.Estimate.Quantiles[5] || one.Estimate.Quantiles[5] == two.Estimate.Quantiles[5] {
		t.Errorf("medians %v and %v", one.Estimate.Quantiles[5], two.Estimate.Quantiles[5])
	}
	if newSubsetQuest(r, SubsetOptions{}).count != 1<<18 {
		t.Error("the default sample is not 2^18")
	}
}

// TestSubsetsOfOneStudy: one subset, its own result.
func TestSubsetsOfOneStudy(t *testing.T) {
	got, err := AllSubsets(background, pairs(t, at95, []float64{2}, []float64{1}), SubsetOptions{})
	if err != nil {
		t.Fatal(err)
	}
	if got.Count != 1 || got.Estimate.Quantiles[5].Value != 2 || got.Sides.AboveNull != 1 {
		t.Errorf("%+v", got)
	}
}

func TestNextOfSize(t *testing.T) {
	n := 0
	for mask := uint32(1)<<5 - 1; mask < 1<<11; mask = nextOfSize(mask) {
		if bits.OnesCount32(mask) != 5 {
			t.Fatalf("%b", mask)
		}
		n++
	}
	if n != 462 { // 11 over 5
		t.Errorf("%d sets of 5 of 11, want 462", n)
	}
}
