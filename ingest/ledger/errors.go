package ledger

import (
	"errors"
	"fmt"
	"io/fs"
	"os"
	"syscall"
)

// NoLedgerError reports a folder without a ledger.
type NoLedgerError struct {
	Dir string // as given; blank for the working folder and those above
}

// Error says how to begin one.
func (e *NoLedgerError) Error() string {
	if e.Dir == "" {
		return "neither this folder nor one above holds a ledger; name the folder with --in DIR, or begin one: steelyard living start FILE --in DIR"
	}
	return fmt.Sprintf("%s: the folder holds no ledger (%s); is it another folder? To begin one: steelyard living start FILE --in %s", e.Dir, fileName, e.Dir)
}

// ExistsError reports a folder in which a ledger was begun before.
type ExistsError struct{ Dir string }

// Error says how to go on with it.
func (e *ExistsError) Error() string {
	return fmt.Sprintf("%s: the folder holds a ledger already; add to it: steelyard living update FILE --in %s", e.Dir, e.Dir)
}

// NewerError reports a ledger in a format that this program does not know.
type NewerError struct{ Version int }

// Error names both versions.
func (e *NewerError) Error() string {
	return fmt.Sprintf("the ledger is of format %d, newer than the format %d that this program knows; use the newer program. Nothing was changed", e.Version, Version)
}

// DamageError reports a line that is not as it was written.
type DamageError struct {
	Line int // 1-based
	Text string
}

// Error names the line.
func (e *DamageError) Error() string {
	return fmt.Sprintf("%s line %d: %s", fileName, e.Line, e.Text)
}

// BusyError reports that another process writes to the ledger.
type BusyError struct{ Who string } // as it named itself; blank if unknown

// Error names the other.
func (e *BusyError) Error() string {
	who := e.Who
	if who == "" {
		who = "a process that has not named itself"
	}
	return fmt.Sprintf("the ledger is being written by %s; run this again when that has finished. Nothing was recorded", who)
}

// UnknownStateError reports a state that the ledger does not have.
type UnknownStateError struct {
	Name string
	Last int // number of the last state
	Many []int
}

// Error says how states are called.
func (e *UnknownStateError) Error() string {
	if len(e.Many) > 0 {
		return fmt.Sprintf("%q begins the checksum of more than one state: %v; give more of its digits, or the number", e.Name, e.Many)
	}
	return fmt.Sprintf("there is no state %q; states are called by their number, 1 to %d, or the first digits of their checksum; see: steelyard living history", e.Name, e.Last)
}

// WriteError reports that the folder could not be written to.
type WriteError struct {
	File string // base name
	Err  error
}

// Error says what to do about the usual causes.
func (e *WriteError) Error() string {
	cause := e.Err
	var path *fs.PathError
	var link *os.LinkError
	switch {
	case errors.As(cause, &path):
		cause = path.Err
	case errors.As(cause, &link):
		cause = link.Err
	}
	remedy := "check the drive and try again"
	switch {
	case errors.Is(cause, syscall.ENOSPC) || diskFull(cause):
		remedy = "the disk is full: make room and run this again"
	case errors.Is(cause, fs.ErrPermission) || errors.Is(cause, syscall.EROFS):
		remedy = "the folder may not be written to: change its permissions, or work on a copy of it"
	}
	return fmt.Sprintf("cannot write %s: %v; %s. Nothing was recorded, and what was recorded before is as it was", e.File, cause, remedy)
}

// Unwrap returns the system's error.
func (e *WriteError) Unwrap() error { return e.Err }
