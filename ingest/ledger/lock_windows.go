package ledger

import (
	"errors"
	"os"
	"syscall"
	"unsafe"
)

// Of the Windows API: LockFileEx and its flags, and error codes.
var (
	kernel       = syscall.NewLazyDLL("kernel32.dll")
	lockFileEx   = kernel.NewProc("LockFileEx")
	unlockFileEx = kernel.NewProc("UnlockFileEx")
)

const (
	failImmediately = 1
	exclusive       = 2

	errorLockViolation  = syscall.Errno(33)
	errorHandleDiskFull = syscall.Errno(39)
	errorDiskFull       = syscall.Errno(112)
	errorIOPending      = syscall.Errno(997)
)

// lockedAt is where the locked byte stands, far beyond the text, which others may
// read.
const lockedAt = 1 << 30

// tryLock takes the lock of a file unless another open file has it.
func tryLock(f *os.File) (held bool, err error) {
	at := syscall.Overlapped{Offset: lockedAt}
	ok, _, err := lockFileEx.Call(f.Fd(), failImmediately|exclusive, 0, 1, 0, uintptr(unsafe.Pointer(&at)))
	switch {
	case ok != 0:
		return true, nil
	case errors.Is(err, errorLockViolation), errors.Is(err, errorIOPending):
		return false, nil
	}
	return false, err
}

func unlock(f *os.File) {
	at := syscall.Overlapped{Offset: lockedAt}
	_, _, _ = unlockFileEx.Call(f.Fd(), 0, 1, 0, uintptr(unsafe.Pointer(&at))) // closing the file does it too
}

func diskFull(err error) bool {
	return errors.Is(err, errorDiskFull) || errors.Is(err, errorHandleDiskFull)
}
