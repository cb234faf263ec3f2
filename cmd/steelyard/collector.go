package main

import (
	"os"
	"runtime/debug"
)

// smallInput is the size of a file, in bytes, up to which memory does not matter.
const smallInput = 1 << 20

// easeCollector lets garbage grow to four times what lives before it is collected, where
// the call names only small files: half of the time of a small call would go into
// collecting a few megabytes. GOGC in the environment prevails.
func easeCollector(args []string) {
	if os.Getenv("GOGC") == "" && onlySmallFiles(args) {
		debug.SetGCPercent(400)
	}
}

// onlySmallFiles reports whether arguments name a file, and none that is large.
func onlySmallFiles(args []string) bool {
	files := 0
	for _, arg := range args {
		info, err := os.Stat(arg)
		if err != nil || !info.Mode().IsRegular() {
			continue
		}
		if info.Size() > smallInput {
			return false
		}
		files++
	}
	return files > 0
}
