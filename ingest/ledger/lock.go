package ledger

import (
	"context"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"
	"time"
)

const lockName = "steelyard.lock"

// patience is how long a process waits for another to finish writing.
const patience = 10 * time.Second

// lockFile holds the lock of a folder until it is closed, or the process ends.
type lockFile struct{ f *os.File }

// lock takes the folder's lock and writes into it who holds it. It waits while
// another process has it, and returns a *BusyError with that one's name when it has
// waited long enough.
func lock(ctx context.Context, dir, who string, wait time.Duration) (*lockFile, error) {
	path := filepath.Join(dir, lockName)
	f, err := os.OpenFile(path, os.O_RDWR|os.O_CREATE, 0o666)
	if err != nil {
		return nil, &WriteError{File: lockName, Err: err}
	}
	const pause = 20 * time.Millisecond
	for waited := time.Duration(0); ; waited += pause {
		held, err := tryLock(f)
		switch {
		case err != nil:
			f.Close()
			return nil, &WriteError{File: lockName, Err: fmt.Errorf("the drive lets no file be locked: %w", err)}
		case held:
			if err := writeHolder(f, who); err != nil {
				f.Close()
				return nil, &WriteError{File: lockName, Err: err}
			}
			return &lockFile{f}, nil
		case waited >= wait:
			f.Close()
			return nil, &BusyError{Who: readHolder(path)}
		}
		select {
		case <-ctx.Done():
			f.Close()
			return nil, ctx.Err()
		case <-time.After(pause):
		}
	}
}

func writeHolder(f *os.File, who string) error {
	if err := f.Truncate(0); err != nil {
		return err
	}
	_, err := f.WriteAt([]byte(who+"\n"), 0)
	return err
}

// readHolder returns how the holder of a lock has named itself.
func readHolder(path string) string {
	f, err := os.Open(path)
	if err != nil {
		return ""
	}
	defer f.Close()
	text, err := io.ReadAll(io.LimitReader(f, 400))
	if err != nil {
		return ""
	}
	line, _, _ := strings.Cut(strings.ToValidUTF8(string(text), "?"), "\n")
	return strings.TrimSpace(line)
}

// release lets the lock go. The file stays: to remove it would let two processes
// hold two files of one name.
func (l *lockFile) release() {
	unlock(l.f)
	l.f.Close()
}
