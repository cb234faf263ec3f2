package stream

import (
	"context"
	"errors"
	"io"
	"sync"
)

// task is a block on its way; its room goes round: free, to the reader, to a worker, to
// the deliverer.
type task[T any] struct {
	block  Block
	result T
	ready  chan struct{}
}

// read hands the blocks of a table to the workers and, in order, to the deliverer.
func read[T any](ctx context.Context, r *Reader, free, work, ordered chan *task[T]) error {
	defer close(work)
	defer close(ordered)
	for {
		select {
		case <-ctx.Done():
			return nil
		case t := <-free:
			if err := r.Next(&t.block); err != nil {
				return err
			}
			ordered <- t
			work <- t
		}
	}
}

// Each has workers turn the blocks of a table into results and delivers these in the
// order of the table, whatever the number of workers: deliver is called from one
// goroutine at a time, and block and result are good until it returns. newWorker is
// called once for each worker. Each returns the first error of the table or of
// deliver, and the cause if ctx ends; it does not wait for a read that hangs.
func Each[T any](ctx context.Context, r *Reader, workers int, newWorker func() func(b *Block, into *T), deliver func(b *Block, result *T) error) error {
	ctx, stop := context.WithCancelCause(ctx)
	defer stop(nil)
	tasks := 2*workers + 2
	free, work, ordered := make(chan *task[T], tasks), make(chan *task[T], tasks), make(chan *task[T], tasks)
	for range tasks {
		free <- &task[T]{ready: make(chan struct{}, 1)}
	}
	readEnd := make(chan error, 1)
	go func() { readEnd <- read(ctx, r, free, work, ordered) }()
	var group sync.WaitGroup
	for range workers {
		do := newWorker()
		group.Go(func() {
			for t := range work {
				if ctx.Err() == nil {
					do(&t.block, &t.result)
				}
				t.ready <- struct{}{}
			}
		})
	}
	for {
		select {
		case <-ctx.Done():
			return context.Cause(ctx)
		case t, open := <-ordered:
			if !open {
				group.Wait()
				if err := <-readEnd; err != nil && !errors.Is(err, io.EOF) {
					return err
				}
				return context.Cause(ctx)
			}
			select {
			case <-ctx.Done():
				return context.Cause(ctx)
			case <-t.ready:
			}
			if err := deliver(&t.block, &t.result); err != nil {
				return err
			}
			free <- t
		}
	}
}
