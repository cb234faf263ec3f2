package main

import (
	"fmt"
	"os"
	"time"

	"github.com/schollz/progressbar/v3"
	"github.com/urfave/cli/v2"
	"golang.org/x/term"

	"steelyard/meta"
)

// Names of the flags of long work.
const (
	flagWorkers = "workers"
	flagQuiet   = "quiet"
)

// patience is how long work may take before its progress is shown.
const patience = time.Second

// workFlags are the flags of commands that may take a while.
func workFlags() []cli.Flag {
	return []cli.Flag{
		&cli.IntFlag{Name: flagWorkers, Usage: "processors to use; the result is the same for any number (default: all)"},
		&cli.BoolFlag{Name: flagQuiet, Usage: "no progress on the terminal"},
	}
}

// work reads --workers and --quiet. Progress goes to the error stream if that is
// a terminal, once the work has taken a second.
func work(c *cli.Context) (meta.Work, error) {
	w := meta.Work{Workers: c.Int(flagWorkers)}
	if w.Workers < 0 || (c.IsSet(flagWorkers) && w.Workers == 0) {
		return w, &callError{fmt.Sprintf("--workers %d: give 1 or more", c.Int(flagWorkers))}
	}
	screen, isFile := c.App.ErrWriter.(*os.File)
	if c.Bool(flagQuiet) || !isFile || !term.IsTerminal(int(screen.Fd())) {
		return w, nil
	}
	start := time.Now()
	var bar *progressbar.ProgressBar
	w.Progress = func(done, total int) {
		if bar == nil && time.Since(start) < patience {
			return
		}
		if bar == nil {
			bar = progressbar.NewOptions(total, progressbar.OptionSetWriter(screen), progressbar.OptionClearOnFinish(),
				progressbar.OptionThrottle(65*time.Millisecond), progressbar.OptionSetWidth(30))
		}
		bar.ChangeMax(total)
		_ = bar.Set(done) // a bar that cannot be drawn costs nothing but the bar
	}
	return w, nil
}
