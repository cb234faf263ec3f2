package meta

import (
	"context"
	"runtime"
	"sync"
	"sync/atomic"
)

// Refit pools any part of one set of studies by one method: what accumulates,
// omits or recombines studies asks nothing else of a method.
type Refit interface {
	// K returns the number of studies in the whole set.
	K() int
	// Mean pools the studies of the given rows, which count from 0 in the order of
	// the sheet and must ascend: the same rows then give the same bits. The slice
	// is neither modified nor kept.
	Mean(rows []int) (Mean, error)
	// Clone returns a Refit of the same studies for another goroutine; one Refit
	// must not be used by two at once.
	Clone() Refit
}

// Foreseeing is a Refit that also gives the interval for a new setting.
type Foreseeing interface {
	Refit
	// Prediction returns the prediction interval beside the latest Mean, or nil
	// where there is none.
	Prediction() *Prediction
}

// Sparing is a Refit that can leave out what only the interval needs.
type Sparing interface {
	Refit
	// Point is Mean for what asks for the estimate and its evidence alone: these are
	// the same, bit for bit, while the limits may be rougher.
	Point(rows []int) (Mean, error)
}

// Reweighing is a Refit that changes nothing of another's means but the evidence
// that they carry.
type Reweighing interface {
	Refit
	// Pooling returns the Refit that pools.
	Pooling() Refit
}

// pairsOf returns the pairs that r pools, if it pools pairs.
func pairsOf(r Refit) (*Pairs, bool) {
	if other, ok := r.(Reweighing); ok {
		r = other.Pooling()
	}
	p, ok := r.(*Pairs)
	return p, ok
}

// point pools rows as sparingly as the method can.
func point(r Refit, rows []int) (Mean, error) {
	if s, ok := r.(Sparing); ok {
		return s.Point(rows)
	}
	return r.Mean(rows)
}

// Pairs is the Refit of estimates with standard errors under a model. It fits in
// scratch space of its own: once it has seen its largest set, Mean allocates
// nothing.
type Pairs struct {
	model Model
	y, s  []float64 // all studies, on the analysis scale; shared by clones
	pool  Pooler
	partY []float64
	partS []float64
}

// NewPairs returns the Refit of the estimates y with standard errors s under a
// model; the slices are kept and must not change. It returns the errors of
// Pooler.Pool for the whole set.
func NewPairs(m Model, y, s []float64) (*Pairs, error) {
	p := &Pairs{model: m, y: y, s: s}
	_, err := p.pool.Pool(m, y, s)
	return p, err
}

// K returns the number of studies.
func (p *Pairs) K() int { return len(p.y) }

// Clone returns a Refit of the same studies for another goroutine.
func (p *Pairs) Clone() Refit { return &Pairs{model: p.model, y: p.y, s: p.s} }

// Mean pools the studies of the given rows; see Refit. Errors are those of
// Pooler.Pool.
func (p *Pairs) Mean(rows []int) (Mean, error) {
	p.partY, p.partS = p.partY[:0], p.partS[:0]
	for _, row := range rows {
		p.partY, p.partS = append(p.partY, p.y[row]), append(p.partS, p.s[row])
	}
	return p.pool.Pool(p.model, p.partY, p.partS)
}

// Prediction returns the prediction interval beside the latest Mean, or nil where
// there is none.
func (p *Pairs) Prediction() *Prediction { return p.pool.prediction() }

// Work says how long work is done. The zero value uses every processor and
// reports nothing; results are the same for any number of workers.
type Work struct {
	Workers  int                   // 0 or less: one per processor
	Progress func(done, total int) // called from one goroutine at a time; nil for none
}

// each runs do for 0 … n−1, every worker with its own Refit, and returns
// context.Cause once ctx has ended. What do writes must belong to its index.
func (w Work) each(ctx context.Context, r Refit, n int, do func(r Refit, i int)) error {
	workers := w.Workers
	if workers <= 0 {
		workers = runtime.GOMAXPROCS(0)
	}
	workers = max(1, min(workers, n))
	var next atomic.Int64
	var group sync.WaitGroup
	report := w.reporter(n)
	for worker := range workers {
		own := r
		if worker > 0 {
			own = r.Clone()
		}
		group.Go(func() {
			for ctx.Err() == nil {
				i := int(next.Add(1)) - 1
				if i >= n {
					return
				}
				do(own, i)
				report(1)
			}
		})
	}
	group.Wait()
	return context.Cause(ctx)
}

// reporter returns what counts finished pieces and tells Progress of them.
func (w Work) reporter(total int) func(more int) {
	if w.Progress == nil {
		return func(int) {}
	}
	var mutex sync.Mutex
	done := 0
	return func(more int) {
		mutex.Lock()
		defer mutex.Unlock()
		done += more
		w.Progress(done, total)
	}
}

// allRows returns 0 … k−1.
func allRows(k int) []int {
	rows := make([]int, k)
	for i := range rows {
		rows[i] = i
	}
	return rows
}

// otherRows writes 0 … k−1 without one row into room.
func otherRows(room []int, k, without int) []int {
	room = room[:0]
	for row := range k {
		if row != without {
			room = append(room, row)
		}
	}
	return room
}
