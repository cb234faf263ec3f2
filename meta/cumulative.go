package meta

import (
	"context"
	"fmt"
)

// Step is one point of a cumulative analysis: the studies that entered, and the
// result for all that have entered by then.
type Step struct {
	Entered    []int // rows that entered here, in the order of the sheet
	K          int   // studies so far
	Mean       Mean
	Prediction *Prediction // nil where there is none
	Added      *float64    // steps of evidence less those of the step before; nil where either is missing
	Alone      bool        // one study so far: the point is that study's own effect, not a mean
	Problem    error       // why there is no Mean; nil otherwise
}

// Cumulative refits after each of the groups of rows has entered, in their order;
// rows within a group enter together. The studies of every refit stand in the
// order of the sheet, so that the last step is the full analysis, bit for bit.
//
// It returns an *OrderError unless each row occurs exactly once, and the cause if
// ctx ends. A step that cannot be pooled carries its own Problem.
func Cumulative(ctx context.Context, r Refit, groups [][]int, work Work) ([]Step, error) {
	entry, err := entries(groups, r.K())
	if err != nil {
		return nil, err
	}
	steps := make([]Step, len(groups))
	err = work.each(ctx, r, len(groups), func(r Refit, i int) {
		step := &steps[i]
		rows := make([]int, 0, len(entry))
		for row, at := range entry {
			if at == i {
				step.Entered = append(step.Entered, row)
			}
			if at <= i {
				rows = append(rows, row)
			}
		}
		step.K, step.Alone = len(rows), len(rows) == 1
		if step.Mean, step.Problem = r.Mean(rows); step.Problem != nil {
			return
		}
		if f, ok := r.(Foreseeing); ok {
			step.Prediction = f.Prediction()
		}
	})
	if err != nil {
		return nil, err
	}
	for i := 1; i < len(steps); i++ {
		before, now := &steps[i-1], &steps[i]
		if before.Problem == nil && now.Problem == nil {
			added := now.Mean.Evidence.Steps() - before.Mean.Evidence.Steps()
			now.Added = &added
		}
	}
	return steps, nil
}

// OrderError reports groups of rows that are not an order of the studies.
type OrderError struct{ Problem string }

func (e *OrderError) Error() string { return "order of accrual: " + e.Problem }

// entries returns, for each row, the number of its group.
func entries(groups [][]int, k int) ([]int, error) {
	entry := make([]int, k)
	for row := range entry {
		entry[row] = -1
	}
	for i, group := range groups {
		if len(group) == 0 {
			return nil, &OrderError{fmt.Sprintf("entry %d holds no study: leave it out", i+1)}
		}
		for _, row := range group {
			if row < 0 || row >= k {
				return nil, &OrderError{fmt.Sprintf("study %d in entry %d is not one of the %d studies", row+1, i+1, k)}
			}
			if entry[row] >= 0 {
				return nil, &OrderError{fmt.Sprintf("study %d enters twice: let it enter once", row+1)}
			}
			entry[row] = i
		}
	}
	for row, at := range entry {
		if at < 0 {
			return nil, &OrderError{fmt.Sprintf("study %d never enters: put it into one of the entries", row+1)}
		}
	}
	return entry, nil
}
