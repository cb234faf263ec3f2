// Package whatif holds the engine that recomputes a report page in the reader's browser,
// packed as text, and the script that runs it there. "make engine" packs it; without
// that the program writes pages that stay as they are.
package whatif

import (
	"embed"
	"fmt"
)

//go:embed built script/*.js
var files embed.FS

// Engine is what a page needs to recompute.
type Engine struct {
	Code   string // the WebAssembly, packed by LZMA and written in base 85
	Worker string // the script of the worker that unpacks, starts and asks it
}

// Packed returns the engine; ok is false in a program that was built without it.
func Packed() (engine Engine, ok bool) {
	code, err := files.ReadFile("built/engine.txt")
	start, errStart := files.ReadFile("built/wasm_exec.js")
	if err != nil || errStart != nil {
		return Engine{}, false
	}
	return Engine{Code: string(code), Worker: string(start) + script("unpack.js") + script("worker.js")}, true
}

// script returns a file of the script; each is embedded, so that it is there.
func script(name string) string {
	text, err := files.ReadFile("script/" + name)
	if err != nil {
		panic(fmt.Sprintf("the script %s is not embedded", name))
	}
	return string(text)
}
