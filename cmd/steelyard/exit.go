package main

import (
	"context"
	"errors"
	"io/fs"

	"github.com/urfave/cli/v2"

	"steelyard/forest"
	"steelyard/ingest/grid"
)

// The exit codes.
const (
	codeDone        = 0
	codeData        = 1
	codeCall        = 2
	codeFile        = 3
	codeTrigger     = 4
	codeInterrupted = 130
)

// callError says that the call is wrong.
type callError struct{ text string }

func (e *callError) Error() string { return e.text }

// fileError says that a file could not be read or written.
type fileError struct{ err error }

func (e *fileError) Error() string { return e.err.Error() }
func (e *fileError) Unwrap() error { return e.err }

// rowsLeftOut says that results were printed but are not the whole sheet's; the
// output itself has said what is missing.
type rowsLeftOut struct{}

func (*rowsLeftOut) Error() string { return "rows were left out" }

// partWritten says of an interrupted call that part of its output stands.
type partWritten struct {
	text string
	err  error
}

func (e *partWritten) Error() string { return e.err.Error() }
func (e *partWritten) Unwrap() error { return e.err }

// exitCode maps an error to the program's exit code.
func exitCode(err error) int {
	var call *callError
	var file *fileError
	var path *fs.PathError
	var unreadable *grid.FileError
	var trigger *triggered
	var large *forest.TooLargeError
	var exit cli.ExitCoder
	switch {
	case err == nil:
		return codeDone
	case errors.Is(err, context.Canceled):
		return codeInterrupted
	case errors.As(err, &trigger):
		return codeTrigger
	case errors.As(err, &call), errors.As(err, &large):
		return codeCall
	case errors.As(err, &file), errors.As(err, &path), errors.As(err, &unreadable):
		return codeFile
	case errors.As(err, &exit):
		return codeCall
	}
	return codeData
}
