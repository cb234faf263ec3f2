package accrual

import (
	"context"
	"fmt"
	"math"
)

// Sizing turns a total number of people into the standard error of a study.
type Sizing func(total float64) (se float64, err error)

// SizePoint is an Outlook at one size of the next study.
type SizePoint struct {
	Size    float64
	Outlook *Outlook
}

// Curve returns the outlook at each of several total sizes, in their order. Errors
// are those of Foresee and of the sizing.
func (q Trial) Curve(ctx context.Context, sizing Sizing, sizes []float64) ([]SizePoint, error) {
	f, err := q.foresee()
	if err != nil {
		return nil, err
	}
	points := make([]SizePoint, len(sizes))
	for i, size := range sizes {
		if points[i], err = f.at(ctx, sizing, size); err != nil {
			return nil, err
		}
	}
	return points, nil
}

// at returns the outlook at one size.
func (f *foreseen) at(ctx context.Context, sizing Sizing, size float64) (SizePoint, error) {
	se, err := sizing(size)
	if err == nil {
		err = checkSE(se)
	}
	if err != nil {
		return SizePoint{}, err
	}
	outlook, err := f.foresee(ctx, se)
	return SizePoint{Size: size, Outlook: outlook}, err
}

// Goal picks the chance in an outlook that is to be reached, such as that of
// passing a step.
type Goal func(o *Outlook) float64

// smallestTrial and largestTrial bound the sizes that are searched, in people.
const (
	smallestTrial = 10
	largestTrial  = 1e7
)

// Smallest is the answer to how large a next study must be.
type Smallest struct {
	Found bool
	Size  float64   // people in all, a whole number; 0 where none suffices
	At    SizePoint // the outlook there; where none suffices, that of the best size
}

// SmallestSize returns the smallest next study, of 10 to ten million people, for
// which a goal has at least a chance, strictly between 0 and 1. Sizes are searched
// upwards in steps of √2 and then halved between the last that fails and the first
// that suffices. None may suffice: variance between studies and the uncertainty of
// the mean remain however large the study is.
//
// It returns the errors of Curve, and an *InputError for a chance out of range.
func (q Trial) SmallestSize(ctx context.Context, sizing Sizing, goal Goal, chance float64) (*Smallest, error) {
	if !(chance > 0 && chance < 1) {
		return nil, &InputError{fmt.Sprintf("a chance of %v to be reached: give one strictly between 0 and 1, such as 0.8", chance)}
	}
	f, err := q.foresee()
	if err != nil {
		return nil, err
	}
	var best SizePoint
	fails, size := 0.0, float64(smallestTrial)
	for {
		point, err := f.at(ctx, sizing, size)
		if err != nil {
			return nil, err
		}
		if best.Outlook == nil || goal(point.Outlook) > goal(best.Outlook) {
			best = point
		}
		if goal(point.Outlook) >= chance {
			break
		}
		if size == largestTrial {
			return &Smallest{At: best}, nil
		}
		fails, size = size, min(largestTrial, math.Ceil(size*math.Sqrt2))
	}
	if fails == 0 {
		return &Smallest{Found: true, Size: size, At: best}, nil
	}
	for size-fails > 1 {
		middle := math.Floor(0.5 * (fails + size))
		point, err := f.at(ctx, sizing, middle)
		if err != nil {
			return nil, err
		}
		if goal(point.Outlook) >= chance {
			size, best = middle, point
		} else {
			fails = middle
		}
	}
	return &Smallest{Found: true, Size: size, At: best}, nil
}
