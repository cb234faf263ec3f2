// Steelyard pools published studies: it checks the sheet of extracted results,
// fits common- and random-effects models, states how strongly the data favour an
// effect over none, and draws it.
//
// Exit codes: 0 done; 1 the data or the plan is wrong, or rows with an error were
// left out; 2 the call is wrong; 3 a file could not be read or written; 4 a trigger was
// met and --fail-on-trigger given; 130 interrupted.
package main

import (
	"context"
	"os"
	"os/signal"
	"runtime/debug"

	"steelyard/ingest"
)

func main() {
	if os.Getenv("GOMEMLIMIT") == "" { // else the runtime has taken that
		debug.SetMemoryLimit(ingest.MemoryLimit)
	}
	easeCollector(os.Args[1:])
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt)
	code := run(ctx, os.Args, streams{in: os.Stdin, out: os.Stdout, err: os.Stderr})
	stop()
	os.Exit(code)
}
