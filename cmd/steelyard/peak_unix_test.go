//go:build unix

package main

import (
	"os"
	"runtime"
	"syscall"
)

// peakBytes is the largest resident size of a finished process.
func peakBytes(state *os.ProcessState) int64 {
	usage, ok := state.SysUsage().(*syscall.Rusage)
	if !ok {
		return 0
	}
	if runtime.GOOS == "darwin" {
		return int64(usage.Maxrss) // bytes there, kilobytes elsewhere
	}
	return int64(usage.Maxrss) << 10
}
