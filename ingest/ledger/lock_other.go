//go:build !windows && (!unix || solaris || aix)

package ledger

import (
	"errors"
	"os"
)

// tryLock fails: without a lock nothing is written.
func tryLock(*os.File) (held bool, err error) { return false, errors.ErrUnsupported }

func unlock(*os.File) {}

func diskFull(error) bool { return false }
