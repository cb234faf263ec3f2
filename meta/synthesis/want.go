package synthesis

import (
	"context"

	"steelyard/meta"
	"steelyard/meta/review"
)

// The interfaces below are what the structures that ask for large parts do. Through them a
// program that never asks for a part, such as the engine of the report page, holds none of
// it.

// Looking is what LooksWanted does.
type Looking interface {
	look(ctx context.Context, o *Outcome, order *order, work meta.Work) (*Looks, error)
}

// Subsetting is what SubsetsWanted does.
type Subsetting interface {
	subsets(ctx context.Context, o *Outcome, refit meta.Refit, work meta.Work) (*Subsets, error)
}

// Foreseeing is what NextWanted does.
type Foreseeing interface {
	next(ctx context.Context, o *Outcome, plan *review.Plan) (*Next, error)
}

// Explaining is what ExplainWanted does.
type Explaining interface {
	explain(ctx context.Context, o *Outcome, columns []review.Column, work meta.Work) error
}
