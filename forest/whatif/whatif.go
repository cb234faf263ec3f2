// Package whatif holds the engine that recomputes a report page in the reader's browser,
// packed as text, and the script that runs it there. "make engine" packs it; without
// that the program writes pages that stay as they are.
package whatif

import (
	"embed"
	"fmt"
	"io/fs"
	"path"
	"strings"
)

//go:embed built script/*.js
var files embed.FS

// Engine is what a page needs to recompute.
type Engine struct {
	Code   string // the WebAssembly, packed by LZMA and written in base 91
	Worker string // the script of the worker that unpacks, starts and asks it
	Script string // what joins the script of the page: all other files, start.js last
}

// Packed returns the engine; ok is false in a program that was built without it.
func Packed() (engine Engine, ok bool) {
	code, err := files.ReadFile("built/engine.txt")
	start, errStart := files.ReadFile("built/wasm_exec.js")
	if err != nil || errStart != nil {
		return Engine{}, false
	}
	return Engine{Code: string(code), Worker: string(start) + script("unpack.js") + script("worker.js"), Script: pageScript()}, true
}

// pageScript joins the files of the script that are not the worker's: they declare in any
// order, and start.js, the last, begins.
func pageScript() string {
	names, err := fs.Glob(files, "script/*.js")
	if err != nil {
		panic(err) // a slip in the pattern
	}
	var out strings.Builder
	for _, name := range names {
		switch name = path.Base(name); name {
		case "unpack.js", "worker.js", "start.js":
		default:
			out.WriteString(script(name))
		}
	}
	return out.String() + script("start.js")
}

// script returns a file of the script; each is embedded, so that it is there.
func script(name string) string {
	text, err := files.ReadFile("script/" + name)
	if err != nil {
		panic(fmt.Sprintf("the script %s is not embedded", name))
	}
	return string(text)
}
