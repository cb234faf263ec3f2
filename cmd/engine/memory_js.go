//go:build js

package main

import "runtime/debug"

// The page's engine has a heap of a few megabytes, which would be swept many times for
// each answer: it may grow to some tens before it is.
func init() { debug.SetGCPercent(800) }
