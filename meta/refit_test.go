package meta

import (
	"context"
	"errors"
	"fmt"
	"reflect"
	"testing"
)

var background = context.Background()

func pairs(t testing.TB, m Model, y, s []float64) *Pairs {
	t.Helper()
	p, err := NewPairs(m, y, s)
	if err != nil {
		t.Fatalf("%+v: %v", m, err)
	}
	return p
}

// oneByOne is the order in which each study enters alone, as the sheet has it.
func oneByOne(k int) [][]int {
	var groups [][]int
	for row := range k {
		groups = append(groups, []int{row})
	}
	return groups
}

func TestRefitDoesNotAllocate(t *testing.T) {
	y, s := drawn(13)
	rows := []int{0, 3, 4, 7, 9, 12}
	for name, m := range everyModel() {
		r := pairs(t, m, y, s)
		if got := testing.AllocsPerRun(20, func() {
			if _, err := r.Mean(rows); err != nil {
				t.Fatal(err)
			}
		}); got != 0 {
			t.Errorf("%s: %v allocations per refit", name, got)
		}
	}
}

func TestRefitErrors(t *testing.T) {
	if _, err := NewPairs(at95, []float64{1, 2}, []float64{1, 0}); err == nil {
		t.Error("a standard error of 0 was taken")
	}
	r := pairs(t, at95, []float64{1, 2}, []float64{1, 1})
	if _, err := r.Mean(nil); !errors.Is(err, ErrNoStudies) {
		t.Errorf("no rows: %v", err)
	}
}

// accruals runs every analysis over one set of studies.
func accruals(r Refit, work Work) (all []any, err error) {
	cumulative, err1 := Cumulative(background, r, oneByOne(r.K()), work)
	without, err2 := LeaveOneOut(background, r, work)
	influence, err3 := Influences(background, r, work)
	tipping, err4 := TippingSet(background, r, 0.5, work)
	chosen := 1
	subsets, err5 := AllSubsets(background, r, SubsetOptions{Important: &Limits{-0.2, 0.2}, Chosen: &chosen, Sample: 3000, Work: work})
	return []any{cumulative, without, influence, tipping, subsets}, errors.Join(err1, err2, err3, err4, err5)
}

func TestWorkersDoNotMatter(t *testing.T) {
	for _, k := range []int{8, 17, 30} {
		m := with(DerSimonianLaird, HartungKnappFloor)
		y, s := drawn(k)
		one, err := accruals(pairs(t, m, y, s), Work{Workers: 1})
		if err != nil {
			t.Fatal(err)
		}
		four, err := accruals(pairs(t, m, y, s), Work{Workers: 4})
		if err != nil {
			t.Fatal(err)
		}
		for i := range one {
			if !reflect.DeepEqual(one[i], four[i]) {
				t.Errorf("k = %d, %T: four workers differ from one", k, one[i])
			}
		}
	}
}

func TestWorkEnds(t *testing.T) {
	y, s := drawn(21)
	reason := errors.New("enough")
	for i := range 5 {
		ctx, stop := context.WithCancelCause(background)
		calls := 0
		work := Work{Workers: 1, Progress: func(done, total int) {
			if calls++; done == 2 || total < 3 {
				stop(reason)
			}
		}}
		r := pairs(t, at95, y, s)
		var err error
		switch i {
		case 0:
			_, err = Cumulative(ctx, r, oneByOne(21), work)
		case 1:
			_, err = LeaveOneOut(ctx, r, work)
		case 2:
			_, err = Influences(ctx, r, work)
		case 3:
			_, err = TippingSet(ctx, r, -9, work)
		case 4:
			stop(reason)
			_, err = AllSubsets(ctx, r, SubsetOptions{Work: work})
		}
		if !errors.Is(err, reason) || calls > 2 {
			t.Errorf("analysis %d: %v after %d calls", i, err, calls)
		}
	}
}

func TestProgressReachesTheEnd(t *testing.T) {
	y, s := drawn(17)
	r := pairs(t, with(DerSimonianLaird, Wald), y, s)
	last, total := 0, 0
	work := Work{Workers: 3, Progress: func(done, all int) {
		if done < last {
			t.Errorf("%d after %d", done, last)
		}
		last, total = done, all
	}}
	if _, err := AllSubsets(background, r, SubsetOptions{Work: work}); err != nil {
		t.Fatal(err)
	}
	if last != 1<<17-1 || total != last {
		t.Errorf("ended at %d of %d, want %d", last, total, 1<<17-1)
	}
}

// FuzzAccruals: no panic and no NaN for any studies that can be pooled.
func FuzzAccruals(f *testing.F) {
	f.Add([]byte{1, 2, 0, 3, 4, 0, 5, 6, 0, 7, 8, 0}, uint32(0))
	f.Add([]byte{0, 0, 0, 0, 9, 20, 0, 0, 0, 0, 9, 3, 1, 0, 0, 1, 0, 0}, uint32(3))
	f.Add([]byte{255, 255, 17, 1, 1, 129, 0, 1, 0, 1, 1, 0}, uint32(0x24))
	f.Fuzz(func(t *testing.T, data []byte, settings uint32) {
		if len(data) > 6*6 {
			return
		}
		y, s := studiesFrom(data)
		m := modelFrom(settings)
		m.Level = 0.95
		r, err := NewPairs(m, y, s)
		if err != nil || len(y) < 2 {
			return
		}
		if steps, err := Cumulative(background, r, oneByOne(len(y)), Work{Workers: 1}); err != nil {
			t.Error(err)
		} else if last := steps[len(steps)-1]; last.Problem != nil || !last.Mean.finite() {
			t.Errorf("last step: %+v", last)
		}
		list, err := Influences(background, r, Work{Workers: 1})
		if err != nil {
			t.Error(err)
		}
		for _, i := range list {
			if i.Problem == nil && !allFinite(i.Carried, i.Pull, i.Detail.Leverage, i.Detail.Residual) {
				t.Errorf("%+v %+v", i, i.Detail)
			}
		}
		if _, err := TippingSet(background, r, 1, Work{Workers: 1}); err != nil {
			t.Error(err)
		}
		subsets, err := AllSubsets(background, r, SubsetOptions{Work: Work{Workers: 1}})
		if err != nil {
			t.Fatal(err)
		}
		for _, q := range append(subsets.Estimate.Quantiles, subsets.Steps.Quantiles...) {
			if !allFinite(q.Value) {
				t.Errorf("%+v", q)
			}
		}
	})
}

func BenchmarkAccrual(b *testing.B) {
	for name, run := range map[string]func(r Refit) error{
		"leave-one-out": func(r Refit) error { _, err := LeaveOneOut(background, r, Work{}); return err },
		"cumulative":    func(r Refit) error { _, err := Cumulative(background, r, oneByOne(r.K()), Work{}); return err },
		"influence":     func(r Refit) error { _, err := Influences(background, r, Work{}); return err },
	} {
		for _, k := range []int{20, 2000} {
			b.Run(fmt.Sprintf("analysis=%s/tau=restricted-ml/k=%d", name, k), func(b *testing.B) {
				y, s := drawn(k)
				r := pairs(b, at95, y, s)
				for b.Loop() {
					if err := run(r); err != nil {
						b.Fatal(err)
					}
				}
			})
		}
	}
}
