package main

import (
	"bytes"
	"context"
	"fmt"
	"os"
	"time"

	"github.com/urfave/cli/v2"

	"steelyard/ingest"
	"steelyard/ingest/ledger"
)

// How often a watched sheet is looked at, how long it must rest before it is read, and
// how long one that cannot be read may be half saved before that is said.
var (
	watchPause = 250 * time.Millisecond
	watchRest  = 750 * time.Millisecond
	watchGrace = 4 * time.Second
)

func livingWatch(c *cli.Context) error {
	format, path, dir, err := sheetAndLedger(c)
	if err != nil {
		return err
	}
	if _, err := ledger.Open(dir); err != nil {
		return livingError(err)
	}
	if _, err := os.Stat(path); err != nil {
		_, err := ingest.Load(c.Context, path) // its error says what is wrong
		return err
	}
	fmt.Fprintf(c.App.ErrWriter, "steelyard: watching %s; nothing is recorded; end with ctrl-C\n", path)
	w := &watcher{path: path}
	for {
		files, err := w.next(c.Context)
		if err != nil {
			return err
		}
		if err := reportWatched(c, format, dir, path, files); err != nil {
			return err
		}
	}
}

// reportWatched prints what a sheet differs in from the last state. What is wrong with
// the sheet is said, and is no reason to stop.
func reportWatched(c *cli.Context, format answerFormat, dir, path string, files *ingest.Files) error {
	l, err := ledger.Open(dir)
	if err != nil {
		return livingError(err)
	}
	before := l.Last()
	if before == nil {
		return fmt.Errorf("the ledger has no state that can be read; see: steelyard living verify")
	}
	call, messages, err := livingCall(c, before)
	if err != nil {
		return err
	}
	now, err := ledger.Compute(c.Context, files, path, call)
	if c.Context.Err() != nil {
		return c.Context.Err()
	}
	if err != nil {
		complain(c, []string{err.Error()})
		return nil
	}
	at := clock().UTC().Format(time.RFC3339)
	report := &changeReport{before: before, single: true, messages: append(ledgerMessages(l), messages...)}
	report.now = &ledger.State{Number: before.Number + 1, Record: ledger.Record{At: at, Program: version, Input: ledger.Input{
		Sheet: ledger.Stored{File: now.Extraction.Source.File, SHA256: now.Extraction.Source.SHA256}, Call: call,
	}}}
	updates, err := updatesTo(l, before)
	if err != nil {
		return err
	}
	if err := report.compute(c, l, now, updates); err != nil {
		return err
	}
	err = report.deliver(c, format)
	if _, partial := err.(*rowsLeftOut); partial { // the report has said so
		return nil
	}
	return err
}

// watcher waits for changes of a file.
type watcher struct {
	path string
	last *ingest.Files // as handed on; nil at first
}

// next returns the files when their content is another than before and has rested for a
// while, so that a sheet is not read while it is being saved. A file that is gone, as
// programs remove one to write it anew, is waited for. The error is the cause if ctx
// ends.
func (w *watcher) next(ctx context.Context) (*ingest.Files, error) {
	var seen *ingest.Files
	var rested, missing time.Duration
	told := false
	for {
		files, err := ingest.Load(ctx, w.path)
		switch {
		case ctx.Err() != nil:
			return nil, ctx.Err()
		case err != nil:
			seen, rested = nil, 0
			if missing += watchPause; missing > watchGrace && !told {
				told = true
				fmt.Fprintf(os.Stderr, "steelyard: %v; still waiting for it\n", err)
			}
		case sameFiles(files, w.last):
			seen, rested, missing = nil, 0, 0
		case !sameFiles(files, seen) || len(files.Sheet.Data) == 0:
			seen, rested = files, 0
		default:
			if rested += watchPause; rested >= watchRest {
				w.last = files
				return files, nil
			}
		}
		select {
		case <-ctx.Done():
			return nil, ctx.Err()
		case <-time.After(watchPause):
		}
	}
}

// sameFiles reports whether two readings of the files have the same content.
func sameFiles(a, b *ingest.Files) bool {
	if a == nil || b == nil {
		return a == b
	}
	return bytes.Equal(a.Sheet.Data, b.Sheet.Data) && sameContent(a.Plan, b.Plan) && sameContent(a.Judgement, b.Judgement)
}

func sameContent(a, b *ingest.File) bool {
	if a == nil || b == nil {
		return a == b
	}
	return bytes.Equal(a.Data, b.Data)
}
