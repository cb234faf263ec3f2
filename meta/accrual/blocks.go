package accrual

import (
	"context"
	"encoding/binary"
	"math/rand/v2"
	"runtime"
	"sync"
	"sync/atomic"

	"steelyard/meta"
)

// blockSize is how many draws share one stream of random numbers: the unit of
// work, and of progress.
const blockSize = 128

// Draws says how much is simulated, from which seed, and by whom.
type Draws struct {
	N    int
	Seed uint64
	Work meta.Work // Progress counts draws
}

// check returns an *InputError unless 100 ≤ N ≤ 1e7.
func (d Draws) check() error {
	if d.N < 100 || d.N > 1e7 {
		return &InputError{"the number of draws must be from 100 to 10,000,000: take 10,000 for a first look, 100,000 for a report"}
	}
	return nil
}

// stream is a source of random numbers for one worker.
type stream struct {
	source rand.ChaCha8
	random *rand.Rand
}

func newStream() *stream {
	s := &stream{}
	s.random = rand.New(&s.source)
	return s
}

// start moves the stream to the beginning of a block of one question.
func (s *stream) start(seed, question uint64, block int) {
	var key [32]byte
	binary.LittleEndian.PutUint64(key[0:], seed)
	binary.LittleEndian.PutUint64(key[8:], question)
	binary.LittleEndian.PutUint64(key[16:], uint64(block))
	s.source.Seed(key)
}

// worker does draws one after another; ctx tells it to stop within a draw.
type worker interface {
	draw(ctx context.Context, i int, random *rand.Rand) error
}

// run has workers do all draws, block by block. The random numbers of a block
// depend on nothing but seed, question and block. It returns the first error of a
// worker, or the cause if ctx ends.
func (d Draws) run(ctx context.Context, question uint64, newWorker func() worker) error {
	ctx, stop := context.WithCancelCause(ctx)
	defer stop(nil)
	blocks := (d.N + blockSize - 1) / blockSize
	workers := d.Work.Workers
	if workers <= 0 {
		workers = runtime.GOMAXPROCS(0)
	}
	var next atomic.Int64
	var group sync.WaitGroup
	report := d.reporter()
	for range min(workers, blocks) {
		own, numbers := newWorker(), newStream()
		group.Go(func() {
			for ctx.Err() == nil {
				block := int(next.Add(1)) - 1
				if block >= blocks {
					return
				}
				numbers.start(d.Seed, question, block)
				from, to := block*blockSize, min(d.N, (block+1)*blockSize)
				for i := from; i < to && ctx.Err() == nil; i++ {
					if err := own.draw(ctx, i, numbers.random); err != nil {
						stop(err)
						return
					}
				}
				if ctx.Err() == nil {
					report(to - from)
				}
			}
		})
	}
	group.Wait()
	return context.Cause(ctx)
}

// reporter returns what counts finished draws and tells Progress of them.
func (d Draws) reporter() func(more int) {
	if d.Work.Progress == nil {
		return func(int) {}
	}
	var mutex sync.Mutex
	done := 0
	return func(more int) {
		mutex.Lock()
		defer mutex.Unlock()
		done += more
		d.Work.Progress(done, d.N)
	}
}
