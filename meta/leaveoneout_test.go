package meta

import (
	"errors"
	"math"
	"math/bits"
	"slices"
	"testing"
)

// TestReferenceLeaveOneOut: the 40-digit values of the check files.
func TestReferenceLeaveOneOut(t *testing.T) {
	for _, name := range checkNames {
		t.Run(name, func(t *testing.T) {
			d, want := readReference(t, name)
			for i, w := range want.LeaveOneOut {
				if w.Omitted != i {
					t.Fatalf("entry %d omits %d", i, w.Omitted)
				}
			}
			compareSeries(t, want.LeaveOneOut, func(m Model) []Mean {
				list, err := LeaveOneOut(background, pairs(t, m, d.y, d.s), Work{})
				if err != nil {
					t.Fatal(err)
				}
				var means []Mean
				for _, o := range list {
					means = append(means, o.Mean)
				}
				return means
			})
		})
	}
}

// TestLeaveOneOutIsRefit: bit for bit what pooling the others gives, and the
// evidence carried is the difference of the steps.
func TestLeaveOneOutIsRefit(t *testing.T) {
	y, s := drawn(9)
	d := studies{y: y, s: s}
	for name, m := range everyModel() {
		list, err := LeaveOneOut(background, pairs(t, m, y, s), Work{})
		if err != nil {
			t.Fatal(err)
		}
		all := mustFit(t, m, y, s)
		for i, o := range list {
			want := mustFit(t, m, without(d, i).y, without(d, i).s).Mean
			if o.Row != i || o.Problem != nil || o.Mean != want || o.Carried != all.Mean.Evidence.Steps()-want.Evidence.Steps() {
				t.Errorf("%s without %d: %+v, want %+v", name, i, o, want)
			}
		}
	}
}

func without(d studies, i int) studies {
	y, s := d.without(i)
	return studies{y: y, s: s}
}

// TestLeaveOneOutFollowsTheRows: permuted rows give the same numbers permuted, up
// to rounding.
func TestLeaveOneOutFollowsTheRows(t *testing.T) {
	y, s := drawn(7)
	order := []int{3, 0, 6, 5, 1, 2, 4}
	var py, ps []float64
	for _, row := range order {
		py, ps = append(py, y[row]), append(ps, s[row])
	}
	plain, err := Influences(background, pairs(t, at95, y, s), Work{})
	if err != nil {
		t.Fatal(err)
	}
	permuted, err := Influences(background, pairs(t, at95, py, ps), Work{})
	if err != nil {
		t.Fatal(err)
	}
	c := checker{t, 1e-8}
	for i, row := range order {
		got, want := permuted[i], plain[row]
		c.near("estimate", got.Mean.Estimate, want.Mean.Estimate)
		c.near("carried", got.Carried, want.Carried)
		c.near("pull", got.Pull, want.Pull)
		c.near("residual", got.Detail.Residual, want.Detail.Residual)
		c.near("distance", got.Detail.Cook, want.Detail.Cook)
	}
}

// TestPublishedLeaveOneOut: PUBLISHED §1, BCG log risk ratios, DerSimonian–Laird
// [recalc]: τ², risk ratio with limits without each trial.
func TestPublishedLeaveOneOut(t *testing.T) {
	want := [][4]float64{
		{0.3122, 0.4940, 0.3443, 0.7089},
		{0.3000, 0.5197, 0.3634, 0.7432},
		{0.3085, 0.5042, 0.3524, 0.7213},
		{0.2167, 0.5386, 0.3905, 0.7430},
		{0.3262, 0.4658, 0.3201, 0.6778},
		{0.3829, 0.4903, 0.3278, 0.7333},
		{0.3006, 0.5191, 0.3631, 0.7421},
		{0.2109, 0.4538, 0.3296, 0.6247},
		{0.3266, 0.4775, 0.3281, 0.6948},
		{0.2946, 0.5207, 0.3636, 0.7457},
		{0.3878, 0.4673, 0.3119, 0.7002},
		{0.3094, 0.4677, 0.3271, 0.6686},
		{0.3177, 0.4589, 0.3169, 0.6645},
	}
	d := readStudies(t, "bcg_lrr") // in the order of the trials' numbers
	list, err := LeaveOneOut(background, pairs(t, with(DerSimonianLaird, Wald), d.y, d.s), Work{})
	if err != nil {
		t.Fatal(err)
	}
	for i, o := range list {
		printed(t, "τ²", o.Mean.Tau2, want[i][0], 4)
		printed(t, "ratio", math.Exp(o.Mean.Estimate), want[i][1], 4)
		printed(t, "low", math.Exp(o.Mean.Low), want[i][2], 4)
		printed(t, "high", math.Exp(o.Mean.High), want[i][3], 4)
	}
}

