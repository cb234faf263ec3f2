package meta

import (
	"context"
	"errors"
)

// Omission is the result without one study.
type Omission struct {
	Row     int // the study left out
	Mean    Mean
	Carried float64 // steps of evidence of all studies less those without this one
	Problem error   // why there is no Mean; nil otherwise
}

// ErrTooFew reports that nothing would be left without a study.
var ErrTooFew = errors.New("one study: without it nothing is left to pool; give at least two")

// LeaveOneOut refits without each study in turn: the same bits as pooling the
// others alone. It returns ErrTooFew for a single study, the error of pooling all
// studies, and the cause if ctx ends; an omission that leaves what cannot be
// pooled carries its own Problem.
func LeaveOneOut(ctx context.Context, r Refit, work Work) ([]Omission, error) {
	k := r.K()
	if k < 2 {
		return nil, ErrTooFew
	}
	all, err := r.Mean(allRows(k))
	if err != nil {
		return nil, err
	}
	list := make([]Omission, k)
	err = work.each(ctx, r, k, func(r Refit, i int) {
		o := &list[i]
		o.Row = i
		if o.Mean, o.Problem = r.Mean(otherRows(make([]int, 0, k), k, i)); o.Problem == nil {
			o.Carried = all.Evidence.Steps() - o.Mean.Evidence.Steps()
		}
	})
	if err != nil {
		return nil, err
	}
	return list, nil
}
