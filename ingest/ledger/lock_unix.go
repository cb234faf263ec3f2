//go:build unix && !solaris && !aix

package ledger

import (
	"errors"
	"os"
	"syscall"
)

// tryLock takes the lock of a file unless another open file has it.
func tryLock(f *os.File) (held bool, err error) {
	for {
		err = syscall.Flock(int(f.Fd()), syscall.LOCK_EX|syscall.LOCK_NB)
		switch {
		case err == nil:
			return true, nil
		case errors.Is(err, syscall.EINTR):
		case errors.Is(err, syscall.EWOULDBLOCK):
			return false, nil
		default:
			return false, err
		}
	}
}

func unlock(f *os.File) { _ = syscall.Flock(int(f.Fd()), syscall.LOCK_UN) } // closing the file does it too

// diskFull knows no other error for that than ENOSPC.
func diskFull(error) bool { return false }