func TestNothingLeftWithoutOneStudy(t *testing.T) {
	r := pairs(t, at95, []float64{1}, []float64{0.2})
	if _, err := LeaveOneOut(background, r, Work{}); !errors.Is(err, ErrTooFew) {
		t.Errorf("leave one out: %v", err)
	}
	if _, err := Influences(background, r, Work{}); !errors.Is(err, ErrTooFew) {
		t.Errorf("influence: %v", err)
	}
	tipping, err := TippingSet(background, r, 1, Work{})
	if err != nil || tipping.Found || tipping.Rows != nil {
		t.Errorf("tipping set: %+v, %v", tipping, err)
	}
}

// bruteTipping tries every set of removals by its definition, in no clever order.
func bruteTipping(t *testing.T, m Model, y, s []float64, below float64) (rows []int, ways int, left Mean) {
	t.Helper()
	k := len(y)
	type way struct {
		rows []int
		mean Mean
	}
	var found []way
	fewest := k
	for mask := 0; mask < 1<<k-1; mask++ {
		var removed []int
		var restY, restS []float64
		for i := range k {
			if mask>>i&1 == 1 {
				removed = append(removed, i)
			} else {
				restY, restS = append(restY, y[i]), append(restS, s[i])
			}
		}
		if n := bits.OnesCount(uint(mask)); n <= fewest {
			if mean := mustPool(t, m, restY, restS); mean.Evidence.Steps() < below {
				found, fewest = append(found, way{removed, mean}), n
			}
		}
	}
	found = slices.DeleteFunc(found, func(w way) bool { return len(w.rows) > fewest })
	if len(found) == 0 {
		return nil, 0, Mean{}
	}
	best := slices.MinFunc(found, func(a, b way) int {
		if a.mean.Evidence.Ln() != b.mean.Evidence.Ln() {
			return int(math.Copysign(1, a.mean.Evidence.Ln()-b.mean.Evidence.Ln()))
		}
		return slices.Compare(a.rows, b.rows)
	})
	return best.rows, len(found), best.mean
}

func TestTippingSetAgainstBruteForce(t *testing.T) {
	d := readStudies(t, "bcg_lrr")
	y, s := d.y[:12], d.s[:12]
	for _, m := range []Model{with(DerSimonianLaird, Wald), with(DerSimonianLaird, HartungKnappFloor), {Level: 0.95, Effects: CommonEffect}} {
		sizes := map[int]bool{}
		for _, below := range []float64{5, 3, 2, 1, 0, -0.4, -0.7} {
			rows, ways, left := bruteTipping(t, m, y, s, below)
			got, err := TippingSet(background, pairs(t, m, y, s), below, Work{})
			if err != nil {
				t.Fatal(err)
			}
			if !got.Exact || got.Found != (ways > 0) || got.Ways != ways || !slices.Equal(got.Rows, rows) || (got.Found && got.Mean != left) {
				t.Errorf("%v below %v: %+v, want %v in %d ways", m.Interval, below, got, rows, ways)
			}
			sizes[len(rows)] = true
		}
		if len(sizes) < 3 {
			t.Errorf("%v: sizes %v only: the case tests little", m.Interval, sizes)
		}
	}
}

// TestTippingSetOfEqualStudies: of equal sets the first in the sheet. The rest of
// 12 equal studies with y = s has z² = k − m: under step 1 from k − m = 4 on, as
// (4 − 1 − ln 2)/2/1.317 = 0.876 and (5 − 1 − ln 2)/2/1.317 = 1.255.
func TestTippingSetOfEqualStudies(t *testing.T) {
	y := slices.Repeat([]float64{0.3}, 12)
	got, err := TippingSet(background, pairs(t, Model{Level: 0.95, Effects: CommonEffect}, y, y), 1, Work{})
	if err != nil {
		t.Fatal(err)
	}
	if !slices.Equal(got.Rows, []int{0, 1, 2, 3, 4, 5, 6, 7}) || got.Ways != 495 { // 12 over 8
		t.Errorf("%+v, want the first eight of 495 ways", got)
	}
}

// TestGreedyTippingSet: 40 equal studies as above need 36 removals, however they
// are chosen; no removal brings the evidence under what a single study has.
func TestGreedyTippingSet(t *testing.T) {
	y := slices.Repeat([]float64{0.3}, 40)
	r := pairs(t, Model{Level: 0.95, Effects: CommonEffect}, y, y)
	got, err := TippingSet(background, r, 1, Work{})
	if err != nil {
		t.Fatal(err)
	}
	if !got.Found || got.Exact || len(got.Rows) != 36 || got.Mean.K != 4 || got.Mean.Evidence.Steps() >= 1 {
		t.Errorf("%+v, want 36 rows", got)
	}
	if got, err = TippingSet(background, r, -0.5, Work{}); err != nil || got.Found || len(got.Rows) != 0 || got.Mean.K != 40 {
		t.Errorf("%+v, %v; want none", got, err)
	}
}

