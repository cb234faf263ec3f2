package meta

import (
	"context"
	"math/big"
	"sync"
)

// exactTipping is the largest number of studies for which the tipping set is
// found by trying every set.
const exactTipping = 20

// Tipping is the tipping set: the fewest studies whose removal brings the
// evidence for an effect under a number of steps.
type Tipping struct {
	Below float64 // in steps of ln ER for an effect over none, signed
	Found bool    // false if no removal that leaves a study does it
	Rows  []int   // to be removed, ascending; empty if the evidence is under it already
	Mean  Mean    // of the studies that stay; of all studies if not Found
	Ways  int     // how many sets of that size do it; 0 if not Found or not Exact
	Exact bool    // every smaller set was tried; else found by removing greedily
}

// TippingSet returns the fewest studies whose removal brings the evidence under
// below, at least one study staying. below counts steps of the evidence for an
// effect, so that 0 asks when the data would favour no effect. Of several sets of
// the fewest studies it is the one that leaves the least evidence, and of equal
// ones the first in the order of the sheet.
//
// Up to 20 studies every set is tried, by size, stopping at the first size that
// does it: evidence can rise when a study goes, so that no set may be passed over.
// With more, studies are removed one by one, each time the one without which the
// least evidence is left: that set may not be the smallest.
//
// Sets that leave what cannot be pooled do not count; progress starts anew with
// each size. It returns the error of
// pooling all studies, and the cause if ctx ends.
func TippingSet(ctx context.Context, r Refit, below float64, work Work) (*Tipping, error) {
	k := r.K()
	all, err := r.Mean(allRows(k))
	if err != nil {
		return nil, err
	}
	t := &Tipping{Below: below, Mean: all, Exact: k <= exactTipping}
	switch {
	case all.Evidence.Steps() < below:
		t.Found, t.Ways = true, 1
		return t, nil
	case t.Exact:
		return t, t.searchAll(ctx, r, work)
	}
	return t, t.removeGreedily(ctx, r, work)
}

// removal is a set of studies to remove, as bits, and what is left without it.
type removal struct {
	mask uint32
	mean Mean
	ways int
}

// better reports whether a leaves less evidence than b, or comes first.
func (a removal) better(b removal) bool {
	if b.ways == 0 {
		return true
	}
	left, other := a.mean.Evidence.Ln(), b.mean.Evidence.Ln()
	if left != other {
		return left < other
	}
	for a.mask&1 == b.mask&1 { // the first study that only one of them removes
		a.mask, b.mask = a.mask>>1, b.mask>>1
	}
	return a.mask&1 == 1
}

// tippingPiece is how many sets one worker tries at a time.
const tippingPiece = 256

// searchAll tries every set of one study, then of two, and so on.
func (t *Tipping) searchAll(ctx context.Context, r Refit, work Work) error {
	k := r.K()
	for size := 1; size < k; size++ {
		best, err := t.searchSize(ctx, r, size, work)
		if err != nil {
			return err
		}
		if best.ways > 0 {
			t.Found, t.Ways, t.Mean = true, best.ways, best.mean
			t.Rows = rowsOf(nil, best.mask)
			return nil
		}
	}
	return nil
}

// searchSize tries every set of one size.
func (t *Tipping) searchSize(ctx context.Context, r Refit, size int, work Work) (removal, error) {
	k := r.K()
	count := int(new(big.Int).Binomial(int64(k), int64(size)).Int64())
	pieces := (count + tippingPiece - 1) / tippingPiece
	starts := make([]uint32, 0, pieces)
	for i, mask := 0, uint32(1)<<size-1; i < count; i, mask = i+1, nextOfSize(mask) {
		if i%tippingPiece == 0 {
			starts = append(starts, mask)
		}
	}
	var best removal
	var mutex sync.Mutex
	err := work.each(ctx, r, pieces, func(r Refit, piece int) {
		own := t.tryPiece(ctx, r, starts[piece], min(tippingPiece, count-piece*tippingPiece))
		mutex.Lock()
		defer mutex.Unlock()
		if own.ways > 0 {
			ways := best.ways + own.ways
			if own.better(best) {
				best = own
			}
			best.ways = ways
		}
	})
	return best, err
}

// tryPiece tries n sets of one size from mask on.
func (t *Tipping) tryPiece(ctx context.Context, r Refit, mask uint32, n int) removal {
	k := r.K()
	everything := uint32(1)<<k - 1
	var best removal
	rows := make([]int, 0, k)
	for ; n > 0 && ctx.Err() == nil; n, mask = n-1, nextOfSize(mask) {
		rows = rowsOf(rows[:0], everything&^mask)
		mean, err := r.Mean(rows)
		if err != nil || !(mean.Evidence.Steps() < t.Below) {
			continue
		}
		ways := best.ways + 1
		if found := (removal{mask: mask, mean: mean}); found.better(best) {
			best = found
		}
		best.ways = ways
	}
	return best
}

// nextOfSize returns the next larger number with as many bits set.
//
// Source: Beeler, Gosper & Schroeppel (1972), HAKMEM, MIT AI Memo 239, item 175.
func nextOfSize(mask uint32) uint32 {
	low := mask & -mask
	high := mask + low
	if low == 0 || high == 0 {
		return 0
	}
	return high | (mask^high)/low>>2
}

// removeGreedily removes the study without which the least evidence is left,
// until it is under the bound or one study is left.
func (t *Tipping) removeGreedily(ctx context.Context, r Refit, work Work) error {
	left := allRows(r.K())
	removed := make([]bool, r.K())
	for len(left) > 1 {
		means := make([]Mean, len(left))
		usable := make([]bool, len(left))
		err := work.each(ctx, r, len(left), func(r Refit, i int) {
			rows := make([]int, 0, len(left))
			rows = append(append(rows, left[:i]...), left[i+1:]...)
			var err error
			means[i], err = r.Mean(rows)
			usable[i] = err == nil
		})
		if err != nil {
			return err
		}
		best := -1
		for i, ok := range usable {
			if ok && (best < 0 || means[i].Evidence.Ln() < means[best].Evidence.Ln()) {
				best = i
			}
		}
		if best < 0 {
			return nil
		}
		removed[left[best]] = true
		left = append(left[:best], left[best+1:]...)
		if means[best].Evidence.Steps() < t.Below {
			t.Found, t.Mean = true, means[best]
			for row, gone := range removed {
				if gone {
					t.Rows = append(t.Rows, row)
				}
			}
			return nil
		}
	}
	return nil
}