// TestTippingSetMayLeaveOneStudy: only the study with z = 0 alone favours no
// effect as much as (0 − 1 − ln 2)/2/1.317 = −0.643 steps.
func TestTippingSetMayLeaveOneStudy(t *testing.T) {
	r := pairs(t, Model{Level: 0.95, Effects: CommonEffect}, []float64{3, 0, 3}, []float64{1, 1, 1})
	got, err := TippingSet(background, r, -0.6, Work{})
	if err != nil || !slices.Equal(got.Rows, []int{0, 2}) || got.Ways != 1 || got.Mean.K != 1 {
		t.Errorf("%+v, %v", got, err)
	}
}

// TestGreedyTippingSetTakesTheHeaviest: of 25 studies one alone carries all the
// evidence.
func TestGreedyTippingSetTakesTheHeaviest(t *testing.T) {
	y, s := make([]float64, 25), slices.Repeat([]float64{1}, 25)
	y[7] = 30
	got, err := TippingSet(background, pairs(t, Model{Level: 0.95, Effects: CommonEffect}, y, s), 0, Work{})
	if err != nil || !got.Found || !slices.Equal(got.Rows, []int{7}) {
		t.Errorf("%+v, %v", got, err)
	}
}

// TestInfluenceOfCommonEffect: closed forms. With leverage h = w/W and residual
// r = y − μ: μ − μᵢ = hr/(1 − h), var μᵢ = 1/(W − w), so that the deleted residual
// is r/√(v(1 − h)), the covariance ratio 1/(1 − h), and so on.
func TestInfluenceOfCommonEffect(t *testing.T) {
	d := readStudies(t, "bcg_lor")
	m := Model{Level: 0.95, Effects: CommonEffect}
	fit := mustFit(t, m, d.y, d.s)
	list, err := Influences(background, pairs(t, m, d.y, d.s), Work{})
	if err != nil {
		t.Fatal(err)
	}
	c := checker{t, closed}
	leverages, shares := 0.0, 0.0
	for i, got := range list {
		v, r := d.s[i]*d.s[i], d.y[i]-fit.Mean.Estimate
		h := fit.Mean.SE * fit.Mean.SE / v
		change := h * r / (1 - h)
		c.near("leverage", got.Detail.Leverage, fit.Weights[i])
		c.near("leverage", got.Detail.Leverage, h)
		c.near("residual", got.Detail.Residual, r/math.Sqrt(v*(1-h)))
		c.near("pull", got.Pull, change/(fit.Mean.SE/math.Sqrt(1-h)))
		c.near("shift", got.Detail.Shift, change/math.Sqrt(h*v))
		c.near("distance", got.Detail.Cook, change*change/(fit.Mean.SE*fit.Mean.SE))
		c.near("covariance ratio", got.Detail.CovarianceRatio, 1/(1-h))
		c.near("contribution to Q", got.Detail.QShare, r*r/v)
		c.near("common shift", got.Detail.CommonShift, got.Pull*got.Pull)
		leverages, shares = leverages+got.Detail.Leverage, shares+got.Detail.QShare
	}
	c.near("sum of leverages", leverages, 1)
	c.near("sum of contributions", shares, fit.Mean.Q)
}

// TestInfluenceByDefinition: each measure from two fits, for random effects.
func TestInfluenceByDefinition(t *testing.T) {
	d := readStudies(t, "bcg_lor")
	for _, m := range []Model{with(RestrictedML, Wald), at95, with(DerSimonianLaird, HartungKnapp), with(DefaultTau, ProfileLikelihood)} {
		variance := func(d studies, tau2 float64) float64 {
			w := 0.0
			for _, s := range d.s {
				w += 1 / (s*s + tau2)
			}
			return 1 / w
		}
		fit := mustFit(t, m, d.y, d.s)
		own := variance(d, fit.Mean.Tau2)
		list, err := Influences(background, pairs(t, m, d.y, d.s), Work{})
		if err != nil {
			t.Fatal(err)
		}
		c := checker{t, closed}
		for i, got := range list {
			rest := without(d, i)
			less := mustFit(t, m, rest.y, rest.s).Mean
			v, other := d.s[i]*d.s[i], variance(rest, less.Tau2)
			h := own / (v + fit.Mean.Tau2)
			change := fit.Mean.Estimate - less.Estimate
			c.near("leverage", got.Detail.Leverage, h)
			c.near("residual", got.Detail.Residual, (d.y[i]-less.Estimate)/math.Sqrt(v+less.Tau2+other))
			c.near("pull", got.Pull, change/less.SE)
			c.near("shift", got.Detail.Shift, change/math.Sqrt(h*(less.Tau2+v)))
			c.near("distance", got.Detail.Cook, change*change/own)
			c.near("covariance ratio", got.Detail.CovarianceRatio, other/own)
			c.near("carried", got.Carried, fit.Mean.Evidence.Steps()-less.Evidence.Steps())
			if got.Mean != less {
				t.Errorf("without %d: %+v, want %+v", i, got.Mean, less)
			}
		}
	}
}
